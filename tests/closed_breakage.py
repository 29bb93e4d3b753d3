"""Closed solutions with breakage and flow, in units of the start or the feed: number 1, mean volume 1.

Sources: binary uniform breakage b = 2/u at the rates S = v and S = v^2, R. M. Ziff and E. D. McGrady, J. Phys. A 18
(1985) 3027, doi:10.1088/0305-4470/18/15/026; with a constant kernel, P. J. Blatz and A. V. Tobolsky, J. Phys. Chem.
49 (1945) 77, B. J. McCoy and G. Madras, Chem. Eng. Sci. 58 (2003) 2903, and P. L. C. Lage, Chem. Eng. Sci. 57 (2002)
4253; stirred tank, M. J. Hounslow, AIChE J. 36 (1990) 106, and the like for k-mers.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.special import erf, gammaln, i0e, i1e

import aggsim as ag

Array = np.ndarray

MONO = ag.Monodisperse(volume=1.0, number=1.0)
EXPONENTIAL = ag.Exponential(mean_volume=1.0, number=1.0)


def uniform(coefficient: float, exponent: float) -> ag.Breakage:
    """Binary breakage, every split equally likely, at the rate coefficient * v^exponent."""
    rate = ag.rates.power_law(coefficient=coefficient, exponent=exponent)
    return ag.Breakage(rate=rate, fragments=ag.fragments.uniform_binary())


@dataclass(frozen=True)
class Breaking:
    """Breakage alone: density n(v, t) below the largest size, number M0(t), number left of a first single size.

    `times` are those of the published values; `second` is M2(t) where it has a closed form.
    """

    name: str
    exponent: float
    start: ag.StartingDistribution
    times: tuple[float, ...]
    density: Callable[[Array, float], Array]
    number: Callable[[float], float] | None
    second: Callable[[float], float] | None
    left: Callable[[float], float] = lambda t: 0.0


B1 = Breaking(
    "B1: S = v, exponential",
    1.0,
    EXPONENTIAL,
    (1.0, 3.0, 10.0),
    lambda v, t: (1 + t) ** 2 * np.exp(-v * (1 + t)),
    lambda t: 1 + t,
    lambda t: 2 / (1 + t),
)
B2 = Breaking(
    "B2: S = v^2, exponential",
    2.0,
    EXPONENTIAL,
    (1.0, 3.0, 10.0),
    lambda v, t: np.exp(-t * v**2 - v) * (1 + 2 * t * (1 + v)),
    None,
    None,
)
B3 = Breaking(
    "B3: S = v, one size",
    1.0,
    MONO,
    (1.0, 5.0, 10.0),
    lambda v, t: np.exp(-t * v) * (2 * t + t**2 * (1 - v)),
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
    lambda v, t: 2 * t * np.exp(-t * v**2),
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
    def vessel(self) -> ag.Batch:
        return ag.Batch(ag.kernels.constant(1.0), breakage=uniform(self.coefficient, 1.0))

    @property
    def last(self) -> float:
        """Number at the steady state."""
        return float(np.sqrt(2 * self.coefficient))

    def number(self, t: Array) -> Array:
        """M0(t)."""
        u = np.tanh(self.last * t / 2)
        return self.last * (1 + self.last * u) / (self.last + u)

    def density(self, v: Array, number: float) -> Array:
        """n(v) where the number is `number`; M2 = 2 / number."""
        return number**2 * np.exp(-number * v)


def tank_number(tau: float) -> float:
    """Number over that of the feed, in a stirred tank with constant kernel, tau = beta N_feed residence time."""
    return float((np.sqrt(1 + 2 * tau) - 1) / tau)


def tank_kmers(k: Array, tau: float) -> Array:
    """Number of k-mers over the number of the monodisperse feed."""
    d = 1 + 2 * tau
    log = k * np.log(2 * tau / d) + gammaln(2 * k - 1) - (2 * k - 1) * np.log(2) - gammaln(k + 1) - gammaln(k)
    return np.sqrt(d) / tau * np.exp(log)


def tank_density(v: Array, tau: float) -> Array:
    """Density of number over the number of an exponential feed."""
    d = 1 + 2 * tau
    z = tau * v / d
    # the scaled Bessel functions carry exp(-z)
    return np.exp(z - (1 + tau) * v / d) * (i0e(z) - i1e(z)) / np.sqrt(d)


def tank_moments(second: float, third: float, tau: float) -> tuple[float, float, float, float]:
    """M0 to M3 for a feed of these M2 and M3."""
    m2 = second + tau
    return tank_number(tau), 1.0, m2, third + 3 * tau * m2
