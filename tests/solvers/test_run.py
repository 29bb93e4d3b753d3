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
