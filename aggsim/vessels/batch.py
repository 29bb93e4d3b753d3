"""A closed, well-mixed suspension."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Any

from aggsim.vessels.aggregation import Aggregation
from aggsim.vessels.base import Process, Vessel, several
from aggsim.vessels.breaking import breaking
from aggsim.vessels.losses import Loss


@dataclass(frozen=True)
class Batch(Vessel):
    """A well-mixed suspension without inflow, whose particles aggregate, break and may settle out.

        dn(v)/dt = 1/2 int_0^v K(v - u, u) n(v - u) n(u) du - n(v) int_0^inf K(v, u) n(u) du
                   + int_v^inf b(v, u) S(u) n(u) du - S(v) n(v) - l(v) n(v)

    Parameters
    ----------
    kernel : Kernel or None
        Collision kernel K(v, w) [m3/s] of `aggsim.kernels`, single or a sum; None where nothing collides.
    breakage : Breakage or sequence of them, optional
        Rate S(v) [1/s] and fragments b(v, u) [1/m3].
    losses : SettlingOut, Withdrawal or sequence of them, optional
        First-order losses l(v) [1/s].

    Raises
    ------
    InputError
        If an argument is of another kind.

    References
    ----------
    .. [1] M. von Smoluchowski, Z. Phys. Chem. 92 (1917) 129, doi:10.1515/zpch-1918-9209.
    """

    kernel: Any
    breakage: Any = None
    losses: Any = None

    def __post_init__(self) -> None:
        _ = self.processes  # refuses what cannot be used

    @cached_property
    def processes(self) -> tuple[Process, ...]:
        return contents(self.kernel, self.breakage, self.losses)


def contents(kernel: Any, breakage: Any, losses: Any) -> tuple[Process, ...]:
    """What happens to particles in a tank, apart from the streams through it."""
    collisions = () if kernel is None else (Aggregation(kernel),)
    example = "SettlingOut(velocity, depth=3.0)"
    return (*collisions, *breaking(breakage), *several("losses", losses, Loss, example))
