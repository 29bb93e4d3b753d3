"""The primary particles that aggregates are made of."""

from __future__ import annotations

import math
import warnings
from dataclasses import dataclass

from aggsim._checks import diameter, scalar
from aggsim.errors import ValidityWarning


@dataclass(frozen=True, kw_only=True)
class Particles:
    """Primary particles, all of one size and material.

    Parameters
    ----------
    diameter : float
        [m].
    density : float
        Of the solid (or drop) [kg/m3], 1 to 30000.
    hamaker : float, optional
        Hamaker constant of the material across the medium [J], 1e-23 to 1e-18.
    surface_potential : float, optional
        Potential at the plane where the diffuse layer starts [V]; the zeta potential is the usual stand-in.
        Between -0.3 and 0.3.

    Raises
    ------
    InputError
        If a value is not finite or outside its range.

    Warns
    -----
    ValidityWarning
        If the density is that of a gas, or of a solid in g/cm3.
    """

    diameter: float
    density: float
    hamaker: float | None = None
    surface_potential: float | None = None

    def __post_init__(self) -> None:
        keep = object.__setattr__
        keep(self, "diameter", diameter("diameter", self.diameter))
        hint = "a density in kg/m3: quartz has 2650 kg/m3 (2.65 g/cm3)"
        keep(self, "density", scalar("density", self.density, "kg/m3", least=1.0, most=30e3, hint=hint))
        if self.density < 25.0:
            warnings.warn(
                f"density={self.density:g} kg/m3 is the density of a gas bubble. "
                f"Try: {1000.0 * self.density:g} if you meant {self.density:g} g/cm3.",
                ValidityWarning,
                stacklevel=3,
            )
        if self.hamaker is not None:
            hint = "a Hamaker constant in joule: 1 zJ is 1e-21 J, 1 kT is about 4.1e-21 J"
            keep(self, "hamaker", scalar("hamaker", self.hamaker, "J", least=1e-23, most=1e-18, hint=hint))
        if self.surface_potential is not None:
            hint = "a potential in volts: -30 mV is -0.030 V"
            potential = scalar(
                "surface_potential", self.surface_potential, "V", least=-0.3, most=0.3, hint=hint
            )
            keep(self, "surface_potential", potential)

    @property
    def volume(self) -> float:
        """Volume of one primary particle [m3], pi d**3/6."""
        return math.pi / 6.0 * self.diameter**3
