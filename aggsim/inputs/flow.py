"""How the medium is stirred."""

from __future__ import annotations

import math
from dataclasses import dataclass

from aggsim._checks import refuse, scalar
from aggsim.inputs.medium import Medium


@dataclass(frozen=True, kw_only=True)
class Flow:
    """A flow that is described by one velocity gradient G.

    Parameters
    ----------
    shear_rate : float
        Shear rate of a laminar flow, or root-mean-square velocity gradient of a stirred vessel [1/s];
        0 for a medium at rest.

    Raises
    ------
    InputError
        If the shear rate is negative, not finite or above 1e8 1/s.
    """

    shear_rate: float

    def __post_init__(self) -> None:
        rate = scalar(
            "shear_rate",
            self.shear_rate,
            "1/s",
            least=0.0,
            most=1e8,
            hint="a velocity gradient in 1/s: 10 to 100 in flocculation, 1000 in a rapid mixer",
        )
        object.__setattr__(self, "shear_rate", rate)

    @classmethod
    def turbulent(cls, *, dissipation: float, medium: Medium) -> Flow:
        """Turbulent flow with a mean rate of dissipation, G = sqrt(dissipation/nu) [1]_.

        Parameters
        ----------
        dissipation : float
            Power that turns to heat per mass of medium [W/kg = m2/s3].
        medium : Medium

        Raises
        ------
        InputError
            If the dissipation is negative or not finite.

        References
        ----------
        .. [1] T. R. Camp, P. C. Stein (1943), J. Boston Soc. Civil Eng. 30, 219.
        """
        _require_medium(medium)
        per_mass = scalar("dissipation", dissipation, "W/kg", least=0.0)
        return cls(shear_rate=math.sqrt(per_mass / medium.kinematic_viscosity))

    @classmethod
    def from_power(cls, *, power: float, volume: float, medium: Medium) -> Flow:
        """Flow in a vessel that takes up a mechanical power, G = sqrt(power/(mu volume)) [1]_.

        Parameters
        ----------
        power : float
            Power that reaches the medium, without the losses of motor and gear [W].
        volume : float
            Volume of medium in the vessel [m3].
        medium : Medium

        Raises
        ------
        InputError
            If the power is negative, the volume is not positive, or one is not finite.

        References
        ----------
        .. [1] T. R. Camp, P. C. Stein (1943), J. Boston Soc. Civil Eng. 30, 219.
        """
        _require_medium(medium)
        watt = scalar("power", power, "W", least=0.0)
        size = scalar("volume", volume, "m3", above=0.0)
        return cls(shear_rate=math.sqrt(watt / (medium.viscosity * size)))

    def dissipation(self, medium: Medium) -> float:
        """Power turned to heat per mass of `medium` [W/kg = m2/s3], nu G**2."""
        _require_medium(medium)
        return medium.kinematic_viscosity * self.shear_rate**2

    def power_per_volume(self, medium: Medium) -> float:
        """Power turned to heat per volume of `medium` [W/m3], mu G**2."""
        _require_medium(medium)
        return medium.viscosity * self.shear_rate**2

    def kolmogorov_length(self, medium: Medium) -> float:
        """Size of the smallest eddies [m], (nu**3/dissipation)**(1/4) = sqrt(nu/G); infinite at rest."""
        _require_medium(medium)
        if self.shear_rate == 0.0:
            return math.inf
        return math.sqrt(medium.kinematic_viscosity / self.shear_rate)


def _require_medium(medium: Medium) -> None:
    if not isinstance(medium, Medium):
        refuse("medium", repr(medium), "Medium", "medium=Medium.water(temperature=298.15)")
