"""How often a particle breaks.

Every law is a function of particle (solid) volume [m3], of any shape, that returns a breakage rate S [1/s].
"""

from __future__ import annotations

import math
import warnings
from collections.abc import Callable
from typing import Any, NoReturn

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.breakage._rate_laws import Custom, FlocStrength, LargestStableSize, PowerLaw, Turbulent
from aggsim.errors import BreakageError, ValidityWarning
from aggsim.inputs import Flow, Medium, Structure


def power_law(*, coefficient: float, exponent: float) -> PowerLaw:
    """Rate that is a power of the volume, S = coefficient * v**exponent.

    Parameters
    ----------
    coefficient : float
        [1/(s m3**exponent)], at least 0.
    exponent : float
        [1]; 0 for a constant rate, 1/3 for one that grows with the diameter of compact particles.

    Raises
    ------
    BreakageError
        If the coefficient is negative or a value is not finite.
    """
    factor = _scalar("coefficient", coefficient, "1/(s m3**exponent)", least=0.0)
    return PowerLaw(factor, _scalar("exponent", exponent))


def shear(
    flow: Flow, *, coefficient: float, flow_exponent: float, volume_exponent: float = 1.0 / 3.0
) -> PowerLaw:
    """Rate in shear or turbulence, fitted to experiments: S = a G**y * v**(1/3) [1]_ [2]_.

    With flow_exponent=1.6 alum and polystyrene flocs were described by 0.0047 in cm, that is a = 0.47 in m (both
    from memory of [2]_, not compared with it); the coefficient of another material has to be fitted.

    Parameters
    ----------
    flow : Flow
    coefficient : float
        a [s**(y - 1) m**(-3 volume_exponent)], at least 0; for a length in cm instead of m multiply by 100.
    flow_exponent : float
        y [1], above 0.
    volume_exponent : float
        [1], at least 0.

    Raises
    ------
    InputError
        If `flow` is not a Flow, or a value is outside its range.

    References
    ----------
    .. [1] J. D. Pandya, L. A. Spielman (1982), J. Colloid Interface Sci. 90, 517,
       DOI 10.1016/0021-9797(82)90317-4.
    .. [2] P. T. Spicer, S. E. Pratsinis (1996), AIChE J. 42, 1612, DOI 10.1002/aic.690420612.
    """
    _require_flow(flow)
    factor = _scalar("coefficient", coefficient, "s**(y - 1) m**(-3 volume_exponent)", least=0.0)
    power = _scalar("flow_exponent", flow_exponent, above=0.0)
    return PowerLaw(factor * flow.shear_rate**power, _scalar("volume_exponent", volume_exponent, least=0.0))


def turbulent(structure: Structure, medium: Medium, flow: Flow, *, resistance: float) -> Turbulent:
    """Rate at which turbulent bursts exceed what a floc withstands.

    S = (4/(15 pi))**(1/2) G exp(-eps_b/eps) with the mean dissipation eps = nu G**2 and the critical one
    eps_b = B/d of a floc of collision diameter d [1]_ [2]_. Written down from memory of the sources; where a B goes
    with the collision radius, pass 2 B.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal.
    medium : Medium
    flow : Flow
        At rest nothing breaks.
    resistance : float
        B [m3/s3], at least 0; eps_b of a floc in W/kg times its diameter in m.

    Raises
    ------
    InputError
        If an argument is of another kind or the resistance is negative or not finite.

    References
    ----------
    .. [1] K. A. Kusters (1991), The influence of turbulence on aggregation of small particles in agitated
       vessels, thesis, Eindhoven University of Technology, DOI 10.6100/IR362582.
    .. [2] J. C. Flesch, P. T. Spicer, S. E. Pratsinis (1999), AIChE J. 45, 1114, DOI 10.1002/aic.690450518.
    """
    _require_structure(structure)
    _require_medium(medium)
    _require_flow(flow)
    per_length = _scalar("resistance", resistance, "m3/s3", least=0.0)
    return Turbulent(structure, flow.shear_rate, flow.dissipation(medium), per_length)


def floc_strength(
    structure: Structure,
    medium: Medium,
    flow: Flow,
    *,
    strength: float,
    at_diameter: float,
    efficiency: float,
    size_exponent: float = 1.0,
    stress_exponent: float = 0.5,
) -> FlocStrength:
    """Rate from the stress of the flow over the strength of a floc, which falls with its size.

    S = e G (d/d_p - 1)**p (mu G/tau)**q, with collision diameter d, primary diameter d_p, and a floc strength
    tau = F/d**2 that goes back to one yield force F [1]_. Primary particles do not break. Strength and efficiency
    act together, as e tau**-q, so data on sizes cannot tell them apart. Form and default exponents were written
    down from memory of the source.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal.
    medium : Medium
    flow : Flow
        At rest nothing breaks.
    strength : float
        Shear stress that a floc of `at_diameter` just withstands [Pa], above 0.
    at_diameter : float
        [m]. The yield force is F = strength * at_diameter**2 [N].
    efficiency : float
        e [1], at least 0; to be fitted.
    size_exponent, stress_exponent : float
        p and q [1], at least 0.

    Raises
    ------
    InputError
        If an argument is of another kind or a value is outside its range.

    References
    ----------
    .. [1] J. C. Winterwerp (1998), J. Hydraul. Res. 36, 309, DOI 10.1080/00221689809498621.
    """
    _require_structure(structure)
    _require_medium(medium)
    _require_flow(flow)
    hint = "a shear stress in Pa: the flow exerts mu G, 0.05 Pa in water at 50 1/s"
    stress = _scalar("strength", strength, "Pa", above=0.0, hint=hint)
    force = stress * _checks.diameter("at_diameter", at_diameter) ** 2
    return FlocStrength(
        structure,
        flow.shear_rate,
        medium.viscosity * flow.shear_rate / force,
        _scalar("efficiency", efficiency, least=0.0),
        _scalar("size_exponent", size_exponent, least=0.0),
        _scalar("stress_exponent", stress_exponent, least=0.0),
    )


def largest_stable_size(
    structure: Structure,
    flow: Flow,
    *,
    coefficient: float,
    exponent: float,
    rate: float,
    steepness: float = 4.0,
) -> LargestStableSize:
    """Rate that rises steeply through the largest size that the flow lets stand, d_max = C G**-gamma [1]_.

    S = rate (d/d_max)**steepness with the collision diameter d: next to nothing well below d_max, and above it more
    and more, so that no aggregation outruns it. The power is an assumption of this library.

    Parameters
    ----------
    structure : Structure
        Compact or Fractal.
    flow : Flow
        At rest nothing breaks.
    coefficient : float
        C, the largest stable diameter at 1 1/s [m], above 0.
    exponent : float
        gamma [1], above 0; commonly 0.3 to 1 (from memory).
    rate : float
        Breakage rate of a floc of the largest stable size [1/s], at least 0.
    steepness : float
        [1], 1 to 30.

    Raises
    ------
    InputError
        If an argument is of another kind or a value is outside its range.

    Warns
    -----
    ValidityWarning
        If G exceeds 500 1/s, above which the power law is not stated [1]_.

    References
    ----------
    .. [1] Molecules (2022) 27, 5550, DOI 10.3390/molecules27175550.
    """
    _require_structure(structure)
    _require_flow(flow)
    hint = "the largest stable diameter at 1 1/s in metres, such as 1e-3"
    at_one = _scalar("coefficient", coefficient, "m", above=0.0, most=0.1, hint=hint)
    power = _scalar("exponent", exponent, above=0.0)
    if flow.shear_rate > 500.0:
        warnings.warn(
            f"shear_rate={flow.shear_rate:g} 1/s is above 500 1/s, where d_max = C G**-gamma is not stated to hold. "
            f"Try: a coefficient and an exponent that were fitted in this range.",
            ValidityWarning,
            stacklevel=2,
        )
    largest = math.inf if flow.shear_rate == 0.0 else at_one * flow.shear_rate**-power
    return LargestStableSize(
        structure,
        largest,
        _scalar("rate", rate, "1/s", least=0.0),
        _scalar("steepness", steepness, least=1.0, most=30.0),
    )


def from_function(function: Callable[[FloatArray], Any], *, name: str = "custom") -> Custom:
    """Rate from one's own formula.

    Parameters
    ----------
    function : callable
        function(volume) -> breakage rate [1/s], finite and not negative, for an array of volumes (n,) [m3].
    name : str
        What the law is called where it is shown.

    Raises
    ------
    BreakageError
        If `function` cannot be called or the name is empty.
    """
    if not callable(function):
        _refuse("function", function, "a function rate(volume) of volumes [m3]")
    if not isinstance(name, str) or not name:
        _refuse("name", name, "a text that is not empty")
    return Custom(name, function)


def _scalar(name: str, value: Any, unit: str = "", **limits: Any) -> float:
    return _checks.scalar(name, value, unit, error=BreakageError, **limits)


def _require_structure(structure: Any) -> None:
    if not isinstance(structure, Structure):
        _refuse("structure", structure, "Compact, Fractal or another Structure, as first argument")


def _require_medium(medium: Any) -> None:
    if not isinstance(medium, Medium):
        _refuse("medium", medium, "Medium", "Medium.water(temperature=298.15)")


def _require_flow(flow: Any) -> None:
    if not isinstance(flow, Flow):
        _refuse("flow", flow, "Flow", "Flow(shear_rate=50.0)")


def _refuse(name: str, got: Any, allowed: str, hint: str = "") -> NoReturn:
    text = repr(got)
    short = text if len(text) <= 80 else f"{type(got).__name__}(...)"
    _checks.refuse(name, short, allowed, hint, error=BreakageError)
