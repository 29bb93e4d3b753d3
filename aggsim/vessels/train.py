"""Tanks in series, with side streams and recycles."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import KW_ONLY, dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.vessels.base import Process, Site, Stream, Term, Vessel, several
from aggsim.vessels.batch import contents
from aggsim.vessels.streams import Inflow, Outflow, feeds_of

FROM_TANKS = Stream("from other tanks", inward=True, internal=True)
TO_TANKS = Stream("to other tanks", inward=False, internal=True)


@dataclass(frozen=True)
class Tank:
    """One well-mixed tank of a train.

    Parameters
    ----------
    kernel : Kernel or None
        Collision kernel [m3/s].
    volume : float
        Volume of suspension [m3].
    breakage : Breakage or sequence of them, optional
    losses : SettlingOut, Withdrawal or sequence of them, optional

    Raises
    ------
    InputError
        If the volume is not positive, or an argument is of another kind.
    """

    kernel: Any
    _: KW_ONLY
    volume: float
    breakage: Any = None
    losses: Any = None

    def __post_init__(self) -> None:
        volume = _checks.scalar("volume", self.volume, "m3", above=0.0)
        object.__setattr__(self, "volume", volume)
        contents(self.kernel, self.breakage, self.losses)  # refuses what cannot be used


@dataclass(frozen=True, kw_only=True)
class SideStream:
    """A flow [m3/s] that joins tank number `into` (from 0) and brings `feed`; clear liquid without it."""

    into: int
    flow: float
    feed: Any = None

    def __post_init__(self) -> None:
        _checks.count("into", self.into, least=0)
        object.__setattr__(self, "flow", _checks.scalar("flow", self.flow, "m3/s", above=0.0))
        feeds_of(self.feed)


@dataclass(frozen=True, kw_only=True)
class Recycle:
    """A flow [m3/s] that returns suspension from tank number `source` to `target`, numbers from 0."""

    source: int
    target: int
    flow: float

    def __post_init__(self) -> None:
        _checks.count("source", self.source, least=0)
        if _checks.count("target", self.target, least=0) > self.source:
            _checks.refuse(
                "target", self.target, f"a tank up to the source, {self.source}", "flow runs forward"
            )
        object.__setattr__(self, "flow", _checks.scalar("flow", self.flow, "m3/s", above=0.0))


@dataclass(frozen=True)
class Train(Vessel):
    """Tanks through which suspension flows one after the other, each of constant volume.

        V_i dn_i/dt = sum_j q_ji n_j - n_i sum_j q_ij + feeds + V_i (aggregation + breakage - losses)

    A result of a train is that of the last tank, which is what leaves; `result.tanks` holds one for each.

    Parameters
    ----------
    tanks : sequence of Tank
    flow : float
        Flow into the first tank [m3/s].
    feed : StartingDistribution, Feed or sequence of Feed, optional
        What it brings; clear liquid without it.
    side_streams : SideStream or sequence of them, optional
    recycles : Recycle or sequence of them, optional

    Raises
    ------
    InputError
        If a tank, side stream or recycle is of another kind or names a tank that is not there, the flow is not
        positive, or a recycle carries more than the flow that passes its source.

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., ch. 14, Wiley 1999.
    """

    tanks: Sequence[Tank]
    _: KW_ONLY
    flow: float
    feed: Any = None
    side_streams: Any = None
    recycles: Any = None

    def __post_init__(self) -> None:
        tanks = several("tanks", self.tanks, Tank, "[Tank(kernel, volume=50.0), Tank(kernel, volume=50.0)]")
        if not tanks:
            _checks.refuse("tanks", repr(self.tanks), "at least one Tank")
        keep = object.__setattr__
        keep(self, "tanks", tanks)
        keep(
            self, "flow", _checks.scalar("flow", self.flow, "m3/s", above=0.0, hint="m3/s; 1 ML/d is 0.01157")
        )
        example = "SideStream(into=1, flow=0.01)"
        keep(self, "side_streams", several("side_streams", self.side_streams, SideStream, example))
        example = "Recycle(source=2, target=0, flow=0.01)"
        keep(self, "recycles", several("recycles", self.recycles, Recycle, example))
        last = len(tanks) - 1
        for k, side in enumerate(self.side_streams):
            _checks.count(f"side_streams[{k}].into", side.into, least=0, most=last, hint="tanks count from 0")
        for k, recycle in enumerate(self.recycles):
            _checks.count(
                f"recycles[{k}].source", recycle.source, least=0, most=last, hint="tanks count from 0"
            )
            passing = float(self.through[recycle.source])
            if recycle.flow > passing:
                _checks.refuse(
                    f"recycles[{k}].flow",
                    f"{recycle.flow:g} m3/s",
                    f"at most the flow that passes tank {recycle.source}, {passing:g} m3/s",
                    "a smaller recycle, or one larger tank in place of those it spans",
                )
        _ = self.processes  # refuses what cannot be used

    @property
    def through(self) -> FloatArray:
        """Net flow that passes each tank on its way out, (n_tanks,) [m3/s]: the feed and the side streams so far."""
        joined = np.zeros(len(self.tanks))
        joined[0] = self.flow
        for side in self.side_streams:
            joined[side.into] += side.flow
        flow: FloatArray = np.cumsum(joined)
        return flow

    @property
    def exchange(self) -> FloatArray:
        """Flow [m3/s] from tank i (row) to tank j (column), (n_tanks, n_tanks)."""
        count = len(self.tanks)
        out = np.zeros((count, count))
        for recycle in self.recycles:
            if recycle.source > recycle.target:
                out[recycle.source, recycle.target] += recycle.flow
        for i in range(count - 1):
            # what recycles bring back to this tank or those before it from those behind passes here again
            out[i, i + 1] = self.through[i] + out[i + 1 :, : i + 1].sum()
        return out

    @property
    def residence_times(self) -> FloatArray:
        """Volume of each tank over the whole flow through it, (n_tanks,) [s]."""
        leaving = self.exchange.sum(axis=1)
        leaving[-1] += self.through[-1]
        times: FloatArray = np.array([tank.volume for tank in self.tanks]) / leaving
        return times

    @property
    def volumes(self) -> tuple[float, ...]:
        volumes = np.array([tank.volume for tank in self.tanks])
        return tuple((volumes / volumes.sum()).tolist())

    @cached_property
    def _tank_processes(self) -> list[tuple[Process, ...]]:
        out: list[tuple[Process, ...]] = []
        for k, tank in enumerate(self.tanks):
            flows = [(self.flow, self.feed)] if k == 0 else []
            flows += [(side.flow, side.feed) for side in self.side_streams if side.into == k]
            inflows = [Inflow(feed, flow / tank.volume) for flow, feeds in flows for feed in feeds_of(feeds)]
            last = [Outflow(self.through[-1] / tank.volume)] if k == len(self.tanks) - 1 else []
            out.append((*contents(tank.kernel, tank.breakage, tank.losses), *inflows, *last))
        return out

    @property
    def processes(self) -> tuple[Process, ...]:
        """The processes of all tanks."""
        return tuple(process for tank in self._tank_processes for process in tank)

    @property
    def streams(self) -> tuple[Stream, ...]:
        between = (FROM_TANKS, TO_TANKS) if len(self.tanks) > 1 else ()
        return (*super().streams, *between)

    def terms(self, site: Site) -> list[Term]:
        out = [
            replace(term, tank=k)
            for k, processes in enumerate(self._tank_processes)
            for process in processes
            for term in process.terms(site)
        ]
        if len(self.tanks) > 1:
            volumes = np.array([tank.volume for tank in self.tanks])
            entries = site.entry(FROM_TANKS), site.entry(TO_TANKS)
            operator = Exchange(self.exchange, volumes, np.array(site.grid.volume), *entries)
            out.append(Term(operator, tank=None))
        return out


class Exchange:
    """Flow between tanks, on the state of all of them."""

    def __init__(
        self, flow: FloatArray, volumes: FloatArray, size: FloatArray, arriving: int, leaving: int
    ) -> None:
        """Take flows [m3/s] from tank i to j, tank volumes [m3], pivots [m3] and the entries of the account."""
        self._arrives = flow.T / volumes[:, None]
        self._leaves = flow.sum(axis=1) / volumes
        self._net = self._arrives - np.diag(self._leaves)
        self._size = size
        self._entries = arriving, leaving

    def add_rates(self, state: FloatArray, factor: float, out: FloatArray) -> float:
        tanks, n = self._leaves.size, self._size.size
        number, rate = state.reshape(tanks, -1)[:, :n], out.reshape(tanks, -1)
        rate[:, :n] += factor * (self._net @ number)
        volume = number @ self._size
        arriving, leaving = self._entries
        rate[:, arriving] += factor * (self._arrives @ volume)
        rate[:, leaving] += factor * (self._leaves * volume)
        return float(volume.sum())

    def add_jacobian(self, state: FloatArray, factor: float, out: FloatArray) -> None:
        tanks, n = self._leaves.size, self._size.size
        width = state.size // tanks
        block = out.reshape(tanks, width, tanks, width)
        section = np.arange(n)
        arriving, leaving = self._entries
        for i in range(tanks):
            for j in range(tanks):
                block[i, section, j, section] += factor * self._net[i, j]
                block[i, arriving, j, :n] += factor * self._arrives[i, j] * self._size
            block[i, leaving, i, :n] += factor * self._leaves[i] * self._size
