"""The contract of starting distributions, their sums, and the ways to state an amount of particles.

The size coordinate is the particle volume v [m3]; n(v) dv is the number of particles per cubic metre of
suspension with volumes between v and v + dv. A law may also hold discrete sizes ("atoms"). Laws add with +
and scale with *.
"""

from __future__ import annotations

import math
from abc import ABC, abstractmethod
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import DistributionError

DENSEST_PACKING = 0.74  # volume fraction of the densest packing of equal spheres
LIGHTEST_SOLID, HEAVIEST_SOLID = 20.0, 25_000.0  # kg/m3, aerogel and platinum metals

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(12)
_CELL = 0.5  # cells of half a scale of the law in ln v: 12 nodes are exact to round-off there


def nodes(edges: FloatArray, log_width: float) -> tuple[FloatArray, FloatArray]:
    """Return Gauss-Legendre nodes in ln v (volumes) and their weights dv for the cells between `edges`."""
    cuts = np.log(edges)
    # two edges that differ by round-off have the same logarithm and still make a cell
    pieces = np.maximum(np.ceil(np.diff(cuts) / (_CELL * min(log_width, 1.0))), 1.0).astype(np.intp)
    half = np.repeat(0.5 * np.diff(cuts) / pieces, pieces)
    order = np.arange(half.size) - np.repeat(np.cumsum(pieces) - pieces, pieces)
    centre = np.repeat(cuts[:-1], pieces) + (2 * order + 1) * half
    volumes = np.exp((centre[:, None] + half[:, None] * _NODES).ravel())
    return volumes, volumes * (half[:, None] * _WEIGHTS).ravel()


class StartingDistribution(ABC):
    """A law of particle size: what every starting distribution answers."""

    @abstractmethod
    def moment(self, k: float) -> float:
        """Return the total moment of order k in volume [m^(3k) / m3], atoms included; k is real."""

    @abstractmethod
    def density(self, volume: ArrayLike) -> FloatArray:
        """Return n(v) [1/m6] of the continuous part at `volume` [m3]."""

    @abstractmethod
    def number_below(self, volume: ArrayLike) -> FloatArray:
        """Return the number [1/m3] of particles up to and including `volume` [m3]."""

    @abstractmethod
    def volume_below(self, volume: ArrayLike) -> FloatArray:
        """Return the volume fraction [1] held by particles up to and including `volume` [m3]."""

    @abstractmethod
    def limits(self, share: float = 1e-9) -> tuple[float, float]:
        """Return two volumes [m3]: at most `share` of the number is smaller, of the volume larger."""

    @abstractmethod
    def __mul__(self, factor: float) -> StartingDistribution:
        """Return the same sizes with `factor` times as many particles."""

    @property
    def total_number(self) -> float:
        """Particles per volume of suspension [1/m3]."""
        return self.moment(0.0)

    @property
    def total_volume(self) -> float:
        """Volume fraction of solids [1]."""
        return self.moment(1.0)

    @property
    def atoms(self) -> tuple[tuple[float, float], ...]:
        """Discrete sizes: pairs of volume [m3] and number [1/m3]."""
        return ()

    @property
    def breaks(self) -> tuple[float, ...]:
        """Volumes [m3] at which the density is not smooth."""
        return ()

    @property
    @abstractmethod
    def log_width(self) -> float:
        """Smallest scale in ln v over which the continuous part varies; 0 where all sizes are discrete."""

    @property
    @abstractmethod
    def _support(self) -> tuple[float, float]:
        """Volumes [m3] outside which the density adds nothing to moments 0 to 6 in double precision."""

    def quadrature(self, edges: ArrayLike) -> tuple[FloatArray, FloatArray]:
        """Return point masses (volumes [m3], numbers [1/m3]) that stand for the continuous part.

        Gauss-Legendre in ln v inside each cell between two of the increasing `edges` [m3] (m + 1,), split
        further at `breaks` and to half a `log_width`, so that sum numbers f(volumes) is the integral of n f
        to round-off for smooth f.

        Raises DistributionError for edges that are not positive and increasing.
        """
        cells = _checks.array("edges", edges, "m3", above=0.0, increasing=True, error=DistributionError)
        low, high = max(cells[0], self._support[0]), min(cells[-1], self._support[1])
        if not low < high or self.log_width <= 0.0:
            return np.empty(0), np.empty(0)
        inside = np.concatenate([cells, np.asarray(self.breaks, dtype=np.float64)])
        cuts = np.unique(np.concatenate([[low, high], inside[(inside > low) & (inside < high)]]))
        volumes, widths = nodes(cuts, self.log_width)
        return volumes, self.density(volumes) * widths

    def __add__(self, other: StartingDistribution) -> Mixture:
        if not isinstance(other, StartingDistribution):
            return NotImplemented
        return Mixture((self, other))

    def __rmul__(self, factor: float) -> StartingDistribution:
        return self * factor


@dataclass(frozen=True)
class Mixture(StartingDistribution):
    """Sum of laws, such as a fine and a coarse fraction; `a + b` makes one.

    `parts`: the laws; mixtures among them are taken apart.

    Raises InputError for no parts, or parts that are not starting distributions.
    """

    parts: tuple[StartingDistribution, ...]

    def __post_init__(self) -> None:
        flat = tuple(_flatten(self.parts))
        if not flat:
            _checks.refuse("parts", self.parts, "at least one starting distribution", error=DistributionError)
        object.__setattr__(self, "parts", flat)

    def __mul__(self, factor: float) -> Mixture:
        return Mixture(tuple(part * factor for part in self.parts))

    @property
    def atoms(self) -> tuple[tuple[float, float], ...]:
        return tuple(atom for part in self.parts for atom in part.atoms)

    @property
    def breaks(self) -> tuple[float, ...]:
        return tuple(sorted({v for part in self.parts for v in part.breaks}))

    @property
    def log_width(self) -> float:
        return min((part.log_width for part in self.parts if part.log_width > 0.0), default=0.0)

    @property
    def _support(self) -> tuple[float, float]:
        return min(part._support[0] for part in self.parts), max(part._support[1] for part in self.parts)

    def moment(self, k: float) -> float:
        return math.fsum(part.moment(k) for part in self.parts)

    def density(self, volume: ArrayLike) -> FloatArray:
        return np.asarray(np.sum([part.density(volume) for part in self.parts], axis=0))

    def number_below(self, volume: ArrayLike) -> FloatArray:
        return np.asarray(np.sum([part.number_below(volume) for part in self.parts], axis=0))

    def volume_below(self, volume: ArrayLike) -> FloatArray:
        return np.asarray(np.sum([part.volume_below(volume) for part in self.parts], axis=0))

    def limits(self, share: float = 1e-9) -> tuple[float, float]:
        pairs = [part.limits(share) for part in self.parts]  # holds for each part, so for their sum
        return min(small for small, _ in pairs), max(large for _, large in pairs)

    def quadrature(self, edges: ArrayLike) -> tuple[FloatArray, FloatArray]:
        """Point masses (volumes [m3], numbers [1/m3]) of every part, each with its own nodes."""
        pairs = [part.quadrature(edges) for part in self.parts]
        return np.concatenate([v for v, _ in pairs]), np.concatenate([n for _, n in pairs])


def _flatten(parts: Iterable[Any]) -> Iterator[StartingDistribution]:
    for part in parts:
        if isinstance(part, Mixture):
            yield from part.parts
        elif isinstance(part, StartingDistribution):
            yield part
        else:
            _checks.refuse(
                "parts", repr(part), "starting distributions, such as LogNormal(...)", error=DistributionError
            )


def factor(value: Any) -> float:
    """Return a positive number to scale a distribution with."""
    return _checks.scalar("factor", value, above=0.0, hint="2.0 * start for twice the particles")


def share(value: Any) -> float:
    """Return a share that may be left out at each end of a distribution."""
    return _checks.scalar("share", value, above=0.0, below=0.5, hint="share=1e-9")


def amount_as_number(
    mean_volume: float,
    number: Any,
    volume_fraction: Any,
    mass_concentration: Any,
    density: Any,
    *,
    physical: bool = True,
) -> float:
    """Return particles per volume of suspension [1/m3] from whichever amount was given.

    `mean_volume` [m3] is that of the particles by number. With `physical`, a number is refused that would
    fill more than the whole suspension; sizes given as plain volumes may be dimensionless: no judgement.

    Raises InputError unless exactly one amount is given, and for amounts that cannot be.
    """
    amounts = {"number": number, "volume_fraction": volume_fraction, "mass_concentration": mass_concentration}
    given = [f"{name}={value!r}" for name, value in amounts.items() if value is not None]
    allowed = (
        "exactly one of number [1/m3], volume_fraction [1], mass_concentration [kg/m3] with density [kg/m3]"
    )
    if len(given) != 1:
        _checks.refuse(
            "amount of particles", " and ".join(given) or "nothing", allowed, "volume_fraction=1e-4"
        )
    if (density is None) != (mass_concentration is None):
        _checks.refuse(
            "density",
            repr(density),
            "the density of the solids [kg/m3], together with mass_concentration [kg/m3] and only then",
            "mass_concentration=0.05, density=1055.0 for 50 mg/L of polystyrene",
        )
    if number is not None:
        count = _checks.scalar("number", number, "1/m3", above=0.0)
        if physical and count * mean_volume > DENSEST_PACKING:
            _checks.refuse(
                "number",
                f"{count:g} 1/m3",
                f"at most {DENSEST_PACKING / mean_volume:.3g} 1/m3 (volume fraction {DENSEST_PACKING})",
                "check the unit: 1 per mL is 1e6 per m3",
            )
        return count
    if mass_concentration is not None:
        mass = _checks.scalar("mass_concentration", mass_concentration, "kg/m3", above=0.0)
        solid = _checks.scalar(
            "density",
            density,
            "kg/m3",
            least=LIGHTEST_SOLID,
            most=HEAVIEST_SOLID,
            hint="the density of the solids in kg/m3, 1055.0 for 1.055 g/cm3",
        )
        fraction = mass / solid
        if fraction > DENSEST_PACKING:
            _checks.refuse(
                "mass_concentration",
                f"{mass:g} kg/m3",
                f"at most {DENSEST_PACKING * solid:g} kg/m3 of solids of {solid:g} kg/m3",
                "check the unit: 1 mg/L is 1e-3 kg/m3",
            )
    else:
        fraction = _checks.scalar(
            "volume_fraction",
            volume_fraction,
            above=0.0,
            most=DENSEST_PACKING,
            hint="a share of the suspension, 0.01 for 1 %",
        )
    return fraction / mean_volume


def size_as_volume(prefix: str, diameter: Any, volume: Any) -> float:
    """Return a particle volume [m3] from a diameter [m] or a volume [m3], whichever was given."""
    if (diameter is None) == (volume is None):
        got = "nothing" if diameter is None else "both"
        _checks.refuse(
            f"{prefix}diameter or {prefix}volume",
            got,
            "exactly one of the two",
            f"{prefix}diameter=400e-9 for 400 nm",
        )
    if diameter is not None:
        return math.pi / 6.0 * _checks.diameter(f"{prefix}diameter", diameter) ** 3
    return _checks.scalar(f"{prefix}volume", volume, "m3", above=0.0)
