from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import aggsim as ag
from aggsim.errors import InputError

MONO = ag.Monodisperse(volume=1.0, number=1.0)
LARGE = ag.Monodisperse(volume=4.0, number=2.0)
GRID = ag.SizeGrid.monomers_then_geometric(1.0, 4096.0, per_doubling=3)
TIMES = np.array([0.0, 0.5, 1.0, 2.0, 5.0])
STEPS = ag.kernels.Strength.steps


def run(tank: ag.StirredTank, start: ag.StartingDistribution | None, times: object = TIMES) -> ag.Result:
    return ag.simulate(tank, start, times, grid=GRID, rtol=1e-9)


def test_without_aggregation_a_tank_fills_and_washes_out_exponentially() -> None:
    tank = ag.StirredTank(None, residence_time=2.0, feed=MONO)
    share = np.exp(-TIMES / 2.0)
    filling, washing = run(tank, None), run(tank, LARGE)
    np.testing.assert_allclose(filling.total_number(), 1.0 - share, rtol=1e-8, atol=1e-15)
    np.testing.assert_allclose(washing.number[:, 0], 1.0 - share, rtol=1e-8, atol=1e-15)
    np.testing.assert_allclose(washing.number[:, 3], 2.0 * share, rtol=1e-8)
    np.testing.assert_allclose(washing.balance.fed, TIMES / 2.0, rtol=1e-13)
    expected = 8.0 * (1.0 - share) + TIMES / 2.0 - (1.0 - share)
    np.testing.assert_allclose(washing.balance.withdrawn, expected, rtol=1e-8, atol=1e-15)
    assert np.abs(washing.balance.closure).max() <= 1e-12


def test_a_tank_of_constant_kernel_on_its_way() -> None:
    """dN/dt = (1 - N) / theta - N^2 / 2, a Riccati equation: N = N1 tanh-like between its two roots."""
    theta = 2.0
    tank = ag.StirredTank(ag.kernels.constant(1.0), residence_time=theta, feed=MONO)
    root = np.sqrt(1.0 + 2.0 * theta)
    up, down = (root - 1.0) / theta, (-root - 1.0) / theta
    decay = np.exp(-root / theta * TIMES) * up / -down  # from N = 0
    exact = (up + down * decay) / (1.0 + decay)
    np.testing.assert_allclose(run(tank, None).total_number(), exact, rtol=1e-7, atol=1e-14)


def test_clear_liquid_dilutes() -> None:
    tank = ag.StirredTank(None, residence_time=3.0)
    result = run(tank, MONO)
    np.testing.assert_allclose(result.total_number(), np.exp(-TIMES / 3.0), rtol=1e-8)
    assert result.balance.inward == {}
    assert np.abs(result.balance.closure).max() <= 1e-12


def test_feeds_share_the_flow_and_the_rest_is_clear() -> None:
    feeds = [ag.Feed(distribution=MONO, share=0.5), ag.Feed(distribution=LARGE, share=0.2)]
    result = run(ag.StirredTank(None, residence_time=1.0, feed=feeds), None, [40.0])
    assert result.number[0, 0] == pytest.approx(0.5, rel=1e-8)
    assert result.number[0, 3] == pytest.approx(0.4, rel=1e-8)
    assert result.balance.fed[-1] == pytest.approx(40.0 * (0.5 + 1.6), rel=1e-13)


def test_a_feed_that_jumps_is_met_exactly() -> None:
    """On for 0.1 s out of 100: number in after the pulse exp(-(t - t1) / theta) (1 - exp(-0.1 / theta))."""
    pulse = ag.Feed(distribution=MONO, strength=STEPS([60.0, 60.1], [0.0, 5.0, 0.0]))
    tank = ag.StirredTank(None, residence_time=50.0, feed=pulse)
    times = np.array([59.0, 60.0, 60.1, 100.0])
    result = run(tank, None, times)
    after = 5.0 * -np.expm1(-0.1 / 50.0)
    expected = [0.0, 0.0, after, after * np.exp(-39.9 / 50.0)]
    np.testing.assert_allclose(result.total_number(), expected, rtol=1e-7)
    np.testing.assert_allclose(result.balance.fed, [0.0, 0.0, 0.01, 0.01], rtol=1e-11)
    assert np.abs(result.balance.closure).max() <= 1e-12


def test_a_feed_that_varies_smoothly() -> None:
    """dN/dt = (1 + cos t - N) / theta with theta = 1: N = 1 + (cos t + sin t) / 2 - 3/2 exp(-t)."""
    feed = ag.Feed(distribution=MONO, strength=ag.kernels.Strength(lambda t: 1.0 + np.cos(t)))
    result = run(ag.StirredTank(None, residence_time=1.0, feed=feed), None)
    exact = 1.0 + 0.5 * (np.cos(TIMES) + np.sin(TIMES)) - 1.5 * np.exp(-TIMES)
    np.testing.assert_allclose(result.total_number(), exact, rtol=1e-7, atol=1e-14)
    np.testing.assert_allclose(result.balance.fed, TIMES + np.sin(TIMES), rtol=1e-7)


def test_a_flow_that_stops_leaves_a_batch() -> None:
    """Filled for 1 s, a batch for the next 4 s: 1 / N grows by half the time."""
    tank = ag.StirredTank(
        ag.kernels.constant(1.0), residence_time=2.0, feed=MONO, flow=STEPS([1.0], [1.0, 0.0])
    )
    result = run(tank, None)
    filled = result.total_number()[2]
    np.testing.assert_allclose(
        result.total_number()[3:], 1.0 / (1.0 / filled + np.array([0.5, 2.0])), rtol=1e-7
    )
    assert np.ptp(result.balance.withdrawn[2:]) == 0.0
    assert np.ptp(result.balance.fed[2:]) == 0.0


def test_strengths_of_flow_and_feed_multiply() -> None:
    feed = ag.Feed(distribution=MONO, strength=STEPS([1.0], [2.0, 0.0]))
    tank = ag.StirredTank(None, residence_time=1.0, feed=feed, flow=STEPS([0.5], [0.5, 1.0]))
    result = run(tank, None, [0.5, 1.0, 2.0])
    np.testing.assert_allclose(result.balance.fed, [0.5, 1.5, 1.5], rtol=1e-12)
    half = 2.0 * -np.expm1(-0.25)
    full = 2.0 + (half - 2.0) * np.exp(-0.5)
    np.testing.assert_allclose(result.total_number(), [half, full, full * np.exp(-1.0)], rtol=1e-7)


def test_a_slow_flow_is_a_batch() -> None:
    slow = ag.StirredTank(ag.kernels.constant(1.0), residence_time=1e12)
    batch = ag.Batch(ag.kernels.constant(1.0))
    one, two = (ag.simulate(v, MONO, TIMES, grid=GRID, rtol=1e-9) for v in (slow, batch))
    np.testing.assert_allclose(one.number, two.number, rtol=1e-6, atol=1e-13)


@given(
    rate=st.floats(0.0, 3.0),
    residence=st.floats(0.1, 10.0),
    breaking=st.floats(0.0, 2.0),
    removal=st.floats(0.0, 1.0),
    start=st.sampled_from([None, MONO, LARGE]),
)
def test_any_tank_balances(
    rate: float, residence: float, breaking: float, removal: float, start: ag.StartingDistribution | None
) -> None:
    """Volume in, out, broken, lost: to round-off."""
    tank = ag.StirredTank(
        ag.kernels.constant(rate),
        residence_time=residence,
        feed=[ag.Feed(distribution=MONO, share=0.4), ag.Feed(distribution=LARGE, share=0.5)],
        breakage=ag.Breakage(
            rate=ag.rates.power_law(coefficient=breaking, exponent=0.3),
            fragments=ag.fragments.equal_binary(),
            smallest=1.0,
        ),
        losses=ag.SettlingOut(lambda v: removal * np.cbrt(v), depth=2.0),
    )
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=2.0**14, per_doubling=1)
    result = ag.simulate(tank, start, [0.0, 1.0, 4.0], grid=grid, scheme=ag.FixedPivot(moments=2))
    assert np.abs(result.balance.closure).max() <= 1e-12
    np.testing.assert_allclose(result.balance.fed, np.array([0.0, 1.0, 4.0]) * 4.4 / residence, rtol=1e-12)


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"residence_time": 0.0}, "residence_time=0 s"),
        ({"residence_time": -5.0}, "residence_time=-5 s"),
        ({"residence_time": np.inf}, "residence_time=inf s.*Batch"),
        ({"residence_time": np.nan}, "residence_time=nan"),
        ({"residence_time": None}, "residence_time=None"),
        ({"flow": 0.5}, "not a factor in time"),
        ({"feed": 1e-4}, "feed=0.0001"),
        ({"breakage": 1.0}, "not a breakage law"),
        ({"losses": "settling"}, "losses='settling'"),
        ({"kernel": 1.0}, "not a collision kernel"),
    ],
)
def test_tanks_that_are_none_are_refused(options: dict[str, object], words: str) -> None:
    whole: dict[str, object] = {"kernel": None, "residence_time": 1.0, **options}
    with pytest.raises(InputError, match=words):
        ag.StirredTank(whole.pop("kernel"), **whole)  # type: ignore[arg-type]


def test_a_tank_without_particles_is_refused() -> None:
    with pytest.raises(InputError, match="start=None leaves a vessel without particles"):
        ag.simulate(ag.StirredTank(ag.kernels.constant(1.0), residence_time=1.0), None, 1.0)


def test_sizes_of_a_tank_of_clear_liquid_are_nan() -> None:
    result = run(ag.StirredTank(None, residence_time=1.0, feed=MONO), None)
    assert np.isnan(result.mean_diameter(4, 3)).tolist() == [True, False, False, False, False]
    assert np.isfinite(result.quantile_diameter([0.1, 0.5])[1:]).all()
