"""Error estimates of a run, and runs that are refined until their error is small enough.

The error of discretisation is judged by a coarser grid, that of integration by a looser tolerance, and what
passed the top by putting it back there. How many times the error of the result a difference exceeds is taken
from the order of the scheme, 2 where a kernel or a start has kinks, and on the safe side where it is higher.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from functools import partial

import numpy as np

from aggsim.errors import SimulationError
from aggsim.result import Comparison, ErrorEstimate, Later, Outcome, Result, Snapshot
from aggsim.sizes import SizeGrid
from aggsim.solvers.job import Job

COARSE = 2.0  # ratio of spacings between a result and the one coarse run of a quick estimate
LOOSE = 30.0  # ratio of their tolerances
EMPTY = 1e-14  # share of the fullest section below which one is empty
ABOVE = 4.0  # doublings that are kept above the last one that is not
OVER = 16.0  # ratio of their errors, less 1, on the safe side of sixth order (63); 3 of second order

STEP = math.sqrt(2.0)  # ratio of spacings between runs of a refinement
TIGHTER = 8.0  # ratio of tolerances, whose errors are taken to differ by
TIME_OVER = 4.0  # times, less 1
TRUSTED_ORDER = 5.0  # of a scheme of higher order
FIRST_TOLERANCE = 1e-2  # rtol over the accuracy that is asked for
MOST_RUNS = 24
UNSEEN = 1e-9  # share of M3 past the top that is not looked at further
COARSEST, FINEST = 0.5, 12.0  # times the usual sections per doubling
FLOOR = 3e-3  # of rtol: what no estimate goes below
FIRST_ERROR = 1e-3  # what the first grid is good for, with so many times the usual sections per doubling:
FIRST, FIRST_AT_SINGLE_SIZES = 0.7, 1.0


def estimated(job: Job, result: Result, rtol: float) -> ErrorEstimate:
    """Estimate of a run from one coarse run."""
    if not result.status.completed:
        raise SimulationError(
            "a run that ended early has no error estimate. Try: times before its end.", result
        )
    sized = math.isfinite(job.scheme.order)
    # where the particles went is known: the coarse run takes these sizes into use from the start
    reached = _reached(result)
    coarse_grid = job.scheme.coarser(reached, COARSE) if sized else reached
    coarse = job.run(coarse_grid, False, min(LOOSE * rtol, 1e-2), yardstick=True)
    if not coarse.status.completed:
        raise SimulationError(
            f"the coarse run of the error estimate ended early: {coarse.status} Try: a finer grid, or accuracy=1e-3.",
            coarse,
        )
    over = min(OVER, _apart(reached, coarse_grid, COARSE) ** job.order(result.grid) - 1.0)
    (one, ends), other = _ends(result, job), Snapshot.of(coarse)
    if not sized:
        return ErrorEstimate(
            result.times, (Comparison("time", one, other, over), *ends), None, FLOOR * rtol, runs=2
        )

    def apart() -> tuple[Comparison, ...]:
        tight = Snapshot.of(job.run(coarse_grid, False, rtol, yardstick=True))
        return Comparison("size", one, tight, over), Comparison("time", tight, other, over), *ends

    comparisons = (Comparison("size and time", one, other, over), *ends)
    return ErrorEstimate(result.times, comparisons, apart, FLOOR * rtol, runs=2)


def _apart(grid: SizeGrid, coarse: SizeGrid, meant: float) -> float:
    """Ratio of the spacings of two grids; the one that was meant where they have none of their own."""
    if grid.ratio is None or coarse.ratio is None:
        return meant
    return math.log(coarse.ratio) / math.log(grid.ratio)


def _reached(result: Result) -> SizeGrid:
    """The grid of a result up to some way above its largest particles."""
    grid = result.grid
    tanks = [tank.number for tank in result.tanks] or [result.number]
    held = np.abs(np.concatenate(tanks)).max(axis=0) * grid.volume
    if not held.any():
        return grid
    used = int(np.flatnonzero(held > EMPTY * held.max())[-1])
    count = int(np.searchsorted(grid.volume, 2.0**ABOVE * grid.volume[used])) + 1
    if count >= grid.sections:
        return grid
    return SizeGrid(grid.volume[:count], ratio=grid.ratio, monomer=grid.monomer)


def refined(job: Job, accuracy: float, progress: object) -> Result:
    """Result whose estimated error is below `accuracy`, or the best that can be had."""
    sized = math.isfinite(job.scheme.order)
    single = any(law is not None and law.atoms for law in (*job.starts, *job.vessel.feeds))
    # a first pair that nearly always does is cheaper than a coarser one that must be followed by another
    first = FIRST_AT_SINGLE_SIZES if single else FIRST
    finer = first * max(1.0, (FIRST_ERROR / accuracy) ** (1.0 / min(job.scheme.order, 6.0))) if sized else 1.0
    rtol = max(FIRST_TOLERANCE * accuracy, 1e-12)
    best: tuple[float, Result] | None = None
    runs, finest = 0, FINEST

    while runs < MOST_RUNS:
        fine = job.run(job.grid(finer), True, rtol, progress)
        # where the particles went is known then, and a wider grid can take it into use from the start
        reached = _reached(fine)
        wide = job.scheme.coarser(reached, STEP) if sized else reached
        loose = job.run(wide, False, min(TIGHTER * rtol, 1e-2), progress, yardstick=True)
        runs += 2
        full = job.order(fine.grid)
        order = full if math.isinf(full) else min(full, TRUSTED_ORDER)
        outcomes = {fine.status.outcome, loose.status.outcome} - {Outcome.COMPLETED}
        if outcomes == {Outcome.UNRESOLVED} and finer < 2.0:
            finer *= STEP  # too coarse to be run at all
            continue
        if fine.status.outcome is Outcome.OUTGROWN and best is None and finer > COARSEST:
            finest = finer = finer / STEP  # so fine that the longest grid is too short
            continue
        if outcomes:
            break
        error = _compared(
            job,
            fine,
            loose,
            partial(job.run, wide, False, rtol, yardstick=True),
            _apart(reached, wide, STEP) ** order - 1.0,
            accuracy,
            FLOOR * rtol,
            runs,
        )
        if best is None or error.largest < best[0]:
            best = error.largest, replace(fine, estimate=Later(error))
        if error.largest <= accuracy or rtol <= 1e-12:
            break
        before = finer, rtol
        if runs <= 2 and sized:
            finer = min(finer * STEP, finest)  # nearly always the grid; to find out would take another run
        else:
            causes = error.by_cause()
            if causes["time"] > 0.3 * accuracy:
                rtol = max(rtol / TIGHTER, 1e-12)
            if sized and causes["size"] > 0.5 * accuracy:
                wanted = (2.0 * causes["size"] / accuracy) ** (1.0 / order)
                steps = max(1, min(2, math.ceil(math.log(wanted) / math.log(STEP))))
                finer = min(finer * STEP**steps, finest)
        if (finer, rtol) == before:
            break  # as fine as it may be, or what passed the top is all that remains
    return fine if best is None else best[1]


def _compared(
    job: Job,
    fine: Result,
    loose: Result,
    tighten: Callable[[], Result],
    over: float,
    accuracy: float,
    floor: float,
    runs: int,
) -> ErrorEstimate:
    """Estimate from a run and one on a wider grid at a looser tolerance, which `tighten` repeats at the tight one."""
    (one, ends), other = _ends(fine, job), Snapshot.of(loose)
    if not math.isfinite(over):
        pairs = (Comparison("time", one, other, TIME_OVER), *ends)
        return ErrorEstimate(fine.times, pairs, None, floor, accuracy, runs)

    def apart() -> tuple[Comparison, ...]:
        middle = Snapshot.of(tighten())
        return Comparison("size", one, middle, over), Comparison("time", middle, other, TIME_OVER), *ends

    # the looser tolerance errs by more times than the wider grid, so the grid's ratio is safe for both
    pairs = (Comparison("size and time", one, other, min(over, TIME_OVER)), *ends)
    return ErrorEstimate(fine.times, pairs, apart, floor, accuracy, runs)


def _ends(result: Result, job: Job) -> tuple[Snapshot, tuple[Comparison, ...]]:
    """The result, and its comparisons with what lies beyond the ends of its grid put back."""
    one, top = _top(result)
    if job.vessel.smallest != 0.0:
        return one, (top,)
    return one, (top, Comparison("bottom", one, Snapshot.with_bottom(result), 1.0))


def _top(result: Result) -> tuple[Snapshot, Comparison]:
    """The result, and its comparison with what passed the top put back there."""
    third = (
        result.balance.beyond_grid * result.grid.volume[-1] ** 2
    )  # what M3, the most sensitive figure, misses
    if (np.abs(third) <= UNSEEN * result.moment(3)).all():
        one = Snapshot.of(result)
        return one, Comparison("top", one, one, 1.0)
    one, with_top = Snapshot.without_and_with_top(result)
    return one, Comparison("top", one, with_top, 1.0)
