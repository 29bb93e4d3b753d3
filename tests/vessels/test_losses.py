from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import aggsim as ag
from aggsim.errors import InputError
from aggsim.vessels import Loss, Site, Stream

Array = np.ndarray

GRID = ag.SizeGrid.geometric(smallest=1.0, largest=64.0, per_doubling=1)
THREE = (
    ag.Monodisperse(volume=1.0, number=1.0)
    + ag.Monodisperse(volume=8.0, number=0.5)
    + ag.Monodisperse(volume=64.0, number=0.1)
)
START = ag.FixedPivot(moments=2).project(THREE, GRID)
TIMES = np.array([0.0, 1.0, 3.0])


def run(*losses: Loss) -> ag.Result:
    vessel = ag.Batch(None, losses=losses)
    return ag.simulate(vessel, THREE, TIMES, grid=GRID, scheme=ag.FixedPivot(moments=2), rtol=1e-9)


def test_particles_settle_out_of_a_mixed_tank_exponentially() -> None:
    """exp(-w t / depth) of each size is left."""
    result = run(ag.SettlingOut(lambda v: 0.2 * np.cbrt(v) ** 2, depth=2.0))
    left = np.exp(-np.outer(TIMES, 0.1 * np.cbrt(GRID.volume) ** 2))
    np.testing.assert_allclose(result.number, left * START, rtol=1e-6, atol=1e-13)
    gone = (START * (1.0 - left)) @ GRID.volume
    np.testing.assert_allclose(result.balance.settled, gone, rtol=1e-7, atol=1e-13)
    assert list(result.balance.outward) == ["settled"]
    assert np.abs(result.balance.closure).max() <= 1e-12


def test_what_rises_stays() -> None:
    result = run(ag.SettlingOut(lambda v: np.where(v > 5.0, 0.3, -0.3), depth=1.0))
    np.testing.assert_allclose(result.number[-1, :3], START[:3], rtol=1e-14)
    np.testing.assert_allclose(result.number[-1, 3:], START[3:] * np.exp(-0.9), rtol=1e-7)


def test_a_withdrawal_by_size_takes_its_share() -> None:
    result = run(ag.Withdrawal(0.5, selectivity=lambda v: np.where(v > 20.0, 0.8, 0.0), name="screen"))
    np.testing.assert_allclose(result.number[:, 6], START[6] * np.exp(-0.4 * TIMES), rtol=1e-7)
    np.testing.assert_array_equal(result.number[:, 3], START[3])
    assert list(result.balance.outward) == ["screen"]
    np.testing.assert_allclose(result.balance.withdrawn, result.balance.outward["screen"])
    assert result.balance.settled[-1] == 0.0
    assert "screen" in str(result.balance)


def test_a_withdrawal_of_all_sizes_alike() -> None:
    result = run(ag.Withdrawal(0.5))
    np.testing.assert_allclose(result.number, np.outer(np.exp(-0.5 * TIMES), START), rtol=1e-7)
    assert run(ag.Withdrawal(0.0)).total_number()[-1] == pytest.approx(START.sum(), rel=1e-14)


def test_losses_add_up_and_are_told_apart() -> None:
    result = run(
        ag.Withdrawal(0.2), ag.Withdrawal(0.3, name="sampling"), ag.SettlingOut(lambda v: 0.0 * v + 0.5, 1.0)
    )
    np.testing.assert_allclose(result.number[-1], START * np.exp(-3.0), rtol=1e-7)
    gone = {name: volume[-1] for name, volume in result.balance.outward.items()}
    assert gone["withdrawn"] / gone["settled"] == pytest.approx(0.4, rel=1e-9)
    assert gone["sampling"] / gone["settled"] == pytest.approx(0.6, rel=1e-9)
    assert result.balance.withdrawn[-1] == pytest.approx(gone["withdrawn"] + gone["sampling"], rel=1e-14)


def test_losses_of_one_name_share_an_account() -> None:
    result = run(ag.Withdrawal(0.2), ag.Withdrawal(0.3))
    assert list(result.balance.outward) == ["withdrawn"]
    assert result.balance.withdrawn[-1] == pytest.approx(START @ GRID.volume * -np.expm1(-1.5), rel=1e-7)


def test_a_mixer_keeps_everything_in_suspension_until_it_stops() -> None:
    still = ag.kernels.Strength.steps([2.0], [0.0, 1.0])
    result = run(ag.SettlingOut(lambda v: 0.0 * v + 0.7, depth=1.0, strength=still))
    np.testing.assert_array_equal(result.number[1], result.number[0])
    np.testing.assert_allclose(result.number[2], START * np.exp(-0.7), rtol=1e-7)


@dataclass(frozen=True)
class Filter(Loss):
    """A loss of one's own."""

    factor: object
    strength: None = None

    @property
    def stream(self) -> Stream:
        return Stream("filtered", inward=False)

    def rates(self, volume: Array) -> Array:
        return self.factor(volume)  # type: ignore[operator,no-any-return]


def test_a_loss_of_ones_own_works_like_the_others() -> None:
    result = run(Filter(lambda v: 0.1 * v / (1.0 + v)))
    expected = START * np.exp(-0.3 * GRID.volume / (1.0 + GRID.volume))
    np.testing.assert_allclose(result.number[-1], expected, rtol=1e-7, atol=1e-13)
    assert list(result.balance.outward) == ["filtered"]


@pytest.mark.parametrize(
    ("loss", "words"),
    [
        (Filter(lambda v: -0.1 * v), "'filtered': rates=-0.1"),
        (Filter(lambda v: np.nan * v), "'filtered': rates=nan"),
        (Filter(lambda v: np.inf * v), "'filtered': rates=inf"),
        (Filter(lambda v: np.ones(3)), r"'filtered': rates=\(3,\)"),
        (ag.SettlingOut(lambda v: np.nan * v, depth=1.0), "'settled': rates=nan"),
        (ag.SettlingOut(lambda v: np.ones(3), depth=1.0), r"'settled': rates=\(3,\)"),
        (ag.Withdrawal(1.0, selectivity=lambda v: v), "selectivity=2"),
        (ag.Withdrawal(1.0, selectivity=lambda v: -0.1 + 0.0 * v), "selectivity=-0.1"),
        (ag.Withdrawal(1.0, selectivity=lambda v: np.nan * v), "selectivity=nan"),
    ],
)
def test_rates_that_are_none_are_refused_before_the_run(loss: Loss, words: str) -> None:
    with pytest.raises(InputError, match=words):
        run(loss)


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: ag.SettlingOut(1e-3, depth=3.0), "not a function of particle volume"),
        (lambda: ag.SettlingOut(lambda v: v, depth=0.0), "depth=0"),
        (lambda: ag.SettlingOut(lambda v: v, depth=-3.0), "depth=-3"),
        (lambda: ag.SettlingOut(lambda v: v, depth=np.nan), "depth=nan"),
        (lambda: ag.SettlingOut(lambda v: v, depth=1.0, strength=1.0), "not a factor in time"),
        (lambda: ag.Withdrawal(-1e-3), "rate=-0.001"),
        (lambda: ag.Withdrawal(np.nan), "rate=nan"),
        (lambda: ag.Withdrawal(np.inf), "rate=inf"),
        (lambda: ag.Withdrawal(1.0, selectivity=0.5), "not a function of particle volume"),
        (lambda: ag.Withdrawal(1.0, name=""), "name=''"),
        (lambda: ag.Withdrawal(1.0, strength=0.5), "not a factor in time"),
        (lambda: ag.Batch(None, losses=1e-3), "losses=0.001"),
        (lambda: ag.Batch(None, losses=[ag.Withdrawal(1.0), None]), "losses=None"),
    ],
)
def test_losses_that_are_none_are_refused(make, words: str) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(InputError, match=words):
        make()


@given(
    rate=st.floats(0.0, 5.0),
    settling=st.floats(0.0, 5.0),
    collisions=st.floats(0.0, 2.0),
)
def test_any_losses_balance(rate: float, settling: float, collisions: float) -> None:
    """Round-off of some 200 evaluations: found 1.4e-13."""
    losses = [
        ag.Withdrawal(rate, selectivity=lambda v: v / (3.0 + v)),
        ag.SettlingOut(lambda v: settling * np.cbrt(v), depth=2.0),
    ]
    vessel = ag.Batch(ag.kernels.constant(collisions), losses=losses)
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=2.0**14, per_doubling=1)
    result = ag.simulate(vessel, THREE, TIMES, grid=grid, scheme=ag.FixedPivot(moments=2))
    assert np.abs(result.balance.closure).max() <= 1e-12
    for gone in result.balance.outward.values():
        assert (np.diff(gone) >= 0.0).all()


def test_the_jacobian_of_a_loss_is_its_rates() -> None:
    loss = ag.Withdrawal(0.3, selectivity=lambda v: v / (1.0 + v))
    site = Site(ag.FixedPivot(moments=2).prepare(GRID), (loss.stream,), None, GRID.sections + 2)
    (term,) = loss.terms(site)
    state = np.append(START, np.zeros(3))
    rates, jacobian = np.zeros(state.size), np.zeros((state.size, state.size))
    term.operator.add_rates(state, 2.0, rates)
    term.operator.add_jacobian(state, 2.0, jacobian)
    np.testing.assert_allclose(jacobian @ state, rates, rtol=1e-13)
    assert rates[-1] == pytest.approx(0.6 * START @ (GRID.volume**2 / (1.0 + GRID.volume)), rel=1e-14)
