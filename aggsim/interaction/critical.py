"""The critical coagulation concentration: how much salt is too much."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np
from scipy import constants
from scipy.optimize import brentq, minimize_scalar

from aggsim._checks import count, refuse
from aggsim.errors import InputError
from aggsim.inputs import Medium, Particles
from aggsim.interaction.models import SUPERPOSITION, UNRETARDED, DoubleLayer, Repulsion, VanDerWaals
from aggsim.interaction.profile import PairEnergy, assembled_pair, pair_energy

_LEAST_SALT, _MOST_SALT = 1e-6, 2e4  # mol/m3, the ends of the search
_CLOSEST = 1e-13  # m
_POINTS = 400


def critical_coagulation_concentration(
    particles: Particles,
    medium: Medium,
    *,
    double_layer: DoubleLayer = SUPERPOSITION,
    van_der_waals: VanDerWaals = UNRETARDED,
    steric: Repulsion | None = None,
    short_range: Repulsion | None = None,
) -> float:
    """Concentration [mol/m3] of a z:z electrolyte at which the energy just fails to rise above zero.

    There the maximum of the energy over separation touches zero, V = 0 and dV/dh = 0 [1]_: the repulsion is
    nowhere larger than the attraction. The concentration is c = I/z**2 with the valence z of the double-layer
    model; for z = 1 it is the ionic strength itself.

    Parameters
    ----------
    particles : Particles
        With `hamaker` and `surface_potential`, which is taken not to change with the salt.
    medium : Medium
        With permittivity; its ionic strength is not used.
    double_layer, van_der_waals, steric, short_range
        As in `pair_energy`; the first two are needed.

    Raises
    ------
    InputError
        If a value is missing, or the energy rises above zero at all ionic strengths from 1e-6 to 2e4 mol/m3, or
        at none.

    Warns
    -----
    ValidityWarning
        If a model is used outside the range of its source at the concentration found.

    References
    ----------
    .. [1] E. J. W. Verwey, J. Th. G. Overbeek (1948), Theory of the Stability of Lyophobic Colloids, Elsevier.
    """
    parts: dict[str, Any] = {
        "double_layer": double_layer,
        "van_der_waals": van_der_waals,
        "steric": steric,
        "short_range": short_range,
    }
    salt = critical_ionic_strength(particles, medium, **parts)
    pair_energy(
        particles, replace(medium, ionic_strength=salt), **parts
    )  # warns of what is beyond range there
    return salt / int(getattr(double_layer, "valence", 1)) ** 2


def critical_ionic_strength(
    particles: Particles,
    medium: Medium,
    *,
    double_layer: Any = SUPERPOSITION,
    van_der_waals: Any = UNRETARDED,
    steric: Any = None,
    short_range: Any = None,
) -> float:
    """Ionic strength [mol/m3] at the critical coagulation concentration, without a word on the range of the models.

    Arguments and errors as in `critical_coagulation_concentration`.
    """
    for name, model in (("double_layer", double_layer), ("van_der_waals", van_der_waals)):
        if model is None:
            refuse(name, None, "a model; without it there is no critical concentration", f"leave {name} out")
    if not isinstance(medium, Medium):
        refuse("medium", repr(medium), "Medium", "Medium.water(temperature=298.15)")

    template = assembled_pair(
        particles,
        replace(medium, ionic_strength=100.0),
        double_layer=double_layer,
        van_der_waals=van_der_waals,
        steric=steric,
        short_range=short_range,
    )

    def excess(log_salt: float) -> float:
        salt = math.exp(log_salt)
        return _log_largest_ratio(replace(template, medium=replace(medium, ionic_strength=salt)))

    low, high = math.log(_LEAST_SALT), math.log(_MOST_SALT)
    if excess(low) <= 0.0:
        raise InputError(
            f"the energy does not rise above zero at any ionic strength from {_LEAST_SALT:g} mol/m3 on: there is no "
            f"critical coagulation concentration. Try: a surface potential further from 0 V, or "
            f"a smaller Hamaker constant (that across the medium, not across vacuum)."
        )
    if excess(high) >= 0.0:
        raise InputError(
            f"the energy still rises above zero at {_MOST_SALT:g} mol/m3, so that no amount of salt coagulates: there "
            f"is no critical coagulation concentration. Try: a model without a repulsion that salt does not screen."
        )
    return math.exp(brentq(excess, low, high, xtol=1e-12, rtol=1e-14))


def critical_coagulation_closed_form(particles: Particles, medium: Medium, valence: int = 1) -> float:
    """Critical coagulation concentration [mol/m3] of a z:z electrolyte in closed form.

    c = eps kT kappa**2/(2 NA z**2 e**2) with kappa = 384 pi eps (kT/(z e))**2 tanh(z e psi/(4 kT))**2/(2.718... A),
    which follows from linear superposition and the Derjaguin form of the attraction, where the maximum touches
    zero at kappa h = 1 [1]_. It does not depend on the size; c goes with z**-6 at high potentials (the rule of
    Schulze and Hardy) and with psi**4/z**2 at low ones.

    Parameters
    ----------
    particles : Particles
        With `hamaker` and `surface_potential`.
    medium : Medium
        With permittivity; its ionic strength is not used.
    valence : int
        z, 1 to 6.

    Raises
    ------
    InputError
        If a value is missing.

    References
    ----------
    .. [1] E. J. W. Verwey, J. Th. G. Overbeek (1948), Theory of the Stability of Lyophobic Colloids, Elsevier.
    """
    z = count("valence", valence, most=6)
    if particles.hamaker is None or particles.surface_potential is None:
        missing = "hamaker" if particles.hamaker is None else "surface_potential"
        refuse(f"particles.{missing}", None, "a number", f"Particles(..., {missing}=...)")
    if medium.relative_permittivity is None:
        refuse(
            "relative_permittivity", None, "a number of at least 1", "Medium(..., relative_permittivity=78.4)"
        )
    permittivity = constants.epsilon_0 * medium.relative_permittivity
    thermal = medium.thermal_energy / (z * constants.e)  # kT/(z e) [V]
    gamma = math.tanh(particles.surface_potential / (4.0 * thermal))
    kappa = 384.0 * math.pi * permittivity * (thermal * gamma) ** 2 / (math.e * particles.hamaker)
    return permittivity * thermal * kappa**2 / (2.0 * constants.N_A * z * constants.e)


def _log_largest_ratio(pair: PairEnergy) -> float:
    """Logarithm of the largest repulsion over attraction at any separation; 0 where the maximum touches zero."""
    parts = dict(pair.parts)
    attraction = parts.pop("van der Waals")

    def ratio(x: float) -> float:
        h = math.exp(x)
        return float(sum(part(h) for part in parts.values()) / -attraction(h))

    farthest = max(100.0 * pair.medium.debye_length, 10.0 * (pair.first.diameter + pair.second.diameter))
    x = np.linspace(math.log(_CLOSEST), math.log(farthest), _POINTS)
    h = np.exp(x)
    values = sum(part(h) for part in parts.values()) / -attraction(h)
    best = int(np.argmax(values))
    bounds = (float(x[max(best - 1, 0)]), float(x[min(best + 1, _POINTS - 1)]))
    found = minimize_scalar(lambda x: -ratio(x), bounds=bounds, method="bounded", options={"xatol": 1e-8})
    largest = max(-float(found.fun), float(values[best]))
    return math.log(largest) if largest > 0.0 else -math.inf
