"""When a product is no longer what it should be: criteria that a shelf life can be counted to."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Protocol

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.result import Result
from aggsim.sizes import Monodisperse, StartingDistribution


class Criterion(Protocol):
    """A quantity of a run and the value that it must not pass."""

    def check(self, start: StartingDistribution) -> None:
        """Raise InputError where the criterion cannot be read from a run with this start."""

    def quantity(self, result: Result) -> FloatArray:
        """The quantity at each output time (n_times,)."""

    def limit(self, result: Result) -> float:
        """The value that ends the life of the product."""

    def __str__(self) -> str:
        """The criterion in words."""


@dataclass(frozen=True, kw_only=True)
class SingleParticlesLeft:
    """The share of the particles that are still single falls to `share`; for a monodisperse start.

    Parameters
    ----------
    share : float
        Between 0 and 1, share of the particles that were there at the start.
    """

    share: float = 0.9

    def __post_init__(self) -> None:
        _checks.scalar("share", self.share, above=0.0, below=1.0, hint="0.9")

    def check(self, start: StartingDistribution) -> None:
        """Raise InputError unless the start is monodisperse."""
        if not isinstance(start, Monodisperse):
            raise InputError(
                f"start={start!r} has particles of several sizes, so that single ones cannot be told from "
                "aggregates. Try: MeanSizeGrowth(factor=1.2), or a Monodisperse start."
            )

    def quantity(self, result: Result) -> FloatArray:
        """Share of single particles (n_times,) [-]."""
        share: FloatArray = result.number[:, 0] / result.number[0, 0]
        return share

    def limit(self, result: Result) -> float:
        """The share [-]."""
        return self.share

    def __str__(self) -> str:
        return f"{self.share:.0%} of the particles still single"


@dataclass(frozen=True, kw_only=True)
class MeanSizeGrowth:
    """A mean diameter D[p, q] grows by a factor.

    Parameters
    ----------
    factor : float
        Above 1.
    p, q : float
        Mean diameter, D[4, 3] without them.
    """

    factor: float = 1.2
    p: float = 4.0
    q: float = 3.0

    def __post_init__(self) -> None:
        _checks.scalar("factor", self.factor, above=1.0, hint="1.2 for a growth by 20 %")

    def check(self, start: StartingDistribution) -> None:
        """Any start will do."""

    def quantity(self, result: Result) -> FloatArray:
        """D[p, q] (n_times,) [m]."""
        return result.mean_diameter(self.p, self.q)

    def limit(self, result: Result) -> float:
        """The factor times D[p, q] at the first output [m]."""
        return self.factor * float(self.quantity(result)[0])

    def __str__(self) -> str:
        return f"D[{self.p:g},{self.q:g}] grown by a factor of {self.factor:g}"


@dataclass(frozen=True, kw_only=True)
class SizeLimit:
    """A mean diameter D[p, q] reaches a limit.

    Parameters
    ----------
    diameter : float
        Limit [m].
    p, q : float
        Mean diameter, D[4, 3] without them.
    """

    diameter: float
    p: float = 4.0
    q: float = 3.0

    def __post_init__(self) -> None:
        _checks.diameter("diameter", self.diameter)
        if self.p == self.q:
            _checks.refuse("p", self.p, "another order than q", "p=4, q=3")

    def check(self, start: StartingDistribution) -> None:
        """Raise InputError where the start is at the limit already."""
        sphere = 6.0 / math.pi
        moments = [sphere ** (k / 3.0) * start.moment(k / 3.0) for k in (self.p, self.q)]
        now = (moments[0] / moments[1]) ** (1.0 / (self.p - self.q))
        if now >= self.diameter:
            raise InputError(
                f"diameter={self.diameter:g} m is not above D[{self.p:g},{self.q:g}] of the start, {now:.3g} m. "
                "Try: a larger limit."
            )

    def quantity(self, result: Result) -> FloatArray:
        """D[p, q] (n_times,) [m]."""
        return result.mean_diameter(self.p, self.q)

    def limit(self, result: Result) -> float:
        """The diameter [m]."""
        return self.diameter

    def __str__(self) -> str:
        return f"D[{self.p:g},{self.q:g}] at {self.diameter:.3g} m"
