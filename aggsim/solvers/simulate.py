"""`simulate`: the one place where physics and numerics meet."""

from __future__ import annotations

import time as clock
import warnings
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import AccuracyWarning, InputError, SimulationError, TimesError
from aggsim.result import Balance, Contributions, Outcome, Result, RunStatistics, Status
from aggsim.schemes import FixedPivot, Scheme
from aggsim.sizes import SizeGrid, StartingDistribution
from aggsim.solvers.growth import BEYOND_SHARE
from aggsim.solvers.ladder import Ladder
from aggsim.solvers.methods import LSODA, Method
from aggsim.solvers.progress import progress_for
from aggsim.solvers.run import Run
from aggsim.vessels import Vessel

NEGATIVE_SHARE = 1e-5  # share of the volume in negative sections above which a run warns


class InterruptedRunError(SimulationError, KeyboardInterrupt):
    """The user interrupted a run; `result` holds what was computed."""


def simulate(
    vessel: Vessel,
    start: StartingDistribution,
    times: Any,
    *,
    grid: SizeGrid | None = None,
    scheme: Scheme | None = None,
    method: Method | None = None,
    rtol: float = 1e-6,
    progress: Any = None,
    raise_unfinished: bool = True,
) -> Result:
    """Compute the particle-size distribution of a suspension over time.

    Parameters
    ----------
    vessel : Vessel
        What happens to the particles, such as `Batch(kernel)`.
    start : StartingDistribution
        The distribution at t = 0.
    times : float or (n_times,)
        Output times [s], not negative and strictly increasing. The states are those at exactly these times.
    grid : SizeGrid, optional
        Pivots. Without it a grid is chosen from `start`, and continued upward as soon as 1e-6 of the volume
        reaches its uppermost sections, before it passes the top. On a grid that is given, what passes
        the top is counted in `result.balance`; sections far above the particles are taken into use in the same
        way, when they are needed.
    scheme : Scheme, optional
        Discretisation in size, `FixedPivot(moments=6)` without it.
    method : Method, optional
        Integration in time, `methods.LSODA()` without it.
    rtol : float
        Relative tolerance of each section per step, from 1e-12 to 1e-2. The absolute tolerance of section k
        is 1e-6 rtol min(N0, V0 / x_k), with the number N0 and the volume V0 of the start. Errors of reported
        figures are usually a few times rtol, plus those of the grid.
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
    began = clock.perf_counter()
    _expect(vessel, Vessel, "vessel", "Batch(kernel)")
    _expect(start, StartingDistribution, "start", "Monodisperse(diameter=400e-9, volume_fraction=1e-5)")
    scheme = FixedPivot() if scheme is None else scheme
    method = LSODA() if method is None else method
    _expect(scheme, Scheme, "scheme", "FixedPivot(moments=6)")
    _expect(method, Method, "method", "methods.LSODA()")
    rtol = _checks.scalar("rtol", rtol, least=1e-12, most=1e-2, hint="1e-6")
    outputs = _output_times(times)
    automatic = grid is None
    if grid is None:
        grid = scheme.default_grid(start)
    _expect(grid, SizeGrid, "grid", "SizeGrid.geometric(smallest=..., largest=...) or None")
    scheme.check(grid)
    number = scheme.project(start, grid)

    shown = progress_for(progress)
    run = Run(vessel, scheme, method, Ladder(scheme, grid, automatic), number, outputs, rtol, shown)
    try:
        status = run.execute()
    finally:
        shown.close()
    result = _result(run, status, scheme, method, rtol, clock.perf_counter() - began)
    if not status.completed and raise_unfinished:
        kind = InterruptedRunError if status.outcome is Outcome.INTERRUPTED else SimulationError
        raise kind(
            f"{status} The result up to there is in the `result` of this error; "
            "simulate(..., raise_unfinished=False) returns it instead.",
            result,
        )
    if status.completed:
        _warn(result, automatic)
    return result


def _expect(value: Any, kind: type, name: str, example: str) -> None:
    if not isinstance(value, kind):
        raise InputError(f"{name}={value!r} is not a {kind.__name__}. Try: {name}={example}.")


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


def _result(run: Run, status: Status, scheme: Scheme, method: Method, rtol: float, seconds: float) -> Result:
    grid, times, states = run.grid, run.times(), run.states()
    number = np.ascontiguousarray(states[:, : grid.sections])
    volume = number * grid.volume
    balance = Balance(
        initial=run.initial_volume,
        present=volume.sum(axis=1),
        beyond_grid=states[:, -1].copy(),
        beyond_grid_number=states[:, -2].copy(),
        negative_share=-np.minimum(volume, 0.0).sum(axis=1) / run.initial_volume,
    )
    contributions = Contributions(run.collisions())
    stats = RunStatistics(
        rate_evaluations=run.rate_evaluations,
        jacobian_evaluations=run.jacobian_evaluations,
        steps=run.steps,
        restarts=run.restarts,
        grid_extensions=run.extensions,
        seconds=seconds,
    )
    settings = {"scheme": repr(scheme), "method": method.name, "rtol": f"{rtol:g}"}
    return Result(times, grid, number, balance, contributions, status, stats, settings)


def _warn(result: Result, automatic: bool) -> None:
    beyond = float(result.balance.beyond_grid[-1]) / result.balance.initial
    if beyond > BEYOND_SHARE and not automatic:
        warnings.warn(
            f"{beyond:.2g} of the particle volume grew past the top of the grid "
            f"({result.grid.volume[-1]:.3g} m3) and is missing from sizes and moments. "
            "Try: a larger `largest`, or grid=None.",
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
