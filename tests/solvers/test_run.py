from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError, SimulationError

MONO = ag.Monodisperse(volume=1.0, number=1.0)


def test_a_short_pulse_is_not_missed() -> None:
    pulse = ag.kernels.Strength.steps([500.0, 501.0], [0.0, 4.0, 0.0])
    vessel = ag.Batch(ag.kernels.constant(1.0) * pulse)
    result = ag.simulate(vessel, MONO, [0.0, 499.0, 500.5, 1000.0])
    # N = 1 / (1 + integral of the strength / 2)
    np.testing.assert_allclose(result.total_number(), [1.0, 1.0, 0.5, 1 / 3], rtol=1e-5)
    assert result.stats.restarts >= 2


def test_a_smooth_strength_acts_by_its_integral() -> None:
    vessel = ag.Batch(ag.kernels.constant(1.0) * ag.kernels.Strength(lambda t: 1.0 + np.sin(t)))
    result = ag.simulate(vessel, MONO, [0.0, 3.0, 7.0], rtol=1e-8)
    integral = result.times + 1.0 - np.cos(result.times)
    np.testing.assert_allclose(result.total_number(), 1 / (1 + integral / 2), rtol=1e-6)


def test_jumps_outside_the_run_do_not_matter() -> None:
    vessel = ag.Batch(ag.kernels.constant(1.0) * ag.kernels.Strength.steps([-1.0, 50.0], [5.0, 1.0, 5.0]))
    result = ag.simulate(vessel, MONO, [0.0, 10.0])
    assert result.total_number()[-1] == pytest.approx(1 / 6, rel=1e-5)


def test_an_interrupted_run_keeps_what_was_computed() -> None:
    def stop_half_way(fraction: float, time: float) -> None:
        if time > 5.0:
            raise KeyboardInterrupt

    vessel = ag.Batch(ag.kernels.constant(1.0))
    times = np.linspace(0.0, 10.0, 11)
    result = ag.simulate(vessel, MONO, times, progress=stop_half_way, raise_unfinished=False)
    assert result.status.outcome is ag.Outcome.INTERRUPTED
    assert 6 <= result.times.size < 11
    np.testing.assert_allclose(result.total_number(), 1 / (1 + result.times / 2), rtol=1e-5)
    # a script that is interrupted stops, and the result is in the error
    with pytest.raises(KeyboardInterrupt) as caught:
        ag.simulate(vessel, MONO, times, progress=stop_half_way)
    assert isinstance(caught.value, SimulationError)
    np.testing.assert_array_equal(caught.value.result.number, result.number)


def test_the_work_limit_ends_a_run() -> None:
    method = ag.methods.LSODA(max_evaluations=50)
    result = ag.simulate(
        ag.Batch(ag.kernels.constant(1.0)), MONO, [0.0, 1e-3, 1e3], method=method, raise_unfinished=False
    )
    assert result.status.outcome is ag.Outcome.WORK_LIMIT
    assert "max_evaluations=50" in str(result.status)
    assert result.times[-1] == result.status.time


def test_rates_that_are_not_finite_end_a_run() -> None:
    # finite rates whose products overflow
    with np.errstate(over="ignore", invalid="ignore"):
        result = ag.simulate(
            ag.Batch(ag.kernels.constant(1e250)),
            ag.Monodisperse(volume=1.0, number=1e40),
            [0.0, 1.0],
            raise_unfinished=False,
        )
    assert result.status.outcome is ag.Outcome.NOT_FINITE
    assert result.times.tolist() == [0.0]


def test_errors_of_a_strength_stop_the_run_with_their_own_words() -> None:
    vessel = ag.Batch(ag.kernels.constant(1.0) * ag.kernels.Strength(lambda t: 1.0 - t))
    with pytest.raises(InputError, match="strength at time"):
        ag.simulate(vessel, MONO, [0.0, 10.0])


STEPS = ag.kernels.Strength.steps
METHODS = [ag.methods.LSODA(), ag.methods.BDF(), ag.methods.Radau()]
each_method = pytest.mark.parametrize("method", METHODS, ids=lambda method: method.name)


@each_method
@pytest.mark.parametrize("beside", [-2, -1, 0, 1, 2])
@pytest.mark.parametrize("kind", ["jump", "stage"])
def test_an_output_beside_a_limit_by_round_off_alone(
    method: ag.solvers.base.Method, beside: int, kind: str
) -> None:
    """linspace(0, 4, 41)[7] is the next number after 0.7: no method steps from one to the other."""
    limit = 0.7
    output = limit
    for _ in range(abs(beside)):
        output = float(np.nextafter(output, np.sign(beside) * np.inf))
    kernel = ag.kernels.constant(1.0)
    vessel: ag.vessels.Vessel = ag.Batch(kernel * STEPS([limit], [1.0, 2.0]))
    if kind == "stage":
        vessel = ag.Schedule.in_turn((ag.Batch(kernel), limit), (ag.Batch(2.0 * kernel), 1.0))
    result = ag.simulate(vessel, MONO, [0.5, output, 1.2], method=method)
    assert result.times.tolist() == [0.5, output, 1.2]
    np.testing.assert_allclose(result.total_number(), [1 / 1.25, 1 / 1.35, 1 / 1.85], rtol=1e-5)


@each_method
def test_jumps_beside_each_other_by_round_off_alone(method: ag.solvers.base.Method) -> None:
    kernel = ag.kernels.constant(1.0)
    vessel = ag.Batch(kernel * STEPS([0.3], [1.0, 2.0]) + kernel * STEPS([0.1 + 0.2], [1.0, 0.0]))
    result = ag.simulate(vessel, MONO, [0.2, 0.3, 0.1 + 0.2, 1.0], method=method)
    np.testing.assert_allclose(result.total_number(), [1 / 1.2, 1 / 1.3, 1 / 1.3, 0.5], rtol=1e-5)


def test_a_run_stops_at_stages_and_jumps_and_starts_anew() -> None:
    feed = ag.Feed(distribution=MONO, strength=STEPS([1.0, 2.0], [0.0, 1.0, 0.0]))
    tank = ag.StirredTank(ag.kernels.constant(1.0), residence_time=1.0, feed=feed)
    schedule = ag.Schedule.in_turn((tank, 1.5), (ag.Batch(ag.kernels.constant(1.0)), 1.0), (tank, 10.0))
    grid = ag.SizeGrid.monomers(1.0, 64)
    result = ag.simulate(schedule, MONO, [3.0], grid=grid, scheme=ag.Monomer())
    # jump at 1, stages at 1.5 and 2.5; the jump at 2 is the tank's, which is not there then
    assert result.stats.restarts - result.stats.grid_extensions == 3
    assert result.balance.fed[-1] == pytest.approx(0.5, rel=1e-9)


def test_an_account_goes_on_where_the_grid_grows() -> None:
    tank = ag.StirredTank(ag.kernels.constant(1.0), residence_time=100.0, feed=MONO)
    result = ag.simulate(tank, None, [0.0, 1.0, 10.0, 1000.0])
    assert result.stats.grid_extensions >= 1
    assert result.balance.fed.tolist() == pytest.approx([0.0, 0.01, 0.1, 10.0], abs=1e-12)
    assert np.abs(result.balance.closure).max() <= 1e-12
    train = ag.Train([ag.Tank(ag.kernels.constant(1.0), volume=1.0)] * 3, flow=0.01, feed=MONO)
    result = ag.simulate(train, [MONO, None, None], [0.0, 1.0, 1000.0])
    assert result.stats.grid_extensions >= 1
    for one in (result, *result.tanks):
        assert np.abs(one.balance.closure).max() <= 1e-12


def test_a_feed_that_comes_late_is_not_lost_in_the_tolerance() -> None:
    """Nothing is there at first: what comes in sets the scale of the tolerances."""
    feed = ag.Feed(distribution=ag.Monodisperse(volume=1.0, number=1e-20), strength=STEPS([5.0], [0.0, 1.0]))
    tank = ag.StirredTank(ag.kernels.constant(1e20), residence_time=1.0, feed=feed)
    result = ag.simulate(tank, None, [5.0, 60.0], rtol=1e-8)
    assert result.total_number()[0] == 0.0
    assert result.total_number()[1] == pytest.approx(1e-20 * (np.sqrt(3.0) - 1.0), rel=1e-7)


def test_an_interrupted_run_keeps_its_stages_and_streams() -> None:
    def stop_half_way(fraction: float, time: float) -> None:
        if time > 1.5:
            raise KeyboardInterrupt

    tank = ag.StirredTank(ag.kernels.constant(1.0), residence_time=1.0, feed=MONO)
    schedule = ag.Schedule(
        [
            ag.Stage(tank, start=0.0, stop=1.0),
            ag.Stage(ag.Batch(ag.kernels.additive(1.0)), start=1.0, stop=3.0, dose=MONO),
        ]
    )
    result = ag.simulate(
        schedule, MONO, np.linspace(0.0, 3.0, 31), progress=stop_half_way, raise_unfinished=False
    )
    assert result.status.outcome is ag.Outcome.INTERRUPTED
    assert 15 <= result.times.size < 31
    assert set(result.balance.inward) == {"fed", "dosed"}
    assert np.abs(result.balance.closure).max() <= 1e-12
    assert list(result.contributions) == ["constant", "additive"]
