"""Starting distributions: laws of particle size that know no grid, in SI units.

Each law states its sizes and, in one of three ways, how many particles there are.
"""

from __future__ import annotations

import copy
import math
from abc import abstractmethod
from dataclasses import dataclass
from typing import Any, Self

import numpy as np
from numpy.typing import ArrayLike
from scipy import special

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import DistributionError
from aggsim.sizes import distribution
from aggsim.sizes.distribution import Mixture as Mixture
from aggsim.sizes.distribution import StartingDistribution as StartingDistribution
from aggsim.sizes.distribution import amount_as_number, size_as_volume


class _Law(StartingDistribution):
    """A law that is stated by its sizes and a number, so that scaling replaces the number."""

    number: float

    def __mul__(self, factor: float) -> Self:
        changed = copy.copy(self)
        changed._set(number=self.number * distribution.factor(factor))
        return changed

    def _set(self, **values: Any) -> None:
        for name, value in values.items():
            object.__setattr__(self, name, value)  # frozen: only at construction


def _log(volume: ArrayLike) -> FloatArray:
    """ln v, with a large negative figure for volumes down to zero and below, where no particles are."""
    v = np.asarray(volume, dtype=np.float64)
    return np.asarray(np.log(np.maximum(v, np.finfo(np.float64).tiny)))


@dataclass(frozen=True, init=False)
class Monodisperse(_Law):
    """Particles of one size.

    `diameter` [m] or `volume` [m3]; and the amount as `number` [1/m3], `volume_fraction` [1], or
    `mass_concentration` [kg/m3] of solids together with their `density` [kg/m3].

    Raises InputError for a size or amount that is missing, stated twice or impossible.
    """

    volume: float
    number: float

    def __init__(
        self,
        *,
        diameter: float | None = None,
        volume: float | None = None,
        number: float | None = None,
        volume_fraction: float | None = None,
        mass_concentration: float | None = None,
        density: float | None = None,
    ) -> None:
        size = size_as_volume("", diameter, volume)
        amount = amount_as_number(
            size, number, volume_fraction, mass_concentration, density, physical=diameter is not None
        )
        self._set(volume=size, number=amount)

    @property
    def atoms(self) -> tuple[tuple[float, float], ...]:
        return ((self.volume, self.number),)

    @property
    def log_width(self) -> float:
        return 0.0

    @property
    def _support(self) -> tuple[float, float]:
        return self.volume, self.volume

    def moment(self, k: float) -> float:
        return float(self.number * self.volume**k)

    def density(self, volume: ArrayLike) -> FloatArray:
        return np.zeros(np.shape(volume))

    def number_below(self, volume: ArrayLike) -> FloatArray:
        return np.asarray(np.where(np.asarray(volume) >= self.volume, self.number, 0.0))

    def volume_below(self, volume: ArrayLike) -> FloatArray:
        return self.number_below(volume) * self.volume

    def limits(self, share: float = 1e-9) -> tuple[float, float]:
        distribution.share(share)
        return self.volume, self.volume


@dataclass(frozen=True, init=False)
class LogNormal(_Law):
    """Lognormal sizes: ln d is normal with standard deviation ln gsd.

    `median_diameter` [m]; `gsd`, the geometric standard deviation of diameter [1]; `median_of` says whose
    median it is: 0 number, 2 surface, 3 volume. The number median follows from Hatch and Choate [1]:
    d_0 = d_r exp(-r ln^2 gsd). The amount as in `Monodisperse`.

    Raises InputError for a size, width or amount that is missing or impossible.

    [1] Hatch and Choate (1929), J. Franklin Inst. 207, 369, doi:10.1016/S0016-0032(29)91451-4.
    """

    median_diameter: float
    gsd: float
    number: float
    median_of: float

    def __init__(
        self,
        *,
        median_diameter: float,
        gsd: float,
        number: float | None = None,
        volume_fraction: float | None = None,
        mass_concentration: float | None = None,
        density: float | None = None,
        median_of: float = 0.0,
    ) -> None:
        median = _checks.diameter("median_diameter", median_diameter)
        width = _checks.scalar(
            "gsd",
            gsd,
            above=1.0,
            most=10.0,
            hint="gsd is the geometric standard deviation, not a coefficient of variation: 1.3 is a narrow "
            "latex, 2 a broad powder; for equal particles (gsd=1) use Monodisperse",
        )
        kind = _checks.scalar(
            "median_of",
            median_of,
            least=0.0,
            most=3.0,
            hint="median_of=0 for the number median, 2 for surface, 3 for volume",
        )
        number_median = median * math.exp(-kind * math.log(width) ** 2)
        if number_median < _checks.SMALLEST_DIAMETER:
            raise DistributionError(
                f"median_diameter={median:g} m with gsd={width:g} and median_of={kind:g} puts the number "
                f"median at {number_median:.2g} m, below the size of an atom. Try: a smaller gsd, or a "
                "measured distribution."
            )
        self._set(median_diameter=median, gsd=width, median_of=kind, number=1.0)
        amount = amount_as_number(self.moment(1.0), number, volume_fraction, mass_concentration, density)
        self._set(number=amount)

    @property
    def _centre(self) -> float:
        """Mean of ln v by number."""
        diameter = math.log(self.median_diameter) - self.median_of * math.log(self.gsd) ** 2
        return 3.0 * diameter + math.log(math.pi / 6.0)

    @property
    def log_width(self) -> float:
        return 3.0 * math.log(self.gsd)

    @property
    def _support(self) -> tuple[float, float]:
        centre, width = self._centre, self.log_width
        return math.exp(centre - 9.0 * width), math.exp(centre + (6.0 * width + 9.0) * width)

    def moment(self, k: float) -> float:
        return self.number * math.exp(k * self._centre + 0.5 * (k * self.log_width) ** 2)

    def density(self, volume: ArrayLike) -> FloatArray:
        v = np.asarray(volume, dtype=np.float64)
        z = (np.log(v) - self._centre) / self.log_width
        return np.asarray(self.number * np.exp(-0.5 * z**2) / (math.sqrt(2.0 * math.pi) * self.log_width * v))

    def number_below(self, volume: ArrayLike) -> FloatArray:
        z = (_log(volume) - self._centre) / self.log_width
        return np.asarray(self.number * special.ndtr(z))

    def volume_below(self, volume: ArrayLike) -> FloatArray:
        z = (_log(volume) - self._centre) / self.log_width
        return np.asarray(self.moment(1.0) * special.ndtr(z - self.log_width))

    def limits(self, share: float = 1e-9) -> tuple[float, float]:
        z = -float(special.ndtri(distribution.share(share)))
        centre, width = self._centre, self.log_width
        return math.exp(centre - z * width), math.exp(centre + (width + z) * width)


class _GammaLaw(_Law):
    """n(v) = N a^a v^(a-1) exp(-a v / m) / (Gamma(a) m^a), mean volume m, shape a."""

    mean_volume: float

    @property
    @abstractmethod
    def _shape(self) -> float:
        """The shape a."""

    @property
    def log_width(self) -> float:
        return min(1.0, 1.0 / math.sqrt(self._shape))

    @property
    def _support(self) -> tuple[float, float]:
        top = float(special.gammainccinv(self._shape + 6.0, 1e-18))
        return self._scaled(float(special.gammaincinv(self._shape, 1e-18))), self._scaled(top)

    def moment(self, k: float) -> float:
        if self._shape + k <= 0.0:
            raise DistributionError(
                f"k={k:g} is not allowed; allowed: k above {-self._shape:g}, lower moments are infinite. "
                "Try: a law without particles of vanishing size, such as LogNormal."
            )
        ratio = float(special.poch(self._shape, k))  # Gamma(a + k) / Gamma(a)
        return float(self.number * ratio * (self.mean_volume / self._shape) ** k)

    def density(self, volume: ArrayLike) -> FloatArray:
        x = np.asarray(volume, dtype=np.float64) * (self._shape / self.mean_volume)
        # a power of zero volume is infinite for shape < 1, as the density is
        with np.errstate(divide="ignore"):
            log_density = special.xlogy(self._shape - 1.0, x) - x - math.lgamma(self._shape)
        return np.asarray(self.number * self._shape / self.mean_volume * np.exp(log_density))

    def number_below(self, volume: ArrayLike) -> FloatArray:
        x = np.maximum(np.asarray(volume, dtype=np.float64), 0.0) * (self._shape / self.mean_volume)
        return np.asarray(self.number * special.gammainc(self._shape, x))

    def volume_below(self, volume: ArrayLike) -> FloatArray:
        x = np.maximum(np.asarray(volume, dtype=np.float64), 0.0) * (self._shape / self.mean_volume)
        return np.asarray(self.number * self.mean_volume * special.gammainc(self._shape + 1.0, x))

    def limits(self, share: float = 1e-9) -> tuple[float, float]:
        share = distribution.share(share)
        small, large = special.gammaincinv(self._shape, share), special.gammainccinv(self._shape + 1.0, share)
        return self._scaled(float(small)), self._scaled(float(large))

    def _scaled(self, x: float) -> float:
        return max(x * (self.mean_volume / self._shape), float(np.finfo(np.float64).tiny))


@dataclass(frozen=True, init=False)
class Exponential(_GammaLaw):
    """Exponential law of volume: n(v) = (N / m) exp(-v / m).

    `mean_volume` m [m3], or `mean_diameter` [m], the diameter of the sphere of mean volume. The amount as in
    `Monodisperse`.

    Raises InputError for a size or amount that is missing, stated twice or impossible.
    """

    mean_volume: float
    number: float

    def __init__(
        self,
        *,
        mean_volume: float | None = None,
        mean_diameter: float | None = None,
        number: float | None = None,
        volume_fraction: float | None = None,
        mass_concentration: float | None = None,
        density: float | None = None,
    ) -> None:
        mean = size_as_volume("mean_", mean_diameter, mean_volume)
        amount = amount_as_number(
            mean, number, volume_fraction, mass_concentration, density, physical=mean_diameter is not None
        )
        self._set(mean_volume=mean, number=amount)

    @property
    def _shape(self) -> float:
        return 1.0


@dataclass(frozen=True, init=False)
class Gamma(_GammaLaw):
    """Gamma law of volume: n(v) = N a^a v^(a-1) exp(-a v / m) / (Gamma(a) m^a).

    `mean_volume` m [m3], or `mean_diameter` [m], the diameter of the sphere of mean volume; `shape` a [1],
    the inverse of the squared coefficient of variation of volume. The amount as in `Monodisperse`.

    Raises InputError for a size, shape or amount that is missing, stated twice or impossible.
    """

    mean_volume: float
    shape: float
    number: float

    def __init__(
        self,
        *,
        mean_volume: float | None = None,
        mean_diameter: float | None = None,
        shape: float,
        number: float | None = None,
        volume_fraction: float | None = None,
        mass_concentration: float | None = None,
        density: float | None = None,
    ) -> None:
        mean = size_as_volume("mean_", mean_diameter, mean_volume)
        a = _checks.scalar(
            "shape",
            shape,
            least=0.1,
            most=1e4,
            hint="shape=1 is the exponential law, larger ones are narrower",
        )
        amount = amount_as_number(
            mean, number, volume_fraction, mass_concentration, density, physical=mean_diameter is not None
        )
        self._set(mean_volume=mean, shape=a, number=amount)

    @property
    def _shape(self) -> float:
        return self.shape


@dataclass(frozen=True, init=False)
class Box(_Law):
    """Equal numbers per ratio of sizes between two limits: n(v) = N / (v ln(v_2 / v_1)).

    `smallest_diameter` and `largest_diameter` [m]. The amount as in `Monodisperse`.

    Raises InputError for sizes or an amount that are missing or impossible.
    """

    smallest_diameter: float
    largest_diameter: float
    number: float

    def __init__(
        self,
        *,
        smallest_diameter: float,
        largest_diameter: float,
        number: float | None = None,
        volume_fraction: float | None = None,
        mass_concentration: float | None = None,
        density: float | None = None,
    ) -> None:
        small = _checks.diameter("smallest_diameter", smallest_diameter)
        large = _checks.diameter("largest_diameter", largest_diameter)
        if large < small * 1.001:
            _checks.refuse(
                "largest_diameter",
                f"{large:g} m",
                f"above smallest_diameter={small:g} m by at least 0.1 %",
                "Monodisperse for equal particles",
            )
        self._set(smallest_diameter=small, largest_diameter=large, number=1.0)
        amount = amount_as_number(self.moment(1.0), number, volume_fraction, mass_concentration, density)
        self._set(number=amount)

    @property
    def log_width(self) -> float:
        return 3.0 * math.log(self.largest_diameter / self.smallest_diameter)

    @property
    def breaks(self) -> tuple[float, ...]:
        return self._support

    @property
    def _support(self) -> tuple[float, float]:
        return math.pi / 6.0 * self.smallest_diameter**3, math.pi / 6.0 * self.largest_diameter**3

    def moment(self, k: float) -> float:
        v, width = self._support[0], self.log_width
        return float(self.number * v**k * special.exprel(k * width))

    def density(self, volume: ArrayLike) -> FloatArray:
        v = np.asarray(volume, dtype=np.float64)
        inside = (v >= self._support[0]) & (v <= self._support[1])
        return np.asarray(np.where(inside, self.number / (self.log_width * np.where(inside, v, 1.0)), 0.0))

    def number_below(self, volume: ArrayLike) -> FloatArray:
        v = np.clip(np.asarray(volume, dtype=np.float64), *self._support)
        return np.asarray(self.number * np.log(v / self._support[0]) / self.log_width)

    def volume_below(self, volume: ArrayLike) -> FloatArray:
        v = np.clip(np.asarray(volume, dtype=np.float64), *self._support)
        return np.asarray(self.number * (v - self._support[0]) / self.log_width)

    def limits(self, share: float = 1e-9) -> tuple[float, float]:
        (small, large), share = self._support, distribution.share(share)
        return small * math.exp(share * self.log_width), large - share * (large - small)
