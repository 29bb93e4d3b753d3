from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest

import aggsim as ag
from aggsim.vessels import Aggregation, Process, Vessel


@dataclass(frozen=True)
class TwoWays(Vessel):
    """A vessel of its own making: two processes side by side."""

    @property
    def processes(self) -> tuple[Process, ...]:
        return (Aggregation(ag.kernels.constant(0.7)), Aggregation(ag.kernels.constant(0.3).named("second")))


def test_processes_add_up_and_simulate_takes_any_vessel() -> None:
    start = ag.Monodisperse(volume=1.0, number=1.0)
    mine = ag.simulate(TwoWays(), start, [2.0])
    batch = ag.simulate(ag.Batch(ag.kernels.constant(1.0)), start, [2.0])
    np.testing.assert_allclose(mine.number, batch.number, rtol=1e-5, atol=1e-9)
    assert list(mine.contributions) == ["constant", "second"]
    assert mine.contributions["second"].event_share[0] == pytest.approx(0.3)
