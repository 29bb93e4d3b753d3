"""Collisions by thermal motion (perikinetic)."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from aggsim._checks import FloatArray, refuse
from aggsim.inputs import Medium, Structure
from aggsim.kernels._arguments import require_medium, require_structure
from aggsim.kernels.base import Kernel, Part
from aggsim.kernels.slip import slip_correction


def brownian(structure: Structure, medium: Medium) -> Kernel:
    """Brownian collisions in a liquid.

    K = 2 kT/(3 mu) (d_i + d_j) (1/h_i + 1/h_j) with collision diameters d and hydrodynamic diameters h
    [1]_; 8 kT/(3 mu) for equal spheres. Every collision sticks: divide by a stability ratio where not.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal.
    medium : Medium

    Raises
    ------
    InputError
        If an argument is of another kind.

    References
    ----------
    .. [1] M. von Smoluchowski (1917), Z. phys. Chem. 92, 129, DOI 10.1515/zpch-1918-9209.
    """
    require_structure(structure)
    require_medium(medium)
    return Kernel((Part("Brownian", _Brownian(structure, medium)),))


def brownian_in_gas(structure: Structure, medium: Medium) -> Kernel:
    """Brownian collisions in a gas, from the continuum to the free-molecular regime.

    K = 4 pi D R (1 + Kn)/(1 + 2 Kn (1 + Kn)) with Kn = 2 D/(c R) [1]_, where R = (d_i + d_j)/2 is half the
    sum of the collision diameters, D = D_i + D_j with D_i = kT C(h_i)/(3 pi mu h_i) and slip correction C,
    and c = sqrt(c_i**2 + c_j**2) with c_i = sqrt(8 kT/(pi m_i)). The limits are 4 pi D R (continuum) and
    pi R**2 c (free molecular).

    Parameters
    ----------
    structure : Structure
        Compact or Fractal.
    medium : Medium
        A gas: its `mean_free_path` is needed.

    Raises
    ------
    InputError
        If an argument is of another kind, or the medium has no mean free path.

    References
    ----------
    .. [1] B. Dahneke (1983), Simple kinetic theory of Brownian diffusion in vapors and aerosols, in
       R. E. Meyer (ed.), Theory of Dispersed Multiphase Flow, Academic Press, 97; as in J. H. Seinfeld,
       S. N. Pandis (2016), Atmospheric Chemistry and Physics, 3rd ed., table 13.1.
    """
    require_structure(structure)
    require_medium(medium)
    if medium.mean_free_path is None:
        refuse(
            "medium.mean_free_path",
            None,
            "a length above 0 [m] for collisions in a gas",
            "Medium.air(temperature=293.15), or brownian(...) for a liquid",
        )
    return Kernel((Part("Brownian in gas", _BrownianInGas(structure, medium)),))


@dataclass(frozen=True)
class _Brownian:
    structure: Structure
    medium: Medium

    def __call__(self, v: FloatArray, w: FloatArray) -> FloatArray:
        factor = 2.0 * self.medium.thermal_energy / (3.0 * self.medium.viscosity)
        reach = self.structure.collision_diameter(v) + self.structure.collision_diameter(w)
        mobility = 1.0 / self.structure.hydrodynamic_diameter(v) + 1.0 / self.structure.hydrodynamic_diameter(
            w
        )
        return factor * reach * mobility


@dataclass(frozen=True)
class _BrownianInGas:
    structure: Structure
    medium: Medium

    def __call__(self, v: FloatArray, w: FloatArray) -> FloatArray:
        radius = 0.5 * (self.structure.collision_diameter(v) + self.structure.collision_diameter(w))
        diffusivity = self._diffusivity(v) + self._diffusivity(w)
        speed = np.sqrt(self._squared_speed(v) + self._squared_speed(w))
        knudsen = 2.0 * diffusivity / (speed * radius)
        transition = (1.0 + knudsen) / (1.0 + 2.0 * knudsen * (1.0 + knudsen))
        return 4.0 * math.pi * diffusivity * radius * transition

    def _diffusivity(self, v: FloatArray) -> FloatArray:
        h = self.structure.hydrodynamic_diameter(v)
        mobility = slip_correction(h, self.medium) / (3.0 * math.pi * self.medium.viscosity * h)
        return self.medium.thermal_energy * mobility

    def _squared_speed(self, v: FloatArray) -> FloatArray:
        """Square of the mean thermal speed."""
        return 8.0 * self.medium.thermal_energy / (math.pi * self.structure.particles.density * v)
