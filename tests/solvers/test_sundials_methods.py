from __future__ import annotations

import pickle
import subprocess
import sys
from typing import Any

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError, SimulationError
from aggsim.solvers.base import Problem
from aggsim.solvers.methods import CVODE, LSODA

MONO = ag.Monodisperse(volume=1.0, number=1.0)
CONSTANT = ag.Batch(ag.kernels.constant(1.0))


@pytest.fixture
def cvode() -> CVODE:
    pytest.importorskip("sksundae")
    return CVODE()


def problem(rates: Any, jacobian: Any, state: list[float], stop: float = 2.0, start: float = 0.0) -> Problem:
    atol = np.full(len(state), 1e-12)
    return Problem(rates, jacobian, start, np.array(state), stop, rtol=1e-8, atol=atol)


def run_to_the_end(method: CVODE, case: Problem) -> tuple[Any, str | None]:
    stepper, reason = method.stepper(case), None
    for _ in range(1000):
        if stepper.time == case.stop or reason is not None:
            return stepper, reason
        reason = stepper.step(case.stop)
    raise AssertionError("the stepper does not come to an end")


def test_the_message_where_the_package_is_missing(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "sksundae", None)
    monkeypatch.setitem(sys.modules, "sksundae.cvode", None)
    with pytest.raises(ImportError, match=r'pip install "aggsim\[sundials\]"'):
        CVODE()


def test_it_agrees_with_lsoda(cvode: CVODE) -> None:
    water = ag.Medium.water(temperature=293.15)
    grains = ag.Compact(ag.Particles(diameter=1e-6, density=2650.0))
    kernel = ag.kernels.brownian(grains, water) + ag.kernels.shear(grains, ag.Flow(shear_rate=30.0))
    vessel = ag.Batch(kernel + ag.kernels.settling(grains, water))
    start = ag.LogNormal(median_diameter=1e-6, gsd=1.4, volume_fraction=2e-5)
    times = [600.0, 3000.0]
    fine = ag.simulate(vessel, start, times, method=LSODA(), rtol=1e-10)
    result = ag.simulate(vessel, start, times, method=cvode, rtol=1e-7)
    # error over many steps: within ten times the tolerance of one
    for quantity in (lambda r: r.total_number(), lambda r: r.moment(2), lambda r: r.quantile_diameter(0.5)):
        np.testing.assert_allclose(quantity(result), quantity(fine), rtol=1e-6)
    assert np.abs(result.balance.closure).max() < 1e-11
    assert result.stats.jacobian_evaluations > 0
    # finite differences would need one rate evaluation for each section and Jacobian
    assert result.stats.rate_evaluations < 600


def test_states_inside_a_step_are_as_good_as_those_at_its_end(cvode: CVODE) -> None:
    times = np.linspace(0.0, 20.0, 1001)
    result = ag.simulate(CONSTANT, MONO, times, method=cvode, rtol=1e-8)
    np.testing.assert_array_equal(result.times, times)
    # N = 1 / (1 + t / 2); some hundred times the tolerance of one step
    np.testing.assert_allclose(result.total_number(), 1 / (1 + times / 2), rtol=2e-6)
    assert np.abs(result.balance.closure).max() < 1e-12
    few = ag.simulate(CONSTANT, MONO, [20.0], method=cvode, rtol=1e-8)
    # outputs cost no evaluations; the times at which sections are taken into use differ a little
    assert result.stats.rate_evaluations == pytest.approx(few.stats.rate_evaluations, rel=0.02)


def test_steps_end_exactly_where_they_are_asked_to(cvode: CVODE) -> None:
    # a start at which times are 1.5e-11 s apart, and a stop that is no multiple of anything
    start, stop = 1e5 / 3.0, 1e5 / 3.0 + 0.7
    case = problem(lambda t, y: -y, lambda t, y: -np.eye(2), [1.0, 3.0], stop, start)
    stepper = cvode.stepper(case)
    for until in [*np.linspace(start, stop, 301)[1:-1].tolist(), stop]:
        while stepper.time < until:
            before, old, copy = stepper.time, stepper.state, stepper.state.copy()
            assert stepper.step(until) is None
            assert before < stepper.time <= until
            np.testing.assert_array_equal(old, copy)
        assert stepper.time == until
        # ten times the tolerance of a step, and the spacing of times
        np.testing.assert_allclose(stepper.state, np.exp(start - until) * case.state, rtol=1e-7)


def test_a_late_start_allows_steps_shorter_than_the_spacing_of_times(cvode: CVODE) -> None:
    start, rate = 1e6, 1e8  # times are 1e-10 s apart, and the state settles within 1e-8 s
    case = problem(lambda t, y: rate * (1.0 - y), lambda t, y: -rate * np.eye(1), [2.0], start + 1.0, start)
    stepper, reason = run_to_the_end(cvode, case)
    assert reason is None
    assert stepper.state == pytest.approx(1.0, rel=1e-8)


def test_jumps_of_a_strength_are_met(cvode: CVODE) -> None:
    pulse = ag.kernels.Strength.steps([500.0, 501.0], [0.0, 4.0, 0.0])
    vessel = ag.Batch(ag.kernels.constant(1.0) * pulse)
    result = ag.simulate(vessel, MONO, [0.0, 499.0, 500.5, 1000.0], method=cvode)
    # N = 1 / (1 + integral of the strength / 2); ten times rtol
    np.testing.assert_allclose(result.total_number(), [1.0, 1.0, 0.5, 1 / 3], rtol=1e-5)
    assert result.stats.restarts >= 2


def test_rates_are_asked_for_at_the_time_of_the_problem(cvode: CVODE) -> None:
    case = problem(lambda t, y: np.array([np.cos(t)]), lambda t, y: np.zeros((1, 1)), [0.0], 12.0, 9.0)
    stepper, reason = run_to_the_end(cvode, case)
    assert reason is None
    # some ten times the tolerance of a step
    assert stepper.state == pytest.approx(np.sin(12.0) - np.sin(9.0), rel=1e-6)


def test_gelation_is_reported(cvode: CVODE) -> None:
    vessel = ag.Batch(ag.kernels.multiplicative(1.0))
    result = ag.simulate(vessel, MONO, [0.5, 2.0], method=cvode, raise_unfinished=False)
    assert result.status.outcome is ag.Outcome.GELATION
    # t_gel = 1 / (C M2(0)): J. B. McLeod, Q. J. Math. 13 (1962) 119; as near as the second moment is
    assert result.status.gelation_time == pytest.approx(1.0, rel=2e-3)


SINGULAR = """
import numpy as np
from aggsim.solvers.base import Problem
from aggsim.solvers.methods import CVODE

# y = 1 / (1 - t)
square = Problem(
    lambda t, y: y * y, lambda t, y: np.diag(2.0 * y), 0.0, np.ones(1), 2.0, rtol=1e-8, atol=np.full(1, 1e-12)
)
stepper, reason = CVODE().stepper(square), None
while reason is None:
    reason = stepper.step(2.0)
print(f"{reason} at t = {stepper.time:.4f}")
"""


def test_a_singularity_is_a_reason_and_nothing_is_printed(cvode: CVODE) -> None:
    # in a process of its own, since compiled code prints when it ends
    done = subprocess.run([sys.executable, "-c", SINGULAR], capture_output=True, text=True, timeout=60)
    assert done.stderr == ""
    assert done.stdout == "the step size became too small for the time to advance at t = 1.0000\n"


def test_a_failure_of_cvode_itself_is_a_reason(cvode: CVODE) -> None:
    nowhere = problem(lambda t, y: np.full(1, np.nan), lambda t, y: np.eye(1), [1.0])
    stepper, reason = run_to_the_end(cvode, nowhere)
    assert reason is not None
    assert "failed" in reason
    assert stepper.time == 0.0


@pytest.mark.parametrize("error", [KeyboardInterrupt, ZeroDivisionError("a rate")])
@pytest.mark.parametrize("calls", [0, 30])
def test_exceptions_come_out_as_they_are(
    cvode: CVODE, error: BaseException, calls: int, capfd: pytest.CaptureFixture[str]
) -> None:
    left = calls

    def rates(time: float, state: Any) -> Any:
        nonlocal left
        left -= 1
        if left < 0:
            raise error
        return -state

    with pytest.raises((KeyboardInterrupt, ZeroDivisionError)) as caught:
        run_to_the_end(cvode, problem(rates, lambda t, y: -np.eye(1), [1.0]))
    assert caught.value is error or caught.type is error
    assert capfd.readouterr() == ("", "")


def test_an_interrupted_run_keeps_what_was_computed(cvode: CVODE) -> None:
    def stop_half_way(fraction: float, time: float) -> None:
        if time > 5.0:
            raise KeyboardInterrupt

    times = np.linspace(0.0, 10.0, 11)
    with pytest.raises(KeyboardInterrupt) as caught:
        ag.simulate(CONSTANT, MONO, times, method=cvode, progress=stop_half_way)
    assert isinstance(caught.value, SimulationError)
    result = caught.value.result
    assert result.status.outcome is ag.Outcome.INTERRUPTED
    assert 6 <= result.times.size < 11
    np.testing.assert_allclose(result.total_number(), 1 / (1 + result.times / 2), rtol=2e-5)


def test_rates_that_are_not_finite_end_a_run(cvode: CVODE, capfd: pytest.CaptureFixture[str]) -> None:
    # finite rates whose products overflow
    vessel, dense = ag.Batch(ag.kernels.constant(1e250)), ag.Monodisperse(volume=1.0, number=1e40)
    with np.errstate(over="ignore", invalid="ignore"):
        result = ag.simulate(vessel, dense, [0.0, 1.0], method=cvode, raise_unfinished=False)
    assert result.status.outcome is ag.Outcome.NOT_FINITE
    assert capfd.readouterr() == ("", "")


def test_the_work_limit_ends_a_run() -> None:
    pytest.importorskip("sksundae")
    method = CVODE(max_evaluations=50)
    result = ag.simulate(CONSTANT, MONO, [0.0, 1e-3, 1e3], method=method, raise_unfinished=False)
    assert result.status.outcome is ag.Outcome.WORK_LIMIT
    assert "max_evaluations=50" in str(result.status)
    assert result.stats.rate_evaluations <= 51


def test_it_is_a_plain_record_of_options(cvode: CVODE) -> None:
    assert pickle.loads(pickle.dumps(cvode)) == cvode
    with pytest.raises(InputError, match="max_evaluations=0"):
        CVODE(max_evaluations=0)
