"""The record of a steady state and of steady states over one parameter."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest

import aggsim as ag
from aggsim.result import SteadyBalance, SteadyCurve, SteadyState

MONO = ag.Monodisperse(volume=1.0, number=1.0)
GRID = ag.SizeGrid.monomers_then_geometric(1.0, 1000.0, per_doubling=3)


def train(rate: float = 1.0) -> ag.Train:
    return ag.Train([ag.Tank(ag.kernels.constant(rate), volume=v) for v in (1.0, 3.0)], flow=1.0, feed=MONO)


@pytest.fixture(scope="module")
def state() -> SteadyState:
    return ag.steady_state(train(), grid=GRID)


def test_the_account_says_what_comes_goes_and_stays() -> None:
    balance = SteadyBalance(
        present=2.0,
        beyond_grid=0.1,
        negative_share=1e-9,
        inward={"fed": 0.5, "dosed": 0.5},
        outward={"withdrawn": 0.6, "settled": 0.2},
    )
    assert balance.closure == pytest.approx(0.1)
    text = str(balance)
    for words in ("fraction 2;", "fed 0.5", "settled 0.2", "beyond the grid 0.1", "closure error 1.0e-01"):
        assert words in text
    assert SteadyBalance(present=1.0, beyond_grid=0.0, negative_share=0.0).closure == 0.0


def test_a_state_reads_like_a_result(state: SteadyState) -> None:
    result = ag.simulate(train(), None, 200.0, grid=GRID, rtol=1e-9)
    assert state.number.shape == (len(GRID),)
    assert state.total_number() == pytest.approx(result.total_number()[-1], rel=1e-8)
    assert state.mean_diameter(4, 3) == pytest.approx(result.mean_diameter(4, 3)[-1], rel=1e-8)
    np.testing.assert_allclose(
        state.quantile_diameter([0.1, 0.9]), result.quantile_diameter([0.1, 0.9])[-1], rtol=1e-7
    )
    np.testing.assert_allclose(state.density(), result.density()[-1], rtol=1e-6, atol=1e-12)
    # per second and per volume of both tanks: a quarter of the flow over the volume
    assert state.balance.inward == pytest.approx({"fed": 0.25}, rel=1e-12)
    assert state.balance.outward == pytest.approx({"withdrawn": 0.25}, rel=1e-9)


def test_the_numbers_are_those_of_the_last_tank(state: SteadyState) -> None:
    assert state.tanks.shape == (2, len(GRID))
    np.testing.assert_array_equal(state.tanks[1], state.number)
    first = state.tank(0)
    np.testing.assert_array_equal(first.number, state.tanks[0])
    # more collisions further on
    assert first.total_number() > state.total_number()
    assert first.quantile_diameter(0.5) < state.quantile_diameter(0.5)
    assert state.tank(1).moment(2) == pytest.approx(float(state.moment(2)), rel=1e-15)


def test_the_record_cannot_be_changed(state: SteadyState) -> None:
    with pytest.raises(dataclasses.FrozenInstanceError):
        state.stable = False  # type: ignore[misc]
    for array in (state.number, state.tanks):
        with pytest.raises(ValueError, match="read-only"):
            array[...] = 0.0


def test_repr_says_what_matters(state: SteadyState) -> None:
    text = repr(state)
    assert len(text.splitlines()) <= 7
    for words in (
        "stable",
        "relaxes in",
        "sections",
        "fed 0.25",
        "FixedPivot(moments=6)",
        f"{state.iterations} Newton",
    ):
        assert words in text
    assert "not stable" not in text
    other = repr(dataclasses.replace(state, jacobian=-state.jacobian, integrated=True))
    assert "not stable" in other
    assert "integration in time" in other


def test_a_curve_reads_state_by_state() -> None:
    rates = [0.5, 1.0, 2.0]
    curve = ag.steady_states(train, rates, grid=GRID)
    assert isinstance(curve, SteadyCurve)
    assert len(curve.states) == 3
    np.testing.assert_array_equal(curve.values, rates)
    np.testing.assert_array_equal(
        curve.mean_diameter(4, 3), [float(s.mean_diameter(4, 3)) for s in curve.states]
    )
    d50 = curve.quantile_diameter(0.5)
    assert (np.diff(d50) > 0.0).all()
    np.testing.assert_allclose(curve.exponent(), np.gradient(np.log(d50), np.log(rates)), rtol=1e-12)
    number = curve.exponent(0.5, r=0)
    by_number = curve.quantile_diameter(0.5, r=0)
    np.testing.assert_allclose(number, np.gradient(np.log(by_number), np.log(rates)), rtol=1e-12)
    assert (np.diff(curve.total_number()) < 0.0).all()


@pytest.mark.parametrize("back", [False, True], ids=["in turn", "with a recycle"])
@pytest.mark.parametrize("closed", [False, True])
def test_stability_is_read_from_the_jacobian(back: bool, closed: bool) -> None:
    size, tanks = 4, 3
    matrix = np.random.default_rng(2).normal(size=(tanks * size, tanks * size)) - 3.0 * np.eye(tanks * size)
    for k in range(0, tanks * size, size):
        if not back:
            matrix[k : k + size, k + size :] = 0.0
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=8.0, per_doubling=1)
    number = np.ones((tanks, size))
    balance = SteadyBalance(present=1.0, beyond_grid=0.0, negative_share=0.0)
    state = SteadyState(grid, number[-1], balance, matrix, closed, 1, 0.0, False, {}, number)
    values = np.linalg.eigvals(matrix)
    if closed:  # the one nearest to zero belongs to the conserved volume
        values = np.delete(values, np.abs(values).argmin())
    assert state.stable is bool(values.real.max() < 0.0)
    assert state.relaxation_time == pytest.approx(1.0 / abs(values.real.max()), rel=1e-9)
