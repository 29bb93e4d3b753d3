"""Collisions because large particles overtake small ones as they settle or rise (differential settling)."""

from __future__ import annotations

import math
from dataclasses import KW_ONLY, dataclass
from typing import Any, Protocol, runtime_checkable

import numpy as np
from numpy.typing import ArrayLike
from scipy import constants

from aggsim._checks import FloatArray, array, refuse
from aggsim.inputs import Medium, Structure
from aggsim.kernels._arguments import require_medium, require_structure
from aggsim.kernels.base import Kernel, Part
from aggsim.kernels.slip import slip_correction


@runtime_checkable
class Drag(Protocol):
    """A drag law of a sphere; an own one needs these two methods and nothing else."""

    def coefficient(self, reynolds: ArrayLike) -> FloatArray:
        """Drag coefficient [1] at Reynolds numbers [1] of any shape."""

    def terminal_reynolds(self, best_number: FloatArray) -> FloatArray:
        """Reynolds number [1] at which drag balances weight, for Best numbers Cd Re**2 [1] of any shape."""


@dataclass(frozen=True)
class Stokes:
    """Creeping flow, Cd = 24/Re; within 10 % up to Re of about 0.5."""

    def coefficient(self, reynolds: ArrayLike) -> FloatArray:
        """Drag coefficient [1] at Reynolds numbers [1] of any shape."""
        return (24.0 / np.asarray(reynolds, dtype=np.float64))[()]

    def terminal_reynolds(self, best_number: FloatArray) -> FloatArray:
        """Reynolds number [1] for Best numbers [1] of any shape."""
        return best_number / 24.0


@dataclass(frozen=True)
class SchillerNaumann:
    """Cd = 24/Re (1 + 0.15 Re**0.687) up to Re = 1000 [1]_, 0.44 above; no drag crisis, so up to about 2e5.

    The two branches miss each other by 0.4 % at Re = 1000. Where the balance has no solution between them,
    the terminal Reynolds number is 1000, so that the speed never falls as weight grows.

    References
    ----------
    .. [1] L. Schiller, A. Naumann (1933), Z. Ver. Dtsch. Ing. 77, 318.
    """

    def coefficient(self, reynolds: ArrayLike) -> FloatArray:
        """Drag coefficient [1] at Reynolds numbers [1] of any shape."""
        re = np.asarray(reynolds, dtype=np.float64)
        viscous = 24.0 / re * (1.0 + 0.15 * np.minimum(re, _NEWTON) ** 0.687)
        return np.where(re > _NEWTON, 0.44, viscous)[()]

    def terminal_reynolds(self, best_number: FloatArray) -> FloatArray:
        """Reynolds number [1] for Best numbers [1] of any shape."""
        best = np.asarray(best_number, dtype=np.float64)
        viscous = np.minimum(best, _BEST_AT_NEWTON)
        # f(y) = log(24 e^y (1 + s)/X) with s = 0.15 e^(0.687 y) is convex and rises with a slope of 1 to
        # 1.687; Newton from Stokes' y, where f > 0, falls monotonically to the root: 7 steps reach round-off
        target = np.log(np.where(viscous > 0.0, viscous, 1.0) / 24.0)
        y = target
        for _ in range(7):
            s = 0.15 * np.exp(0.687 * y)
            y = y - (y + np.log1p(s) - target) / (1.0 + 0.687 * s / (1.0 + s))
        re = viscous / (24.0 * (1.0 + 0.15 * np.exp(0.687 * y)))
        return np.where(best > _BEST_AT_NEWTON, np.maximum(_NEWTON, np.sqrt(best / 0.44)), re)


_NEWTON = 1000.0  # Reynolds number above which the drag coefficient of Schiller and Naumann is constant
_BEST_AT_NEWTON = 24.0 * _NEWTON * (1.0 + 0.15 * _NEWTON**0.687)


def settling_velocity(
    structure: Structure, medium: Medium, volume: ArrayLike, *, drag: Drag | None = None
) -> FloatArray:
    """Speed at which single particles settle in a medium at rest [m/s]; negative where they rise.

    Weight less buoyancy of the solid, F = (rho_p - rho) g v, balances the drag on a sphere of the
    hydrodynamic diameter h that the medium does not flow through: Cd Re**2 = 8 F rho/(pi mu**2) with
    Re = rho w h/mu. Creeping flow gives w = F/(3 pi mu h). In a gas the speed is multiplied by the slip
    correction. g is the standard acceleration of gravity.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal.
    medium : Medium
    volume : array_like, shape (n,)
        Solid volumes [m3].
    drag : Drag, optional
        Stokes() unless given; SchillerNaumann() for particles beyond creeping flow.

    Raises
    ------
    InputError
        If a volume is not positive, or an argument is of another kind.

    References
    ----------
    1. G. G. Stokes (1851), Trans. Camb. Phil. Soc. 9, part II, 8.
    2. R. Clift, J. R. Grace, M. E. Weber (1978), Bubbles, Drops, and Particles, Academic Press, ch. 5.
    """
    require_structure(structure)
    require_medium(medium)
    law = _drag_law(drag)
    v = array("volume", np.atleast_1d(np.asarray(volume)), "m3", above=0.0)
    speed = _speed(structure, medium, law, v)
    return speed[0] if np.ndim(volume) == 0 else speed


@dataclass(frozen=True)
class SettlingVelocity:
    """Settling speed of single particles as a function of their solid volume alone (`settling_velocity`).

    Calling it with volumes [m3] gives speeds [m/s] of the same shape, negative where particles rise.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal.
    medium : Medium
    drag : Drag, optional
        Stokes() unless given; SchillerNaumann() for particles beyond creeping flow.

    Raises
    ------
    InputError
        If an argument is of another kind; when called, if a volume is not positive.
    """

    structure: Structure
    medium: Medium
    _: KW_ONLY
    drag: Drag | None = None

    def __post_init__(self) -> None:
        require_structure(self.structure)
        require_medium(self.medium)
        object.__setattr__(self, "drag", _drag_law(self.drag))

    def __call__(self, volume: ArrayLike) -> FloatArray:
        """Speed [m/s] of particles of solid `volume` [m3], a number or (n,)."""
        return settling_velocity(self.structure, self.medium, volume, drag=self.drag)


def settling(structure: Structure, medium: Medium, *, drag: Drag | None = None) -> Kernel:
    """Collisions by differential settling along straight paths.

    K = pi/4 (d_i + d_j)**2 |w_i - w_j| with collision diameters d and settling speeds w [1]_
    (`settling_velocity`). Zero for equal sizes, with a kink there. Grows faster than volume for compact
    particles, so that the largest may run away. Multiply by a collision efficiency for what hydrodynamic
    interaction prevents.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal.
    medium : Medium
    drag : Drag, optional
        Stokes() unless given; SchillerNaumann() for particles beyond creeping flow.

    Raises
    ------
    InputError
        If an argument is of another kind.

    References
    ----------
    .. [1] W. Findeisen (1939), Meteorol. Z. 56, 365.
    """
    require_structure(structure)
    require_medium(medium)
    return Kernel((Part("settling", _Settling(structure, medium, _drag_law(drag))),))


@dataclass(frozen=True)
class _Settling:
    structure: Structure
    medium: Medium
    drag: Drag

    def __call__(self, v: FloatArray, w: FloatArray) -> FloatArray:
        reach = self.structure.collision_diameter(v) + self.structure.collision_diameter(w)
        first, second = (_speed(self.structure, self.medium, self.drag, size) for size in (v, w))
        return 0.25 * math.pi * reach * reach * np.abs(first - second)


def _speed(structure: Structure, medium: Medium, drag: Drag, v: FloatArray) -> FloatArray:
    excess = structure.particles.density - medium.density
    best = 8.0 * abs(excess) * constants.g * v * medium.density / (math.pi * medium.viscosity**2)
    h = structure.hydrodynamic_diameter(v)
    speed = drag.terminal_reynolds(best) * medium.kinematic_viscosity / h
    return math.copysign(1.0, excess) * slip_correction(h, medium) * speed


def _drag_law(drag: Any) -> Drag:
    if drag is None:
        return Stokes()
    if isinstance(drag, type) or not isinstance(drag, Drag):
        refuse("drag", repr(drag), "a drag law", "Stokes() or SchillerNaumann()")
    return drag
