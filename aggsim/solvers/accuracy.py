"""Error estimates of a run, and runs that are refined until their error is small enough.

The error of discretisation is judged by a coarser grid, that of integration by a looser tolerance, and what
passed the top by putting it back there. How many times the error of the result a difference exceeds is taken
from the order of the scheme, 2 where a kernel or a start has kinks, and on the safe side where it is higher.
"""

from __future__ import annotations

import math
from dataclasses import replace

from aggsim.errors import SimulationError
from aggsim.result import Comparison, ErrorEstimate, Later, Result, Snapshot
from aggsim.sizes import SizeGrid
from aggsim.solvers.job import Job
from aggsim.solvers.ladder import LARGEST_AUTOMATIC_GRID

COARSE = 2.0  # ratio of spacings between a result and the one coarse run of a quick estimate
LOOSE = 30.0  # ratio of their tolerances
OVER = 16.0  # ratio of their errors, less 1, on the safe side of sixth order (63); 3 of second order

STEP = math.sqrt(2.0)  # ratio of spacings between runs of a refinement
TIGHTER = 8.0  # ratio of tolerances, whose errors are taken to differ by
TIME_OVER = 3.0  # times, less 1
TRUSTED_ORDER = 4.0  # of a scheme of higher order
FIRST_TOLERANCE = 1e-2  # rtol over the accuracy that is asked for
MOST_RUNS = 24
FINEST = 12.0  # times the usual sections per doubling
FLOOR = 3e-3  # of rtol: what no estimate goes below
FIRST_ERROR = 3e-4  # what half the usual sections per doubling are good for


def estimated(job: Job, result: Result, grid: SizeGrid | None, rtol: float) -> ErrorEstimate:
    """Estimate from one coarse run; `grid` as the user gave it."""
    if not result.status.completed:
        raise SimulationError(
            "a run that ended early has no error estimate. Try: times before its end.", result
        )
    sized = math.isfinite(job.scheme.order)
    coarse_grid = (job.grid(1.0 / COARSE) if grid is None else grid.coarser(COARSE)) if sized else result.grid
    coarse = job.run(coarse_grid, grid is None, min(LOOSE * rtol, 1e-2))
    if not coarse.status.completed:
        raise SimulationError(
            f"the coarse run of the error estimate ended early: {coarse.status} Try: a finer grid, or accuracy=1e-3.",
            coarse,
        )
    over = min(OVER, COARSE ** job.order(result.grid) - 1.0)
    cause = "size and time" if sized else "time"
    one = Snapshot.of(result)
    comparisons = (Comparison(cause, one, Snapshot.of(coarse), over), _top(one, result))
    return ErrorEstimate(result.times, comparisons, FLOOR * rtol, runs=2)


def refined(job: Job, accuracy: float, progress: object) -> Result:
    """Result whose estimated error is below `accuracy`, or the best that can be had."""
    full = job.order(job.grid())
    order = min(full, TRUSTED_ORDER)
    sized = math.isfinite(full)
    single = any(law is not None and law.atoms for law in (*job.starts, *job.vessel.feeds))
    coarsest = 1.0 / STEP if single else 0.5  # single sizes need some sections around them to be run at all
    finer = max(coarsest, 0.5 * (FIRST_ERROR / accuracy) ** (1.0 / min(full, 6.0))) if sized else 1.0
    rtol = max(FIRST_TOLERANCE * accuracy, 1e-12)
    best: tuple[float, Result] | None = None
    runs, known = 0, {}

    def run(density: float, tolerance: float) -> Result:
        nonlocal runs
        key = (round(density, 9), tolerance)
        if key not in known:
            runs += 1
            known[key] = job.run(job.grid(density), True, tolerance, progress)
        return known[key]

    while runs < MOST_RUNS:
        fine = run(finer, rtol)
        coarse = run(finer / STEP, rtol) if sized else fine
        loose = run(finer / STEP if sized else finer, min(TIGHTER * rtol, 1e-2))
        if not (fine.status.completed and coarse.status.completed and loose.status.completed):
            if not fine.status.completed and best is not None:
                break
            if fine.status.gelation_time is not None or finer > 2.0:
                return fine
            finer *= STEP  # too coarse to be run at all
            continue
        one, other = Snapshot.of(fine), Snapshot.of(coarse)
        size = (Comparison("size", one, other, STEP**order - 1.0),) if sized else ()
        time = Comparison("time", other, Snapshot.of(loose), TIME_OVER)
        error = ErrorEstimate(fine.times, (*size, time, _top(one, fine)), FLOOR * rtol, accuracy, runs)
        largest = error.largest
        if best is None or largest < best[0]:
            best = largest, _with(fine, error)
        causes = error.by_cause()
        if largest <= accuracy or fine.grid.sections >= LARGEST_AUTOMATIC_GRID or rtol <= 1e-12:
            break
        if causes["time"] > 0.3 * accuracy:
            rtol = max(rtol / TIGHTER, 1e-12)
        if sized and causes["size"] > 0.5 * accuracy:
            wanted = (2.0 * causes["size"] / accuracy) ** (1.0 / order)
            finer *= STEP ** max(1, min(2, math.ceil(math.log(wanted) / math.log(STEP))))
            if finer > FINEST or job.grid(finer).sections > LARGEST_AUTOMATIC_GRID:
                break
        elif causes["time"] <= 0.3 * accuracy:
            break  # what passed the top remains
    assert best is not None, "a run that was completed stands here"
    return best[1]


def _with(result: Result, error: ErrorEstimate) -> Result:
    return replace(result, estimate=Later(error))


def _top(one: Snapshot, result: Result) -> Comparison:
    return Comparison("top", one, Snapshot.with_top(result), 1.0)
