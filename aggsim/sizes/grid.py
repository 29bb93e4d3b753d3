"""The size grid: an increasing list of particle volumes, the pivots, one per section."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import GridError
from aggsim.sizes import means

# sections; a dense pair matrix of more does not fit in the memory of an ordinary machine
LARGEST_GRID = 20_000
LARGEST_MONOMER_GRID = 1_000_000  # sections; multiples of one size need no matrix


@dataclass(frozen=True, eq=False)
class SizeGrid:
    """Pivots x_k [m3] at which a scheme places the particles of section k.

    Build one with `geometric`, `monomers`, `monomers_then_geometric` or `from_pivots`.

    Attributes
    ----------
    volume : (n_sections,) m3
        Pivot volumes, strictly increasing.
    ratio : float or None
        Volume ratio by which `extended` continues the grid; None continues it by whole monomers.
    monomer : float or None
        Volume [m3] of which the lower pivots are the multiples 1, 2, 3, ..., None where there is no such unit.
    """

    volume: FloatArray
    ratio: float | None = None
    monomer: float | None = None

    def __post_init__(self) -> None:
        volume = _checks.array("volume", self.volume, "m3", above=0.0, increasing=True, error=GridError)
        if volume.size < 2:
            raise GridError(
                f"volume holds {volume.size} pivot; a grid needs at least 2. Try: a larger `largest`."
            )
        multiples = self.monomer is not None and self.ratio is None
        _refuse_long(volume.size, LARGEST_MONOMER_GRID if multiples else LARGEST_GRID)
        volume.setflags(write=False)
        object.__setattr__(self, "volume", volume)

    @classmethod
    def geometric(cls, *, smallest: Any, largest: Any, per_doubling: float = 3) -> SizeGrid:
        """Pivots smallest * 2**(k / per_doubling), up to the first that reaches `largest`.

        Parameters
        ----------
        smallest, largest : float
            Volumes [m3] of the first pivot and of the size that must be covered.
        per_doubling : float
            Sections per doubling of the volume, from 0.1 to 100.

        Raises
        ------
        GridError
            If the sizes are not positive and increasing, or the grid would be too long.
        """
        first = _checks.scalar("smallest", smallest, "m3", above=0.0, error=GridError)
        last = _checks.scalar("largest", largest, "m3", above=first, error=GridError)
        density = _checks.scalar("per_doubling", per_doubling, least=0.1, most=100.0, error=GridError)
        steps = int(np.ceil((np.log2(last) - np.log2(first)) * density - 1e-9))
        _refuse_long(steps + 1)
        return cls(first * 2.0 ** (np.arange(steps + 1) / density), ratio=2.0 ** (1.0 / density))

    @classmethod
    def monomers(cls, volume: Any, count: int) -> SizeGrid:
        """Every multiple of one particle volume: volume * (1, 2, ..., count) [m3]."""
        unit = _checks.scalar("volume", volume, "m3", above=0.0, error=GridError)
        _checks.count("count", count, least=2, most=LARGEST_MONOMER_GRID)
        return cls(unit * np.arange(1.0, count + 1.0), monomer=unit)

    @classmethod
    def monomers_then_geometric(cls, volume: Any, largest: Any, per_doubling: float = 3) -> SizeGrid:
        """Multiples 1, 2, 3, ... of one volume until the geometric spacing exceeds it, geometric from there.

        The grid for a monodisperse start: the small aggregates exist at multiples of the primary particle
        only, and each of them has its own pivot.

        Parameters
        ----------
        volume : float
            Volume [m3] of the primary particle.
        largest : float
            Volume [m3] that must be covered.
        per_doubling : float
            Sections per doubling of the volume in the geometric part.
        """
        unit = _checks.scalar("volume", volume, "m3", above=0.0, error=GridError)
        last = _checks.scalar("largest", largest, "m3", above=unit, error=GridError)
        density = _checks.scalar("per_doubling", per_doubling, least=0.1, most=100.0, error=GridError)
        ratio = 2.0 ** (1.0 / density)
        singles = int(np.ceil(1.0 / (ratio - 1.0) - 1e-9))
        reach = last / unit
        steps = max(0, int(np.ceil(np.log(reach / singles) / np.log(ratio) - 1e-9)))
        _refuse_long(singles + steps)
        upper = singles * ratio ** np.arange(1.0, steps + 1.0)
        return cls(unit * np.concatenate([np.arange(1.0, singles + 1.0), upper]), ratio=ratio, monomer=unit)

    @classmethod
    def from_pivots(cls, volume: Any) -> SizeGrid:
        """Grid on the given pivot volumes [m3], any strictly increasing list of shape (n_sections,)."""
        pivots = _checks.array("volume", volume, "m3", above=0.0, increasing=True, error=GridError)
        ratio = float(pivots[-1] / pivots[-2]) if pivots.size > 1 else None
        return cls(pivots, ratio=ratio)

    def extended(self, largest: Any) -> SizeGrid:
        """Grid with the same lower pivots, continued upward by its own rule until it covers `largest` [m3]."""
        last = _checks.scalar("largest", largest, "m3", above=0.0, error=GridError)
        top = float(self.volume[-1])
        if last <= top:
            return self
        if self.ratio is None:
            unit = self.monomer if self.monomer is not None else top - float(self.volume[-2])
            steps = int(np.ceil((last - top) / unit - 1e-9))
            _refuse_long(self.volume.size + steps, LARGEST_MONOMER_GRID)
            more = unit * (round(top / unit) + np.arange(1.0, steps + 1.0))
        else:
            steps = int(np.ceil(np.log(last / top) / np.log(self.ratio) - 1e-9))
            _refuse_long(self.volume.size + steps)
            more = top * self.ratio ** np.arange(1.0, steps + 1.0)
        return SizeGrid(np.concatenate([self.volume, more]), ratio=self.ratio, monomer=self.monomer)

    def extended_down(self, smallest: Any) -> SizeGrid:
        """This grid with pivots below its first one, down to exactly `smallest` [m3], for fragments.

        The pivots below are geometric, at most as far apart as those at the top of the grid, or a quarter of a
        doubling where that is made of whole monomers.
        """
        first = float(self.volume[0])
        last = _checks.scalar("smallest", smallest, "m3", above=0.0, below=first, error=GridError)
        ratio = 2.0**0.25 if self.ratio is None else self.ratio
        steps = int(np.ceil(np.log(first / last) / np.log(ratio) - 1e-9))
        _refuse_long(self.sections + steps)
        below = last * (first / last) ** (np.arange(steps) / steps)
        return SizeGrid(np.concatenate([below, self.volume]), ratio=self.ratio)

    def without_gaps(self) -> SizeGrid:
        """This grid with pivots between those that are farther apart than the ones at its top.

        Whole monomers stay pivots; fragments need the sizes between them.
        """
        if self.ratio is None:
            return self
        x = self.volume
        steps = np.ceil(np.log(x[1:] / x[:-1]) / np.log(self.ratio) - 1e-9).astype(int)
        parts = [a * (b / a) ** (np.arange(k) / k) for a, b, k in zip(x[:-1], x[1:], steps, strict=True)]
        return SizeGrid(np.concatenate([*parts, x[-1:]]), ratio=self.ratio)

    def coarser(self, factor: float) -> SizeGrid:
        """A grid of the same range with `factor` times fewer sections where this one is geometric.

        Whole monomers at the lower end stay as far as the new spacing needs them; a grid of nothing else is
        returned as it is.
        """
        scale = _checks.scalar("factor", factor, above=0.0, error=GridError)
        if self.is_monomers:
            return self
        top = float(self.volume[-1])
        if self.monomer is not None and self.ratio is not None:
            density = float(np.log(2.0) / np.log(self.ratio)) / scale
            return SizeGrid.monomers_then_geometric(self.monomer, top, density)
        index = np.arange(np.ceil((self.sections - 1) / scale - 1e-9) + 1.0) * scale
        last = np.log(self.volume[-1] / self.volume[-2])
        between = np.exp(np.interp(index, np.arange(self.sections), np.log(self.volume)))
        beyond = index > self.sections - 1
        between[beyond] = top * np.exp((index[beyond] - (self.sections - 1)) * last)
        between[0] = self.volume[0]
        return SizeGrid(between, ratio=None if self.ratio is None else self.ratio**scale)

    @property
    def sections(self) -> int:
        """Number of sections."""
        return int(self.volume.size)

    def __len__(self) -> int:
        return self.sections

    def __eq__(self, other: object) -> bool:
        return isinstance(other, SizeGrid) and np.array_equal(self.volume, other.volume)

    def __hash__(self) -> int:
        return hash(self.volume.tobytes())

    @cached_property
    def diameter(self) -> FloatArray:
        """Volume-equivalent sphere diameter of each pivot (n_sections,) [m]."""
        return means.diameter_of(self.volume)

    @cached_property
    def width(self) -> FloatArray:
        """Width dv/dk [m3] that belongs to each pivot (n_sections,), of a smooth curve through the pivots."""
        return means.section_width(self.volume)

    @cached_property
    def limits(self) -> FloatArray:
        """Limits between the sections (n_sections + 1,) [m3], on the same smooth curve."""
        return means.section_limits(self.volume)

    @property
    def is_geometric(self) -> bool:
        """True where neighbouring pivots keep one ratio to 1e-9."""
        ratios = self.volume[1:] / self.volume[:-1]
        return bool(np.ptp(ratios) <= 1e-9 * ratios[0])

    @property
    def is_monomers(self) -> bool:
        """True where pivot k is k + 1 times the first to 1e-9."""
        expected = self.volume[0] * np.arange(1.0, self.sections + 1.0)
        return bool(np.allclose(self.volume, expected, rtol=1e-9, atol=0.0))

    def __repr__(self) -> str:
        return (
            f"SizeGrid({self.sections} sections, volume {self.volume[0]:.3g} to {self.volume[-1]:.3g} m3, "
            f"diameter {self.diameter[0]:.3g} to {self.diameter[-1]:.3g} m)"
        )


def _refuse_long(sections: int, most: int = LARGEST_GRID) -> None:
    if sections > most:
        raise GridError(
            f"the grid would have {sections} sections; at most {most} are allowed. "
            "Try: fewer sections per doubling, a smaller `largest`, or monomers_then_geometric."
        )
