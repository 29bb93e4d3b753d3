"""The stability ratio of every pair of aggregates, to divide a kernel by."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol, runtime_checkable

import numpy as np
from numpy.typing import ArrayLike

from aggsim._checks import FloatArray, refuse
from aggsim.inputs import Medium, Structure
from aggsim.interaction.fuchs import capped_ratio, log_fuchs
from aggsim.interaction.models import SUPERPOSITION, UNRETARDED, DoubleLayer, Repulsion, VanDerWaals
from aggsim.interaction.potentials import positive
from aggsim.interaction.profile import PairEnergy, pair_energy


@runtime_checkable
class Carrier(Protocol):
    """Which spheres interact when aggregates meet; an own one needs this method and nothing else."""

    def interacting_diameter(self, structure: Structure, volume: FloatArray) -> FloatArray:
        """Diameter [m] of the sphere that carries the interaction, for solid `volume` [m3] of any shape."""


@dataclass(frozen=True)
class PrimaryParticles:
    """Aggregates touch with one primary particle each: the stability ratio is the same for all pairs."""

    def interacting_diameter(self, structure: Structure, volume: FloatArray) -> FloatArray:
        """Diameter [m] of a primary particle, for `volume` [m3] of any shape."""
        return np.full(np.shape(volume), structure.particles.diameter)


@dataclass(frozen=True)
class WholeSpheres:
    """Aggregates interact as solid spheres of their collision diameter: drops, or dense grains."""

    def interacting_diameter(self, structure: Structure, volume: FloatArray) -> FloatArray:
        """Collision diameter [m], for solid `volume` [m3] of any shape."""
        return np.asarray(structure.collision_diameter(volume))


@dataclass(frozen=True)
class PairwiseStabilityRatio:
    """Stability ratio W(v, w) [1] of two particle volumes, made by `pairwise_stability_ratio`.

    Parameters
    ----------
    structure : Structure
    energy : PairEnergy
        Of two primary particles; holds the models, the medium and the surfaces.
    carried_by : Carrier
    hydrodynamics : bool
    """

    structure: Structure
    energy: PairEnergy
    carried_by: Carrier
    hydrodynamics: bool

    def __call__(self, v: ArrayLike, w: ArrayLike) -> FloatArray:
        """Stability ratio [1] for solid volumes `v` and `w` [m3], which broadcast; at most 1e300.

        Raises
        ------
        InputError
            If a volume is not above 0 and finite, or the integral diverges (see `stability_ratio`).
        """
        return capped_ratio(self.logarithm(v, w))[()]

    def logarithm(self, v: ArrayLike, w: ArrayLike) -> FloatArray:
        """Natural logarithm of the stability ratio [1], without an upper limit; arguments and errors alike."""
        first = self.carried_by.interacting_diameter(self.structure, positive("v", v, "m3"))
        second = self.carried_by.interacting_diameter(self.structure, positive("w", w, "m3"))
        # each unordered pair of sizes once; complex numbers sort by their real, then their imaginary part
        pairs = np.minimum(first, second) + 1j * np.maximum(first, second)
        different, place = np.unique(pairs, return_inverse=True)
        thermal = self.energy.medium.thermal_energy
        ratio = log_fuchs(self.energy.between, different.real, different.imag, thermal, self.hydrodynamics)
        return ratio[place].reshape(pairs.shape)[()]


_PRIMARY = PrimaryParticles()


def pairwise_stability_ratio(
    structure: Structure,
    medium: Medium,
    *,
    carried_by: Carrier = _PRIMARY,
    double_layer: DoubleLayer | None = SUPERPOSITION,
    van_der_waals: VanDerWaals | None = UNRETARDED,
    steric: Repulsion | None = None,
    short_range: Repulsion | None = None,
    hydrodynamics: bool = True,
) -> PairwiseStabilityRatio:
    """Stability ratio as a function of two particle volumes, so that `kernel / it` works.

    W is the integral of `stability_ratio` for the spheres that carry the interaction. Divide the Brownian kernel
    by it; a shear kernel takes a collision efficiency instead.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal, around particles with `hamaker` and `surface_potential`.
    medium : Medium
        With permittivity and ionic strength.
    carried_by : Carrier
        `PrimaryParticles()` for aggregates that keep their primary particles, `WholeSpheres()` for spheres of
        the collision diameter of the aggregate.
    double_layer, van_der_waals, steric, short_range
        As in `pair_energy`.
    hydrodynamics : bool
        Whether the liquid between the particles slows their approach.

    Raises
    ------
    InputError
        If a part lacks a value that it needs, or an argument is of the wrong kind.

    Warns
    -----
    ValidityWarning
        If a model is used outside the range of its source for two primary particles.

    References
    ----------
    1. N. Fuchs (1934), Z. Phys. 89, 736, DOI 10.1007/BF01341386.
    """
    if not isinstance(structure, Structure):
        refuse("structure", repr(structure), "Compact, Fractal or another Structure", "Compact(particles)")
    if isinstance(carried_by, type) or not isinstance(carried_by, Carrier):
        refuse("carried_by", repr(carried_by), "PrimaryParticles() or WholeSpheres()")
    energy = pair_energy(
        structure.particles,
        medium,
        double_layer=double_layer,
        van_der_waals=van_der_waals,
        steric=steric,
        short_range=short_range,
    )
    return PairwiseStabilityRatio(structure, energy, carried_by, hydrodynamics)
