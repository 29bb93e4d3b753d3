"""Mixers: the mechanical power that reaches the medium, and the speed or power for a wanted shear rate."""

from __future__ import annotations

import math
import warnings
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any, Protocol, runtime_checkable

import numpy as np
from scipy import constants

from aggsim import _checks
from aggsim.errors import ValidityWarning
from aggsim.inputs import Flow, Medium

_TURBULENT = 1e4  # Reynolds number from which a power number is constant; common practice


@runtime_checkable
class Mixer(Protocol):
    """What a mixer answers; an own one needs this method and nothing else."""

    def power(self, medium: Medium) -> float:
        """Power that reaches the `medium` [W]."""


@dataclass(frozen=True, kw_only=True)
class Impeller:
    """A turbine or propeller in turbulent flow, P = Np rho N**3 D**5 with N in revolutions per second [1]_.

    Parameters
    ----------
    power_number : float
        Np [1] of this impeller in turbulent flow, from its maker.
    diameter : float
        D [m], at most 20.
    rpm : float
        Revolutions per minute [1/min].

    Raises
    ------
    InputError
        If a value is not positive and finite.

    References
    ----------
    .. [1] J. H. Rushton, E. W. Costich, H. J. Everett (1950), Chem. Eng. Prog. 46, 395.
    """

    power_number: float
    diameter: float
    rpm: float

    def __post_init__(self) -> None:
        keep = object.__setattr__
        keep(self, "power_number", _checks.scalar("power_number", self.power_number, above=0.0))
        hint = "a diameter in metres: 0.5 for 500 mm"
        keep(
            self, "diameter", _checks.scalar("diameter", self.diameter, "m", above=0.0, most=20.0, hint=hint)
        )
        keep(self, "rpm", _checks.scalar("rpm", self.rpm, "1/min", above=0.0))

    def reynolds_number(self, medium: Medium) -> float:
        """Re = rho N D**2/mu [1]."""
        _require_medium(medium)
        return self.rpm / 60.0 * self.diameter**2 / medium.kinematic_viscosity

    def power(self, medium: Medium) -> float:
        """Power that reaches the `medium` [W].

        Warns
        -----
        ValidityWarning
            If Re is below 1e4 (common practice), where the power number is no constant.
        """
        reynolds = self.reynolds_number(medium)
        if reynolds < _TURBULENT:
            warnings.warn(
                f"an impeller of {self.diameter:g} m at {self.rpm:.3g} rpm has a Reynolds number of {reynolds:.3g}, "
                f"below the {_TURBULENT:g} from which the power number is constant. "
                "Try: the power number at this Reynolds number, from the maker's curve.",
                ValidityWarning,
                stacklevel=2,
            )
        return self.power_number * medium.density * (self.rpm / 60.0) ** 3 * self.diameter**5

    def rpm_for(self, *, shear_rate: float, volume: float, medium: Medium) -> float:
        """Revolutions per minute for a wanted G, whatever `rpm` is: (mu G**2 V/(Np rho D**5))**(1/3).

        Parameters
        ----------
        shear_rate : float
            Root-mean-square velocity gradient G [1/s].
        volume : float
            Volume of medium that is stirred [m3].
        medium : Medium

        Raises
        ------
        InputError
            If the shear rate or the volume is not positive.

        Warns
        -----
        ValidityWarning
            As in `power`, at the speed found.
        """
        wanted = _power_for(shear_rate, volume, medium)
        revolutions = math.cbrt(wanted / (self.power_number * medium.density * self.diameter**5))
        found = replace(self, rpm=60.0 * revolutions)
        found.power(medium)  # warns
        return found.rpm


@dataclass(frozen=True, kw_only=True)
class Paddles:
    """Blades on a shaft, P = sum Cd A rho w**3/2 with w = (1 - slip) 2 pi r N [1]_; N in revolutions per second.

    Parameters
    ----------
    area : float or (n,)
        Area of each blade across its path, or of all blades at one radius together [m2].
    radius : float or (n,)
        Distance of the centre of each blade from the shaft [m], one for each area; a wide blade is better cut
        into strips.
    drag_coefficient : float
        Cd [1]; 1.8 for long flat blades is common practice.
    rpm : float
        Revolutions of the shaft per minute [1/min].
    slip : float
        Speed of the water over that of the blades [1], 0 to below 1; 0.25 is common practice.

    Raises
    ------
    InputError
        If a value is outside its range, or there is not one radius for each area.

    References
    ----------
    .. [1] T. R. Camp (1955), Flocculation and flocculation basins, Trans. ASCE 120, 1.
    """

    area: float | Sequence[float]
    radius: float | Sequence[float]
    drag_coefficient: float
    rpm: float
    slip: float

    def __post_init__(self) -> None:
        keep = object.__setattr__
        area = _checks.array("area", np.atleast_1d(_checks.plain(self.area, "m2")), "m2", above=0.0)
        radius = np.atleast_1d(_checks.plain(self.radius, "m"))
        radius = _checks.array(
            "radius", radius, "m", above=0.0, most=20.0, size=area.size, hint="one radius for each area"
        )
        keep(self, "area", tuple(area.tolist()))
        keep(self, "radius", tuple(radius.tolist()))
        keep(self, "drag_coefficient", _checks.scalar("drag_coefficient", self.drag_coefficient, above=0.0))
        keep(self, "rpm", _checks.scalar("rpm", self.rpm, "1/min", above=0.0))
        keep(self, "slip", _checks.scalar("slip", self.slip, least=0.0, below=1.0, hint="0.25 for 25 %"))

    def power(self, medium: Medium) -> float:
        """Power that reaches the `medium` [W]."""
        _require_medium(medium)
        speed = (1.0 - self.slip) * 2.0 * math.pi * self.rpm / 60.0 * np.asarray(self.radius)
        return float(0.5 * self.drag_coefficient * medium.density * (np.asarray(self.area) @ speed**3))

    def rpm_for(self, *, shear_rate: float, volume: float, medium: Medium) -> float:
        """Revolutions per minute for a wanted G, whatever `rpm` is; the power grows with their cube.

        Arguments and errors as in `Impeller.rpm_for`.
        """
        wanted = _power_for(shear_rate, volume, medium)
        return self.rpm * math.cbrt(wanted / self.power(medium))


@dataclass(frozen=True, kw_only=True)
class MotorPower:
    """A drive of known power, of which the share `efficiency` reaches the medium.

    Parameters
    ----------
    power_drawn : float
        Electric power that the motor draws [W].
    efficiency : float
        Of motor and gear together [1], above 0 and at most 1.

    Raises
    ------
    InputError
        If a value is outside its range.
    """

    power_drawn: float
    efficiency: float

    def __post_init__(self) -> None:
        keep = object.__setattr__
        hint = "a power in watts: 15e3 for 15 kW"
        keep(self, "power_drawn", _checks.scalar("power_drawn", self.power_drawn, "W", above=0.0, hint=hint))
        hint = "0.8 for 80 %"
        keep(
            self, "efficiency", _checks.scalar("efficiency", self.efficiency, above=0.0, most=1.0, hint=hint)
        )

    def power(self, medium: Medium) -> float:
        """Power that reaches the `medium` [W]."""
        _require_medium(medium)
        return self.efficiency * self.power_drawn

    def power_drawn_for(self, *, shear_rate: float, volume: float, medium: Medium) -> float:
        """Electric power [W] for a wanted G, whatever `power_drawn` is: mu G**2 V/efficiency.

        Arguments and errors as in `Impeller.rpm_for`.
        """
        return _power_for(shear_rate, volume, medium) / self.efficiency


@dataclass(frozen=True, kw_only=True)
class HeadLoss:
    """A flow that spends a head in a valve, a weir, a pipe or a static mixer, P = rho g Q h.

    What a pump passes on as head is not turned to heat in it; its losses are, (1/efficiency - 1) rho g Q H.

    Parameters
    ----------
    head : float
        Head that is lost [m].
    flow_rate : float
        [m3/s].

    Raises
    ------
    InputError
        If a value is not positive.

    References
    ----------
    .. [1] T. R. Camp, P. C. Stein (1943), J. Boston Soc. Civil Eng. 30, 219.
    """

    head: float
    flow_rate: float

    def __post_init__(self) -> None:
        keep = object.__setattr__
        keep(self, "head", _checks.scalar("head", self.head, "m", above=0.0, hint="metres of water"))
        keep(self, "flow_rate", _checks.scalar("flow_rate", self.flow_rate, "m3/s", above=0.0))

    def power(self, medium: Medium) -> float:
        """Power turned to heat in the `medium` [W]."""
        _require_medium(medium)
        return medium.density * constants.g * self.flow_rate * self.head


def _power_for(shear_rate: Any, volume: Any, medium: Medium) -> float:
    rate = _checks.scalar("shear_rate", shear_rate, "1/s", above=0.0)
    size = _checks.scalar("volume", volume, "m3", above=0.0, hint="a volume in m3: 2e-3 for 2 L")
    return Flow(shear_rate=rate).power_per_volume(medium) * size


def _require_medium(medium: Any) -> None:
    if not isinstance(medium, Medium):
        _checks.refuse("medium", repr(medium), "Medium", "Medium.water(temperature=283.15)")
