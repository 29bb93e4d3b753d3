"""Closed solutions with aggregation, breakage and flow, in units of the start or the feed: number 1, mean volume 1.

Convention: dN/dt = -beta N^2 / 2 for the constant kernel beta.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.special import erf, gammaln, i0e, i1e, ive

from aggsim._checks import FloatArray
from aggsim.breakage import Breakage, fragments, rates
from aggsim.kernels import Kernel, additive, constant, multiplicative
from aggsim.sizes import Exponential, Monodisperse, StartingDistribution
from aggsim.vessels import Batch

MONO: StartingDistribution = Monodisperse(volume=1.0, number=1.0)
EXPONENTIAL: StartingDistribution = Exponential(mean_volume=1.0, number=1.0)

# ---- aggregation

SMOLUCHOWSKI = "M. von Smoluchowski, Z. Phys. Chem. 92 (1917) 129"
SCOTT = "W. T. Scott, J. Atmos. Sci. 25 (1968) 54"
GOLOVIN = "A. M. Golovin, Bull. Acad. Sci. USSR Geophys. Ser. 5 (1963) 482"
MCLEOD = "J. B. McLeod, Q. J. Math. 13 (1962) 119"


@dataclass(frozen=True)
class ClosedSolution:
    """One problem of aggregation with a closed solution.

    `number(k or v, t)` is the number of k-mers, or the number density at v; `moments(t)` are M0 to M3.
    """

    name: str
    source: str
    kernel: Kernel
    start: StartingDistribution
    time: float
    number: Callable[[FloatArray, float], FloatArray]
    moments: Callable[[float], tuple[float, float, float, float]]
    discrete: bool


def _constant_discrete(k: FloatArray, t: float) -> FloatArray:
    T = t / 2
    return np.asarray(np.exp((k - 1) * np.log(T) - (k + 1) * np.log1p(T)))


def _sum_discrete(k: FloatArray, t: float) -> FloatArray:
    f = -np.expm1(-t)
    return np.asarray((1 - f) * np.exp((k - 1) * np.log(k * f) - k * f - gammaln(k + 1)))


def _product_discrete(k: FloatArray, t: float) -> FloatArray:
    return np.asarray(np.exp((k - 1) * np.log(k * t) - k * t - np.log(k) - gammaln(k + 1)))


def _constant_exponential(v: FloatArray, t: float) -> FloatArray:
    T = t / 2
    return np.asarray(np.exp(-v / (1 + T)) / (1 + T) ** 2)


def _sum_exponential(v: FloatArray, t: float) -> FloatArray:
    f = -np.expm1(-t)
    root = np.sqrt(f)
    # ive carries exp(-2 v sqrt f) out of the Bessel function
    return np.asarray((1 - f) / (v * root) * np.exp(-v * (1 - root) ** 2) * ive(1, 2 * v * root))


def _product_exponential(v: FloatArray, t: float) -> FloatArray:
    # the terms of the series peak at k = v (t / 4)^(1/3), with a standard deviation of sqrt(k / 3)
    v = np.asarray(v, dtype=np.float64)
    peak = np.floor(v * (t / 4) ** (1 / 3))
    reach = np.ceil(30.0 + 6.0 * np.sqrt(peak.max()))
    k = peak + np.arange(-reach, reach + 1.0).reshape(-1, *(1,) * v.ndim)
    n = np.maximum(k, 0.0)
    log_terms = 3 * n * np.log(v) + n * np.log(t) - gammaln(n + 2) - gammaln(2 * n + 2) - v * (1 + t)
    return np.asarray(np.where(k < 0.0, 0.0, np.exp(log_terms)).sum(axis=0))


CONSTANT_MONO = ClosedSolution(
    "constant kernel, monodisperse",
    SMOLUCHOWSKI,
    constant(1.0),
    MONO,
    20.0,
    _constant_discrete,
    lambda t: (1 / (1 + t / 2), 1.0, 1 + t, 1 + 3 * t + 1.5 * t**2),
    True,
)
SUM_MONO = ClosedSolution(
    "sum kernel, monodisperse",
    GOLOVIN,
    additive(1.0),
    MONO,
    2.0,
    _sum_discrete,
    lambda t: (np.exp(-t), 1.0, np.exp(2 * t), 3 * np.exp(4 * t) - 2 * np.exp(3 * t)),
    True,
)
PRODUCT_MONO = ClosedSolution(
    "product kernel, monodisperse, 90 % of the way to gelation",
    MCLEOD,
    multiplicative(1.0),
    MONO,
    0.9,
    _product_discrete,
    lambda t: (1 - t / 2, 1.0, 1 / (1 - t), 1 / (1 - t) ** 3),
    True,
)
CONSTANT_EXP = ClosedSolution(
    "constant kernel, exponential",
    SCOTT,
    constant(1.0),
    EXPONENTIAL,
    20.0,
    _constant_exponential,
    lambda t: (1 / (1 + t / 2), 1.0, 2 + t, 6 * (1 + t / 2) ** 2),
    False,
)
SUM_EXP = ClosedSolution(
    "sum kernel, exponential",
    f"{GOLOVIN}; {SCOTT}",
    additive(1.0),
    EXPONENTIAL,
    2.0,
    _sum_exponential,
    lambda t: (np.exp(-t), 1.0, 2 * np.exp(2 * t), 12 * np.exp(4 * t) - 6 * np.exp(3 * t)),
    False,
)
PRODUCT_EXP = ClosedSolution(
    "product kernel, exponential, 90 % of the way to gelation",
    SCOTT,
    multiplicative(1.0),
    EXPONENTIAL,
    0.45,
    _product_exponential,
    lambda t: (1 - t / 2, 1.0, 2 / (1 - 2 * t), 6 / (1 - 2 * t) ** 3),
    False,
)

DISCRETE = [CONSTANT_MONO, SUM_MONO, PRODUCT_MONO]
CONTINUOUS = [CONSTANT_EXP, SUM_EXP, PRODUCT_EXP]
ALL = DISCRETE + CONTINUOUS

# ---- breakage into two, every split equally likely: b = 2/u

ZIFF_MCGRADY = "R. M. Ziff, E. D. McGrady, J. Phys. A 18 (1985) 3027, doi:10.1088/0305-4470/18/15/026"
REVERSIBLE = (
    "P. J. Blatz, A. V. Tobolsky, J. Phys. Chem. 49 (1945) 77; B. J. McCoy, G. Madras, Chem. Eng. Sci. 58 (2003) 2903; "
    "P. L. C. Lage, Chem. Eng. Sci. 57 (2002) 4253"
)


def uniform(coefficient: float, exponent: float) -> Breakage:
    """Binary breakage, every split equally likely, at the rate coefficient * v^exponent."""
    rate = rates.power_law(coefficient=coefficient, exponent=exponent)
    return Breakage(rate=rate, fragments=fragments.uniform_binary())


@dataclass(frozen=True)
class Breaking:
    """Breakage alone: density n(v, t) below the largest size, number M0(t), number left of a first single size.

    `times` are those of the published values; `second` is M2(t) where it has a closed form.
    """

    name: str
    exponent: float
    start: StartingDistribution
    times: tuple[float, ...]
    density: Callable[[FloatArray, float], FloatArray]
    number: Callable[[float], float] | None
    second: Callable[[float], float] | None
    left: Callable[[float], float] = lambda t: 0.0


B1 = Breaking(
    "B1: S = v, exponential",
    1.0,
    EXPONENTIAL,
    (1.0, 3.0, 10.0),
    lambda v, t: np.asarray((1 + t) ** 2 * np.exp(-v * (1 + t))),
    lambda t: 1 + t,
    lambda t: 2 / (1 + t),
)
B2 = Breaking(
    "B2: S = v^2, exponential",
    2.0,
    EXPONENTIAL,
    (1.0, 3.0, 10.0),
    lambda v, t: np.asarray(np.exp(-t * v**2 - v) * (1 + 2 * t * (1 + v))),
    None,
    None,
)
B3 = Breaking(
    "B3: S = v, one size",
    1.0,
    MONO,
    (1.0, 5.0, 10.0),
    lambda v, t: np.asarray(np.exp(-t * v) * (2 * t + t**2 * (1 - v))),
    lambda t: 1 + t,
    # of the density, 2 (t - 1 + exp(-t)) / t^2 - exp(-t), and of what is left of the first size
    lambda t: 2 * (t - 1 + np.exp(-t)) / t**2,
    lambda t: float(np.exp(-t)),
)
B4 = Breaking(
    "B4: S = v^2, one size",
    2.0,
    MONO,
    (1.0, 5.0, 10.0),
    lambda v, t: np.asarray(2 * t * np.exp(-t * v**2)),
    lambda t: float(np.exp(-t) + np.sqrt(np.pi * t) * erf(np.sqrt(t))),
    lambda t: float(np.sqrt(np.pi / t) * erf(np.sqrt(t)) / 2),
    lambda t: float(np.exp(-t)),
)
BREAKING = [B1, B2, B3, B4]


@dataclass(frozen=True)
class Reversible:
    """Constant kernel 1 with binary uniform breakage S = s v; an exponential start stays exponential."""

    coefficient: float

    @property
    def vessel(self) -> Batch:
        """The batch."""
        return Batch(constant(1.0), breakage=uniform(self.coefficient, 1.0))

    @property
    def last(self) -> float:
        """Number at the steady state."""
        return float(np.sqrt(2 * self.coefficient))

    def number(self, t: FloatArray) -> FloatArray:
        """M0(t)."""
        u = np.tanh(self.last * t / 2)
        return np.asarray(self.last * (1 + self.last * u) / (self.last + u))

    def density(self, v: FloatArray, number: float) -> FloatArray:
        """n(v) where the number is `number`; M2 = 2 / number."""
        return np.asarray(number**2 * np.exp(-number * v))


# ---- stirred tank with a constant kernel, tau = beta N_feed residence time

HOUNSLOW = "M. J. Hounslow, AIChE J. 36 (1990) 106"


def tank_number(tau: float) -> float:
    """Number over that of the feed."""
    return float((np.sqrt(1 + 2 * tau) - 1) / tau)


def tank_kmers(k: FloatArray, tau: float) -> FloatArray:
    """Number of k-mers over the number of the monodisperse feed."""
    d = 1 + 2 * tau
    log = k * np.log(2 * tau / d) + gammaln(2 * k - 1) - (2 * k - 1) * np.log(2) - gammaln(k + 1) - gammaln(k)
    return np.asarray(np.sqrt(d) / tau * np.exp(log))


def tank_density(v: FloatArray, tau: float) -> FloatArray:
    """Density of number over the number of an exponential feed."""
    d = 1 + 2 * tau
    z = tau * v / d
    # the scaled Bessel functions carry exp(-z)
    return np.asarray(np.exp(z - (1 + tau) * v / d) * (i0e(z) - i1e(z)) / np.sqrt(d))


def tank_moments(second: float, third: float, tau: float) -> tuple[float, float, float, float]:
    """M0 to M3 for a feed of these M2 and M3."""
    m2 = second + tau
    return tank_number(tau), 1.0, m2, third + 3 * tau * m2
