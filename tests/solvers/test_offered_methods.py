from __future__ import annotations

import dataclasses
from importlib.util import find_spec

import pytest

import aggsim as ag
from aggsim.solvers.base import Method

OFFERED = [v for v in vars(ag.methods).values() if isinstance(v, type) and v is not Method]
if find_spec("sksundae") is None:
    OFFERED.remove(ag.methods.CVODE)


@pytest.mark.parametrize("kind", OFFERED, ids=lambda k: k.__name__)
def test_every_method_on_offer_solves_the_same_problem(kind: type[Method]) -> None:
    method = kind()
    assert dataclasses.is_dataclass(method)
    start = ag.Monodisperse(volume=1.0, number=1.0)
    result = ag.simulate(ag.Batch(ag.kernels.constant(1.0)), start, [4.0], method=method)
    assert result.total_number()[0] == pytest.approx(1 / 3, rel=2e-5)
    assert result.settings["method"] == kind.__name__
