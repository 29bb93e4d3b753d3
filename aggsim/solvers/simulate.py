"""`simulate`: the one place where physics and numerics meet."""

from __future__ import annotations

import warnings
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import AccuracyWarning, InputError, SimulationError, TimesError
from aggsim.result import Later, Outcome, Result
from aggsim.schemes import Scheme
from aggsim.sizes import SizeGrid, StartingDistribution
from aggsim.solvers.accuracy import estimated, refined
from aggsim.solvers.growth import BEYOND_SHARE
from aggsim.solvers.job import Job
from aggsim.solvers.methods import LSODA, Method
from aggsim.solvers.setting import default_scheme, expect, starts_of
from aggsim.vessels import Vessel

PILED_UP = 1e-2  # share of the number in the first section above which a run with breakage warns
NEGATIVE_SHARE = 1e-5  # share of the volume in negative sections above which a run warns


class InterruptedRunError(SimulationError, KeyboardInterrupt):
    """The user interrupted a run; `result` holds what was computed."""


def simulate(
    vessel: Vessel,
    start: StartingDistribution | Sequence[StartingDistribution | None] | None,
    times: Any,
    *,
    grid: SizeGrid | None = None,
    scheme: Scheme | None = None,
    method: Method | None = None,
    rtol: float = 1e-6,
    accuracy: float | None = None,
    progress: Any = None,
    raise_unfinished: bool = True,
) -> Result:
    """Compute the particle-size distribution of a suspension over time.

    Parameters
    ----------
    vessel : Vessel
        What happens to the particles, such as `Batch(kernel)`.
    start : StartingDistribution, None, or a sequence with one for each tank
        The distribution at t = 0; None for a vessel that begins with clear liquid and is fed.
    times : float or (n_times,)
        Output times [s], not negative and strictly increasing. The states are those at exactly these times.
    grid : SizeGrid, optional
        Pivots. Without it a grid is chosen from `start`, and continued upward as soon as 1e-6 of the volume
        reaches its uppermost sections, before it passes the top. On a grid that is given, what passes
        the top is counted in `result.balance`; sections far above the particles are taken into use in the same
        way, when they are needed.
    scheme : Scheme, optional
        Discretisation in size. Without it `FixedPivot(moments=6)`; `FixedPivot(moments=2)` where start or feed
        hold single sizes above the smallest one, around which higher orders swing.
    method : Method, optional
        Integration in time, `methods.LSODA()` without it.
    rtol : float
        Relative tolerance of each section per step, from 1e-12 to 1e-2. The absolute tolerance of section k
        is 1e-6 rtol min(N0, V0 / x_k), with the number N0 and the volume V0 of the start. Errors of reported
        figures are usually a few times rtol, plus those of the grid; `result.error` estimates both.
    accuracy : float, optional
        Relative accuracy of the figures in `result.error` (number, moments, mean sizes, quantiles) at all output
        times, from 1e-9 to 0.1. Grid and tolerance are then chosen and refined until the estimated error is
        below it; `grid` must be None and `rtol` is not used. Where it cannot be had within 400 sections or 24 runs, the
        run warns, returns the best, and `result.error.met` is False.
    progress : None, bool or function
        None: a line on a terminal when the run is long; True: at once; False: never; a function is called
        with (fraction, time).
    raise_unfinished : bool
        True raises SimulationError where the last output time is not reached; the error carries the result.
        False returns the result, whose `status` tells the reason.

    Returns
    -------
    Result
        Numbers in each section at each output time, with accounts, status and cost.

    Raises
    ------
    InputError
        Where an argument cannot be used (TimesError, GridError, KernelError and DistributionError among them);
        nothing is computed then.
    SimulationError
        Where the run ends early (gelation, a distribution that outgrows every grid, a method that stalls, an
        interruption, which is also a KeyboardInterrupt) and `raise_unfinished` is True.

    Notes
    -----
    Strengths that jump in time are met by stopping at the jump and starting the method anew. Gelation is
    recognised by the growth time of the second moment, M2 / (dM2/dt), running linearly into zero; the run
    then ends within 0.1 % of the estimated gelation time and reports it. For kernels under which large
    particles sweep up small ones faster than they grow, such as differential settling, theory puts gelation
    at once [1]_; the time found is then that at which a share of 1e-6 of the volume runs away, and it depends
    weakly on the resolution.

    References
    ----------
    .. [1] P. G. J. van Dongen, J. Phys. A 20 (1987) 1889, doi:10.1088/0305-4470/20/7/033.
    """
    expect(vessel, Vessel, "vessel", "Batch(kernel)")
    each = starts_of(vessel, start)
    scheme = default_scheme(vessel, each) if scheme is None else scheme
    method = LSODA() if method is None else method
    expect(scheme, Scheme, "scheme", "FixedPivot(moments=6)")
    expect(method, Method, "method", "methods.LSODA()")
    rtol = _checks.scalar("rtol", rtol, least=1e-12, most=1e-2, hint="1e-6")
    outputs = _output_times(times)
    job = Job(vessel, each, _within(outputs, vessel), scheme, method)
    if accuracy is not None:
        result = refined(job, _accuracy(accuracy, grid), progress)
    else:
        chosen = job.grid() if grid is None else grid
        expect(chosen, SizeGrid, "grid", "SizeGrid.geometric(smallest=..., largest=...) or None")
        scheme.check(chosen)
        result = job.run(chosen, grid is None, rtol, progress)
        result = replace(result, estimate=Later(lambda: estimated(job, result, rtol)))
    status = result.status
    if not status.completed and raise_unfinished:
        kind = InterruptedRunError if status.outcome is Outcome.INTERRUPTED else SimulationError
        raise kind(
            f"{status} The result up to there is in the `result` of this error; "
            "simulate(..., raise_unfinished=False) returns it instead.",
            result,
        )
    if status.completed:
        _warn(result, grid is None, vessel)
    return result


def _output_times(times: Any) -> FloatArray:
    raw = _checks.plain(times, "s")
    values = [raw] if np.ndim(raw) == 0 else raw
    return _checks.array(
        "times",
        values,
        "s",
        least=0.0,
        increasing=True,
        hint="seconds after the start, such as numpy.linspace(0, 3600, 61)",
        error=TimesError,
    )


def _accuracy(accuracy: Any, grid: SizeGrid | None) -> float:
    if grid is not None:
        raise InputError(
            "accuracy and grid are given both; an accuracy chooses the grid by itself. "
            "Try: grid=None, or this grid without an accuracy and a look at `result.error`."
        )
    return _checks.scalar("accuracy", accuracy, least=1e-9, most=0.1, hint="1e-3 for a thousandth")


def _within(outputs: FloatArray, vessel: Vessel) -> FloatArray:
    stop = vessel.spans[-1].stop
    if outputs[-1] > stop * (1.0 + 1e-9):
        _checks.refuse(
            f"times[{outputs.size - 1}]",
            f"{outputs[-1]:g} s",
            f"at most {stop:g} s, where the last stage of the vessel stops",
            "a longer last stage",
            error=TimesError,
        )
    return np.minimum(outputs, stop)


def _warn(result: Result, automatic: bool, vessel: Vessel) -> None:
    last = result.number[-1]
    if vessel.smallest == 0.0 and last[0] > PILED_UP * last.sum():
        warnings.warn(
            f"{last[0] / last.sum():.2g} of the particles stand in the first section ({result.grid.volume[0]:.3g} m3), "
            "where fragments smaller than it count by volume: their number is too low. Try: Breakage(smallest=...) for "
            "the volume of particles that do not break, or a grid that reaches lower.",
            AccuracyWarning,
            stacklevel=3,
        )
    beyond = float(result.balance.beyond_grid[-1]) / result.balance.scale
    if beyond > BEYOND_SHARE and not automatic:
        warnings.warn(
            f"{beyond:.2g} of the particle volume grew past the top of the grid "
            f"({result.grid.volume[-1]:.3g} m3) and is missing from sizes and moments. "
            "Try: a larger `largest`, or grid=None.",
            AccuracyWarning,
            stacklevel=3,
        )
    if result.estimate is not None and result.estimate.ready and not result.error.met:
        warnings.warn(
            f"the accuracy asked for, {result.error.asked:g}, was not reached within the cost allowed; the estimated "
            f"error is {result.error.largest:.2g}, in {result.error.worst}. Try: output times farther from gelation, "
            "or a larger accuracy; under settling M3, the ninth power of diameter, hangs on very few particles.",
            AccuracyWarning,
            stacklevel=3,
        )
    negative = float(result.balance.negative_share.max())
    if negative > NEGATIVE_SHARE:
        warnings.warn(
            f"{negative:.2g} of the particle volume stands in sections with a negative number (allowed without "
            f"warning: {NEGATIVE_SHARE:g}). Try: more sections per doubling, or FixedPivot(moments=2), which "
            "keeps every number positive.",
            AccuracyWarning,
            stacklevel=3,
        )
