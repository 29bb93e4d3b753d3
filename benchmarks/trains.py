"""A train of six tanks over one day, against one tank of the same sections."""

from __future__ import annotations

from typing import Any

import numpy as np
from _common import machine, one_thread, seconds, table, target
from steady_states import RAW, basin

import aggsim as ag

SECTIONS = 60
DAY = 86400.0
SHEAR_RATES = (70.0, 50.0, 35.0, 25.0, 15.0, 10.0)


def grid() -> ag.SizeGrid:
    """Sixty sections at 2.5 per doubling, from the finest of the raw water to 200 um."""
    smallest = RAW.limits(1e-2)[0]
    made = ag.SizeGrid.geometric(
        smallest=smallest, largest=smallest * 2.0 ** ((SECTIONS - 1) / 2.5), per_doubling=2.5
    )
    assert made.sections == SECTIONS
    return made


def main() -> None:
    one_thread()
    machine()
    sizes = grid()
    tanks = [ag.Tank(**basin(g), volume=120.0) for g in SHEAR_RATES]
    train = ag.Train(tanks, flow=0.4, feed=RAW)
    one = ag.StirredTank(**basin(35.0), residence_time=1800.0, feed=RAW)
    times = np.linspace(0.0, DAY, 97)

    def day(vessel: Any) -> ag.Result:
        return ag.simulate(vessel, None, times, grid=sizes)

    rows = []
    several, single = seconds(lambda: day(train), lambda: day(one), repeats=3)
    for name, vessel, time in (("train of six tanks", train, several), ("one tank", one, single)):
        stats = day(vessel).stats
        rows.append(
            [name, stats.rate_evaluations, stats.jacobian_evaluations, f"{time:.3f}", f"{time / single:.1f}"]
        )
    header = ["vessel", "rate evaluations", "Jacobians", "time [s]", "over one tank"]
    table(
        f"One day from clear liquid, {SECTIONS} sections in each tank, 97 outputs, rtol = 1e-6", header, rows
    )
    target("time of the train [s]", several, 2.0, at_most=True)


if __name__ == "__main__":
    main()
