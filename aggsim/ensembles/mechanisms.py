"""What happens in a closed batch: rates of pairs and of single particles, with strengths in time."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import InputError

_INSTANTS = 17  # at which a strength is sampled on an interval
_MARGIN = 1.1  # for what lies between them
_PIECES = 16  # of a stretch of time in which a strength may vary


def laws_of(vessel: Any) -> tuple[Any, tuple[Any, ...]]:
    """Kernel and breakage laws of a vessel in which nothing else happens.

    Raises InputError for a vessel with streams or losses, or a law whose fragments cannot be drawn.
    """
    missing = [name for name in ("kernel", "breakage", "processes") if not hasattr(vessel, name)]
    if missing:
        raise InputError(f"vessel={vessel!r} is not a closed batch. Try: vessel=Batch(kernel).")
    kernel, breakage = vessel.kernel, vessel.breakage
    laws = tuple(breakage) if isinstance(breakage, (tuple, list)) else (breakage,) * (breakage is not None)
    if len(vessel.processes) != (kernel is not None) + len(laws):
        raise InputError(
            f"vessel={vessel!r} has streams or losses; allowed: a closed batch of particles that aggregate and "
            "break. Try: Batch(kernel, breakage=...), or simulate for this vessel."
        )
    for law in laws:
        if not callable(getattr(law.fragments, "sample", None)):
            raise InputError(
                f"breakage: fragments={law.fragments!r} cannot be drawn one by one; allowed: fragments with a "
                "method sample(parent, generator). Try: fragments.uniform_binary()."
            )
    return kernel, laws


@dataclass(frozen=True)
class Mechanism:
    """rate(v, w) [m3/s] of collisions or rate(v) [1/s] of breakage, times a strength that depends on time."""

    rate: Any
    strength: Any = None

    def matrix(self, volume: FloatArray) -> FloatArray:
        """Collision rates of all pairs of `volume` (n,) [m3]; a kernel that is not symmetric is refused."""
        parts = self.rate.part_matrices(volume)
        return np.asarray(sum(part.matrix for part in parts))


def collision_mechanisms(kernel: Any) -> list[Mechanism]:
    """The parts of a kernel: those with a strength one by one, the others as one sum."""
    if kernel is None:
        return []
    steady = tuple(part for part in kernel.parts if part.strength is None)
    out = [Mechanism(replace(kernel, parts=steady))] if steady else []
    for part in kernel.parts:
        if part.strength is not None:
            out.append(Mechanism(replace(kernel, parts=(replace(part, strength=None),)), part.strength))
    return out


def breakage_mechanisms(laws: Sequence[Any]) -> list[Mechanism]:
    """The rates of breakage laws."""
    return [Mechanism(law.rates, law.strength) for law in laws]


@dataclass(frozen=True)
class Interval:
    """A stretch of time without jumps, and the strengths on it."""

    start: float
    stop: float

    def factors(self, mechanisms: Sequence[Mechanism], times: FloatArray) -> FloatArray:
        """Strengths (mechanisms, n_times) at times [s] inside."""
        out = np.ones((len(mechanisms), times.size))
        for row, mechanism in zip(out, mechanisms, strict=True):
            if mechanism.strength is not None:
                factor = mechanism.strength.on(self.start, self.stop)
                row[:] = [factor(float(t)) for t in times]
        return out

    def largest(self, mechanisms: Sequence[Mechanism]) -> FloatArray:
        """Upper bounds of the strengths (mechanisms,)."""
        sampled = self.factors(mechanisms, np.linspace(self.start, self.stop, _INSTANTS))
        top = sampled.max(axis=1)
        return np.asarray(np.where(sampled.min(axis=1) < top, _MARGIN * top, top))


def intervals(start: float, stop: float, mechanisms: Sequence[Mechanism]) -> list[Interval]:
    """The time from `start` to `stop` [s], cut at the jumps of strengths and, with any, into pieces."""
    strengths = [m.strength for m in mechanisms if m.strength is not None]
    jumps = {jump for strength in strengths for jump in strength.jumps if start < jump < stop}
    cuts = np.array([start, *sorted(jumps), stop])
    if strengths:  # bounds follow a strength that varies
        steps = np.arange(_PIECES) / _PIECES
        cuts = np.append((cuts[:-1, None] + np.diff(cuts)[:, None] * steps).ravel(), stop)
    return [Interval(a, b) for a, b in zip(cuts.tolist(), cuts[1:].tolist(), strict=False) if a < b]
