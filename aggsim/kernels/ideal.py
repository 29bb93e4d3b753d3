"""Kernels with closed solutions: constant, sum, product."""

from __future__ import annotations

from dataclasses import dataclass

from aggsim._checks import FloatArray, scalar
from aggsim.errors import KernelError
from aggsim.kernels.base import Kernel, Part


def constant(rate: float) -> Kernel:
    """Kernel that is the same for all pairs, K = rate [1]_.

    Parameters
    ----------
    rate : float
        [m3/s], at least 0.

    Raises
    ------
    KernelError
        If the rate is negative or not finite.

    References
    ----------
    .. [1] M. von Smoluchowski (1917), Z. phys. Chem. 92, 129, DOI 10.1515/zpch-1918-9209.
    """
    return Kernel((Part("constant", _Constant(_rate(rate, "m3/s"))),))


def additive(rate: float) -> Kernel:
    """Kernel that is the sum of the volumes, K = rate (v + w) [1]_.

    Parameters
    ----------
    rate : float
        [1/s], at least 0.

    Raises
    ------
    KernelError
        If the rate is negative or not finite.

    References
    ----------
    .. [1] A. M. Golovin (1963), Izv. Akad. Nauk SSSR, Ser. Geofiz. 5, 783.
    """
    return Kernel((Part("additive", _Additive(_rate(rate, "1/s"))),))


def multiplicative(rate: float) -> Kernel:
    """Kernel that is the product of the volumes, K = rate v w; it gels at a finite time [1]_.

    Parameters
    ----------
    rate : float
        [1/(m3 s)], at least 0.

    Raises
    ------
    KernelError
        If the rate is negative or not finite.

    References
    ----------
    .. [1] J. B. McLeod (1962), Quart. J. Math. 13, 119, DOI 10.1093/qmath/13.1.119.
    """
    return Kernel((Part("multiplicative", _Multiplicative(_rate(rate, "1/(m3 s)"))),))


def _rate(rate: float, unit: str) -> float:
    return scalar("rate", rate, unit, least=0.0, error=KernelError)


@dataclass(frozen=True)
class _Constant:
    rate: float

    def __call__(self, v: FloatArray, w: FloatArray) -> float:
        return self.rate


@dataclass(frozen=True)
class _Additive:
    rate: float

    def __call__(self, v: FloatArray, w: FloatArray) -> FloatArray:
        return self.rate * (v + w)


@dataclass(frozen=True)
class _Multiplicative:
    rate: float

    def __call__(self, v: FloatArray, w: FloatArray) -> FloatArray:
        return self.rate * (v * w)
