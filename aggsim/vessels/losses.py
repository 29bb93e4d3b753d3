"""First-order losses: particles that settle out, or are drawn off by size."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.vessels.base import Process, Site, Stream, Term, TimeFactor
from aggsim.vessels.streams import Drain, require_time_factor

SETTLED = Stream("settled", inward=False)


class Loss(Process):
    """Particles that leave at a rate in proportion to their number.

    A loss of one's own states `stream`, `strength` and `rates(volume)`.
    """

    strength: TimeFactor | None

    @property
    @abstractmethod
    def stream(self) -> Stream:
        """The stream that the loss is counted in."""

    @abstractmethod
    def rates(self, volume: FloatArray) -> FloatArray:
        """Share of the particles of `volume` (n,) [m3] that leaves per time, (n,) [1/s]."""

    def terms(self, site: Site) -> list[Term]:
        volume = np.array(site.grid.volume)
        rate = np.asarray(self.rates(volume), dtype=np.float64)
        if rate.shape != volume.shape or not ((rate >= 0.0) & (rate < np.inf)).all():
            bad = rate.shape if rate.shape != volume.shape else rate[~((rate >= 0.0) & (rate < np.inf))][0]
            _checks.refuse(
                f"loss {self.stream.name!r}: rates",
                f"{bad}",
                f"finite rates of at least 0 [1/s], one for each of the {volume.size} volumes",
                "check the velocity or selectivity for volumes [m3] of the solids",
            )
        return [Term(Drain(rate, volume, site.entry(self.stream)), self.strength)]

    @property
    def streams(self) -> tuple[Stream, ...]:
        return (self.stream,)


@dataclass(frozen=True)
class SettlingOut(Loss):
    """Particles that settle to the bottom of a tank whose contents stay mixed.

        dn/dt = - w(v) / depth * n

    with the settling speed w. Without mixing all particles of one speed would be gone after depth / w; in a
    mixed tank a share exp(-1) is then left.

    Parameters
    ----------
    velocity : callable
        Settling speed [m/s] of particles of solid volume v (n,) [m3], such as
        `kernels.SettlingVelocity(flocs, water)`. Where it is negative, particles rise and stay.
    depth : float
        Depth of the tank [m].
    strength : Strength, optional
        Factor in time [1], such as 0 while a mixer keeps everything in suspension.

    Raises
    ------
    InputError
        If the velocity cannot be called, or the depth is not positive.

    References
    ----------
    .. [1] A. Hazen, Trans. Am. Soc. Civ. Eng. 53 (1904) 45.
    """

    velocity: Callable[[FloatArray], Any]
    depth: float
    strength: TimeFactor | None = None

    def __post_init__(self) -> None:
        if not callable(self.velocity):
            raise InputError(
                f"velocity={self.velocity!r} is not a function of particle volume. "
                "Try: kernels.SettlingVelocity(structure, medium)."
            )
        depth = _checks.scalar("depth", self.depth, "m", above=0.0, hint="depth of the tank in metres")
        object.__setattr__(self, "depth", depth)
        require_time_factor("strength", self.strength)

    @property
    def stream(self) -> Stream:
        return SETTLED

    def rates(self, volume: FloatArray) -> FloatArray:
        speed = np.asarray(self.velocity(volume), dtype=np.float64)
        return np.maximum(speed, 0.0) / self.depth


@dataclass(frozen=True)
class Withdrawal(Loss):
    """Particles that are drawn off, all alike or by size.

        dn/dt = - rate * selectivity(v) * n

    Parameters
    ----------
    rate : float
        Share of the tank's particles that is drawn off per time [1/s].
    selectivity : callable, optional
        Factor [1] for particles of volume v (n,) [m3], such as the grade efficiency of a screen; 1 without it.
    name : str
        Name of the stream in the account.
    strength : Strength, optional
        Factor in time [1].

    Raises
    ------
    InputError
        If the rate is negative, or the selectivity cannot be called; in use, if it is not between 0 and 1.
    """

    rate: float
    selectivity: Callable[[FloatArray], Any] | None = None
    name: str = "withdrawn"
    strength: TimeFactor | None = None

    def __post_init__(self) -> None:
        rate = _checks.scalar("rate", self.rate, "1/s", least=0.0, hint="a share per second, such as 1e-3")
        object.__setattr__(self, "rate", rate)
        if self.selectivity is not None and not callable(self.selectivity):
            raise InputError(
                f"selectivity={self.selectivity!r} is not a function of particle volume. Try: lambda v: v > limit."
            )
        if not isinstance(self.name, str) or not self.name:
            _checks.refuse("name", repr(self.name), "a text that is not empty")
        require_time_factor("strength", self.strength)

    @property
    def stream(self) -> Stream:
        return Stream(self.name, inward=False)

    def rates(self, volume: FloatArray) -> FloatArray:
        if self.selectivity is None:
            return np.full(volume.size, self.rate)
        share = np.broadcast_to(np.asarray(self.selectivity(volume), dtype=np.float64), volume.shape)
        if not ((share >= 0.0) & (share <= 1.0)).all():
            bad = float(share[~((share >= 0.0) & (share <= 1.0))][0])
            _checks.refuse("selectivity", f"{bad:g}", "from 0 to 1", "a share of the particles of each size")
        return self.rate * share
