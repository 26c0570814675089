"""What a reduced model is judged by: the readings, each against its own largest magnitude."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import combinations

import numpy as np

from fluidev.flow.reduced.piece import Batch

Pair = tuple[int, int]

# Without readings of a case all there are count, and one weaker than this part of the mean
# two-terminal resistance as if it were that large.
FAINT = 1e-3


@dataclass(frozen=True)
class Judge:
    """Readings as contact numbers: current (K, 2) and voltage (K, 2); faintest: see FAINT."""

    current: np.ndarray
    voltage: np.ndarray
    faintest: float

    def resistances(self, batch: Batch) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """Readings (m, K), bounds on their errors (m, K) and mean two-terminal resistances (m,).

        All in units of the sheet resistance.
        """
        impedance = np.linalg.inv(batch.conductance)
        values, right = _readings(impedance, self.current, self.voltage)
        left = differences(impedance.transpose(0, 2, 1), self.voltage)
        bound = error_bounds(batch.left, batch.right, left, right)
        return values, bound, mean_resistance(impedance)

    def largest(self, values: np.ndarray, scale: np.ndarray) -> np.ndarray:
        """Largest magnitude (K,) of each reading over the points, by the scale at its point."""
        found = np.abs(values / scale[:, None]).max(axis=0)
        return np.maximum(found, max(self.faintest, np.finfo(float).tiny))


def judge_of(readings: tuple[tuple[Pair, Pair], ...], contacts: int) -> Judge:
    """The judge for readings ((in, out), (plus, minus)) by contact number, or for all there are."""
    if readings:
        current, voltage = (np.array([r[k] for r in readings]) for k in (0, 1))
        return Judge(current, voltage, 0.0)
    pairs = np.array(list(combinations(range(contacts), 2)))
    first, second = np.triu_indices(len(pairs))
    return Judge(pairs[first], pairs[second], FAINT)


def differences(impedance: np.ndarray, pairs: np.ndarray) -> np.ndarray:
    """Potentials (m, N − 1, K) for a unit current through each pair, the last contact at 0 V.

    impedance: (m, N − 1, N − 1), the inverse of the conductance of the first N − 1 contacts.
    """
    padded = np.pad(impedance, ((0, 0), (0, 0), (0, 1)))
    return np.asarray(padded[:, :, pairs[:, 0]] - padded[:, :, pairs[:, 1]])


def error_bounds(
    left_form: np.ndarray, right_form: np.ndarray | None, left: np.ndarray, right: np.ndarray
) -> np.ndarray:
    """Bounds (m, K) on the error of leftᵀ G right; forms (m, N − 1, N − 1), potentials (m, N − 1, K).

    right_form: None where it is the same. The error is then e_aᵀ A e_b with the errors e of two
    flows, of which the forms' product tells as much as the forms tell of their energies; it is
    bounded halfway to the Cauchy–Schwarz bound, which alone holds for two different forms.
    """
    there = np.matmul(left_form, left)
    here = np.matmul(left_form if right_form is None else right_form, right)
    one, two = (left * there).sum(axis=1), (right * here).sum(axis=1)
    bound = np.sqrt(np.maximum(one, 0.0) * np.maximum(two, 0.0))
    if right_form is None:
        bound = 0.5 * (bound + np.abs((left * here).sum(axis=1)))
    return np.asarray(bound)


def mean_resistance(impedance: np.ndarray) -> np.ndarray:
    """Mean (m,) of the two-terminal resistances of all pairs of contacts."""
    count = impedance.shape[1] + 1
    diagonal = np.trace(impedance, axis1=1, axis2=2)
    total = impedance.sum(axis=(1, 2))
    return np.asarray(2.0 * (count * diagonal - total) / (count * (count - 1)))


def _readings(
    impedance: np.ndarray, current: np.ndarray, voltage: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    potentials = differences(impedance, current)
    padded = np.pad(potentials, ((0, 0), (0, 1), (0, 0)))
    index = np.arange(len(voltage))
    values = padded[:, voltage[:, 0], index] - padded[:, voltage[:, 1], index]
    return values, potentials
