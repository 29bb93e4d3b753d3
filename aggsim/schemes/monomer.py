"""Every multiple of one particle volume: the discrete aggregation equation without approximation in size."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import GridError
from aggsim.schemes import _loops
from aggsim.schemes.base import Scheme, require_sections
from aggsim.sizes import SizeGrid, StartingDistribution

MEMORY_LIMIT = 8000  # sections; the dense kernel matrix then takes half a gigabyte


@dataclass(frozen=True)
class Monomer(Scheme):
    """The discrete equation on the multiples k = 1, 2, 3, ... of one particle volume, exact in size.

        dn_k/dt = 1/2 sum_{i+j=k} K_ij n_i n_j - n_k sum_j K_kj n_j

    What grows past the last multiple is counted in the account. Cost grows with the square of the number of
    sizes, so this scheme is a yardstick and a tool for small aggregates.

    Raises
    ------
    GridError
        In `check`, if the pivots are not the multiples 1, 2, 3, ... of the first.

    References
    ----------
    .. [1] M. von Smoluchowski, Z. Phys. Chem. 92 (1917) 129, doi:10.1515/zpch-1918-9209.
    """

    def check(self, grid: SizeGrid) -> None:
        require_sections(grid, 2, self)
        if not grid.is_monomers:
            raise GridError(
                f"grid={grid!r} is not made of the multiples 1, 2, 3, ... of its first volume, which Monomer() "
                "needs. Try: SizeGrid.monomers(volume, count), or FixedPivot() on this grid."
            )
        if grid.sections > MEMORY_LIMIT:
            raise GridError(
                f"grid has {grid.sections} sections; Monomer() allows {MEMORY_LIMIT}, for its pair matrix. "
                "Try: FixedPivot() on SizeGrid.monomers_then_geometric(...)."
            )

    def default_grid(self, start: StartingDistribution) -> SizeGrid:
        smallest, largest = start.limits(1e-8)
        unit = min((volume for volume, _ in start.atoms), default=smallest)
        room = 8 * int(np.ceil(largest / unit))
        if room > MEMORY_LIMIT:
            raise GridError(
                f"start spans volumes {smallest:.3g} to {largest:.3g} m3, {largest / unit:.3g} times the smallest; "
                f"Monomer() allows {MEMORY_LIMIT} multiples in all. Try: FixedPivot()."
            )
        return SizeGrid.monomers(unit, max(64, room))

    def prepare(self, grid: SizeGrid) -> PreparedMonomer:
        self.check(grid)
        return PreparedMonomer(grid)


@dataclass(frozen=True)
class PreparedMonomer:
    """The monomer scheme on one grid; nothing but the grid is needed."""

    grid: SizeGrid

    def aggregation(self, matrix: FloatArray) -> MonomerOperator:
        return MonomerOperator(np.ascontiguousarray(matrix), np.array(self.grid.volume))


@dataclass(frozen=True, eq=False)
class MonomerOperator:
    """Direct sums over all pairs."""

    matrix: FloatArray
    volume: FloatArray

    def add_rates(self, number: FloatArray, factor: float, out: FloatArray) -> float:
        total: float = _loops.monomer_rates(self.matrix, self.volume, number, factor, out)
        return total

    def add_jacobian(self, number: FloatArray, factor: float, out: FloatArray) -> None:
        _loops.monomer_jacobian(self.matrix, self.volume, number, factor, out)
