"""Settings that hold for the whole suite: floating-point errors raise, figures close, hypothesis is repeatable."""

from __future__ import annotations

import os
from collections.abc import Iterator

import hypothesis
import matplotlib as mpl
import numpy as np
import pytest

mpl.use("Agg")

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
