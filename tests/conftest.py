"""Settings that hold for the whole suite: floating-point errors raise, figures close, hypothesis is repeatable."""

from __future__ import annotations

import os
from collections.abc import Iterator
from typing import Any

import hypothesis
import matplotlib as mpl
import numpy as np
import pytest

mpl.use("Agg")

_approx = pytest.approx


def _relative_approx(
    expected: Any, rel: float | None = None, abs: float | None = None, **options: Any
) -> Any:
    """pytest.approx without its hidden absolute tolerance of 1e-12, which passes anything of the size 1e-18."""
    if abs is None:
        rel, abs = 1e-6 if rel is None else rel, 0.0
    return _approx(expected, rel=rel, abs=abs, **options)


pytest.approx = _relative_approx  # type: ignore[assignment]

# compiled loops and LSODA make the first example slow, so no deadline; a fixed seed keeps CI repeatable
hypothesis.settings.register_profile("house", deadline=None, derandomize=True, max_examples=25)
hypothesis.settings.register_profile("thorough", deadline=None, max_examples=300)
hypothesis.settings.load_profile(os.environ.get("AGGSIM_HYPOTHESIS", "house"))


@pytest.fixture(autouse=True)
def floating_point_errors_raise() -> Iterator[None]:
    """Overflow, division by zero and invalid operations are mistakes; underflow to zero is how tails end."""
    with np.errstate(all="raise", under="ignore"):
        yield


@pytest.fixture(autouse=True)
def close_figures() -> Iterator[None]:
    yield
    import matplotlib.pyplot as plt

    plt.close("all")
