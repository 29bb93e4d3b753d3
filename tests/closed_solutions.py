"""Closed solutions of the aggregation equation, in units of the start: N0 = 1, mean volume 1.

Convention: dN/dt = -beta N^2 / 2 for the constant kernel beta. Sources: constant kernel, M. von Smoluchowski,
Z. Phys. Chem. 92 (1917) 129 (discrete) and W. T. Scott, J. Atmos. Sci. 25 (1968) 54 (exponential); sum kernel,
A. M. Golovin, Bull. Acad. Sci. USSR Geophys. Ser. 5 (1963) 482 and Scott 1968; product kernel, J. B. McLeod,
Q. J. Math. 13 (1962) 119 (discrete) and Scott 1968 (exponential).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.special import gammaln, ive

import aggsim as ag

Array = np.ndarray


@dataclass(frozen=True)
class ClosedSolution:
    """One problem with a closed solution.

    `number(k or v, t)` is the number of k-mers, or the number density at v; `moments(t)` are M0 to M3.
    """

    name: str
    kernel: ag.kernels.Kernel
    start: ag.StartingDistribution
    time: float
    number: Callable[[Array, float], Array]
    moments: Callable[[float], tuple[float, float, float, float]]
    discrete: bool


def _constant_discrete(k: Array, t: float) -> Array:
    T = t / 2
    return np.exp((k - 1) * np.log(T) - (k + 1) * np.log1p(T))


def _sum_discrete(k: Array, t: float) -> Array:
    f = -np.expm1(-t)
    return (1 - f) * np.exp((k - 1) * np.log(k * f) - k * f - gammaln(k + 1))


def _product_discrete(k: Array, t: float) -> Array:
    return np.exp((k - 1) * np.log(k * t) - k * t - np.log(k) - gammaln(k + 1))


def _constant_exponential(v: Array, t: float) -> Array:
    T = t / 2
    return np.exp(-v / (1 + T)) / (1 + T) ** 2


def _sum_exponential(v: Array, t: float) -> Array:
    f = -np.expm1(-t)
    root = np.sqrt(f)
    # ive carries exp(-2 v sqrt f) out of the Bessel function
    return (1 - f) / (v * root) * np.exp(-v * (1 - root) ** 2) * ive(1, 2 * v * root)


def _product_exponential(v: Array, t: float) -> Array:
    k = np.arange(400.0)[:, None]
    log_terms = 3 * k * np.log(v) + k * np.log(t) - gammaln(k + 2) - gammaln(2 * k + 2) - v * (1 + t)
    return np.exp(log_terms).sum(axis=0)


_MONO = ag.Monodisperse(volume=1.0, number=1.0)
_EXP = ag.Exponential(mean_volume=1.0, number=1.0)

CONSTANT_MONO = ClosedSolution(
    "constant kernel, monodisperse",
    ag.kernels.constant(1.0),
    _MONO,
    20.0,
    _constant_discrete,
    lambda t: (1 / (1 + t / 2), 1.0, 1 + t, 1 + 3 * t + 1.5 * t**2),
    True,
)
SUM_MONO = ClosedSolution(
    "sum kernel, monodisperse",
    ag.kernels.additive(1.0),
    _MONO,
    2.0,
    _sum_discrete,
    lambda t: (np.exp(-t), 1.0, np.exp(2 * t), 3 * np.exp(4 * t) - 2 * np.exp(3 * t)),
    True,
)
PRODUCT_MONO = ClosedSolution(
    "product kernel, monodisperse, 90 % of the way to gelation",
    ag.kernels.multiplicative(1.0),
    _MONO,
    0.9,
    _product_discrete,
    lambda t: (1 - t / 2, 1.0, 1 / (1 - t), 1 / (1 - t) ** 3),
    True,
)
CONSTANT_EXP = ClosedSolution(
    "constant kernel, exponential",
    ag.kernels.constant(1.0),
    _EXP,
    20.0,
    _constant_exponential,
    lambda t: (1 / (1 + t / 2), 1.0, 2 + t, 6 * (1 + t / 2) ** 2),
    False,
)
SUM_EXP = ClosedSolution(
    "sum kernel, exponential",
    ag.kernels.additive(1.0),
    _EXP,
    2.0,
    _sum_exponential,
    lambda t: (np.exp(-t), 1.0, 2 * np.exp(2 * t), 12 * np.exp(4 * t) - 6 * np.exp(3 * t)),
    False,
)
PRODUCT_EXP = ClosedSolution(
    "product kernel, exponential, 90 % of the way to gelation",
    ag.kernels.multiplicative(1.0),
    _EXP,
    0.45,
    _product_exponential,
    lambda t: (1 - t / 2, 1.0, 2 / (1 - 2 * t), 6 / (1 - 2 * t) ** 3),
    False,
)

DISCRETE = [CONSTANT_MONO, SUM_MONO, PRODUCT_MONO]
CONTINUOUS = [CONSTANT_EXP, SUM_EXP, PRODUCT_EXP]
ALL = DISCRETE + CONTINUOUS
