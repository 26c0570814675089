"""What a reduced model says at many points, and how far that may be from the truth."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from fluidev.flow.reduced.discretisation import Shares
from fluidev.flow.reduced.judge import error_bounds


@dataclass(frozen=True)
class Answers:
    """Conductance matrices (m, N, N) in S at m points, with two kinds of error.

    left, right: (m, N − 1, N − 1) in S: what a full solve on the same mesh would change, ΔG, is
    bounded by |aᵀ ΔG b|² ≤ (aᵀ left a)(bᵀ right b), potentials a, b of the first N − 1 contacts
    taken against the last; right is None where it is the same. shares: what the mesh itself gets wrong. scale: (m,) mean two-terminal
    resistance in Ω.
    """

    contacts: tuple[str, ...]
    conductance: np.ndarray = field(repr=False)
    left: np.ndarray = field(repr=False)
    right: np.ndarray | None = field(repr=False)
    scale: np.ndarray = field(repr=False)
    shares: tuple[Shares, ...] = field(repr=False)

    def __len__(self) -> int:
        return len(self.conductance)

    @property
    def errors(self) -> np.ndarray:
        """Error bars (m, N, N) in S of all entries of the matrices."""
        count = len(self.contacts)
        one = np.broadcast_to(np.eye(count)[:, None, :], (count, len(self), count))
        bars = [[self.bars(one[i], one[j]) for j in range(count)] for i in range(count)]
        return np.array(bars).transpose(2, 0, 1)

    def bars(self, left: np.ndarray, right: np.ndarray) -> np.ndarray:
        """Error bars (m,) of leftᵀ G right for contact potentials (m, N): both kinds together."""
        return self.reduction_bars(left, right) + self.discretisation_bars(left, right)

    def discretisation_bars(self, left: np.ndarray, right: np.ndarray) -> np.ndarray:
        """The part (m,) of the bars that is due to the mesh: the largest that was found anywhere."""
        one = np.einsum("mij,mi->mj", self.conductance, left)
        two = np.einsum("mij,mj->mi", self.conductance, right)
        return np.max([s.bars(one, two) for s in self.shares], axis=0) * self.scale

    def reduction_bars(self, left: np.ndarray, right: np.ndarray) -> np.ndarray:
        """The part (m,) of the bars that is due to the reduction alone."""
        a, b = ((side[:, :-1] - side[:, -1:])[:, :, None] for side in (left, right))
        return error_bounds(self.left, self.right, a, b)[:, 0]

    def potentials(self, pair: tuple[str, str], reverse: bool = False) -> np.ndarray:
        """Contact potentials (m, N) in V for 1 A in at one contact and out at another.

        The last contact is at 0 V. reverse: in the reversed field. ValueError for an unknown name.
        """
        matrix = self.conductance.transpose(0, 2, 1) if reverse else self.conductance
        drive = np.zeros((len(self.contacts), 1))
        drive[self._index(pair[0])] += 1.0
        drive[self._index(pair[1])] -= 1.0
        found = np.linalg.solve(matrix[:, :-1, :-1], drive[None, :-1])[:, :, 0]
        return np.pad(found, ((0, 0), (0, 1)))

    def resistances(
        self, current: tuple[str, str], voltage: tuple[str, str]
    ) -> tuple[np.ndarray, np.ndarray]:
        """A four-terminal resistance (m,) at every point and its error bars (m,), in Ω."""
        right = self.potentials(current)
        value = right[:, self._index(voltage[0])] - right[:, self._index(voltage[1])]
        return value, self.bars(self.potentials(voltage, reverse=True), right)

    def _index(self, name: str) -> int:
        if name not in self.contacts:
            known = ", ".join(self.contacts)
            raise ValueError(f"there is no contact {name!r}; the contacts are {known}")
        return self.contacts.index(name)


@dataclass(frozen=True)
class ReducedError:
    """The error of one of the answers, as flow.answer.Error."""

    answers: Answers = field(repr=False)

    def bar(self, left: np.ndarray, right: np.ndarray) -> float:
        """Error bar of leftᵀ G right for contact potentials (N,)."""
        return float(self.answers.bars(np.asarray(left)[None], np.asarray(right)[None])[0])
