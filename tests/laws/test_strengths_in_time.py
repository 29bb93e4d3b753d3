"""Kernels that change with time: the constant kernel depends on the integral of its strength alone.

N / N0 = 1 / (1 + T) with T = N0 / 2 times the integral of the rate over time.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from reference_runs import MONODISPERSE, brownian
from scheme_cases import NUMBER_KEEPING, grid_for

import aggsim as ag

CONSTANT = ag.kernels.constant(1.0)


@pytest.mark.parametrize("method", [ag.methods.LSODA(), ag.methods.BDF(), ag.methods.Radau()], ids=repr)
def test_a_short_pulse_in_a_long_run_is_not_missed(method: ag.methods.Method) -> None:
    pulse = ag.kernels.Strength.steps([500.0, 501.0], [0.0, 1.0, 0.0])
    result = ag.simulate(
        ag.Batch(CONSTANT * pulse), MONODISPERSE, [0.0, 499.0, 500.0, 500.5, 501.0, 1000.0], method=method
    )
    exact = [1.0, 1.0, 1.0, 1.0 / 1.25, 1.0 / 1.5, 1.0 / 1.5]
    np.testing.assert_allclose(result.total_number(), exact, rtol=2e-5)  # rtol = 1e-6
    # where nothing happens nothing changes, to the last digit
    assert (result.number[:3] == result.number[0]).all()
    assert (result.number[4] == result.number[5]).all()


@given(
    durations=st.lists(st.floats(0.05, 3.0), min_size=1, max_size=5),
    values=st.lists(st.floats(0.0, 4.0), min_size=6, max_size=6),
)
def test_steps_give_the_closed_solution_of_their_integral(
    durations: list[float], values: list[float]
) -> None:
    jumps = np.cumsum(durations)
    levels = values[: jumps.size + 1]
    end = float(jumps[-1]) + 1.0
    edges = np.concatenate([[0.0], jumps, [end]])
    integral = np.concatenate([[0.0], np.cumsum(np.diff(edges) * levels)])
    kernel = CONSTANT * ag.kernels.Strength.steps(jumps, levels)
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 1e4, per_doubling=3)
    result = ag.simulate(ag.Batch(kernel), MONODISPERSE, edges, grid=grid, rtol=1e-9)
    total = 0.5 * integral
    np.testing.assert_allclose(result.total_number(), 1.0 / (1.0 + total), rtol=1e-7)
    np.testing.assert_allclose(result.moment(2), 1.0 + 2.0 * total, rtol=1e-7)
    assert result.stats.restarts >= jumps.size  # one at each jump, more for each climb


@pytest.mark.parametrize("scheme", NUMBER_KEEPING, ids=repr)
def test_a_smooth_strength_gives_the_closed_solution_of_its_integral(scheme: ag.schemes.Scheme) -> None:
    strength = ag.kernels.Strength(lambda t: 1.0 + math.sin(t))
    times = np.linspace(0.0, 4.0, 9)
    grid = grid_for(scheme, doublings=9)
    result = ag.simulate(
        ag.Batch(CONSTANT * strength), MONODISPERSE, times, grid=grid, scheme=scheme, rtol=1e-10
    )
    total = 0.5 * (times + 1.0 - np.cos(times))
    np.testing.assert_allclose(result.total_number(), 1.0 / (1.0 + total), rtol=1e-8)
    np.testing.assert_allclose(result.number[:, 0], 1.0 / (1.0 + total) ** 2, rtol=1e-8)


def test_a_smooth_strength_with_a_jump_uses_both_its_sides() -> None:
    """Mixing that decays as exp(-t) and is switched off at t = 1."""
    strength = ag.kernels.Strength(lambda t: math.exp(-t) if t < 1.0 else 0.0, jumps=(1.0,))
    result = ag.simulate(ag.Batch(CONSTANT * strength), MONODISPERSE, [0.5, 1.0, 2.0], rtol=1e-10)
    total = 0.5 * -np.expm1([-0.5, -1.0, -1.0])
    np.testing.assert_allclose(result.total_number(), 1.0 / (1.0 + total), rtol=1e-9)


def test_parts_with_their_own_strengths_add_up() -> None:
    """Two halves of one kernel in two periods of time are that kernel all the time."""
    kernel = brownian()
    first = kernel * ag.kernels.Strength.steps([2.0], [1.0, 0.0])
    second = kernel * ag.kernels.Strength.steps([2.0], [0.0, 1.0])
    times = [1.0, 2.0, 5.0]
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 1e3, per_doubling=3)
    split = ag.simulate(ag.Batch(first + second), MONODISPERSE, times, grid=grid, rtol=1e-10)
    whole = ag.simulate(ag.Batch(kernel), MONODISPERSE, times, grid=grid, rtol=1e-10)
    np.testing.assert_allclose(split.moment(0), whole.moment(0), rtol=1e-9)
    np.testing.assert_allclose(split.moment(2), whole.moment(2), rtol=1e-9)
    names = list(split.contributions)
    assert split.contributions[names[0]].events[0] > 0.0
    assert split.contributions[names[0]].events[-1] == 0.0
    assert split.contributions[names[1]].events[0] == 0.0


def test_doubling_a_strength_is_doubling_time() -> None:
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 1e3, per_doubling=3)
    once = ag.simulate(ag.Batch(brownian()), MONODISPERSE, [4.0, 8.0], grid=grid, rtol=1e-10)
    twice = brownian() * ag.kernels.Strength(lambda t: 2.0)
    fast = ag.simulate(ag.Batch(twice), MONODISPERSE, [2.0, 4.0], grid=grid, rtol=1e-10)
    np.testing.assert_allclose(fast.number, once.number, rtol=1e-7, atol=1e-14)
