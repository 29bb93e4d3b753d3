"""What holds in any vessel: accounts close, units cancel, methods agree, and what is the same is the same."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from reference_runs import brownian, shear

import aggsim as ag
from aggsim.verification import closed

Array = np.ndarray

SINGLES = ag.Monodisperse(volume=1.0, number=1.0)
EXPONENTIAL = closed.EXPONENTIAL
STEPS = ag.kernels.Strength.steps
SCHEMES = [ag.FixedPivot(moments=2), ag.FixedPivot(moments=4), ag.FixedPivot(moments=6), ag.Sectional()]
GRID = ag.SizeGrid.geometric(smallest=1e-4, largest=3e4, per_doubling=3)

each_scheme = pytest.mark.parametrize("scheme", SCHEMES, ids=repr)


def halves(coefficient: float) -> ag.Breakage:
    rate = ag.rates.power_law(coefficient=coefficient, exponent=1.0 / 3.0)
    return ag.Breakage(rate=rate, fragments=ag.fragments.equal_binary())


def plant() -> ag.Schedule:
    """A tank that fills, mixes, breaks, settles, is dosed and diluted, sampled and drawn off, with jumps in time."""
    kernel = brownian() + 0.2 * shear() * STEPS([1.5], [1.0, 0.3])
    losses = [
        ag.SettlingOut(lambda v: 0.02 * np.cbrt(v) ** 2, depth=1.0, strength=STEPS([2.5], [0.0, 1.0])),
        ag.Withdrawal(0.1, selectivity=lambda v: v / (5.0 + v), name="screen"),
    ]
    feed = [
        ag.Feed(distribution=EXPONENTIAL, share=0.5, strength=STEPS([0.5], [2.0, 0.5])),
        ag.Feed(distribution=ag.Gamma(mean_volume=5.0, shape=3.0, number=0.1), share=0.3),
    ]
    tank = ag.StirredTank(
        kernel,
        residence_time=2.0,
        feed=feed,
        breakage=[halves(0.05), closed.uniform(0.01, 1.0)],
        losses=losses,
        flow=STEPS([0.2, 0.7], [0.0, 1.0, 0.6]),
    )
    batch = ag.Batch(kernel, breakage=halves(0.1), losses=losses)
    return ag.Schedule(
        [
            ag.Stage(tank, start=0.0, stop=1.0),
            ag.Stage(batch, start=1.0, stop=2.0, dilution=0.3),
            ag.Stage(tank, start=2.0, stop=3.0, dose=ag.Gamma(mean_volume=2.0, shape=2.0, number=0.5)),
            ag.Stage(batch, start=3.0, stop=4.0, dose=EXPONENTIAL, dilution=0.1),
        ]
    )


@each_scheme
def test_the_account_of_everything_at_once_closes(scheme: ag.schemes.Scheme) -> None:
    """Found 1e-15, with 4 stages and 10 jumps."""
    times = np.linspace(0.0, 4.0, 41)
    result = ag.simulate(plant(), EXPONENTIAL, times, grid=GRID, scheme=scheme)
    balance = result.balance
    assert set(balance.inward) == {"fed", "dosed"}
    assert set(balance.outward) == {"withdrawn", "settled", "screen", "diluted"}
    assert np.abs(balance.closure).max() <= 1e-13
    for volume in (*balance.inward.values(), *balance.outward.values()):
        assert (np.diff(volume) >= -1e-16).all()
        assert volume[-1] > 0.01
    # fed: the integral of flow and feed over the time that the tank is open
    fed = 0.5 * (
        0.5 * (2.0 * 0.3 + 0.5 * (0.2 + 0.6 * 0.3 + 0.6 * 1.0)) + 0.3 * 0.5 * (0.5 + 0.6 * 0.3 + 0.6)
    )
    assert balance.inward["fed"][-1] == pytest.approx(fed, rel=1e-8)
    assert balance.inward["dosed"][-1] == pytest.approx(2.0, rel=1e-10)


@pytest.mark.parametrize(
    "method", [ag.methods.LSODA(), ag.methods.BDF(), ag.methods.Radau()], ids=lambda m: m.name
)
def test_methods_agree_on_everything_at_once(method: ag.solvers.base.Method) -> None:
    """Within 5 times the tolerance that was asked for."""
    rtol = 1e-6
    times = [1.0, 2.0, 2.7, 4.0]
    scheme = ag.FixedPivot(moments=2)
    exact = ag.simulate(plant(), EXPONENTIAL, times, grid=GRID, scheme=scheme, rtol=1e-10)
    result = ag.simulate(plant(), EXPONENTIAL, times, grid=GRID, scheme=scheme, method=method, rtol=rtol)
    for k in (0, 1, 2):
        np.testing.assert_allclose(result.moment(k), exact.moment(k), rtol=5 * rtol)
    for name, volume in exact.balance.outward.items():
        np.testing.assert_allclose(result.balance.outward[name], volume, rtol=5 * rtol, atol=1e-12)


# ---- strong breakage of large flocs beside slow aggregation


def stiff() -> tuple[ag.Batch, ag.SizeGrid, list[float]]:
    """Rates from 4e6 per s (breakage of the largest) to 0.4 per s (collisions), and times over six decades."""
    breakage = closed.uniform(100.0, 2.0)
    grid = ag.SizeGrid.geometric(smallest=1e-5, largest=200.0, per_doubling=3)
    return ag.Batch(ag.kernels.constant(1.0), breakage=breakage), grid, [1e-5, 1e-3, 0.1, 1.0, 10.0]


@pytest.mark.parametrize("method", ["LSODA", "BDF", "Radau", "CVODE"])
@pytest.mark.parametrize("moments", [2, 6])
def test_stiff_breakage_beside_slow_aggregation(method: str, moments: int) -> None:
    """Within 5 times the tolerance; found 0.3 for moments, 1.7 for sections that hold a thousandth of the volume."""
    if method == "CVODE":
        pytest.importorskip("sksundae")
    rtol = 1e-6
    vessel, grid, times = stiff()
    start = ag.Exponential(mean_volume=10.0, number=0.1)
    options: dict[str, Any] = {"grid": grid, "scheme": ag.FixedPivot(moments=moments)}
    exact = ag.simulate(vessel, start, times, method=ag.methods.BDF(), rtol=1e-10, **options)
    result = ag.simulate(vessel, start, times, method=getattr(ag.methods, method)(), rtol=rtol, **options)
    for k in (0, 1, 2, 3):
        np.testing.assert_allclose(result.moment(k), exact.moment(k), rtol=5 * rtol)
    held = exact.number * grid.volume > 1e-3 * exact.moment(1)[:, None]
    np.testing.assert_allclose(result.number[held], exact.number[held], rtol=5 * rtol)
    assert np.abs(result.balance.closure).max() <= 1e-13
    assert result.stats.rate_evaluations <= 10_000
    # N comes to rest at sqrt(2 sum of rates): steady and long run agree here as well
    state = ag.steady_state(vessel, start=start, **options)
    late = ag.simulate(vessel, start, 1e3, method=ag.methods.BDF(), **options)
    assert late.total_number()[-1] == pytest.approx(float(state.total_number()), rel=1e-8)
    assert state.iterations <= 30


# ---- scales


@given(
    volume=st.floats(1e-3, 1e3),
    time=st.floats(1e-3, 1e3),
    amount=st.floats(1e-3, 1e3),
    scheme=st.sampled_from(SCHEMES),
)
def test_units_cancel_with_flow_and_breakage(
    volume: float, time: float, amount: float, scheme: ag.schemes.Scheme
) -> None:
    """v -> s v, t -> c t, n -> a n: the same run in other units, a few times rtol where a step is decided otherwise."""
    rtol = 1e-8

    def run(v: float, t: float, n: float) -> ag.Result:
        kernel = ag.kernels.from_function(lambda a, b: (np.cbrt(a / v) + np.cbrt(b / v)) ** 3 / (8.0 * t * n))
        rate = ag.rates.power_law(coefficient=0.5 / t / v**0.5, exponent=0.5)
        tank = ag.StirredTank(
            kernel,
            residence_time=2.0 * t,
            feed=ag.Exponential(mean_volume=v, number=n),
            breakage=ag.Breakage(rate=rate, fragments=ag.fragments.uniform_binary()),
            losses=ag.SettlingOut(lambda x: 0.1 / t * np.cbrt(x / v), depth=1.0),
        )
        grid = ag.SizeGrid.from_pivots(v * 2.0 ** (np.arange(-36.0, 31.0) / 3))
        start = ag.Gamma(mean_volume=3.0 * v, shape=2.0, number=0.2 * n)
        return ag.simulate(tank, start, np.array([0.3, 1.0]) * t, grid=grid, scheme=scheme, rtol=rtol)

    one, other = run(1.0, 1.0, 1.0), run(volume, time, amount)
    for k in (0.0, 1.0, 2.0):
        np.testing.assert_allclose(other.moment(k) / (amount * volume**k), one.moment(k), rtol=10 * rtol)
    for name, carried in one.balance.outward.items():
        np.testing.assert_allclose(other.balance.outward[name] / (amount * volume), carried, rtol=10 * rtol)


@given(factor=st.floats(0.1, 10.0), exponent=st.floats(0.0, 1.5))
def test_breakage_twice_as_fast_is_half_the_time(factor: float, exponent: float) -> None:
    grid = ag.SizeGrid.geometric(smallest=1e-6, largest=64.0, per_doubling=2)
    scheme = ag.FixedPivot(moments=2)
    times = np.array([0.5, 2.0])
    once = ag.simulate(
        ag.Batch(None, breakage=closed.uniform(1.0, exponent)), EXPONENTIAL, times, grid=grid, scheme=scheme
    )
    other = ag.simulate(
        ag.Batch(None, breakage=factor * closed.uniform(1.0, exponent)),
        EXPONENTIAL,
        times / factor,
        grid=grid,
        scheme=scheme,
    )
    for k in (0, 2):
        np.testing.assert_allclose(other.moment(k), once.moment(k), rtol=1e-5)


# ---- the same thing said in two ways


def test_a_withdrawal_is_an_outflow() -> None:
    """A batch that is drawn off at one over the residence time is a tank fed with clear liquid."""
    drawn = ag.simulate(ag.Batch(shear(), losses=ag.Withdrawal(0.5)), EXPONENTIAL, [1.0, 3.0], grid=GRID)
    tank = ag.simulate(ag.StirredTank(shear(), residence_time=2.0), EXPONENTIAL, [1.0, 3.0], grid=GRID)
    np.testing.assert_array_equal(drawn.number, tank.number)
    np.testing.assert_array_equal(drawn.balance.withdrawn, tank.balance.withdrawn)


def test_a_dose_at_a_limit_is_a_short_strong_feed() -> None:
    """The same volume in 1e-4 s: alike to the collisions in that time."""
    kernel = ag.kernels.constant(1.0)
    still = ag.Batch(kernel)
    dosed = ag.Schedule(
        [ag.Stage(still, start=0.0, stop=1.0), ag.Stage(still, start=1.0, stop=3.0, dose=EXPONENTIAL)]
    )
    width = 1e-4
    burst = ag.Feed(distribution=EXPONENTIAL, strength=STEPS([1.0, 1.0 + width], [0.0, 1.0 / width, 0.0]))
    # a huge tank: what flows in per time is as given, what flows out is nothing
    tank = ag.StirredTank(
        kernel, residence_time=1.0, feed=burst, flow=STEPS([1.0, 1.0 + width], [0.0, 1.0, 0.0])
    )
    one = ag.simulate(dosed, SINGLES + EXPONENTIAL, [2.0, 3.0], grid=GRID, scheme=ag.FixedPivot(moments=2))
    other = ag.simulate(tank, SINGLES + EXPONENTIAL, [2.0, 3.0], grid=GRID, scheme=ag.FixedPivot(moments=2))
    assert other.balance.fed[-1] == pytest.approx(1.0, rel=1e-9)
    np.testing.assert_allclose(other.total_number(), one.total_number(), rtol=3 * width)
    np.testing.assert_allclose(other.moment(2), one.moment(2), rtol=3 * width)


def test_many_tanks_are_plug_flow() -> None:
    """Number at the steady state of n tanks under a constant kernel: tends to that of a batch of the same time with
    the error 1 / n; N / N0 of the batch is 1 / (1 + K N0 t / 2)."""
    kernel, errors = ag.kernels.constant(1.0), []
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 1e3, per_doubling=3)
    for count in (5, 10, 20):
        train = ag.Train([ag.Tank(kernel, volume=2.0 / count) for _ in range(count)], flow=1.0, feed=SINGLES)
        state = ag.steady_state(train, grid=grid, scheme=ag.FixedPivot(moments=2))
        assert state.iterations <= 30
        number = 1.0
        for _ in range(count):  # each tank: 0 = (N_in - N) / theta - N^2 / 2
            number = (np.sqrt(1 + 2 * (2.0 / count) * number) - 1) / (2.0 / count)
        assert state.total_number() == pytest.approx(number, rel=1e-12)
        errors.append(float(state.total_number()) / 0.5 - 1.0)
    np.testing.assert_allclose(np.array(errors[:-1]) / errors[1:], 2.0, rtol=0.1)


@each_scheme
def test_breakage_and_aggregation_of_the_same_halves_undo_each_other(scheme: ag.schemes.Scheme) -> None:
    """Two sizes only, on a grid that doubles: 2 singles <-> 1 double, n2 / n1^2 = K / (2 S) at rest."""
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=2.0**6, per_doubling=1)
    only = ag.kernels.from_function(lambda v, w: 0.4 * ((v < 1.5) & (w < 1.5)))
    breakage = ag.Breakage(
        rate=ag.rates.from_function(lambda v: np.full(v.shape, 0.3)), fragments=ag.fragments.equal_binary()
    )
    vessel = ag.Batch(only, breakage=breakage)
    state = ag.steady_state(vessel, start=SINGLES, grid=grid, scheme=scheme)
    n1, n2 = state.number[:2]
    assert n2 / n1**2 == pytest.approx(0.5 * 0.4 / 0.3, rel=1e-10)
    assert n1 + 2.0 * n2 == pytest.approx(1.0, rel=1e-12)
    assert np.abs(state.number[2:]).max() <= 1e-14
