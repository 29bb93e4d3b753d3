"""One quick record and one table of error estimates for all tests of this folder."""

from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.verification import effectivity, record


@pytest.fixture(scope="session")
def quick() -> record.Record:
    with np.errstate(all="raise", under="ignore"):
        return record.make(ag.__version__, quick=True)


@pytest.fixture(scope="session")
def estimates() -> list[effectivity.Row]:
    with np.errstate(all="raise", under="ignore"):
        return effectivity.rows()
