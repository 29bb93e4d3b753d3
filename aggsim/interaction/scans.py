"""Stability over salt and over zeta potential: what the figures of the barrier show."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.inputs import Medium, Particles
from aggsim.interaction.critical import critical_ionic_strength
from aggsim.interaction.fuchs import log_stability_ratio
from aggsim.interaction.models import ConstantCharge, ConstantPotential, LinearSuperposition
from aggsim.interaction.profile import assembled_pair

MODELS = (LinearSuperposition(), ConstantPotential(), ConstantCharge())


@dataclass(frozen=True, eq=False)
class SaltScan:
    """Stability ratio over ionic strength, for several double-layer models.

    Attributes
    ----------
    ionic_strength : (n,) mol/m3
    log10_ratio : dict of (n,)
        Logarithm (base 10) of the stability ratio by model.
    critical : dict
        Ionic strength at the critical coagulation concentration [mol/m3] by model, None where there is none.
    """

    ionic_strength: FloatArray
    log10_ratio: Mapping[str, FloatArray]
    critical: Mapping[str, float | None]


@dataclass(frozen=True, eq=False)
class StabilityMap:
    """Stability ratio over surface potential and ionic strength.

    Attributes
    ----------
    surface_potential : (m,) V
    ionic_strength : (n,) mol/m3
    log10_ratio : dict of (m, n)
        Logarithm (base 10) of the stability ratio by model.
    """

    surface_potential: FloatArray
    ionic_strength: FloatArray
    log10_ratio: Mapping[str, FloatArray]


def salt_scan(
    particles: Particles,
    medium: Medium,
    ionic_strength: Any,
    *,
    double_layers: Sequence[Any] = MODELS,
    hydrodynamics: bool = True,
    **options: Any,
) -> SaltScan:
    """Compute the stability ratio at each ionic strength (n,) [mol/m3] with each double-layer model.

    `options` go to `pair_energy` (van_der_waals, steric, short_range). The models differ by orders of magnitude
    at the same inputs; their spread belongs to the answer. Raises InputError for concentrations that do not
    increase.
    """
    salts = _checks.array("ionic_strength", ionic_strength, "mol/m3", above=0.0, increasing=True)
    ratios: dict[str, FloatArray] = {}
    critical: dict[str, float | None] = {}
    for model in double_layers:
        liquids = [replace(medium, ionic_strength=float(salt)) for salt in salts]
        name = model_name(model)
        ratios[name] = np.array(
            [_log10_ratio(particles, liquid, model, hydrodynamics, options) for liquid in liquids]
        )
        try:
            critical[name] = critical_ionic_strength(particles, medium, double_layer=model, **options)
        except InputError:
            critical[name] = None
    return SaltScan(salts, ratios, critical)


def stability_map(
    particles: Particles,
    medium: Medium,
    surface_potential: Any,
    ionic_strength: Any,
    *,
    double_layers: Sequence[Any] = MODELS,
    hydrodynamics: bool = True,
    **options: Any,
) -> StabilityMap:
    """Compute the stability ratio at each surface potential (m,) [V] and ionic strength (n,) [mol/m3].

    `options` as in `salt_scan`. Raises InputError for values that do not increase.
    """
    potentials = _checks.array("surface_potential", surface_potential, "V", increasing=True)
    salts = _checks.array("ionic_strength", ionic_strength, "mol/m3", above=0.0, increasing=True)
    ratios = {}
    for model in double_layers:
        rows = []
        for potential in potentials:
            grains = replace(particles, surface_potential=float(potential))
            liquids = [replace(medium, ionic_strength=float(salt)) for salt in salts]
            rows.append([_log10_ratio(grains, liquid, model, hydrodynamics, options) for liquid in liquids])
        ratios[model_name(model)] = np.array(rows)
    return StabilityMap(potentials, salts, ratios)


def model_name(model: Any) -> str:
    """Name of a model in words: LinearSuperposition() is "linear superposition"."""
    return "".join(f" {c.lower()}" if c.isupper() else c for c in type(model).__name__).strip()


def _log10_ratio(
    particles: Particles, medium: Medium, model: Any, hydrodynamics: bool, options: Mapping[str, Any]
) -> float:
    energy = assembled_pair(
        particles, medium, double_layer=model, **options
    )  # a scan crosses limits on purpose
    return log_stability_ratio(energy, hydrodynamics=hydrodynamics) / math.log(10.0)
