"""Results made by hand, lognormal distributions that are known in closed form, and short runs of vessels."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

import aggsim as ag
from aggsim.result import Balance, Contributions, Outcome, Result, RunStatistics, Status, SteadyCurve
from aggsim.sizes import SizeGrid

GSD = 1.5
SMALLEST, LARGEST = 1e-22, 1e-12  # m3; 58 nm to 12 um, far beyond the tails used here


def lognormal_result(
    times: Any = (0.0, 600.0, 1200.0, 2400.0, 3600.0),
    *,
    first: float = 400e-9,
    growth: float = 2.0,
    parts: bool = True,
    **changed: Any,
) -> Result:
    """Number lognormal with GSD 1.5, median from `first` to `growth * first` linear in ln, volume constant."""
    t = np.array(times, dtype=np.float64)
    grid = SizeGrid.geometric(smallest=SMALLEST, largest=LARGEST, per_doubling=3)
    median = first * growth ** (t / (t[-1] or 1.0))
    spread = np.log(grid.diameter / median[:, None]) / np.log(GSD)
    shape = np.exp(-0.5 * spread**2)
    number = shape * (1e-5 / (shape @ grid.volume))[:, None]
    volume = number @ grid.volume
    slow, fast = np.linspace(3.0, 1.0, t.size), np.linspace(1.0, 3.0, t.size)
    given = {"brownian": (1e10 * slow, 1e-9 * slow), "shear": (1e10 * fast, 1e-9 * fast)} if parts else {}
    fields: dict[str, Any] = {
        "times": t,
        "grid": grid,
        "number": number,
        "balance": Balance(1e-5, volume, 1e-5 - volume, np.zeros(t.size), np.zeros(t.size)),
        "contributions": Contributions(given),
        "status": Status(Outcome.COMPLETED, float(t[-1])),
        "stats": RunStatistics(100, 10, 50, 0, 1, 0.0123),
        "settings": {"scheme": "FixedPivot(moments=6)", "method": "LSODA", "rtol": "1e-06"},
    }
    return Result(**(fields | changed))


@pytest.fixture
def make_result() -> Callable[..., Result]:
    return lognormal_result


@pytest.fixture
def result() -> Result:
    return lognormal_result()


FEED = ag.LogNormal(median_diameter=1e-6, gsd=1.5, volume_fraction=1e-4)
KERNEL = ag.kernels.constant(1e-14)


@pytest.fixture(scope="session")
def train_run() -> Result:
    """Three tanks of 100 s in series that start from clear liquid."""
    train = ag.Train([ag.Tank(KERNEL, volume=10.0)] * 3, flow=0.1, feed=FEED)
    return ag.simulate(train, None, np.linspace(0.0, 1200.0, 13))


@pytest.fixture(scope="session")
def tank_run() -> Result:
    """A tank that starts full, is fed, overflows, settles at 1/3000 per second and is drawn off."""
    losses = [
        ag.SettlingOut(lambda v: np.full_like(v, 1e-3), depth=3.0),
        ag.Withdrawal(rate=1e-4, name="beyond grid"),  # a name that other columns have too
    ]
    tank = ag.StirredTank(KERNEL, residence_time=600.0, feed=FEED, losses=losses)
    return ag.simulate(tank, FEED, np.linspace(0.0, 1800.0, 13))


def steady_tank(rate: float) -> ag.StirredTank:
    breakage = ag.Breakage(
        rate=ag.rates.power_law(coefficient=1e5 * rate, exponent=0.6),
        fragments=ag.fragments.uniform_binary(),
    )
    return ag.StirredTank(KERNEL, residence_time=1200.0, feed=FEED, breakage=breakage)


@pytest.fixture(scope="session")
def curve() -> SteadyCurve:
    """Steady states of a tank over a factor on its breakage rate."""
    return ag.steady_states(steady_tank, [20.0, 60.0, 200.0, 600.0])


@pytest.fixture
def feed() -> ag.LogNormal:
    return FEED
