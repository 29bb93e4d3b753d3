"""The liquid or gas that carries the particles."""

from __future__ import annotations

import math
import warnings
from dataclasses import dataclass

from scipy import constants

from aggsim._checks import refuse, scalar
from aggsim.errors import ValidityWarning
from aggsim.inputs import water

_LEAST_TEMPERATURE = 200.0  # K; below it a figure is far more often in degrees Celsius
_GAS_DENSITY = 50.0  # kg/m3; a fluid that is lighter is a gas ...
_GAS_VISCOSITY = 1e-4  # Pa s; ... and no gas is more viscous than this
_MOLAR_MASS_OF_AIR = 28.9644e-3  # kg/mol, U.S. Standard Atmosphere 1976


@dataclass(frozen=True, kw_only=True)
class Medium:
    """A liquid or a gas, given by the values of its properties.

    Parameters
    ----------
    temperature : float
        [K], 200 to 3000.
    viscosity : float
        Dynamic viscosity [Pa s], at most 1000.
    density : float
        [kg/m3], at most 25000.
    relative_permittivity : float, optional
        Static dielectric constant [1]; needed for double layers only.
    ionic_strength : float
        I = 1/2 sum c z**2 [mol/m3] (1 mol/m3 = 1 mmol/L), 0 to 20000.
    mean_free_path : float, optional
        [m]; given for a gas, None for a liquid.
    name : str
        What tables and figures call it.

    Raises
    ------
    InputError
        If a value is not finite, is outside its range, or two of them cannot belong to one fluid.
    """

    temperature: float
    viscosity: float
    density: float
    relative_permittivity: float | None = None
    ionic_strength: float = 0.0
    mean_free_path: float | None = None
    name: str = "medium"

    def __post_init__(self) -> None:
        keep = object.__setattr__
        keep(self, "temperature", _temperature(self.temperature, _LEAST_TEMPERATURE, 3000.0))
        keep(
            self,
            "viscosity",
            scalar(
                "viscosity",
                self.viscosity,
                "Pa s",
                above=0.0,
                most=1e3,
                hint="a viscosity in Pa s: water has 0.89e-3 Pa s (0.89 mPa s) at 25 C",
            ),
        )
        hint = "a density in kg/m3: water has 997 kg/m3 (0.997 g/cm3) at 25 C"
        keep(self, "density", scalar("density", self.density, "kg/m3", above=0.0, most=25e3, hint=hint))
        if self.density < _GAS_DENSITY and self.viscosity > _GAS_VISCOSITY:
            refuse(
                "density",
                f"{self.density:g} kg/m3 with viscosity={self.viscosity:g} Pa s",
                f"at least {_GAS_DENSITY:g} kg/m3 for a liquid, or at most {_GAS_VISCOSITY:g} Pa s for a gas",
                hint,
            )
        if self.relative_permittivity is not None:
            permittivity = scalar("relative_permittivity", self.relative_permittivity, least=1.0, most=1000.0)
            keep(self, "relative_permittivity", permittivity)
        strength = scalar(
            "ionic_strength",
            self.ionic_strength,
            "mol/m3",
            least=0.0,
            most=20e3,
            hint="an ionic strength in mol/m3: 1 mol/L is 1000 mol/m3",
        )
        keep(self, "ionic_strength", strength)
        if self.mean_free_path is not None:
            path = scalar(
                "mean_free_path",
                self.mean_free_path,
                "m",
                above=0.0,
                most=1.0,
                hint="a mean free path in metres: air has 66e-9 m at 20 C and 101325 Pa",
            )
            keep(self, "mean_free_path", path)

    @classmethod
    def water(cls, temperature: float = 298.15, *, ionic_strength: float = 0.0) -> Medium:
        """Liquid water at atmospheric pressure.

        Density and permittivity follow IAPWS SR6-08 [1]_ at 0.1 MPa, viscosity IAPWS R12-08 [2]_ at that
        density. Dissolved salt counts for the double layer only; its effect on density, viscosity and
        permittivity (each some 10 % at 1 mol/L of sodium chloride) is not included.

        Parameters
        ----------
        temperature : float
            [K], 273.15 to 373.15.
        ionic_strength : float
            [mol/m3].

        Raises
        ------
        InputError
            If the temperature is outside the range of the liquid.

        Warns
        -----
        ValidityWarning
            If the ionic strength exceeds 1000 mol/m3, where pure water is no fair stand-in.

        References
        ----------
        .. [1] IAPWS SR6-08(2011); Pátek et al. (2009), DOI 10.1063/1.3043575.
        .. [2] IAPWS R12-08(2008); Huber et al. (2009), DOI 10.1063/1.3088050.
        """
        kelvin = _temperature(temperature, 273.15, 373.15)
        density = water.density(kelvin)
        medium = cls(
            temperature=kelvin,
            viscosity=water.viscosity(kelvin, density),
            density=density,
            relative_permittivity=water.relative_permittivity(kelvin),
            ionic_strength=ionic_strength,
            name="water",
        )
        if medium.ionic_strength > 1000.0:
            warnings.warn(
                f"ionic_strength={medium.ionic_strength:g} mol/m3 is above 1000 mol/m3; density, viscosity "
                f"and permittivity are those of pure water. Try: Medium(...) with values of the solution.",
                ValidityWarning,
                stacklevel=2,
            )
        return medium

    @classmethod
    def air(cls, temperature: float = 293.15, *, pressure: float = 101325.0) -> Medium:
        """Dry air, for particles in a gas.

        mu = 1.458e-6 T**1.5/(T + 110.4) [1]_, rho = p M/(R T), and the mean free path
        lambda = 2 mu/(p sqrt(8 M/(pi R T))) [2]_.

        Parameters
        ----------
        temperature : float
            [K], 200 to 2000.
        pressure : float
            [Pa], at most 2e6 (ideal gas).

        Raises
        ------
        InputError
            If a value is outside its range.

        References
        ----------
        .. [1] U.S. Standard Atmosphere 1976, NOAA-S/T 76-1562, eq. 51 (Sutherland).
        .. [2] J. H. Seinfeld, S. N. Pandis (2016), Atmospheric Chemistry and Physics, 3rd ed., eq. 9.6.
        """
        kelvin = _temperature(temperature, _LEAST_TEMPERATURE, 2000.0)
        pascal = scalar(
            "pressure",
            pressure,
            "Pa",
            above=0.0,
            most=2e6,
            hint="a pressure in pascal: 1 bar is 1e5 Pa, 1 atm is 101325 Pa",
        )
        viscosity = 1.458e-6 * kelvin**1.5 / (kelvin + 110.4)
        mass_per_energy = _MOLAR_MASS_OF_AIR / (constants.R * kelvin)  # kg/J
        return cls(
            temperature=kelvin,
            viscosity=viscosity,
            density=pascal * mass_per_energy,
            relative_permittivity=1.0,
            mean_free_path=2.0 * viscosity / (pascal * math.sqrt(8.0 / math.pi * mass_per_energy)),
            name="air",
        )

    @property
    def thermal_energy(self) -> float:
        """kT [J]."""
        return constants.k * self.temperature

    @property
    def kinematic_viscosity(self) -> float:
        """nu = mu/rho [m2/s]."""
        return self.viscosity / self.density

    @property
    def debye_length(self) -> float:
        """Thickness of the double layer [m]: sqrt(eps0 er kT/(2 e**2 NA I)); infinite without ions.

        Raises
        ------
        InputError
            If there are ions but `relative_permittivity` was not given.
        """
        if self.ionic_strength == 0.0:
            return math.inf
        if self.relative_permittivity is None:
            refuse(
                "relative_permittivity",
                None,
                "a number of at least 1 where a Debye length is asked for",
                f"Medium(..., relative_permittivity=...) for {self.name!r}; water has 78.4 at 25 C",
            )
        charge_density = 2.0 * constants.e**2 * constants.N_A * self.ionic_strength
        return math.sqrt(
            constants.epsilon_0 * self.relative_permittivity * self.thermal_energy / charge_density
        )


def _temperature(value: float, least: float, most: float) -> float:
    hint = "a temperature in kelvin, such as 298.15"
    kelvin = scalar("temperature", value, "K", hint=hint)
    if not least <= kelvin <= most:
        converted = kelvin + constants.zero_Celsius
        if kelvin < _LEAST_TEMPERATURE and least <= converted <= most:
            hint = f"{converted:g}; this looks like degrees Celsius and temperatures are in kelvin"
        refuse("temperature", f"{kelvin:g} K", f"{least:g} to {most:g} K", hint)
    return kelvin
