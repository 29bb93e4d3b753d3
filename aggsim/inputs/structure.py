"""How large an aggregate is that holds a given volume of solid."""

from __future__ import annotations

from dataclasses import KW_ONLY, dataclass
from typing import Protocol, runtime_checkable

import numpy as np
from numpy.typing import ArrayLike, NDArray

from aggsim._checks import FloatArray, refuse, scalar
from aggsim.inputs.particles import Particles


@runtime_checkable
class Structure(Protocol):
    """What every structure offers; an own one needs these four members and nothing else."""

    @property
    def particles(self) -> Particles:
        """The primary particles."""

    def collision_diameter(self, volume: ArrayLike) -> FloatArray:
        """Diameter [m] that another particle has to reach, for solid `volume` [m3]."""

    def hydrodynamic_diameter(self, volume: ArrayLike) -> FloatArray:
        """Diameter [m] of the sphere with the same drag, for solid `volume` [m3]."""

    def effective_density(self, volume: ArrayLike, medium_density: float) -> FloatArray:
        """Density [kg/m3] of the aggregate with its pores full of medium, for solid `volume` [m3]."""


@dataclass(frozen=True)
class Compact:
    """Aggregates without pores: drops that coalesce, or grains that pack densely.

    Every diameter is that of the sphere of equal volume, d = (6 v/pi)**(1/3).

    Parameters
    ----------
    particles : Particles
    """

    particles: Particles

    def __post_init__(self) -> None:
        _require_particles(self.particles)

    def collision_diameter(self, volume: ArrayLike) -> FloatArray:
        """Diameter [m] of the sphere, for `volume` [m3] of any shape."""
        return _sphere_diameter(np.asarray(volume, dtype=np.float64))

    def hydrodynamic_diameter(self, volume: ArrayLike) -> FloatArray:
        """Diameter [m] of the sphere, for `volume` [m3] of any shape."""
        return self.collision_diameter(volume)

    def effective_density(self, volume: ArrayLike, medium_density: float) -> FloatArray:
        """Density [kg/m3] of the solid, for `volume` [m3] of any shape."""
        return np.full(np.shape(volume), self.particles.density)[()]


@dataclass(frozen=True)
class Fractal:
    """Aggregates that get looser as they grow: number of primary particles N = k (d/d0)**D.

    d = d0 (v/(v0 k))**(1/D) is the collision diameter of an aggregate that holds the solid volume v = N v0.
    An aggregate is never smaller than the solid sphere of its volume, and whatever is not larger than one
    primary particle is a solid sphere. With a prefactor below 1 the diameter therefore steps up between one
    primary particle and the smallest aggregate. `dimension=3` with `prefactor=1` is `Compact`.

    Parameters
    ----------
    particles : Particles
    dimension : float
        Fractal dimension D [1], above 1 and at most 3; 1.8 for diffusion-limited, 2.1 for reaction-limited
        aggregates, 2 to 2.6 for flocs grown in shear.
    prefactor : float
        k [1], for the collision diameter; 0.1 to 10. A prefactor k0 that was measured for the radius of
        gyration becomes k0 (D/(D + 2))**(D/2) if the aggregate is taken as a ball of uniform density.
    hydrodynamic_ratio : float
        Hydrodynamic over collision diameter of an aggregate [1]; 0.1 to 3.

    Raises
    ------
    InputError
        If a value is outside its range.

    References
    ----------
    1. C. M. Sorensen (2011), The mobility of fractal aggregates: a review, Aerosol Sci. Technol. 45, 765,
       DOI 10.1080/02786826.2011.560909.
    """

    particles: Particles
    _: KW_ONLY
    dimension: float
    prefactor: float = 1.0
    hydrodynamic_ratio: float = 1.0

    def __post_init__(self) -> None:
        _require_particles(self.particles)
        keep = object.__setattr__
        hint = "1.8 for diffusion-limited, 2.1 for reaction-limited aggregates, 3 for compact ones"
        keep(self, "dimension", scalar("dimension", self.dimension, above=1.0, most=3.0, hint=hint))
        keep(self, "prefactor", scalar("prefactor", self.prefactor, least=0.1, most=10.0))
        keep(
            self,
            "hydrodynamic_ratio",
            scalar("hydrodynamic_ratio", self.hydrodynamic_ratio, least=0.1, most=3.0),
        )

    def collision_diameter(self, volume: ArrayLike) -> FloatArray:
        """Outer diameter d [m], for solid `volume` [m3] of any shape."""
        solid, outer, single = self._diameters(volume)
        return np.where(single, solid, outer)[()]

    def hydrodynamic_diameter(self, volume: ArrayLike) -> FloatArray:
        """Diameter [m] of the sphere with the same drag, for solid `volume` [m3] of any shape.

        It is not below that of the solid sphere, which has the least drag of all bodies of its volume.
        """
        solid, outer, single = self._diameters(volume)
        return np.where(single, solid, np.maximum(self.hydrodynamic_ratio * outer, solid))[()]

    def effective_density(self, volume: ArrayLike, medium_density: float) -> FloatArray:
        """Density [kg/m3] of the aggregate with its pores full of medium, for solid `volume` [m3].

        rho + (rho_p - rho) v/(pi d**3/6), which is rho + (rho_p - rho) (d/d0)**(D - 3) for prefactor 1.
        """
        v = np.asarray(volume, dtype=np.float64)
        # the ratio of diameters, not of volumes: exactly 1 for a solid sphere
        solid_share = (_sphere_diameter(v) / self.collision_diameter(v)) ** 3
        return (solid_share * self.particles.density + (1.0 - solid_share) * medium_density)[()]

    def _diameters(self, volume: ArrayLike) -> tuple[FloatArray, FloatArray, NDArray[np.bool_]]:
        """Diameter of the solid sphere, outer diameter, and whether it is one primary particle at most."""
        v = np.asarray(volume, dtype=np.float64)
        count = v / self.particles.volume
        solid = _sphere_diameter(v)
        if self.dimension == 3.0:  # the cube root of Compact, so that the two agree to the last digit
            outer = _sphere_diameter(v / self.prefactor)
        else:
            outer = self.particles.diameter * (count / self.prefactor) ** (1.0 / self.dimension)
        # a pivot that stands for one particle may miss its volume by round-off
        single = count <= 1.0 + 1e-9
        return solid, np.maximum(outer, solid), single


def _sphere_diameter(volume: FloatArray) -> FloatArray:
    return np.cbrt(6.0 / np.pi * volume)


def _require_particles(particles: Particles) -> None:
    if not isinstance(particles, Particles):
        refuse(
            "particles",
            repr(particles),
            "Particles",
            "Particles(diameter=..., density=...) as first argument",
        )
