"""Puddles: the landscape of remote impurities has the spectrum and the size it is said to have."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fluidev.errors import CaseError
from fluidev.fluid.density.puddles import WAVES, puddle_waves
from tests.fluid.density.densities import N, at, expression, fluid

D = 40e-9
PUDDLES = {"rms": "5e10/cm^2", "spacer": "40 nm", "seed": 7}


def test_rms_over_the_plane_is_exact() -> None:
    # every plane wave contributes half of its square
    waves = puddle_waves(3.0, D, 1)
    assert waves.amplitude**2 * WAVES / 2 == pytest.approx(9.0, rel=1e-12)
    points = np.random.default_rng(0).uniform(0, 1e-3, (2, 100_000))
    found = waves.at(points)
    assert found.std() == pytest.approx(3.0, rel=0.02)
    assert abs(found.mean()) < 0.05


@pytest.mark.parametrize("seed", range(5))
def test_every_landscape_has_the_gradients_of_the_spectrum(seed: int) -> None:
    # ⟨|∇δn|²⟩ = rms² ⟨q²⟩ with ⟨q²⟩ = ∫ q² e^{−2qd} q dq / ∫ e^{−2qd} q dq = 3/(2d²), half along x
    waves = puddle_waves(1.0, D, seed).wavevectors * D
    assert (waves**2).sum(axis=1).mean() == pytest.approx(1.5, rel=0.05)
    assert (waves**2).mean(axis=0) == pytest.approx([0.75, 0.75], rel=0.1)
    assert waves.prod(axis=1).mean() == pytest.approx(0.0, abs=0.05)


def test_correlation_of_remote_impurities() -> None:
    """⟨δn(0) δn(r)⟩ = rms² [1 + (r/2d)²]^{−3/2}, over many seeds; half at r = 1.53 d.

    Derived here: ∫ e^{−2qd} J₀(qr) q dq = 2d/(4d² + r²)^{3/2}. In a sum of plane waves the
    correlation is the mean of cos(q·r).
    """
    seeds = [puddle_waves(1.0, D, seed).wavevectors for seed in range(200)]
    wavevectors = np.concatenate(seeds)
    for r in (0.5, 1.0, 1.5328, 3.0, 6.0):
        wanted = (1 + (r / 2) ** 2) ** -1.5
        for direction in (0.0, 0.7, 2.0):
            step = r * D * np.array([math.cos(direction), math.sin(direction)])
            found = np.cos(wavevectors @ step).mean()
            assert found == pytest.approx(wanted, abs=0.01)
    assert (1 + (1.5328 / 2) ** 2) ** -1.5 == pytest.approx(0.5, abs=1e-4)


def test_the_landscape_is_gaussian_enough() -> None:
    values = np.concatenate(
        [puddle_waves(1.0, D, seed).at(np.zeros((2, 1))) for seed in range(4000)]
    )
    assert values.std() == pytest.approx(1.0, abs=0.05)
    assert (values**4).mean() == pytest.approx(3.0, abs=0.4)
    assert np.mean(np.abs(values) < 1.0) == pytest.approx(0.6827, abs=0.03)


def test_a_seed_is_a_landscape_on_every_machine() -> None:
    # Numbers kept from when this was written: the raw bits of PCG64 do not change.
    points = np.array([[0.0, 1e-7, -3e-7], [0.0, 2e-7, 5e-7]])
    found = puddle_waves(1.0, D, 7).at(points)
    assert found == pytest.approx(KEPT, rel=1e-9)
    assert puddle_waves(1.0, D, 8).at(points) != pytest.approx(KEPT, rel=0.1)


KEPT = [-0.8053015043634549, -1.2413283377812103, 0.10715688806646477]


def test_it_is_the_same_wherever_and_however_it_is_asked_for() -> None:
    waves = puddle_waves(1.0, D, 3)
    points = np.random.default_rng(0).uniform(-1e-5, 1e-5, (2, 90, 100))
    whole = waves.at(points)
    assert whole.shape == (90, 100)
    assert waves.at(points[:, 5, 7]) == pytest.approx(whole[5, 7], abs=1e-12)


def test_puddles_lie_over_every_density() -> None:
    waves = puddle_waves(0.05 * N, D, 7).at(np.array([1.3e-6, 0.2e-6]))
    gate = {"rectangle": [[1, 0], [2, 1]], "density": "4e11/cm^2", "edge_width": "1 nm"}
    formula = expression("n0*(1 + x/w)", w="13 um")
    for density, keys, under in (
        ("1e12/cm^2", {}, N),
        (formula, {}, 1.1 * N),
        ("1e12/cm^2", {"gate": [gate]}, 0.4 * N),
    ):
        found = fluid(density, puddles=PUDDLES, **keys)
        assert at(found, (1.3, 0.2))[0] == pytest.approx(under + float(waves), rel=1e-9)
        assert found.density is not None
        assert found.density.reference == N


@pytest.mark.parametrize(
    ("changes", "key", "clause"),
    [
        ({"rms": "1 um"}, "rms", "got a length"),
        ({"rms": "0/cm^2"}, "rms", "got zero"),
        ({"spacer": "0 nm"}, "spacer", "a length above zero"),
        ({"seed": 1.5}, "seed", "a whole number"),
        ({"seed": -1}, "seed", "zero or more"),
        ({"seed": "7"}, "seed", "a whole number"),
        ({"seed": 2**70}, "seed", "less than"),
        ({"seed": None}, "seed", "missing"),
        ({"sead": 1}, "sead", "did you mean 'seed'?"),
    ],
)
def test_mistakes(changes: dict[str, object], key: str, clause: str) -> None:
    table = {name: value for name, value in (PUDDLES | changes).items() if value is not None}
    with pytest.raises(CaseError) as refused:
        fluid("1e12/cm^2", puddles=table)
    assert refused.value.key == f"fluid.puddles.{key}"
    assert clause in refused.value.expected
