"""The interaction energy of a pair over the separation: sum of its parts, barrier and minima."""

from __future__ import annotations

import inspect
import math
import warnings
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cached_property, partial
from types import MappingProxyType
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike
from scipy.optimize import minimize_scalar

from aggsim._checks import FloatArray, refuse
from aggsim.errors import ValidityWarning
from aggsim.inputs import Medium, Particles
from aggsim.interaction.models import SUPERPOSITION, UNRETARDED, DoubleLayer, Repulsion, VanDerWaals
from aggsim.interaction.potentials import positive

_CLOSEST = 1e-13  # m, where the search for barrier and minima starts
_PER_DECADE = 200  # points of the search


class _Extreme(NamedTuple):
    separation: float
    energy: float


class _Landscape(NamedTuple):
    barrier: float
    top: _Extreme | None
    primary: _Extreme | None
    secondary: _Extreme | None


@dataclass(frozen=True, kw_only=True)
class PairEnergy:
    """Interaction energy of two particles, made by `pair_energy`; call it with separations.

    Parameters
    ----------
    first, second : Particles
    medium : Medium
    double_layer : DoubleLayer or None
    van_der_waals : VanDerWaals or None
    steric, short_range : Repulsion or None
    """

    first: Particles
    second: Particles
    medium: Medium
    double_layer: DoubleLayer | None
    van_der_waals: VanDerWaals | None
    steric: Repulsion | None
    short_range: Repulsion | None

    def __call__(self, h: ArrayLike) -> FloatArray:
        """Energy [J] at separations `h` of the surfaces [m], of any shape; 0 J far apart.

        Raises
        ------
        InputError
            If a separation is not above 0 and finite.
        """
        return self.between(h, self.first.diameter, self.second.diameter)

    def between(self, h: ArrayLike, d1: ArrayLike, d2: ArrayLike) -> FloatArray:
        """Energy [J] of spheres of the same surfaces but diameters `d1`, `d2` [m]; all three broadcast.

        Raises
        ------
        InputError
            If a separation or a diameter is not above 0 and finite.
        """
        gap, one, two = positive("h", h), positive("d1", d1), positive("d2", d2)
        parts = [self._part(name, gap, one, two) for name in self.parts]
        if not parts:
            return np.zeros(np.broadcast_shapes(gap.shape, one.shape, two.shape))[()]
        return np.asarray(sum(parts[1:], start=parts[0]))[()]

    @cached_property
    def hamaker(self) -> float:
        """Hamaker constant of the pair [J], sqrt(A1 A2); nan where there is no van der Waals part."""
        if self.van_der_waals is None or self.first.hamaker is None or self.second.hamaker is None:
            return math.nan
        return math.sqrt(self.first.hamaker) * math.sqrt(self.second.hamaker)

    @property
    def parts(self) -> Mapping[str, Callable[[ArrayLike], FloatArray]]:
        """Function of the separation [m] for every part [J] that was not left out, by name."""
        choices = {
            "van der Waals": self.van_der_waals,
            "double layer": self.double_layer,
            "steric": self.steric,
            "short range": self.short_range,
        }
        d1, d2 = self.first.diameter, self.second.diameter
        named = {
            name: partial(self._part, name, d1=d1, d2=d2) for name in choices if choices[name] is not None
        }
        return MappingProxyType(named)

    @property
    def barrier(self) -> float:
        """Energy at the highest maximum [J], 0 J being far apart; 0.0 where there is no maximum.

        It is negative where the maximum lies below the energy far apart. Where the energy has no extreme and only
        rises towards contact, it is the energy at the separation 1e-13 m.
        """
        return self._landscape.barrier

    @property
    def barrier_separation(self) -> float | None:
        """Separation at the highest maximum [m]; None where there is no maximum."""
        top = self._landscape.top
        return None if top is None else top.separation

    @property
    def primary_minimum(self) -> float | None:
        """Energy at the minimum inside the barrier [J]; None where the energy falls without end."""
        primary = self._landscape.primary
        return None if primary is None else primary.energy

    @property
    def primary_minimum_separation(self) -> float | None:
        """Separation at the primary minimum [m]; None where there is none."""
        primary = self._landscape.primary
        return None if primary is None else primary.separation

    @property
    def secondary_minimum(self) -> float | None:
        """Energy at the minimum outside the barrier [J]; None where there is none."""
        secondary = self._landscape.secondary
        return None if secondary is None else secondary.energy

    @property
    def secondary_minimum_separation(self) -> float | None:
        """Separation at the secondary minimum [m]; None where there is none."""
        secondary = self._landscape.secondary
        return None if secondary is None else secondary.separation

    def _part(self, name: str, h: ArrayLike, d1: ArrayLike, d2: ArrayLike) -> FloatArray:
        if name == "van der Waals" and self.van_der_waals is not None:
            return self.van_der_waals.energy(h, d1, d2, self.hamaker)
        if name == "double layer" and self.double_layer is not None:
            psi1, psi2 = self.first.surface_potential, self.second.surface_potential
            if psi1 is None or psi2 is None:
                refuse("surface_potential", None, "a potential [V] of both particles", "pair_energy(...)")
            return self.double_layer.energy(h, d1, d2, psi1, psi2, self.medium)
        model = self.steric if name == "steric" else self.short_range
        if model is None:
            refuse("name", repr(name), "one of " + ", ".join(map(repr, self.parts)))
        return model.energy(h, d1, d2, self.medium)

    @cached_property
    def _landscape(self) -> _Landscape:
        farthest = 10.0 * (self.first.diameter + self.second.diameter)
        if self.double_layer is not None and math.isfinite(self.medium.debye_length):
            farthest = max(farthest, 100.0 * self.medium.debye_length)
        count = int(_PER_DECADE * math.log10(farthest / _CLOSEST)) + 1
        position = np.linspace(math.log(_CLOSEST), math.log(farthest), count)
        energy = self(np.exp(position))
        inner, left, right = energy[1:-1], energy[:-2], energy[2:]
        tops = [
            self._refine(position, int(k), -1.0) for k in np.flatnonzero((inner > left) & (inner > right)) + 1
        ]
        pits = [
            self._refine(position, int(k), 1.0) for k in np.flatnonzero((inner < left) & (inner < right)) + 1
        ]
        top = max(tops, key=lambda e: e.energy, default=None)
        if top is None:
            rising = not pits and float(energy[0]) > 0.0
            primary = min(pits, key=lambda e: e.energy, default=None)
            return _Landscape(float(energy[0]) if rising else 0.0, None, primary, None)
        inside = [pit for pit in pits if pit.separation < top.separation]
        outside = [pit for pit in pits if pit.separation > top.separation]
        return _Landscape(
            top.energy,
            top,
            min(inside, key=lambda e: e.energy, default=None),
            min(outside, key=lambda e: e.energy, default=None),
        )

    def _refine(self, position: FloatArray, k: int, sign: float) -> _Extreme:
        """The extreme near point `k` of the search: a minimum for sign 1, a maximum for sign -1."""
        scale = abs(float(self(math.exp(position[k])))) or 1.0
        found = minimize_scalar(
            lambda x: sign * float(self(math.exp(x))) / scale,
            bounds=(float(position[k - 1]), float(position[k + 1])),
            method="bounded",
            options={"xatol": 1e-9},
        )
        separation = math.exp(float(found.x))
        return _Extreme(separation, float(self(separation)))


def pair_energy(
    particles: Particles,
    medium: Medium,
    other: Particles | None = None,
    *,
    double_layer: DoubleLayer | None = SUPERPOSITION,
    van_der_waals: VanDerWaals | None = UNRETARDED,
    steric: Repulsion | None = None,
    short_range: Repulsion | None = None,
) -> PairEnergy:
    """Interaction energy of two particles in a medium as a function of their separation (DLVO and beyond) [1]_ [2]_.

    V(h) = V_van_der_Waals + V_double_layer + V_steric + V_short_range. Particles of two materials attract with
    A = sqrt(A1 A2), each A_i being that of the material across the medium.

    Parameters
    ----------
    particles : Particles
        With `hamaker` for the van der Waals part and `surface_potential` for the double layer.
    medium : Medium
        With permittivity and ionic strength for the double layer.
    other : Particles, optional
        The second particle; None for one like the first.
    double_layer : DoubleLayer or None
        `LinearSuperposition()` (default), `ConstantPotential()`, `ConstantCharge()`, or one's own; None leaves
        the part out. The choice can move a stability ratio by many orders of magnitude: compare them.
    van_der_waals : VanDerWaals or None
        `Hamaker(...)` (default) or one's own; None leaves the part out.
    steric, short_range : Repulsion, optional
        `Brush(...)`, `Hydration(...)`, `Born(...)` or one's own.

    Raises
    ------
    InputError
        If a part lacks a value that it needs, or an argument is of the wrong kind.

    Warns
    -----
    ValidityWarning
        If a model is used outside the range of its source.

    References
    ----------
    .. [1] B. V. Derjaguin, L. D. Landau (1941), Acta Physicochim. URSS 14, 633.
    .. [2] E. J. W. Verwey, J. Th. G. Overbeek (1948), Theory of the Stability of Lyophobic Colloids, Elsevier.
    """
    pair = assembled_pair(
        particles,
        medium,
        other,
        double_layer=double_layer,
        van_der_waals=van_der_waals,
        steric=steric,
        short_range=short_range,
    )
    _warn(pair)
    return pair


def assembled_pair(
    particles: Particles,
    medium: Medium,
    other: Particles | None = None,
    *,
    double_layer: DoubleLayer | None = SUPERPOSITION,
    van_der_waals: VanDerWaals | None = UNRETARDED,
    steric: Repulsion | None = None,
    short_range: Repulsion | None = None,
) -> PairEnergy:
    """Check and combine the parts as `pair_energy` does, without a word on the range of the models.

    For searches and scans that pass through conditions in which nobody asked for an energy.
    """
    second = particles if other is None else other
    _require("particles", particles, Particles, "Particles(diameter=..., density=...)")
    _require("other", second, Particles, "Particles(diameter=..., density=...)")
    _require("medium", medium, Medium, "Medium.water(ionic_strength=...)")
    if van_der_waals is not None:
        _require_model("van_der_waals", van_der_waals, VanDerWaals, "Hamaker(), or None to leave it out")
        for name, one in (("particles", particles), ("other", second)):
            if one.hamaker is None:
                refuse(
                    f"{name}.hamaker",
                    None,
                    "a Hamaker constant across the medium [J] where a van der Waals part is asked for",
                    "Particles(..., hamaker=9e-21), or van_der_waals=None",
                )
    if double_layer is not None:
        _require_model(
            "double_layer", double_layer, DoubleLayer, "LinearSuperposition(), or None to leave it out"
        )
        for name, one in (("particles", particles), ("other", second)):
            if one.surface_potential is None:
                refuse(
                    f"{name}.surface_potential",
                    None,
                    "a potential [V] where a double layer is asked for",
                    "Particles(..., surface_potential=-0.030), or double_layer=None",
                )
    for name, model in (("steric", steric), ("short_range", short_range)):
        if model is not None:
            _require_model(name, model, Repulsion, "Brush(...), Hydration(...), or None to leave it out")
    pair = PairEnergy(
        first=particles,
        second=second,
        medium=medium,
        double_layer=double_layer,
        van_der_waals=van_der_waals,
        steric=steric,
        short_range=short_range,
    )
    pair(1e-9)  # what a part lacks in the medium shows here, not in the middle of a calculation
    return pair


def _warn(pair: PairEnergy) -> None:
    beyond = getattr(pair.double_layer, "beyond_range", None)
    if beyond is None:
        return
    one, two = pair.first, pair.second
    sentences = beyond(one.diameter, two.diameter, one.surface_potential, two.surface_potential, pair.medium)
    for sentence in sentences:
        warnings.warn(sentence, ValidityWarning, stacklevel=3)


def _require(name: str, value: object, kind: type, hint: str) -> None:
    if isinstance(value, type) or not isinstance(value, kind):
        refuse(name, repr(value), kind.__name__, hint)


def _require_model(name: str, value: object, kind: type, hint: str) -> None:
    """Refuse a class in place of its object, and a model that belongs to another part."""
    _require(name, value, kind, hint)
    wanted = [key for key in inspect.signature(kind.energy).parameters if key != "self"]  # type: ignore[attr-defined]
    try:
        inspect.signature(value.energy).bind(*wanted)  # type: ignore[attr-defined]
    except TypeError:
        refuse(name, repr(value), f"{kind.__name__} with a method energy({', '.join(wanted)})", hint)
