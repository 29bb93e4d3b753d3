"""One simulation that can be carried out on any grid and at any tolerance."""

from __future__ import annotations

import math
import time as clock
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.result import Balance, Contributions, Result, RunStatistics, Status
from aggsim.schemes import BEYOND, Scheme
from aggsim.sizes import SizeGrid, StartingDistribution
from aggsim.solvers.base import Method
from aggsim.solvers.growth import NEGATIVE_LIMIT
from aggsim.solvers.ladder import Ladder
from aggsim.solvers.progress import progress_for
from aggsim.solvers.run import Run
from aggsim.solvers.setting import default_grid, project_or_none
from aggsim.vessels import Stream, Vessel


@dataclass(frozen=True, eq=False)
class Job:
    """Everything that makes a simulation, but its grid and its tolerance."""

    vessel: Vessel
    starts: list[StartingDistribution | None]
    outputs: FloatArray
    scheme: Scheme
    method: Method

    def grid(self, finer: float = 1.0) -> SizeGrid:
        """The default grid, with `finer` times the usual sections per doubling."""
        return default_grid(self.scheme, self.vessel, self.starts, finer)

    def order(self, grid: SizeGrid) -> float:
        """Order of convergence on a grid: that of the scheme, or 2 where a kernel or a start is not smooth on it."""
        laws = [law for law in (*self.starts, *self.vessel.feeds) if law is not None]
        sharp = any(law.breaks or (law.atoms and grid.monomer is None) for law in laws)
        smooth = not sharp and all(span.vessel.smooth(grid.volume) for span in self.vessel.spans)
        return (
            self.scheme.order
            if smooth or not math.isfinite(self.scheme.order)
            else min(self.scheme.order, 2.0)
        )

    def run(
        self, grid: SizeGrid, automatic: bool, rtol: float, progress: Any = False, yardstick: bool = False
    ) -> Result:
        """Result on a grid, which is continued upward where `automatic`.

        A `yardstick` for the error of another run takes the whole grid into use from the start, which is known to
        be no longer than needed, and is not given up for its negative sections, which are part of that error.
        """
        began = clock.perf_counter()
        starts = np.array([project_or_none(self.scheme, one, grid) for one in self.starts])
        shown = progress_for(progress)
        ladder = Ladder(self.scheme, grid, automatic, at_once=yardstick)
        limit = math.inf if yardstick else NEGATIVE_LIMIT
        run = Run(self.vessel, self.scheme, self.method, ladder, starts, self.outputs, rtol, shown, limit)
        try:
            status = run.execute()
        finally:
            shown.close()
        seconds = clock.perf_counter() - began
        return _result(run, status, self.scheme, self.method, rtol, seconds, yardstick)


def _result(
    run: Run, status: Status, scheme: Scheme, method: Method, rtol: float, seconds: float, yardstick: bool
) -> Result:
    grid, times, states = run.grid, run.times(), run.states()
    shares = np.array(run.vessel.volumes)
    stats = RunStatistics(
        rate_evaluations=run.rate_evaluations,
        jacobian_evaluations=run.jacobian_evaluations,
        steps=run.steps,
        restarts=run.restarts,
        grid_extensions=run.extensions,
        seconds=seconds,
    )
    settings = {"scheme": repr(scheme), "method": method.name, "rtol": f"{rtol:g}"}

    def record(tank: int, balance: Balance, tanks: tuple[Result, ...] = ()) -> Result:
        number = np.ascontiguousarray(states[:, tank, : grid.sections])
        contributions = Contributions({} if yardstick else run.collisions(states, tank))
        return Result(times, grid, number, balance, contributions, status, stats, settings, tanks)

    def account(weights: FloatArray, streams: list[Stream]) -> Balance:
        """Balance of the tanks with these weights."""
        together = np.einsum("i,tik->tk", weights, states)
        initial = float(weights @ (run.starts @ run.ladder.whole.volume))
        volume = np.einsum("i,tik->tk", weights, np.minimum(states[:, :, : grid.sections], 0.0) * grid.volume)
        carried = {s: together[:, grid.sections + BEYOND + run.streams.index(s)].copy() for s in streams}
        balance = Balance(
            initial=initial,
            present=together[:, : grid.sections] @ grid.volume,
            beyond_grid=together[:, grid.sections + 1].copy(),
            beyond_grid_number=together[:, grid.sections].copy(),
            negative_share=np.zeros(times.size),
            inward={s.name: v for s, v in carried.items() if s.inward},
            outward={s.name: v for s, v in carried.items() if not s.inward},
        )
        # of what is there, or was there before it was washed out; not of all that ever passed
        there = np.maximum.accumulate(np.maximum(balance.present, initial))
        share = np.divide(-volume.sum(axis=1), there, out=np.zeros(times.size), where=there > 0.0)
        return replace(balance, negative_share=share)

    whole = account(shares, [stream for stream in run.streams if not stream.internal])
    if shares.size == 1:
        return record(0, whole)
    alone = np.eye(shares.size)
    passing = [
        [s for s in run.streams if states[:, k, grid.sections + BEYOND + run.streams.index(s)].any()]
        for k in range(shares.size)
    ]
    tanks = tuple(record(k, account(alone[k], passing[k])) for k in range(shares.size))
    return record(shares.size - 1, whole, tanks)
