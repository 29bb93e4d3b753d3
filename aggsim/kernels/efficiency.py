"""The share of the encounters in shear that end in contact."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from aggsim._checks import FloatArray, refuse, scalar
from aggsim.inputs import Flow, Medium, Structure
from aggsim.kernels._arguments import require_flow, require_medium, require_structure


@dataclass(frozen=True)
class ShearEfficiency:
    """Collision efficiency of two particle volumes in shear, made by `shear_efficiency`.

    Parameters
    ----------
    structure : Structure
    hamaker : float
        [J].
    stress : float
        mu G [Pa].
    coefficient, exponent : float
        [1].
    """

    structure: Structure
    hamaker: float
    stress: float
    coefficient: float
    exponent: float

    def __call__(self, v: ArrayLike, w: ArrayLike) -> FloatArray:
        """Efficiency [1] for solid volumes `v` and `w` [m3], which broadcast; at most 1."""
        number = self.attraction_number(v, w)
        return np.minimum(self.coefficient * number**self.exponent, 1.0)[()]

    def attraction_number(self, v: ArrayLike, w: ArrayLike) -> FloatArray:
        """A/(36 pi mu G a**3) [1] for solid volumes `v` and `w` [m3], which broadcast; infinite at rest."""
        reach = self.structure.collision_diameter(v) + self.structure.collision_diameter(w)
        radius = np.asarray(0.25 * reach)
        if self.stress == 0.0:
            return np.full(radius.shape, np.inf)[()]
        return (self.hamaker / (36.0 * math.pi * self.stress * radius**3))[()]


def shear_efficiency(
    structure: Structure,
    medium: Medium,
    flow: Flow,
    *,
    coefficient: float = 0.8,
    exponent: float = 0.18,
) -> ShearEfficiency:
    """Share of the collisions along straight paths that attraction brings about against the liquid film.

    alpha = 0.8 C**0.18 with C = A/(36 pi mu G a**3), never above 1, for equal spheres in simple shear without a
    double layer, and C from 1e-5 to 0.1 [1]_: about 0.1 to 0.5. Coefficient, exponent and range are quoted from
    memory and were not compared with the source. For unequal spheres a = (r1 + r2)/2 is an assumption of this
    library, which overstates the efficiency where the sizes differ much. Multiply a shear kernel by the result.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal, around particles with `hamaker`; sizes are collision diameters.
    medium : Medium
    flow : Flow
        At rest the efficiency is 1.
    coefficient : float
        [1], above 0.
    exponent : float
        [1], 0 to 1.

    Raises
    ------
    InputError
        If an argument is of another kind, a value outside its range, or the particles have no Hamaker constant.

    References
    ----------
    .. [1] T. G. M. van de Ven, S. G. Mason (1977), Colloid Polym. Sci. 255, 468, DOI 10.1007/BF01536463.
    """
    require_structure(structure)
    require_medium(medium)
    require_flow(flow)
    hamaker = structure.particles.hamaker
    if hamaker is None:
        refuse(
            "structure.particles.hamaker",
            None,
            "a Hamaker constant across the medium [J]",
            "Particles(..., hamaker=9e-21)",
        )
    factor = scalar("coefficient", coefficient, above=0.0)
    power = scalar("exponent", exponent, least=0.0, most=1.0)
    return ShearEfficiency(structure, hamaker, medium.viscosity * flow.shear_rate, factor, power)
