"""How high the barrier must be for particles to stay single long enough."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

from scipy.optimize import brentq

from aggsim._checks import scalar
from aggsim.inputs import Medium, Particles
from aggsim.interaction.fuchs import log_stability_ratio
from aggsim.interaction.models import SUPERPOSITION, UNRETARDED, DoubleLayer, Repulsion, VanDerWaals
from aggsim.interaction.profile import assembled_pair, pair_energy

_MOST_POTENTIAL = 0.3  # V, the limit of Particles
_LEAST_SALT, _MOST_SALT = 1e-4, 2e4  # mol/m3: pure water, and the limit of Medium


@dataclass(frozen=True, kw_only=True)
class RequiredBarrier:
    """What keeps the wanted share of the particles single.

    Parameters
    ----------
    stability_ratio : float
        Least stability ratio [1].
    surface_potential : float or None
        Least magnitude of the potential at the given ionic strength [V]; 0.0 where none is needed, None where
        not even 0.3 V suffices.
    barrier : float or None
        Highest energy over separation at that potential [J]; None where there is no such potential.
    ionic_strength : float or None
        Largest ionic strength at the potential of the particles [mol/m3]; infinite where any up to 2e4 mol/m3 will
        do, None where not even 1e-4 mol/m3 is low enough or the particles have no potential.
    """

    stability_ratio: float
    surface_potential: float | None
    barrier: float | None
    ionic_strength: float | None


def required_barrier(
    particles: Particles,
    medium: Medium,
    *,
    number: float,
    time: float,
    share_single: float = 0.5,
    double_layer: DoubleLayer = SUPERPOSITION,
    van_der_waals: VanDerWaals | None = UNRETARDED,
    steric: Repulsion | None = None,
    short_range: Repulsion | None = None,
    hydrodynamics: bool = True,
) -> RequiredBarrier:
    """Stability ratio, barrier, potential and ionic strength that keep a share of the particles single.

    With the rate K/W of Brownian coagulation of equal spheres, K = 8 kT/(3 mu), for all pairs, the share of single
    particles is n1/N0 = 1/(1 + T)**2, T = K N0 t/(2 W) [1]_; hence W = K N0 t/2/(share**(-1/2) - 1). The potential
    and the ionic strength are those at which the integral of `stability_ratio` has this value.

    Parameters
    ----------
    particles : Particles
        With `hamaker`; `surface_potential` is needed for the ionic strength only.
    medium : Medium
        With permittivity and ionic strength.
    number : float
        Number concentration of particles at the start, all single [1/m3].
    time : float
        [s].
    share_single : float
        Share that is wanted single after `time` [1], above 0 and below 1.
    double_layer, van_der_waals, steric, short_range
        As in `pair_energy`; a double layer is needed.
    hydrodynamics : bool
        Whether the liquid between the particles slows their approach.

    Raises
    ------
    InputError
        If a value is missing or outside its range.

    Warns
    -----
    ValidityWarning
        If a model is used outside the range of its source at the potential found.

    References
    ----------
    .. [1] M. von Smoluchowski (1917), Z. phys. Chem. 92, 129, DOI 10.1515/zpch-1918-9209.
    """
    amount = scalar("number", number, "1/m3", above=0.0)
    seconds = scalar("time", time, "s", above=0.0)
    share = scalar("share_single", share_single, above=0.0, below=1.0, hint="0.9 for nine of ten")

    parts: dict[str, Any] = {
        "double_layer": double_layer,
        "van_der_waals": van_der_waals,
        "steric": steric,
        "short_range": short_range,
    }
    template = assembled_pair(replace(particles, surface_potential=0.0), medium, **parts)
    half_rate = 4.0 * medium.thermal_energy / (3.0 * medium.viscosity)
    target = math.log(half_rate) + math.log(amount) + math.log(seconds)
    target -= math.log(math.expm1(-0.5 * math.log(share)))

    def excess(potential: float, salt: float) -> float:
        grain = replace(particles, surface_potential=potential)
        liquid = replace(medium, ionic_strength=salt)
        energy = replace(template, first=grain, second=grain, medium=liquid)
        return log_stability_ratio(energy, hydrodynamics=hydrodynamics) - target

    potential = _first_zero(lambda psi: excess(psi, medium.ionic_strength), 0.0, _MOST_POTENTIAL)
    salt = None
    given = particles.surface_potential
    if given is not None:
        log_salt = _first_zero(
            lambda x: excess(given, math.exp(-x)), -math.log(_MOST_SALT), -math.log(_LEAST_SALT)
        )
        if log_salt is not None:
            salt = math.inf if log_salt == -math.log(_MOST_SALT) else math.exp(-log_salt)
    barrier = None
    if potential is not None:
        barrier = pair_energy(replace(particles, surface_potential=potential), medium, **parts).barrier
    return RequiredBarrier(
        stability_ratio=math.exp(target),
        surface_potential=potential,
        barrier=barrier,
        ionic_strength=salt,
    )


def _first_zero(function: Callable[[float], float], low: float, high: float) -> float | None:
    """Where a function that rises reaches 0: `low` if it is not below 0 there, None if it never does."""
    if function(low) >= 0.0:
        return low
    if function(high) < 0.0:
        return None
    return float(brentq(function, low, high, xtol=1e-14, rtol=1e-12))
