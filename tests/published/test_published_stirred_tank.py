"""Stirred tank with a constant kernel at its steady state: figures of the published solutions.

Exponential feed: M. J. Hounslow, AIChE J. 36 (1990) 106. Monodisperse feed: the same balance for k-mers, whose
generating function is a square root. Figures worked out from the formulas at 30 digits, printed to 12.
"""

from __future__ import annotations

import closed_breakage as closed
import numpy as np
import pytest

import aggsim as ag

Array = np.ndarray

NUMBER = {1.0: 0.732050807569, 10.0: 0.358257569496}
SIZES = np.array([1.0, 2.0, 3.0, 5.0, 10.0])
KMERS = {
    1.0: [0.57735026919, 0.0962250448649, 0.032075014955, 0.00623680846347, 2.78543529e-4],
    10.0: [0.218217890236, 0.0519566405324, 0.0247412573964, 0.00981795928427, 0.00260892559561],
}
VOLUMES = np.array([0.1, 0.5, 1.0, 2.0, 5.0, 10.0])
DENSITY = {
    1.0: [0.531262081573, 0.381973411318, 0.254619869375, 0.115972934523, 0.0137283939584, 7.92696206e-4],
    10.0: [0.20226713616, 0.150191058773, 0.105020513359, 0.0541692253071, 0.0118827756379, 0.00287136450182],
}
TOP = {1.0: 300.0, 10.0: 2000.0}  # above what holds 1e-12 of M2

each_tau = pytest.mark.parametrize("tau", [1.0, 10.0])


def tank(tau: float, feed: ag.StartingDistribution) -> ag.StirredTank:
    return ag.StirredTank(ag.kernels.constant(1.0), residence_time=tau, feed=feed)


@each_tau
def test_formulas(tau: float) -> None:
    assert closed.tank_number(tau) == pytest.approx(NUMBER[tau], rel=1e-11)
    np.testing.assert_allclose(
        closed.tank_kmers(SIZES, tau), KMERS[tau], rtol=1e-8
    )  # the last digits printed
    np.testing.assert_allclose(closed.tank_density(VOLUMES, tau), DENSITY[tau], rtol=1e-8)


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
    # VOLUMES are no pivots of one grid: each gets one that holds it
    for volume, printed in zip(VOLUMES, DENSITY[tau], strict=True):
        largest = volume * 2.0 ** np.ceil(np.log2(TOP[tau] / volume))
        grid = ag.SizeGrid.geometric(smallest=volume * 2.0**-20, largest=largest, per_doubling=6)
        if by == "steady state":
            number = ag.steady_state(tank(tau, closed.EXPONENTIAL), grid=grid).number
        else:
            number = ag.simulate(tank(tau, closed.EXPONENTIAL), None, 40.0 * tau, grid=grid).number[-1]
        at = int(np.argmin(np.abs(grid.volume - volume)))
        assert grid.volume[at] == pytest.approx(volume, rel=1e-12)
        assert number[at] / grid.width[at] == pytest.approx(printed, rel=3e-5)


# Orthokinetic decay at a constant volume fraction phi, collision efficiency 0.1, G = 50 1/s, phi = 5e-5, 1200 s: the
# textbook form dN/dt = -(4/pi) alpha G phi N comes from Smoluchowski's (1917) rate (4/3) G d^3 of equal spheres with
# phi = pi d^3 N / 6. The kernel (4/pi) alpha G (v + w) has this rate for equal spheres, and as volume is kept, it
# has this decay whatever the sizes.
DECAY = 4.0 / np.pi * 0.1 * 50.0  # 1/s, per volume fraction
SINGLES = ag.Monodisperse(diameter=2e-6, volume_fraction=5e-5)


def test_the_kernel_has_the_rate_of_equal_spheres() -> None:
    v = np.pi / 6 * 2e-6**3
    assert float(ag.kernels.additive(DECAY)(v, v)) == pytest.approx(0.1 * 4 / 3 * 50.0 * 2e-6**3, rel=1e-13)


def test_decay_in_plug_flow() -> None:
    """N/N0 = exp(-4 alpha G phi t / pi) = 0.68251426; found 3e-14 off the formula at rtol = 1e-9."""
    result = ag.simulate(ag.Batch(ag.kernels.additive(DECAY)), SINGLES, [0.0, 1200.0], rtol=1e-9)
    left = result.total_number()[-1] / result.total_number()[0]
    assert left == pytest.approx(0.68251426, abs=0.5e-8)
    assert left == pytest.approx(np.exp(-DECAY * 5e-5 * 1200.0), rel=1e-9)


@pytest.mark.parametrize("by", ["steady state", "long run"])
def test_decay_in_four_equal_tanks(by: str) -> None:
    """N/N0 = (1 + 4 alpha G phi t / (4 pi))^-4 = 0.69432312 for 1200 s in all (tanks in series: O. Levenspiel,
    Chemical Reaction Engineering, 3rd ed., 1999); found below 1e-12 of the formula."""
    kernel = ag.kernels.additive(DECAY)
    train = ag.Train([ag.Tank(kernel, volume=3.0) for _ in range(4)], flow=4 * 3.0 / 1200.0, feed=SINGLES)
    if by == "steady state":
        state = ag.steady_state(train)
        tanks = [float(state.tank(k).total_number()) for k in range(4)]
    else:
        tanks = [
            float(tank.total_number()[0]) for tank in ag.simulate(train, None, [12_000.0], rtol=1e-9).tanks
        ]
    left = np.array(tanks) / SINGLES.total_number
    assert left[-1] == pytest.approx(0.69432312, abs=0.5e-8)
    exact = (1 + DECAY * 5e-5 * 300.0) ** -np.arange(1.0, 5.0)
    np.testing.assert_allclose(left, exact, rtol=1e-10)
