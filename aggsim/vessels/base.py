"""What a vessel is: a sum of processes that change the numbers of particles.

A process turns itself, on a prepared scheme, into terms: an operator and a factor in time. `simulate` adds up
the terms of whatever vessel it is given and never asks which one it is. Physics reaches this room as plain
objects (a kernel is anything with `part_matrices`), so vessels know neither kernels nor schemes.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Protocol

import numpy as np

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
    """One operator of the right-hand side, times a factor in time (None: constant 1).

    `collisions` names the kernel matrices (n_sections, n_sections) [m3/s] that the operator is made of, where
    it is made of collisions.
    """

    operator: Any
    strength: TimeFactor | None = None
    collisions: Mapping[str, FloatArray] = field(default_factory=dict)


class Process(Protocol):
    """Something that changes the numbers of particles."""

    def terms(self, prepared: Any) -> Sequence[Term]:
        """The terms of the process on a prepared scheme."""


class Vessel(ABC):
    """A suspension and everything that happens to it."""

    @property
    @abstractmethod
    def processes(self) -> tuple[Process, ...]:
        """The processes whose terms add up to the rate of change."""

    def terms(self, prepared: Any) -> list[Term]:
        """All terms on a prepared scheme."""
        return [term for process in self.processes for term in process.terms(prepared)]


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
