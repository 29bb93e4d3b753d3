"""Streams that carry particles into and out of a tank, and the account of their volume."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.sizes import StartingDistribution
from aggsim.vessels.base import Process, Site, Stream, Term, TimeFactor

FED = Stream("fed", inward=True)
WITHDRAWN = Stream("withdrawn", inward=False)


@dataclass(frozen=True, kw_only=True)
class Feed:
    """A stream of particles into a tank.

    Parameters
    ----------
    distribution : StartingDistribution
        Particles per volume of this stream.
    share : float
        Share of this stream in the whole flow into the tank [1], above 0 and at most 1. What the shares of all
        feeds leave is clear liquid.
    strength : Strength, optional
        Factor in time on the particles that the stream brings [1], jumps included.

    Raises
    ------
    InputError
        If the distribution is none, the share is outside its limits, or the strength is no factor in time.
    """

    distribution: StartingDistribution
    share: float = 1.0
    strength: TimeFactor | None = None

    def __post_init__(self) -> None:
        if not isinstance(self.distribution, StartingDistribution):
            raise InputError(
                f"distribution={self.distribution!r} is not a starting distribution. "
                "Try: LogNormal(median_diameter=..., gsd=..., volume_fraction=...)."
            )
        share = _checks.scalar("share", self.share, above=0.0, most=1.0, hint="0.1 for a tenth of the flow")
        object.__setattr__(self, "share", share)
        require_time_factor("strength", self.strength)


def require_time_factor(name: str, value: object) -> None:
    """Refuse what is neither None nor a factor in time."""
    if value is not None and not (callable(value) and hasattr(value, "jumps") and hasattr(value, "on")):
        raise InputError(
            f"{name}={value!r} is not a factor in time. Allowed: None, or a Strength. "
            "Try: kernels.Strength.steps([600.0], [1.0, 0.5])."
        )


def feeds_of(feed: object) -> tuple[Feed, ...]:
    """None, one distribution or Feed, or a sequence of Feeds whose shares make at most the whole flow."""
    if feed is None:
        return ()
    items = tuple(feed) if isinstance(feed, (tuple, list)) else (feed,)
    feeds = tuple(Feed(distribution=x) if isinstance(x, StartingDistribution) else x for x in items)
    for item in feeds:
        if not isinstance(item, Feed):
            raise InputError(
                f"feed={item!r} is not allowed; allowed: a starting distribution, a Feed, or a sequence of Feeds. "
                "Try: feed=Feed(distribution=start, share=0.9)."
            )
    total = sum(item.share for item in feeds)
    if total > 1.0 + 1e-12:
        _checks.refuse(
            "feed", f"feeds with shares that make {total:g}", "shares that make at most 1 of the flow"
        )
    return feeds


@dataclass(frozen=True, eq=False)
class Source:
    """Particles that come at a constant rate (n_sections,) [1/(m3 s)], kept account of at one entry."""

    rate: FloatArray
    volume_rate: float
    entry: int

    def add_rates(self, number: FloatArray, factor: float, out: FloatArray) -> float:
        out[: self.rate.size] += factor * self.rate
        out[self.entry] += factor * self.volume_rate
        return factor

    def add_jacobian(self, number: FloatArray, factor: float, out: FloatArray) -> None:
        """The rate does not depend on what is there."""


@dataclass(frozen=True, eq=False)
class Drain:
    """Particles that leave at rates (n_sections,) [1/s] in proportion to their number."""

    rate: FloatArray
    volume: FloatArray
    entry: int
    _volume_rate: FloatArray = field(init=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "_volume_rate", self.rate * self.volume)

    def add_rates(self, number: FloatArray, factor: float, out: FloatArray) -> float:
        n = self.rate.size
        there = number[:n]
        out[:n] -= factor * (self.rate * there)
        gone = factor * float(self._volume_rate @ there)
        out[self.entry] += gone
        return gone

    def add_jacobian(self, number: FloatArray, factor: float, out: FloatArray) -> None:
        n = self.rate.size
        diagonal = np.arange(n)
        out[diagonal, diagonal] -= factor * self.rate
        out[self.entry, :n] += factor * self._volume_rate


@dataclass(frozen=True)
class Inflow(Process):
    """One feed at `rate` [1/s], volumes of its tank per time, with a factor in time on the flow."""

    feed: Feed
    rate: float
    flow: TimeFactor | None = None

    def terms(self, site: Site) -> list[Term]:
        rate = self.rate * self.feed.share * site.numbers(self.feed.distribution)
        source = Source(rate, float(rate @ site.grid.volume), site.entry(FED))
        return [Term(source, product(self.flow, self.feed.strength))]

    @property
    def streams(self) -> tuple[Stream, ...]:
        return (FED,)

    @property
    def feeds(self) -> tuple[StartingDistribution, ...]:
        return (self.feed.distribution,)


@dataclass(frozen=True)
class Outflow(Process):
    """Suspension that leaves at `rate` [1/s], volumes of its tank per time, with all its particles."""

    rate: float
    flow: TimeFactor | None = None

    def terms(self, site: Site) -> list[Term]:
        volume = np.array(site.grid.volume)
        return [Term(Drain(np.full(volume.size, self.rate), volume, site.entry(WITHDRAWN)), self.flow)]

    @property
    def streams(self) -> tuple[Stream, ...]:
        return (WITHDRAWN,)


def product(first: TimeFactor | None, second: TimeFactor | None) -> TimeFactor | None:
    """Product of two factors in time, None for 1."""
    if first is None or second is None:
        return second if first is None else first
    return first * second  # type: ignore[operator,no-any-return]
