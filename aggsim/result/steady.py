"""The record of a steady state."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from aggsim._checks import FloatArray
from aggsim.result.readings import Readings
from aggsim.sizes import SizeGrid


@dataclass(frozen=True, eq=False)
class SteadyBalance:
    """Account of particle volume at a steady state, per volume of the vessel.

    Attributes
    ----------
    present : float
        Volume fraction in the sections [-].
    beyond_grid : float
        What grows past the top of the grid [1/s]; the smaller, the better resolved.
    negative_share : float
        Share of the volume in sections with a negative number [-].
    inward, outward : dict of float
        What each stream brings or takes [1/s].
    """

    present: float
    beyond_grid: float
    negative_share: float
    inward: Mapping[str, float] = field(default_factory=dict)
    outward: Mapping[str, float] = field(default_factory=dict)

    @property
    def closure(self) -> float:
        """Relative closure error: (in - out - beyond the grid) / in; without streams 0."""
        fed = sum(self.inward.values())
        return (fed - sum(self.outward.values()) - self.beyond_grid) / fed if fed > 0.0 else 0.0

    def __str__(self) -> str:
        streams = {**self.inward, **self.outward, "beyond the grid": self.beyond_grid}
        rates = ", ".join(f"{name} {rate:.6g}" for name, rate in streams.items())
        return f"particle volume fraction {self.present:.6g}; per second: {rates}; closure error {self.closure:.1e}"


@dataclass(frozen=True, eq=False)
class SteadyState(Readings):
    """Particle-size distribution that no longer changes.

    Attributes
    ----------
    grid : SizeGrid
    number : (n_sections,) 1/m3
        Number of particles in each section; of the last tank where there are several.
    balance : SteadyBalance
        Account of all tanks together.
    jacobian : (n_tanks n, n_tanks n) 1/s
        Exact derivative of the rates by the numbers in the first n sections of each tank, those in use.
    closed : bool
        True where the particle volume is conserved.
    iterations : int
        Newton steps that were taken.
    residual : float
        Largest relative change of a section in the last step.
    integrated : bool
        True where Newton's method needed the help of an integration in time.
    settings : dict
        The numerical choices in words.
    tanks : (n_tanks, n_sections) 1/m3
        Numbers in each tank.
    """

    grid: SizeGrid
    number: FloatArray
    balance: SteadyBalance
    jacobian: FloatArray = field(repr=False)
    closed: bool
    iterations: int
    residual: float
    integrated: bool
    settings: Mapping[str, str]
    tanks: FloatArray

    def __post_init__(self) -> None:
        for array in (self.number, self.tanks, self.jacobian):
            array.setflags(write=False)

    @cached_property
    def _growth(self) -> float:
        """Largest real part of the eigenvalues of the Jacobian [1/s], without that of a conserved volume.

        Where no tank depends on one behind it, the eigenvalues are those of each tank.
        """
        size = self.jacobian.shape[0] // self.tanks.shape[0]
        if any(self.jacobian[k : k + size, k + size :].any() for k in range(0, self.jacobian.shape[0], size)):
            size = self.jacobian.shape[0]
        blocks = [self.jacobian[k : k + size, k : k + size] for k in range(0, self.jacobian.shape[0], size)]
        values = np.concatenate([np.linalg.eigvals(block) for block in blocks])
        if self.closed:
            values = np.delete(values, int(np.abs(values).argmin()))
        return float(values.real.max())

    @property
    def stable(self) -> bool:
        """True where every small disturbance that keeps the conserved volume dies out."""
        return self._growth < 0.0

    @property
    def relaxation_time(self) -> float:
        """Time [s] in which the slowest disturbance falls to 1/e; of the fastest growth where it is not stable."""
        return 1.0 / max(abs(self._growth), 1e-300)

    def tank(self, k: int) -> Tank:
        """Readings of tank number k (from 0)."""
        return Tank(self.grid, self.tanks[k])

    def __repr__(self) -> str:
        kind = "stable" if self.stable else "not stable"
        how = ", after integration in time" if self.integrated else ""
        return "\n".join(
            [
                f"SteadyState: {kind}, relaxes in {self.relaxation_time:.4g} s",
                f"  grid      {self.grid!r}",
                f"  number    {float(self.total_number()):.4g} 1/m3",
                f"  D[4,3]    {float(self.mean_diameter(4, 3)):.4g} m",
                f"  balance   {self.balance}",
                f"  computed  {', '.join(f'{k} {v}' for k, v in self.settings.items())}; {self.iterations} Newton "
                f"steps{how}, last change {self.residual:.1e}",
            ]
        )


@dataclass(frozen=True, eq=False)
class Tank(Readings):
    """Numbers (n_sections,) [1/m3] in one tank at a steady state."""

    grid: SizeGrid
    number: FloatArray


@dataclass(frozen=True, eq=False)
class SteadyCurve:
    """Steady states over the values of one parameter.

    Attributes
    ----------
    values : (n_values,)
        The parameter.
    states : tuple of SteadyState
    """

    values: FloatArray
    states: Sequence[SteadyState]

    def total_number(self) -> FloatArray:
        """Number of particles (n_values,) [1/m3]."""
        return np.array([float(state.total_number()) for state in self.states])

    def mean_diameter(self, p: float, q: float) -> FloatArray:
        """Mean diameter D[p, q] (n_values,) [m]."""
        return np.array([float(state.mean_diameter(p, q)) for state in self.states])

    def quantile_diameter(self, p: float, r: float = 3, structure: object = None) -> FloatArray:
        """Diameter below which the share p of quantity r lies (n_values,) [m]; see `Result.quantile_diameter`."""
        return np.array([float(state.quantile_diameter(p, r, structure)) for state in self.states])

    def exponent(self, p: float = 0.5, r: float = 3, structure: object = None) -> FloatArray:
        """Local slope d ln(quantile diameter) / d ln(value), (n_values,); -gamma of d = C G**-gamma."""
        size = np.log(self.quantile_diameter(p, r, structure))
        slope: FloatArray = np.gradient(size, np.log(self.values))
        return slope
