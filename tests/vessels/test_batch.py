from __future__ import annotations

import pytest

import aggsim as ag
from aggsim.errors import InputError
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
