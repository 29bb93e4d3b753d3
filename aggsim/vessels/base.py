"""What a vessel is: a sum of processes that change the numbers of particles.

A process turns itself, on a prepared scheme, into terms: an operator and a factor in time. `simulate` adds up
the terms of whatever vessel it is given and never asks which one it is. Physics reaches this room as plain
objects (a kernel is anything with `part_matrices`), so vessels know neither kernels nor schemes.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any, Protocol

from aggsim._checks import FloatArray


class TimeFactor(Protocol):
    """A factor in time, with the times at which it jumps."""

    @property
    def jumps(self) -> tuple[float, ...]:
        """Times [s] at which the factor is not smooth."""

    def __call__(self, time: float) -> float:
        """Factor at `time` [s]."""

    def on(self, start: float, stop: float) -> Callable[[float], float]:
        """The factor on [start, stop], smooth up to both ends."""


@dataclass(frozen=True, eq=False)
class Term:
    """One operator of the right-hand side, times a factor in time (None: constant 1)."""

    operator: Any
    strength: TimeFactor | None = None


@dataclass(frozen=True)
class Collisions:
    """Collisions of one named part of a kernel, at each of the times asked for.

    Attributes
    ----------
    events : (n_times,) 1/(m3 s)
        Collision events per volume of suspension and time.
    volume_flux : (n_times,) 1/s
        Volume of the particles that collide, per volume of suspension and time.
    """

    events: FloatArray
    volume_flux: FloatArray


class Process(Protocol):
    """Something that changes the numbers of particles."""

    def terms(self, prepared: Any) -> Sequence[Term]:
        """The terms of the process on a prepared scheme."""

    def collisions(self, volume: FloatArray, times: FloatArray, number: FloatArray) -> dict[str, Collisions]:
        """Collisions by named part, for numbers (n_times, n_sections) at pivots `volume`."""


class Vessel(ABC):
    """A suspension and everything that happens to it."""

    @property
    @abstractmethod
    def processes(self) -> tuple[Process, ...]:
        """The processes whose terms add up to the rate of change."""

    def terms(self, prepared: Any) -> list[Term]:
        """All terms on a prepared scheme."""
        return [term for process in self.processes for term in process.terms(prepared)]

    def collisions(self, volume: FloatArray, times: FloatArray, number: FloatArray) -> dict[str, Collisions]:
        """Collisions by named part of every process."""
        out: dict[str, Collisions] = {}
        for process in self.processes:
            out.update(process.collisions(volume, times, number))
        return out
