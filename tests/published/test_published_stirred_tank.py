"""Stirred tank with a constant kernel at its steady state: figures of the published solutions.

The figures and their sources stand in the verification record. Monodisperse feed: the same balance for k-mers, whose
generating function is a square root.
"""

from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.verification import closed
from aggsim.verification.published.breakage import (
    DENSITY,
    FOUR_TANKS,
    KMERS,
    NUMBER,
    PER_FRACTION,
    PLUG_FLOW,
    SINGLES,
    SIZES,
    TANK_VOLUMES,
    TOP,
    tank,
    train,
)

Array = np.ndarray

each_tau = pytest.mark.parametrize("tau", [1.0, 10.0])


@each_tau
def test_formulas(tau: float) -> None:
    assert closed.tank_number(tau) == pytest.approx(NUMBER[tau], rel=1e-11)
    np.testing.assert_allclose(
        closed.tank_kmers(SIZES, tau), KMERS[tau], rtol=1e-8
    )  # the last digits printed
    np.testing.assert_allclose(closed.tank_density(TANK_VOLUMES, tau), DENSITY[tau], rtol=1e-8)


@each_tau
@pytest.mark.parametrize("by", ["steady state", "long run"])
def test_every_kmer(tau: float, by: str) -> None:
    """All sizes resolved; found 7e-14 and less, so the tolerance is that of the printed digits."""
    vessel, grid = tank(tau, closed.MONO), ag.SizeGrid.monomers(1.0, 64 if tau == 1.0 else 600)
    if by == "steady state":
        number = ag.steady_state(vessel, grid=grid, scheme=ag.Monomer()).number
    else:
        # transients die out with exp(-t / tau)
        number = ag.simulate(vessel, None, 40.0 * tau, grid=grid, scheme=ag.Monomer(), rtol=1e-9).number[-1]
    kept = SIZES.astype(int) - 1
    np.testing.assert_allclose(number[kept], KMERS[tau], rtol=1e-8)
    assert number.sum() == pytest.approx(NUMBER[tau], rel=1e-11)
    exact = closed.tank_kmers(grid.volume, tau)
    np.testing.assert_allclose(number, exact, rtol=1e-10, atol=1e-15)


@each_tau
@pytest.mark.parametrize("moments", [2, 4, 6])
def test_kmers_on_a_grid_of_monomers_and_sections(tau: float, moments: int) -> None:
    """With 16 sections per doubling the multiples up to 23 are pivots, which are exact; found below 1e-15."""
    grid = ag.SizeGrid.monomers_then_geometric(1.0, TOP[tau], per_doubling=16)
    state = ag.steady_state(tank(tau, closed.MONO), grid=grid, scheme=ag.FixedPivot(moments=moments))
    np.testing.assert_allclose(state.number[SIZES.astype(int) - 1], KMERS[tau], rtol=1e-8)
    np.testing.assert_allclose(state.number[:20], closed.tank_kmers(grid.volume[:20], tau), rtol=1e-12)
    assert state.total_number() == pytest.approx(NUMBER[tau], rel=1e-11)


@each_tau
@pytest.mark.parametrize("by", ["steady state", "long run"])
def test_density_for_an_exponential_feed(tau: float, by: str) -> None:
    """Six moments at 6 sections per doubling: found 1.2e-5 (tau = 1) and 2.0e-6 (tau = 10) at the volumes printed."""
    # TANK_VOLUMES are no pivots of one grid: each gets one that holds it
    for volume, printed in zip(TANK_VOLUMES, DENSITY[tau], strict=True):
        largest = volume * 2.0 ** np.ceil(np.log2(TOP[tau] / volume))
        grid = ag.SizeGrid.geometric(smallest=volume * 2.0**-20, largest=largest, per_doubling=6)
        if by == "steady state":
            number = ag.steady_state(tank(tau, closed.EXPONENTIAL), grid=grid).number
        else:
            number = ag.simulate(tank(tau, closed.EXPONENTIAL), None, 40.0 * tau, grid=grid).number[-1]
        at = int(np.argmin(np.abs(grid.volume - volume)))
        assert grid.volume[at] == pytest.approx(volume, rel=1e-12)
        assert number[at] / grid.width[at] == pytest.approx(printed, rel=3e-5)


def test_the_kernel_has_the_rate_of_equal_spheres() -> None:
    v = np.pi / 6 * 2e-6**3
    assert float(ag.kernels.additive(PER_FRACTION)(v, v)) == pytest.approx(
        0.1 * 4 / 3 * 50.0 * 2e-6**3, rel=1e-13
    )


def test_decay_in_plug_flow() -> None:
    """N/N0 = exp(-4 alpha G phi t / pi) = 0.68251426; found 3e-14 off the formula at rtol = 1e-9."""
    result = ag.simulate(ag.Batch(ag.kernels.additive(PER_FRACTION)), SINGLES, [0.0, 1200.0], rtol=1e-9)
    left = result.total_number()[-1] / result.total_number()[0]
    assert left == pytest.approx(PLUG_FLOW, abs=0.5e-8)
    assert left == pytest.approx(np.exp(-PER_FRACTION * 5e-5 * 1200.0), rel=1e-9)


@pytest.mark.parametrize("by", ["steady state", "long run"])
def test_decay_in_four_equal_tanks(by: str) -> None:
    """N/N0 = (1 + 4 alpha G phi t / (4 pi))^-4 = 0.69432312 for 1200 s in all (tanks in series: O. Levenspiel,
    Chemical Reaction Engineering, 3rd ed., 1999); found below 1e-12 of the formula."""
    if by == "steady state":
        state = ag.steady_state(train())
        tanks = [float(state.tank(k).total_number()) for k in range(4)]
    else:
        tanks = [
            float(tank.total_number()[0]) for tank in ag.simulate(train(), None, [12_000.0], rtol=1e-9).tanks
        ]
    left = np.array(tanks) / SINGLES.total_number
    assert left[-1] == pytest.approx(FOUR_TANKS, abs=0.5e-8)
    exact = (1 + PER_FRACTION * 5e-5 * 300.0) ** -np.arange(1.0, 5.0)
    np.testing.assert_allclose(left, exact, rtol=1e-10)
