"""What an ideal settling basin takes out of a suspension of flocs.

Particles settle singly, each at its own speed: no hindrance, no growth, no short-circuiting in the basin.

References: [1] A. Hazen (1904), On sedimentation, Trans. ASCE 53, 45; [2] T. R. Camp (1946), Sedimentation
and the design of settling tanks, Trans. ASCE 111, 895.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Protocol

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.sizes import SizeGrid, means

_CELL = 0.01  # largest width in ln v; the speed is taken as linear across it
_AROUND_PIVOT = 1e-10  # relative; wide enough to hold a lone size, too narrow to matter otherwise
_ENTRIES = 20_000_000  # of the table that one call of `means.cumulative` builds

Velocity = Callable[[FloatArray], FloatArray]


class Sizes(Protocol):
    """Particle numbers on a grid, such as a Result."""

    @property
    def grid(self) -> SizeGrid:
        """Pivots of the sections."""

    @property
    def number(self) -> FloatArray:
        """Particles in each section (..., n_sections) [1/m3]."""


def settled_share(
    state: Sizes, velocity: Velocity, overflow_rate: Any, *, upflow: bool = False
) -> FloatArray:
    """Share of the solids volume that an ideal basin removes [1].

    With overflow rate u and settling speed w, a horizontal-flow basin catches the share min(1, w/u) of each
    size [1, 2], an upflow basin all that settles at w >= u. Rising particles are not caught. The density of
    volume over size is integrated as in `means.cumulative`, so the share is a smooth function of u.

    Parameters
    ----------
    state : Result, or another object with `grid` and `number` (..., n_sections)
        Each output time of a Result gives a row.
    velocity : callable
        Settling speed [m/s] of solid volumes (n,) [m3], such as `kernels.SettlingVelocity(flocs, water)`.
    overflow_rate : float or (n_rates,)
        Flow over horizontal area of the basin [m/s], above 0 and at most 1.
    upflow : bool
        True for a basin whose water rises against the particles.

    Returns
    -------
    number.shape[:-1] + overflow_rate.shape

    Raises
    ------
    InputError
        If an overflow rate is out of range, or the velocity is no function that gives finite speeds.
    DistributionError
        If a row holds no particles.
    """
    rates = _rates(overflow_rate)
    volume_share, slow, fast = _by_speed(state, velocity)
    if upflow:
        caught = 1.0 - _below(slow, fast, rates)
    else:
        low, high = np.clip(slow, 0.0, rates), np.clip(fast, 0.0, rates)
        beyond = np.maximum(
            fast - np.maximum(slow, rates), 0.0
        )  # part of the cell that settles faster than u
        # the mean of min(1, w/u) for w spread evenly from slow to fast
        mean = ((high - low) * (0.5 * (high + low) / rates) + beyond) / _width(slow, fast)
        caught = np.where(fast > slow, mean, low / rates)
    return _shaped(volume_share @ caught, state, overflow_rate)


def overflow_volume_fraction(
    state: Sizes, velocity: Velocity, overflow_rate: Any, *, upflow: bool = False
) -> FloatArray:
    """Volume of solids per volume of water that leaves an ideal basin [1].

    Arguments, shape and errors as in `settled_share`; times the density of the solids it is a concentration
    [kg/m3].
    """
    share = settled_share(state, velocity, overflow_rate, upflow=upflow)
    total = means.moment(state.grid.volume, state.number, 1.0)
    return (total.reshape(total.shape + (1,) * (share.ndim - total.ndim)) * (1.0 - share))[()]


def slower_share(state: Sizes, velocity: Velocity, speed: Any) -> FloatArray:
    """Share of the solids volume that settles more slowly than `speed` [m/s], a number or (n,) [1].

    The cumulative distribution of settling velocities; one less it is what an upflow basin of this overflow
    rate removes. Other arguments, shape and errors as in `settled_share`.
    """
    speeds = _checks.array("speed", np.atleast_1d(_checks.plain(speed, "m/s")), "m/s")
    volume_share, slow, fast = _by_speed(state, velocity)
    return _shaped(volume_share @ _below(slow, fast, speeds), state, speed)


def _by_speed(state: Sizes, velocity: Velocity) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Volume share (rows, cells) of narrow cells of size, and the lowest and highest speed (cells, 1) in each.

    The first cell is the first pivot alone, where `means.cumulative` jumps.
    """
    v, number = state.grid.volume, np.asarray(state.number, dtype=np.float64)
    even = np.exp(np.arange(np.log(v[0]), np.log(v[-1]), _CELL))
    edges = np.concatenate([even, v * (1.0 - _AROUND_PIVOT), v * (1.0 + _AROUND_PIVOT)])
    edges = np.unique(np.clip(edges, v[0], v[-1]))
    every = number.reshape(-1, v.size)
    holds = every.any(axis=-1)
    rows = every[holds] if holds.any() else every  # which is refused below
    pieces = np.array_split(edges, -(-edges.size * rows.size // _ENTRIES))
    below = np.concatenate([means.cumulative(v, rows, piece) for piece in pieces], axis=-1)
    # a spline may fall by a trifle where next to nothing is
    share = np.full((every.shape[0], edges.size), np.nan)  # where there is nothing, nothing has a share
    share[holds] = np.diff(np.maximum.accumulate(below, axis=-1), axis=-1, prepend=0.0)
    speed = _speeds(velocity, edges)
    slow, fast = np.minimum(speed[:-1], speed[1:]), np.maximum(speed[:-1], speed[1:])
    return share, np.append(speed[:1], slow)[:, None], np.append(speed[:1], fast)[:, None]


def _below(slow: FloatArray, fast: FloatArray, speed: FloatArray) -> FloatArray:
    """Part of each cell (cells, n) that is slower than `speed` (n,)."""
    spread = np.clip((np.clip(speed, slow, fast) - slow) / _width(slow, fast), 0.0, 1.0)
    return np.where(fast > slow, spread, slow < speed)


def _width(slow: FloatArray, fast: FloatArray) -> FloatArray:
    return np.where(fast > slow, fast - slow, 1.0)


def _speeds(velocity: Velocity, volume: FloatArray) -> FloatArray:
    hint = "kernels.SettlingVelocity(flocs, water)"
    if not callable(velocity):
        _checks.refuse("velocity", repr(velocity), "a function of solid volumes (n,) [m3]", hint)
    speed = np.asarray(velocity(volume), dtype=np.float64)
    if speed.shape != volume.shape:
        got = f"a function that gives shape {speed.shape} for {volume.size} volumes"
        _checks.refuse("velocity", got, "one speed [m/s] per volume", hint)
    if not np.isfinite(speed).all():
        where = float(volume[~np.isfinite(speed)][0])
        _checks.refuse("velocity", f"NaN or infinity at {where:.3g} m3", "finite speeds [m/s]", hint)
    return speed


def _rates(overflow_rate: Any) -> FloatArray:
    return _checks.array(
        "overflow_rate",
        np.atleast_1d(_checks.plain(overflow_rate, "m/s")),
        "m/s",
        above=0.0,
        most=1.0,
        hint="flow over area in m/s: 40 m/d is 40/86400, 2 m/h is 2/3600",
    )


def _shaped(share: FloatArray, state: Sizes, asked: Any) -> FloatArray:
    """Shape number.shape[:-1] + asked.shape; round-off of sums taken off at 0 and 1."""
    shape = np.shape(state.number)[:-1] + np.shape(_checks.plain(asked, "m/s"))
    return np.clip(share, 0.0, 1.0).reshape(shape)[()]
