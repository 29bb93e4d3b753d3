"""What a vessel is: a sum of processes that change the numbers of particles, in one tank or several.

A process turns itself, on a prepared scheme, into terms: an operator and a factor in time. `simulate` adds up
the terms of whatever vessel it is given and never asks which one it is. Physics reaches this room as plain
objects (a kernel is anything with `part_matrices`, breakage anything with `table`), so vessels know neither
kernels nor breakage laws nor schemes.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Protocol

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.sizes import SizeGrid, StartingDistribution


class TimeFactor(Protocol):
    """A factor in time, with the times at which it jumps."""

    @property
    def jumps(self) -> tuple[float, ...]:
        """Times [s] at which the factor is not smooth."""

    def __call__(self, time: float) -> float:
        """Factor at `time` [s]."""

    def on(self, start: float, stop: float) -> Callable[[float], float]:
        """The factor on [start, stop], smooth up to both ends."""


@dataclass(frozen=True)
class Stream:
    """A stream of particle volume into or out of a tank that the account keeps; `internal` between tanks."""

    name: str
    inward: bool
    internal: bool = False


@dataclass(frozen=True, eq=False)
class Site:
    """Where processes are turned into terms: a scheme on a grid, and the streams that are kept account of.

    The state of a tank holds n_sections numbers [1/m3], the number and the volume that passed the top of the
    grid, and then one entry per stream, the volume [m3 per m3 of tank] that it carried so far.
    """

    prepared: Any
    streams: tuple[Stream, ...] = ()
    project: Callable[[StartingDistribution], FloatArray] | None = None
    first_stream: int = 0

    @property
    def grid(self) -> SizeGrid:
        """The grid."""
        grid: SizeGrid = self.prepared.grid
        return grid

    def entry(self, stream: Stream) -> int:
        """Place of a stream in the state of a tank."""
        return self.first_stream + self.streams.index(stream)

    def numbers(self, distribution: StartingDistribution) -> FloatArray:
        """Numbers (n_sections,) [1/m3] that stand for a distribution."""
        assert self.project is not None, "a site of processes that bring particles has a projection"
        return self.project(distribution)


@dataclass(frozen=True, eq=False)
class Term:
    """One operator of the right-hand side, times a factor in time (None: constant 1).

    `collisions` names the kernel matrices (n_sections, n_sections) [m3/s] that the operator is made of, where
    it is made of collisions. `tank` is the tank whose state the operator works on, None for the state of all.
    """

    operator: Any
    strength: TimeFactor | None = None
    collisions: Mapping[str, Any] = field(default_factory=dict)
    tank: int | None = 0


class Process(ABC):
    """Something that changes the numbers of particles in a tank."""

    @abstractmethod
    def terms(self, site: Site) -> Sequence[Term]:
        """The terms of the process on a site."""

    @property
    def streams(self) -> tuple[Stream, ...]:
        """Streams that the process feeds or drains."""
        return ()

    @property
    def feeds(self) -> tuple[StartingDistribution, ...]:
        """Distributions that the process brings in, which a grid must cover."""
        return ()

    @property
    def smallest(self) -> float | None:
        """Volume [m3] of the smallest pieces that the process makes; infinitely small ones are 0, none None."""
        return None

    def smooth(self, volume: FloatArray) -> bool:
        """False where a rate has a kink among the volumes (n,) [m3], which lowers the order of schemes to 2."""
        return True


@dataclass(frozen=True)
class Span:
    """A vessel from `start` to `stop` [s], and what is added when it begins (see `Stage`)."""

    start: float
    stop: float
    vessel: Vessel
    dose: StartingDistribution | None = None
    dilution: float = 0.0


class Vessel(ABC):
    """A suspension and everything that happens to it.

    A vessel of one tank states its `processes`. One of several tanks overrides `volumes` and `terms`, one that
    changes at stated times `spans`.
    """

    @property
    @abstractmethod
    def processes(self) -> tuple[Process, ...]:
        """The processes whose terms add up to the rate of change."""

    @property
    def volumes(self) -> tuple[float, ...]:
        """Volume of each tank as a share of them all, (n_tanks,)."""
        return (1.0,)

    @property
    def spans(self) -> tuple[Span, ...]:
        """What the vessel is over time."""
        return (Span(0.0, np.inf, self),)

    def terms(self, site: Site) -> list[Term]:
        """All terms on a site."""
        return [term for process in self.processes for term in process.terms(site)]

    @property
    def streams(self) -> tuple[Stream, ...]:
        """Streams to keep account of, each once."""
        return tuple(dict.fromkeys(stream for process in self.processes for stream in process.streams))

    @property
    def feeds(self) -> tuple[StartingDistribution, ...]:
        """Distributions that come in on the way."""
        return tuple(feed for process in self.processes for feed in process.feeds)

    def smooth(self, volume: FloatArray) -> bool:
        """False where a rate has a kink among the volumes (n,) [m3]."""
        return all(process.smooth(volume) for process in self.processes)

    @property
    def smallest(self) -> float | None:
        """Volume [m3] of the smallest pieces that breakage makes; 0 without a limit, None without breakage."""
        sizes = [process.smallest for process in self.processes if process.smallest is not None]
        return min(sizes, default=None)


def several(name: str, value: Any, kind: type, example: str) -> tuple[Any, ...]:
    """None, one object of a kind, or a sequence of them, as a tuple."""
    if value is None:
        return ()
    items = tuple(value) if isinstance(value, (tuple, list)) else (value,)
    for item in items:
        if not isinstance(item, kind):
            raise InputError(
                f"{name}={item!r} is not allowed; allowed: None, one {kind.__name__} or a sequence of them. "
                f"Try: {name}={example}."
            )
    return items


def collision_rates(
    terms: Sequence[Term], volume: FloatArray, times: FloatArray, number: FloatArray
) -> dict[str, tuple[FloatArray, FloatArray]]:
    """Collision events [1/(m3 s)] and volume of the colliding particles [1/s], (n_times,) each, by named part.

    For numbers (n_times, n_sections) [1/m3] at the pivots `volume` (n_sections,) [m3]. Negative numbers of
    round-off size count as zero here: times a steep kernel they would be collisions.
    """
    number = np.maximum(number, 0.0)
    weighted = number * volume
    out = {}
    for term in terms:
        factor = 1.0 if term.strength is None else np.array([term.strength(t) for t in times])
        for name, matrix in term.collisions.items():
            met = number @ matrix
            events = 0.5 * factor * np.einsum("tk,tk->t", met, number)
            out[name] = (events, factor * np.einsum("tk,tk->t", met, weighted))
    return out
