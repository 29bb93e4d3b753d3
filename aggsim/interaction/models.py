"""The choice of an interaction, carried by small frozen records with one method, `energy`."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol, runtime_checkable

import numpy as np
from numpy.typing import ArrayLike

from aggsim._checks import FloatArray, count, refuse, scalar
from aggsim.inputs import Medium
from aggsim.interaction import potentials

_LEAST_KAPPA_A = 5.0
_MOST_POTENTIAL = 0.050  # V times valence, for the linearised Hogg-Healy-Fuerstenau forms


@runtime_checkable
class DoubleLayer(Protocol):
    """What a double-layer model offers; an own one needs this method and nothing else."""

    def energy(
        self,
        h: ArrayLike,
        d1: ArrayLike,
        d2: ArrayLike,
        psi1: ArrayLike,
        psi2: ArrayLike,
        medium: Medium,
    ) -> FloatArray:
        """Energy [J] at separations `h` [m] of spheres of diameters `d1`, `d2` [m] and potentials [V]."""


@runtime_checkable
class VanDerWaals(Protocol):
    """What a model of the van der Waals attraction offers; an own one needs this method and nothing else."""

    def energy(self, h: ArrayLike, d1: ArrayLike, d2: ArrayLike, hamaker: ArrayLike) -> FloatArray:
        """Energy [J] at separations `h` [m] of spheres of diameters `d1`, `d2` [m]."""


@runtime_checkable
class Repulsion(Protocol):
    """What a steric or a short-range model offers; an own one needs this method and nothing else."""

    def energy(self, h: ArrayLike, d1: ArrayLike, d2: ArrayLike, medium: Medium) -> FloatArray:
        """Energy [J] at separations `h` [m] of spheres of diameters `d1`, `d2` [m]."""


@dataclass(frozen=True, kw_only=True)
class LinearSuperposition:
    """Double layer by `linear_superposition`; for kappa a above 5, any potential.

    Parameters
    ----------
    valence : int
        z of the counter-ions in a symmetric electrolyte, 1 to 6.

    Raises
    ------
    InputError
        If the valence is outside its range.
    """

    valence: int = 1

    def __post_init__(self) -> None:
        object.__setattr__(self, "valence", count("valence", self.valence, most=6))

    def energy(
        self,
        h: ArrayLike,
        d1: ArrayLike,
        d2: ArrayLike,
        psi1: ArrayLike,
        psi2: ArrayLike,
        medium: Medium,
    ) -> FloatArray:
        """Energy [J] at separations `h` [m] of spheres of diameters `d1`, `d2` [m] and potentials [V]."""
        return potentials.linear_superposition(h, d1, d2, psi1, psi2, medium, self.valence)

    def beyond_range(self, d1: float, d2: float, psi1: float, psi2: float, medium: Medium) -> tuple[str, ...]:
        """Sentences on inputs outside the range of the source; empty inside it."""
        return _thick_layer(d1, d2, medium)


@dataclass(frozen=True, kw_only=True)
class ConstantPotential:
    """Double layer by `constant_potential`; for kappa a above 5 and z |psi| up to 50 mV.

    Parameters
    ----------
    valence : int
        z of the counter-ions, 1 to 6; the energy depends on it through the ionic strength alone, the range of the
        formula directly.

    Raises
    ------
    InputError
        If the valence is outside its range.
    """

    valence: int = 1

    def __post_init__(self) -> None:
        object.__setattr__(self, "valence", count("valence", self.valence, most=6))

    def energy(
        self,
        h: ArrayLike,
        d1: ArrayLike,
        d2: ArrayLike,
        psi1: ArrayLike,
        psi2: ArrayLike,
        medium: Medium,
    ) -> FloatArray:
        """Energy [J] at separations `h` [m] of spheres of diameters `d1`, `d2` [m] and potentials [V]."""
        return potentials.constant_potential(h, d1, d2, psi1, psi2, medium)

    def beyond_range(self, d1: float, d2: float, psi1: float, psi2: float, medium: Medium) -> tuple[str, ...]:
        """Sentences on inputs outside the range of the source; empty inside it."""
        return _thick_layer(d1, d2, medium) + _high_potential(psi1, psi2, self.valence)


@dataclass(frozen=True, kw_only=True)
class ConstantCharge:
    """Double layer by `constant_charge`; for kappa a above 5 and z |psi| up to 50 mV.

    Parameters
    ----------
    valence : int
        z of the counter-ions, 1 to 6; the energy depends on it through the ionic strength alone, the range of the
        formula directly.

    Raises
    ------
    InputError
        If the valence is outside its range.
    """

    valence: int = 1

    def __post_init__(self) -> None:
        object.__setattr__(self, "valence", count("valence", self.valence, most=6))

    def energy(
        self,
        h: ArrayLike,
        d1: ArrayLike,
        d2: ArrayLike,
        psi1: ArrayLike,
        psi2: ArrayLike,
        medium: Medium,
    ) -> FloatArray:
        """Energy [J] at separations `h` [m] of spheres of diameters `d1`, `d2` [m] and potentials [V]."""
        return potentials.constant_charge(h, d1, d2, psi1, psi2, medium)

    def beyond_range(self, d1: float, d2: float, psi1: float, psi2: float, medium: Medium) -> tuple[str, ...]:
        """Sentences on inputs outside the range of the source; empty inside it."""
        return _thick_layer(d1, d2, medium) + _high_potential(psi1, psi2, self.valence)


@dataclass(frozen=True, kw_only=True)
class Hamaker:
    """Van der Waals attraction by `hamaker_spheres` or `hamaker_derjaguin`, retarded or not.

    Parameters
    ----------
    derjaguin : bool
        Use the form for small separations at all separations; wrong far away, offered for comparison.
    retardation_wavelength : float, optional
        Weaken the energy by `retardation_gregory` with this wavelength [m], 1e-9 to 1e-6; 100e-9 is customary.

    Raises
    ------
    InputError
        If the wavelength is outside its range, or `derjaguin` is not True or False.
    """

    derjaguin: bool = False
    retardation_wavelength: float | None = None

    def __post_init__(self) -> None:
        if not isinstance(self.derjaguin, (bool, np.bool_)):
            refuse("derjaguin", repr(self.derjaguin), "True or False")
        if self.retardation_wavelength is not None:
            wavelength = scalar(
                "retardation_wavelength",
                self.retardation_wavelength,
                "m",
                least=1e-9,
                most=1e-6,
                hint="a wavelength in metres, such as 100e-9",
            )
            object.__setattr__(self, "retardation_wavelength", wavelength)

    def energy(self, h: ArrayLike, d1: ArrayLike, d2: ArrayLike, hamaker: ArrayLike) -> FloatArray:
        """Energy [J] at separations `h` [m] of spheres of diameters `d1`, `d2` [m]."""
        form = potentials.hamaker_derjaguin if self.derjaguin else potentials.hamaker_spheres
        unretarded = form(h, d1, d2, hamaker)
        if self.retardation_wavelength is None:
            return unretarded
        return (unretarded * potentials.retardation_gregory(h, self.retardation_wavelength))[()]


def _thick_layer(d1: float, d2: float, medium: Medium) -> tuple[str, ...]:
    thinnest = 0.5 * min(d1, d2) / medium.debye_length
    if thinnest >= _LEAST_KAPPA_A:
        return ()
    return (
        f"kappa a={thinnest:.3g} is below {_LEAST_KAPPA_A:g}, where the double layer (Debye length "
        f"{medium.debye_length:.3g} m) is too thick for the Derjaguin approximation; the energy is a rough estimate.",
    )


def _high_potential(psi1: float, psi2: float, valence: int) -> tuple[str, ...]:
    highest = valence * max(abs(psi1), abs(psi2))
    if highest <= _MOST_POTENTIAL:
        return ()
    return (
        f"valence * |surface_potential|={highest:.3g} V is above {_MOST_POTENTIAL:g} V, the range of the linearised "
        f"double layer. Try: LinearSuperposition().",
    )


# what pair_energy and its kin use unless told otherwise
SUPERPOSITION = LinearSuperposition()
UNRETARDED = Hamaker()
