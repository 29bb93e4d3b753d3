"""Formulas of breakage rates: callables of particle volume [m3] that return 1/s."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from aggsim._checks import FloatArray
from aggsim.inputs import Structure

_SAME_SIZE = 1e-9  # relative; a pivot that stands for a primary particle may miss its volume by round-off


@dataclass(frozen=True)
class PowerLaw:
    """coefficient * v**exponent, made by `rates.power_law` or `rates.shear`."""

    coefficient: float
    exponent: float

    def __call__(self, volume: ArrayLike) -> FloatArray:
        """Breakage rate [1/s] at `volume` [m3]."""
        rate: FloatArray = self.coefficient * np.asarray(volume, dtype=np.float64) ** self.exponent
        return rate


@dataclass(frozen=True)
class Turbulent:
    """Made by `rates.turbulent`: shear rate [1/s], dissipation [W/kg], resistance [m3/s3]."""

    structure: Structure
    shear_rate: float
    dissipation: float
    resistance: float

    def __call__(self, volume: ArrayLike) -> FloatArray:
        """Breakage rate [1/s] at `volume` [m3]."""
        if self.dissipation == 0.0:
            return np.zeros(np.shape(volume))[()]
        critical = self.resistance / self.structure.collision_diameter(volume)
        frequency = math.sqrt(4.0 / (15.0 * math.pi)) * self.shear_rate
        rate: FloatArray = frequency * np.exp(-critical / self.dissipation)
        return rate


@dataclass(frozen=True)
class FlocStrength:
    """Made by `rates.floc_strength`: shear rate [1/s], stress over yield force [1/m2], efficiency and exponents [1]."""

    structure: Structure
    shear_rate: float
    stress_per_force: float
    efficiency: float
    size_exponent: float
    stress_exponent: float

    def __call__(self, volume: ArrayLike) -> FloatArray:
        """Breakage rate [1/s] at `volume` [m3]."""
        v = np.asarray(volume, dtype=np.float64)
        particles = self.structure.particles
        d = self.structure.collision_diameter(v)
        excess = np.maximum(d / particles.diameter - 1.0, 0.0) ** self.size_exponent
        stress = (self.stress_per_force * d * d) ** self.stress_exponent
        aggregate = v > particles.volume * (1.0 + _SAME_SIZE)
        return np.where(aggregate, self.efficiency * self.shear_rate * excess * stress, 0.0)[()]


@dataclass(frozen=True)
class LargestStableSize:
    """Made by `rates.largest_stable_size`: largest stable diameter [m], rate [1/s], steepness [1]."""

    structure: Structure
    largest_diameter: float
    rate: float
    steepness: float

    def __call__(self, volume: ArrayLike) -> FloatArray:
        """Breakage rate [1/s] at `volume` [m3]."""
        size = np.asarray(self.structure.collision_diameter(volume))
        rate: FloatArray = self.rate * (size / self.largest_diameter) ** self.steepness
        return rate


@dataclass(frozen=True)
class Custom:
    """Made by `rates.from_function`."""

    name: str
    function: Callable[[FloatArray], Any]

    def __call__(self, volume: FloatArray) -> Any:
        """Breakage rate [1/s] at `volume` [m3]."""
        return self.function(volume)
