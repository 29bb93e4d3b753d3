from __future__ import annotations

import warnings

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import aggsim as ag
from aggsim.errors import AccuracyWarning, InputError
from aggsim.schemes import FixedPivot
from aggsim.vessels import Site


def test_a_batch_aggregates_and_does_nothing_else() -> None:
    batch = ag.Batch(ag.kernels.constant(1.0))
    assert [type(p).__name__ for p in batch.processes] == ["Aggregation"]
    prepared = FixedPivot(2).prepare(ag.SizeGrid.monomers(1.0, 8))
    assert len(batch.terms(Site(prepared))) == 1


@pytest.mark.parametrize("kernel", [1.0, lambda v, w: v + w], ids=["number", "function"])
def test_what_is_no_kernel_is_refused(kernel: object) -> None:
    with pytest.raises(InputError, match=r"not a collision kernel.*from_function"):
        ag.Batch(kernel)


def test_a_batch_holds_all_that_happens_in_it() -> None:
    law = ag.Breakage(
        rate=ag.rates.power_law(coefficient=1.0, exponent=1.0), fragments=ag.fragments.uniform_binary()
    )
    losses = [ag.Withdrawal(0.1), ag.SettlingOut(lambda v: v, depth=1.0)]
    batch = ag.Batch(ag.kernels.constant(1.0), breakage=law, losses=losses)
    kinds = [type(p).__name__ for p in batch.processes]
    assert kinds == ["Aggregation", "Breaking", "Withdrawal", "SettlingOut"]
    assert [stream.name for stream in batch.streams] == ["withdrawn", "settled"]
    assert batch.feeds == ()
    assert batch.smallest == 0.0
    assert ag.Batch(None).processes == ()


def test_a_batch_in_which_nothing_happens_stays_as_it_is() -> None:
    result = ag.simulate(ag.Batch(None), ag.Exponential(mean_volume=1.0, number=1.0), [0.0, 1e6])
    np.testing.assert_array_equal(result.number[1], result.number[0])
    assert np.abs(result.balance.closure).max() <= 1e-15


@given(
    rate=st.floats(0.0, 1.0),
    breaking=st.floats(0.0, 2.0),
    exponent=st.floats(0.0, 2.0),
    scheme=st.sampled_from([ag.FixedPivot(moments=2), ag.FixedPivot(moments=4), ag.Sectional()]),
    fragments=st.sampled_from(
        [ag.fragments.uniform_binary(), ag.fragments.equal_binary(), ag.fragments.erosion(0.5)]
    ),
)
def test_closed_vessels_keep_their_volume(
    rate: float, breaking: float, exponent: float, scheme: ag.schemes.Scheme, fragments: object
) -> None:
    law = ag.Breakage(
        rate=ag.rates.power_law(coefficient=breaking, exponent=exponent),
        fragments=fragments,  # type: ignore[arg-type]
    )
    grid = ag.SizeGrid.geometric(smallest=1e-4, largest=300.0, per_doubling=2)
    start = ag.Exponential(mean_volume=1.0, number=1.0)
    vessel = ag.Batch(ag.kernels.constant(rate), breakage=law)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", AccuracyWarning)  # 4 moments on a coarse grid
        result = ag.simulate(vessel, start, [0.0, 0.3, 1.0], grid=grid, scheme=scheme)
    assert np.abs(result.balance.closure).max() <= 1e-12
    np.testing.assert_allclose(result.moment(1) + result.balance.beyond_grid, 1.0, rtol=1e-12)
