"""`steady_state`: the distribution that no longer changes, by Newton's method on the exact Jacobian."""

from __future__ import annotations

import warnings
from collections.abc import Callable
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import AccuracyWarning, InputError, SimulationError
from aggsim.result import SteadyBalance, SteadyCurve, SteadyState
from aggsim.schemes import BEYOND, Scheme
from aggsim.sizes import SizeGrid, StartingDistribution
from aggsim.solvers.growth import BEYOND_SHARE
from aggsim.solvers.job import Job
from aggsim.solvers.ladder import Ladder
from aggsim.solvers.methods import BDF
from aggsim.solvers.newton import Found, Search
from aggsim.solvers.setting import default_grid, default_scheme, expect, project_or_none, starts_of
from aggsim.vessels import Vessel

UNSEEN = 1e-12  # share of the volume past the top, in the time of the quickest section, that is not looked at
HELP_TOLERANCE = 1e-6  # rtol of that integration; Newton's method finds the rest
DECADES = 12  # of time that the help of an integration may cover


def steady_state(
    vessel: Vessel,
    *,
    start: StartingDistribution | None = None,
    grid: SizeGrid | None = None,
    scheme: Scheme | None = None,
    near: SteadyState | None = None,
) -> SteadyState:
    """Compute the distribution at which aggregation, breakage and streams are in balance.

    Parameters
    ----------
    vessel : Vessel
        A batch with breakage, a stirred tank or a train, with nothing that changes in time.
    start : StartingDistribution, optional
        What a vessel without streams holds: its particle volume is the one that stays. For a vessel that is fed it
        is a first guess, and the feed is one without it.
    grid : SizeGrid, optional
        Pivots. Without it a grid is chosen from start and feeds, and continued upward where particles come near
        its top.
    scheme : Scheme, optional
        As in `simulate` without it.
    near : SteadyState, optional
        A state to begin from, such as that of a neighbouring shear rate.

    Returns
    -------
    SteadyState
        Numbers in each section, whether the state is stable, and the account of the streams.

    Raises
    ------
    InputError
        If the vessel changes in time, has no particles, loses them without a feed, or is given no start although
        nothing is fed.
    SimulationError
        If no steady state was found: particles that aggregate without breakage or outflow never come to rest.

    Notes
    -----
    Newton's method solves rates(n) = 0 with implicit steps in a pseudo time that grows as the rates fall, so that
    far from the solution it follows the vessel's own way there, and near it converges quadratically [1]_. In a
    closed vessel the rates keep the particle volume x . n, the Jacobian is singular, and one bordered row holds
    x . n at that of the start. Where this fails, the vessel is integrated in time and Newton's method begins
    again from there. The state is stable if all eigenvalues of the Jacobian, without that of the conserved
    volume, have negative real parts.

    References
    ----------
    .. [1] C. T. Kelley and D. E. Keyes, SIAM J. Numer. Anal. 35 (1998) 508, doi:10.1137/S0036142996304796.
    """
    _require_constant(vessel)
    if near is not None:
        expect(near, SteadyState, "near", "steady_state(...) of a vessel that is alike")
        if near.tanks.shape[0] != len(vessel.volumes):
            _checks.refuse(
                "near",
                f"a state of {near.tanks.shape[0]} tanks",
                f"one of {len(vessel.volumes)}, as the vessel has",
            )
    closed = not any(not stream.internal for stream in vessel.streams)
    if not closed and not vessel.feeds:
        raise InputError(
            "vessel loses particles and is fed none: its steady state holds nothing. Try: a feed, or simulate."
        )
    starts: list[StartingDistribution | None] = [None] * len(vessel.volumes)
    if closed or start is not None:
        starts = starts_of(vessel, start)
    if closed and vessel.smallest is None:
        raise SimulationError(
            "no steady state exists: in a closed vessel particles that aggregate without breakage never come to rest. "
            "Try: breakage, or simulate(...) to see where the distribution is going."
        )
    scheme = default_scheme(vessel, starts) if scheme is None else scheme
    expect(scheme, Scheme, "scheme", "FixedPivot(moments=6)")
    automatic = grid is None
    if grid is None:
        grid = default_grid(scheme, vessel, starts) if near is None else near.grid
    expect(grid, SizeGrid, "grid", "SizeGrid.geometric(smallest=..., largest=...) or None")
    scheme.check(grid)
    guess = np.array([project_or_none(scheme, one, grid) for one in starts])
    feeds = {id(feed): scheme.project(feed, grid) for feed in vessel.feeds}
    everything = sum(feeds.values(), start=guess.sum(axis=0))
    if not closed and start is None:
        guess = np.tile(everything, (len(starts), 1))
    elif start is not None and start.log_width == 0.0:
        guess = _spread(guess, grid)
    volume = float(np.array(vessel.volumes) @ (guess @ grid.volume)) if closed else None
    search = Search(vessel, scheme, Ladder(scheme, grid, automatic), feeds, everything, volume)
    if near is not None:
        found = search.newton(search.placed(near), search.ladder.whole, np.inf)
        if found is not None:
            return _record(search, found, False)
    found = search.newton(guess, grid, None)
    integrated = found is None
    if found is None:
        found = _with_help(search, starts, automatic)
    if found is None:
        raise SimulationError(
            f"no steady state was found in {search.iterations} Newton steps and {DECADES} decades of time. "
            "Particles that aggregate without breakage, outflow or settling never come to rest. "
            "Try: breakage or a loss, or simulate(...) to see where the distribution is going."
        )
    return _record(search, found, integrated)


def steady_states(
    vessel: Callable[[float], Vessel],
    values: Any,
    *,
    start: StartingDistribution | None = None,
    grid: SizeGrid | None = None,
    scheme: Scheme | None = None,
) -> SteadyCurve:
    """Compute steady states over the values of one parameter, each from the one before.

    Parameters
    ----------
    vessel : callable
        vessel(value) -> Vessel, such as a tank at one shear rate.
    values : (n_values,)
        Values of the parameter, in an order in which neighbours are alike.
    start, grid, scheme
        As in `steady_state`.

    Returns
    -------
    SteadyCurve

    Raises
    ------
    InputError, SimulationError
        As `steady_state` does.
    """
    given = _checks.array("values", values)
    states: list[SteadyState] = []
    for value in given.tolist():
        near = states[-1] if states else None
        states.append(steady_state(vessel(value), start=start, grid=grid, scheme=scheme, near=near))
    return SteadyCurve(given, tuple(states))


def _spread(number: FloatArray, grid: SizeGrid) -> FloatArray:
    """A smooth distribution with the volume and ten times the mean volume of single sizes, a better first guess."""
    x = grid.volume
    mean = 10.0 * (number @ x) / number.sum(axis=-1)
    shape = grid.width * np.exp(-x / mean[:, None])
    out: FloatArray = shape * ((number @ x) / (shape @ x))[:, None]
    return out


def _require_constant(vessel: Vessel) -> None:
    if not isinstance(vessel, Vessel):
        raise InputError(f"vessel={vessel!r} is not a Vessel. Try: vessel=StirredTank(...).")
    if len(vessel.spans) != 1 or np.isfinite(vessel.spans[0].stop):
        raise InputError(
            "vessel has several stages or ends at a stated time, and no steady state but that of one stage. "
            "Try: the vessel of that stage."
        )


def _with_help(search: Search, starts: list[StartingDistribution | None], automatic: bool) -> Found | None:
    """Newton's method from states ever later in time."""
    grid, scheme = search.ladder.whole, search.scheme
    number = np.array([project_or_none(scheme, one, grid) for one in starts]) + search.fed
    rates = search.rates(search.system(grid), number)
    fastest = float((np.abs(rates) / (number + search.scale(grid))).max())
    if fastest == 0.0:
        return None
    for decade in range(2, DECADES):
        times = np.array([0.0, 10.0**decade / fastest])
        late = Job(search.vessel, starts, times, scheme, BDF()).run(grid, automatic, HELP_TOLERANCE)
        if not late.status.completed:
            return None
        tanks = np.array([tank.number[-1] for tank in late.tanks] or [late.number[-1]])
        found = search.newton(tanks, late.grid, float(times[-1]))
        if found is not None:
            return found
    return None


def _record(search: Search, found: Found, integrated: bool) -> SteadyState:
    grid, number, system = found.grid, found.number, found.system
    shares, x = np.array(search.vessel.volumes), grid.volume
    rates = search.all_rates(system, number)
    together = shares @ rates
    outside = [stream for stream in search.vessel.streams if not stream.internal]
    carried = {s: float(together[grid.sections + BEYOND + search.vessel.streams.index(s)]) for s in outside}
    volume = float(shares @ (number @ x))
    result_grid = search.ladder.result_grid(grid)
    beyond, fed = float(together[grid.sections + 1]), sum(rate for s, rate in carried.items() if s.inward)
    tanks = np.pad(number, ((0, 0), (0, result_grid.sections - grid.sections)))
    state = SteadyState(
        grid=result_grid,
        number=tanks[-1].copy(),
        balance=SteadyBalance(
            present=volume,
            beyond_grid=beyond,
            negative_share=-float(shares @ (np.minimum(number, 0.0) @ x)) / volume,
            inward={s.name: rate for s, rate in carried.items() if s.inward},
            outward={s.name: rate for s, rate in carried.items() if not s.inward},
        ),
        jacobian=found.jacobian,
        closed=search.volume is not None,
        iterations=search.iterations,
        residual=found.change,
        integrated=integrated,
        settings={"scheme": repr(search.scheme)},
        tanks=tanks,
    )
    _require_inside(state, beyond, fed, float(np.abs(np.diag(found.jacobian)).max()))
    return state


def _require_inside(state: SteadyState, beyond: float, fed: float, fastest: float) -> None:
    """Refuse or warn where too much grows past the top of the grid [1/s]; `fastest` is the quickest rate [1/s]."""
    volume, top = state.balance.present, state.grid.volume[-1]
    if fed == 0.0 and beyond > UNSEEN * fastest * volume:
        lost = beyond * state.relaxation_time / volume
        if lost > BEYOND_SHARE:
            raise SimulationError(
                f"no steady state was found in the {state.grid.sections} sections up to {top:.3g} m3: {lost:.2g} of "
                "the particle volume grows past them before a disturbance dies out. Try: a larger `largest`."
            )
    elif fed > 0.0 and beyond > BEYOND_SHARE * fed:
        warnings.warn(
            f"{beyond / fed:.2g} of the particle volume that is fed grows past the top of the grid ({top:.3g} m3). "
            "Try: a larger `largest`; where it stays so, particles gel.",
            AccuracyWarning,
            stacklevel=4,
        )
