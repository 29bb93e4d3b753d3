"""Repulsion by polymer layers, hydration and overlapping atoms: pure functions, and records that carry the choice.

All are derived in Derjaguin's approximation (separation and layer small against both radii), with
a = a1 a2/(a1 + a2) of the radii a1, a2; where a source is written for equal spheres of radius R, R = 2 a.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy import constants

from aggsim._checks import FloatArray, scalar
from aggsim.inputs import Medium
from aggsim.interaction.potentials import derjaguin_radius, finite, positive


def brush_osmotic(
    h: ArrayLike,
    d1: ArrayLike,
    d2: ArrayLike,
    medium: Medium,
    *,
    thickness: ArrayLike,
    volume_fraction: ArrayLike,
    flory_parameter: ArrayLike,
    solvent_molar_volume: ArrayLike,
) -> FloatArray:
    """Energy [J] of mixing two polymer layers of uniform density [1]_.

    V = 8 pi a kT/v phi**2 (1/2 - chi) g with the volume v of a solvent molecule and the layer L:
    g = (L - h/2)**2 for L <= h < 2 L, g = L**2 [h/(2 L) - 1/4 - ln(h/L)] for h < L, and 0 beyond 2 L.

    Parameters
    ----------
    h : array_like
        Separation of the bare surfaces [m], above 0.
    d1, d2 : array_like
        Diameters without the layer [m].
    medium : Medium
    thickness : array_like
        Of one layer, L [m].
    volume_fraction : array_like
        Of polymer in the layer, phi [1].
    flory_parameter : array_like
        Flory-Huggins parameter chi [1]; above 1/2 (a poor solvent) the layers attract.
    solvent_molar_volume : array_like
        [m3/mol].

    Raises
    ------
    InputError
        If a length is not positive and finite.

    References
    ----------
    .. [1] B. Vincent, J. Edwards, S. Emmett, A. Jones (1986), Colloids Surf. 18, 261.
    """
    gap, layer = positive("h", h), positive("thickness", thickness)
    radius = derjaguin_radius(positive("d1", d1), positive("d2", d2))
    molecule = positive("solvent_molar_volume", solvent_molar_volume, "m3/mol") / constants.N_A
    contrast = finite("volume_fraction", volume_fraction, "1") ** 2
    contrast = contrast * (0.5 - finite("flory_parameter", flory_parameter, "1"))
    x = gap / layer
    touching = (1.0 - 0.5 * np.minimum(x, 2.0)) ** 2
    pressed = 0.5 * x - 0.25 - np.log(x)
    shape = layer**2 * np.where(x < 1.0, pressed, touching)
    return (8.0 * np.pi * radius * medium.thermal_energy / molecule * contrast * shape)[()]


def brush_elastic(
    h: ArrayLike,
    d1: ArrayLike,
    d2: ArrayLike,
    medium: Medium,
    *,
    thickness: ArrayLike,
    volume_fraction: ArrayLike,
    molar_mass: ArrayLike,
    polymer_density: ArrayLike,
) -> FloatArray:
    """Energy [J] of pressing the chains of two polymer layers together [1]_.

    V = 4 pi a kT phi L**2 rho NA/M {x ln[x ((3 - x)/2)**2] - 6 ln[(3 - x)/2] + 3 (1 - x)} with x = h/L, and 0
    beyond L.

    Parameters
    ----------
    h : array_like
        Separation of the bare surfaces [m], above 0.
    d1, d2 : array_like
        Diameters without the layer [m].
    medium : Medium
    thickness : array_like
        Of one layer, L [m].
    volume_fraction : array_like
        Of polymer in the layer, phi [1].
    molar_mass : array_like
        Of one chain, M [kg/mol].
    polymer_density : array_like
        Of the pure polymer, rho [kg/m3].

    Raises
    ------
    InputError
        If a length, the molar mass or the density is not positive and finite.

    References
    ----------
    .. [1] B. Vincent, J. Edwards, S. Emmett, A. Jones (1986), Colloids Surf. 18, 261.
    """
    gap, layer = positive("h", h), positive("thickness", thickness)
    radius = derjaguin_radius(positive("d1", d1), positive("d2", d2))
    chains = positive("polymer_density", polymer_density, "kg/m3") * constants.N_A
    chains = chains / positive("molar_mass", molar_mass, "kg/mol")
    chains = chains * finite("volume_fraction", volume_fraction, "1")
    x = np.minimum(gap / layer, 1.0)
    stretch = np.log1p(0.5 * (1.0 - x))
    shape = layer**2 * (x * (np.log(x) + 2.0 * stretch) - 6.0 * stretch + 3.0 * (1.0 - x))
    return (4.0 * np.pi * radius * medium.thermal_energy * chains * shape)[()]


def hydration(
    h: ArrayLike, d1: ArrayLike, d2: ArrayLike, *, energy_per_area: ArrayLike, decay_length: ArrayLike
) -> FloatArray:
    """Exponential hydration repulsion [J], V = 2 pi a w0 lambda exp(-h/lambda) [1]_.

    Parameters
    ----------
    h : array_like
        Separation of the surfaces [m], above 0.
    d1, d2 : array_like
        Diameters [m].
    energy_per_area : array_like
        w0 of flat surfaces at contact [J/m2], such as 3e-3 to 30e-3.
    decay_length : array_like
        lambda [m], such as 0.6e-9 to 1.1e-9 in solutions of a 1:1 salt.

    Raises
    ------
    InputError
        If a length is not positive and finite.

    References
    ----------
    .. [1] J. N. Israelachvili (2011), Intermolecular and Surface Forces, 3rd ed., Academic Press, ch. 15,
       DOI 10.1016/C2009-0-21560-1.
    """
    gap, decay = positive("h", h), positive("decay_length", decay_length)
    radius = derjaguin_radius(positive("d1", d1), positive("d2", d2))
    contact = 2.0 * np.pi * radius * finite("energy_per_area", energy_per_area, "J/m2") * decay
    return (contact * np.exp(-gap / decay))[()]


def born(
    h: ArrayLike, d1: ArrayLike, d2: ArrayLike, *, hamaker: ArrayLike, atom_diameter: ArrayLike
) -> FloatArray:
    """Born repulsion [J] of overlapping atoms in two spheres, V = A a s**6/(1260 h**7).

    It is the sphere and sphere form, for h << a, of the integral of the repulsive Lennard-Jones term that is given
    for sphere and plate in [1]_.

    Parameters
    ----------
    h : array_like
        Separation of the surfaces [m], above 0.
    d1, d2 : array_like
        Diameters [m].
    hamaker : array_like
        Hamaker constant A across the medium [J].
    atom_diameter : array_like
        Lennard-Jones diameter s [m], about 0.5e-9.

    Raises
    ------
    InputError
        If a length is not positive and finite.

    References
    ----------
    .. [1] E. Ruckenstein, D. C. Prieve (1976), AIChE J. 22, 276, DOI 10.1002/aic.690220209.
    """
    gap, atom = positive("h", h), positive("atom_diameter", atom_diameter)
    radius = derjaguin_radius(positive("d1", d1), positive("d2", d2))
    # (s/h)**6 first: the powers alone would leave the range of floats early
    return (finite("hamaker", hamaker, "J") * radius / (1260.0 * gap) * (atom / gap) ** 6)[()]


@dataclass(frozen=True, kw_only=True)
class Brush:
    """Steric repulsion of two equal polymer layers by `brush_osmotic` and `brush_elastic`.

    Parameters
    ----------
    thickness : float
        Of one layer [m], 1e-10 to 1e-6.
    volume_fraction : float
        Of polymer in the layer [1], above 0 and below 1.
    flory_parameter : float
        Flory-Huggins parameter of polymer and solvent [1], -2 to 2; below 1/2 in a good solvent.
    molar_mass : float, optional
        Of one chain [kg/mol]; None leaves the elastic part out, which acts at separations below one thickness.
    polymer_density : float
        Of the pure polymer [kg/m3], for the elastic part.
    solvent_molar_volume : float
        [m3/mol]; the default is that of water.

    Raises
    ------
    InputError
        If a value is outside its range.
    """

    thickness: float
    volume_fraction: float
    flory_parameter: float
    molar_mass: float | None = None
    polymer_density: float = 1100.0
    solvent_molar_volume: float = 18.07e-6

    def __post_init__(self) -> None:
        keep = object.__setattr__
        hint = "a thickness in metres, such as 5e-9"
        keep(self, "thickness", scalar("thickness", self.thickness, "m", least=1e-10, most=1e-6, hint=hint))
        keep(self, "volume_fraction", scalar("volume_fraction", self.volume_fraction, above=0.0, below=1.0))
        keep(self, "flory_parameter", scalar("flory_parameter", self.flory_parameter, least=-2.0, most=2.0))
        if self.molar_mass is not None:
            hint = "a molar mass in kg/mol: 2000 g/mol is 2 kg/mol"
            keep(
                self,
                "molar_mass",
                scalar("molar_mass", self.molar_mass, "kg/mol", least=1e-2, most=1e5, hint=hint),
            )
        hint = "a density in kg/m3, such as 1100"
        density = scalar("polymer_density", self.polymer_density, "kg/m3", least=100.0, most=5e3, hint=hint)
        keep(self, "polymer_density", density)
        hint = "a molar volume in m3/mol: water has 18e-6"
        volume = scalar(
            "solvent_molar_volume", self.solvent_molar_volume, "m3/mol", least=1e-6, most=1e-3, hint=hint
        )
        keep(self, "solvent_molar_volume", volume)

    def energy(self, h: ArrayLike, d1: ArrayLike, d2: ArrayLike, medium: Medium) -> FloatArray:
        """Energy [J] at separations `h` [m] of spheres of diameters `d1`, `d2` [m] without their layers."""
        total = brush_osmotic(
            h,
            d1,
            d2,
            medium,
            thickness=self.thickness,
            volume_fraction=self.volume_fraction,
            flory_parameter=self.flory_parameter,
            solvent_molar_volume=self.solvent_molar_volume,
        )
        if self.molar_mass is None:
            return total
        return total + brush_elastic(
            h,
            d1,
            d2,
            medium,
            thickness=self.thickness,
            volume_fraction=self.volume_fraction,
            molar_mass=self.molar_mass,
            polymer_density=self.polymer_density,
        )


@dataclass(frozen=True, kw_only=True)
class Hydration:
    """Short-range repulsion by `hydration`.

    Parameters
    ----------
    energy_per_area : float
        Of flat surfaces at contact [J/m2], -0.1 to 0.1; 3e-3 to 30e-3 is customary,
        negative for hydrophobic attraction.
    decay_length : float
        [m], 1e-10 to 1e-8.

    Raises
    ------
    InputError
        If a value is outside its range.
    """

    energy_per_area: float
    decay_length: float = 1e-9

    def __post_init__(self) -> None:
        keep = object.__setattr__
        hint = "an energy in J/m2: 10 mJ/m2 is 10e-3 J/m2"
        energy = scalar("energy_per_area", self.energy_per_area, "J/m2", least=-0.1, most=0.1, hint=hint)
        keep(self, "energy_per_area", energy)
        hint = "a length in metres, such as 1e-9"
        keep(
            self,
            "decay_length",
            scalar("decay_length", self.decay_length, "m", least=1e-10, most=1e-8, hint=hint),
        )

    def energy(self, h: ArrayLike, d1: ArrayLike, d2: ArrayLike, medium: Medium) -> FloatArray:
        """Energy [J] at separations `h` [m] of spheres of diameters `d1`, `d2` [m]."""
        return hydration(h, d1, d2, energy_per_area=self.energy_per_area, decay_length=self.decay_length)


@dataclass(frozen=True, kw_only=True)
class Born:
    """Short-range repulsion of overlapping atoms by `born`; it gives the primary minimum a bottom.

    Parameters
    ----------
    hamaker : float
        Hamaker constant across the medium [J], 1e-23 to 1e-18.
    atom_diameter : float
        Lennard-Jones diameter [m], 1e-10 to 1e-9.

    Raises
    ------
    InputError
        If a value is outside its range.
    """

    hamaker: float
    atom_diameter: float = 0.5e-9

    def __post_init__(self) -> None:
        keep = object.__setattr__
        hint = "a Hamaker constant in joule: 1 zJ is 1e-21 J"
        keep(self, "hamaker", scalar("hamaker", self.hamaker, "J", least=1e-23, most=1e-18, hint=hint))
        hint = "a diameter in metres, such as 0.5e-9"
        atom = scalar("atom_diameter", self.atom_diameter, "m", least=1e-10, most=1e-9, hint=hint)
        keep(self, "atom_diameter", atom)

    def energy(self, h: ArrayLike, d1: ArrayLike, d2: ArrayLike, medium: Medium) -> FloatArray:
        """Energy [J] at separations `h` [m] of spheres of diameters `d1`, `d2` [m]."""
        return born(h, d1, d2, hamaker=self.hamaker, atom_diameter=self.atom_diameter)
