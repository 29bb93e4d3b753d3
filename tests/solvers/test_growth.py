from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.solvers.growth import GrowthWatch

PRODUCT = ag.Batch(ag.kernels.multiplicative(1.0))


@pytest.mark.parametrize(
    ("start", "gelation"),
    [
        # t_gel = 1 / (C M2(0)): J. B. McLeod, Q. J. Math. 13 (1962) 119
        (ag.Monodisperse(volume=1.0, number=1.0), 1.0),
        (ag.Exponential(mean_volume=1.0, number=1.0), 0.5),
    ],
    ids=["monodisperse", "exponential"],
)
@pytest.mark.parametrize("scheme", [ag.FixedPivot(2), ag.FixedPivot(4), ag.FixedPivot(6), ag.Sectional()])
def test_gelation_is_found_at_its_time(
    start: ag.StartingDistribution, gelation: float, scheme: ag.FixedPivot
) -> None:
    result = ag.simulate(PRODUCT, start, [0.0, 0.5 * gelation, 3.0], scheme=scheme, raise_unfinished=False)
    assert result.status.outcome is ag.Outcome.GELATION
    # second-order schemes gel early by their error in M2
    tolerance = 2e-3 if scheme in (ag.FixedPivot(4), ag.FixedPivot(6)) else 3e-2
    assert result.status.gelation_time == pytest.approx(gelation, rel=tolerance)
    assert result.status.time < 3.0
    assert f"t = {result.status.gelation_time:.6g} s" in str(result.status)
    np.testing.assert_array_equal(result.times[:2], [0.0, 0.5 * gelation])
    assert result.times[-1] == result.status.time
    assert np.isfinite(result.number).all()


def test_gelation_on_a_grid_of_the_user() -> None:
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 1e6)
    result = ag.simulate(
        PRODUCT, ag.Monodisperse(volume=1.0, number=1.0), 2.0, grid=grid, raise_unfinished=False
    )
    assert result.status.outcome is ag.Outcome.GELATION
    assert result.status.gelation_time == pytest.approx(1.0, rel=1e-2)


@pytest.mark.parametrize(
    "kernel",
    [
        ag.kernels.constant(1.0),
        ag.kernels.additive(1.0),
        ag.kernels.additive(1.0) * ag.kernels.Strength.steps([8.0], [0.01, 3.0]),
    ],
    ids=["constant", "additive", "a late jump"],
)
def test_growth_without_gelation_is_not_taken_for_it(kernel: ag.kernels.Kernel) -> None:
    result = ag.simulate(ag.Batch(kernel), ag.Monodisperse(volume=1.0, number=1.0), [0.0, 10.0])
    assert result.status.completed


def test_growth_that_leaves_every_grid_is_reported() -> None:
    start = ag.Monodisperse(volume=1.0, number=1.0)
    result = ag.simulate(ag.Batch(ag.kernels.additive(1.0)), start, 200.0, raise_unfinished=False)
    assert result.status.outcome is ag.Outcome.OUTGROWN
    assert "sections" in result.status.detail
    assert np.abs(result.balance.closure).max() < 1e-11


def test_the_growth_time_leads_to_the_time_of_blow_up() -> None:
    grid = ag.SizeGrid.from_pivots([1.0, 2.0, 4.0, 8.0, 16.0, 32.0, 64.0])
    watch = GrowthWatch(1.0)
    watch.on(grid)
    # M2 = (3 - t)^-2: growth time (3 - t) / 2
    state = np.zeros(9)
    rates = np.zeros(9)
    for t in (0.0, 1.0, 2.0, 2.9, 2.999):
        state[0] = (3.0 - t) ** -2
        rates[0] = 2.0 * (3.0 - t) ** -3
        watch.sight(t, state, rates)
    assert watch.gelation_time() == pytest.approx(3.0, rel=1e-12)
    assert watch.gelation_near(2.9) is None
    assert watch.gelation_near(2.9995) == pytest.approx(3.0, rel=1e-12)
    watch.begin(2.9995)
    assert watch.gelation_time() is None
