"""Collisions because neighbouring streamlines move at different speeds (orthokinetic)."""

from __future__ import annotations

import math
from dataclasses import dataclass

from aggsim._checks import FloatArray
from aggsim.inputs import Flow, Structure
from aggsim.kernels._arguments import require_flow, require_structure
from aggsim.kernels.base import Kernel, Part


def shear(structure: Structure, flow: Flow) -> Kernel:
    """Collisions in simple shear along straight paths.

    K = G/6 (d_i + d_j)**3 with collision diameters d [1]_; with G the mean velocity gradient it is the usual
    estimate for a stirred vessel too [2]_. Multiply by a collision efficiency for what hydrodynamic
    interaction prevents. Valid for particles smaller than the Kolmogorov length of the flow.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal.
    flow : Flow

    Raises
    ------
    InputError
        If an argument is of another kind.

    References
    ----------
    .. [1] M. von Smoluchowski (1917), Z. phys. Chem. 92, 129, DOI 10.1515/zpch-1918-9209.
    .. [2] T. R. Camp, P. C. Stein (1943), J. Boston Soc. Civil Eng. 30, 219.
    """
    require_structure(structure)
    require_flow(flow)
    return Kernel((Part("shear", _Shear(structure, flow.shear_rate / 6.0)),))


def turbulent_shear(structure: Structure, flow: Flow) -> Kernel:
    """Collisions in isotropic turbulence, of particles that follow it.

    K = sqrt(8 pi/15) (r_i + r_j)**3 sqrt(dissipation/nu) with collision radii r [1]_, and
    sqrt(dissipation/nu) the `shear_rate` of the flow. Valid for particles smaller than the Kolmogorov length.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal.
    flow : Flow

    Raises
    ------
    InputError
        If an argument is of another kind.

    References
    ----------
    .. [1] P. G. Saffman, J. S. Turner (1956), J. Fluid Mech. 1, 16, DOI 10.1017/S0022112056000020.
    """
    require_structure(structure)
    require_flow(flow)
    # (r_i + r_j)**3 = (d_i + d_j)**3/8
    factor = math.sqrt(8.0 * math.pi / 15.0) / 8.0 * flow.shear_rate
    return Kernel((Part("turbulent shear", _Shear(structure, factor)),))


@dataclass(frozen=True)
class _Shear:
    """factor [1/s] * (d_i + d_j)**3."""

    structure: Structure
    factor: float

    def __call__(self, v: FloatArray, w: FloatArray) -> FloatArray:
        reach = self.structure.collision_diameter(v) + self.structure.collision_diameter(w)
        return self.factor * (reach * reach * reach)
