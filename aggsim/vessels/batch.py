"""A closed, well-mixed suspension."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from aggsim.vessels.aggregation import Aggregation
from aggsim.vessels.base import Process, Vessel


@dataclass(frozen=True)
class Batch(Vessel):
    """A closed, well-mixed suspension whose particles aggregate.

        dn(v)/dt = 1/2 int_0^v K(v - u, u) n(v - u) n(u) du - n(v) int_0^inf K(v, u) n(u) du

    Parameters
    ----------
    kernel : Kernel
        Collision kernel K(v, w) [m3/s] of `aggsim.kernels`, single or a sum.

    Raises
    ------
    InputError
        If `kernel` is not a kernel.

    References
    ----------
    .. [1] M. von Smoluchowski, Z. Phys. Chem. 92 (1917) 129, doi:10.1515/zpch-1918-9209.
    """

    kernel: Any

    def __post_init__(self) -> None:
        Aggregation(self.kernel)  # refuses what is not a kernel

    @property
    def processes(self) -> tuple[Process, ...]:
        return (Aggregation(self.kernel),)
