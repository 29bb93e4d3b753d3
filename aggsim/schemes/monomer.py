"""Every multiple of one particle volume: the discrete aggregation equation without approximation in size."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from aggsim._checks import FloatArray
from aggsim.errors import GridError
from aggsim.schemes import _loops
from aggsim.schemes.base import LinearOperator, Operator, Scheme, require_sections
from aggsim.schemes.fast_monomer import MATRIX_LIMIT, FactoredOperator
from aggsim.schemes.low_rank import FactoredKernel, RankError, factored
from aggsim.sizes import SizeGrid, StartingDistribution

_LARGEST_DEFAULT = 100_000  # sections
_DIRECT_SUM = 1000  # sections up to which the direct sum over pairs is as quick as any


@dataclass(frozen=True)
class Monomer(Scheme):
    """The discrete equation on the multiples k = 1, 2, 3, ... of one particle volume, exact in size.

        dn_k/dt = 1/2 sum_{i+j=k} K_ij n_i n_j - n_k sum_j K_kj n_j

    What grows past the last multiple is counted in the account. Up to 1000 sizes the sums run over all pairs.
    With more, a kernel that is a short sum of products of functions of one size (ideal, Brownian, shear and
    other smooth ones; every rate to 1e-10) makes the births convolutions [2]_, which cost a hundredth of the
    sums at 50 000 sizes; other kernels, such as settling, stay with the sums, up to 8000 sizes.

    Raises
    ------
    GridError
        In `check`, if the pivots are not the multiples 1, 2, 3, ... of the first.

    References
    ----------
    .. [1] M. von Smoluchowski, Z. Phys. Chem. 92 (1917) 129, doi:10.1515/zpch-1918-9209.
    .. [2] S. A. Matveev, A. P. Smirnov, E. E. Tyrtyshnikov, J. Comput. Phys. 282 (2015) 23,
       doi:10.1016/j.jcp.2014.11.003.
    """

    def check(self, grid: SizeGrid) -> None:
        if grid.sections < 2:
            require_sections(grid, 2, self)
        if not grid.is_monomers:
            raise GridError(
                f"grid={grid!r} is not made of the multiples 1, 2, 3, ... of its first volume, which Monomer() "
                "needs. Try: SizeGrid.monomers(volume, count), or FixedPivot() on this grid."
            )

    @property
    def order(self) -> float:
        return math.inf

    def default_grid(self, start: StartingDistribution, finer: float = 1.0) -> SizeGrid:
        smallest, largest = start.limits(1e-8)
        unit = min((volume for volume, _ in start.atoms), default=smallest)
        room = 8 * int(np.ceil(largest / unit))
        if room > _LARGEST_DEFAULT:
            raise GridError(
                f"start spans volumes {smallest:.3g} to {largest:.3g} m3, {largest / unit:.3g} times the smallest; "
                f"a grid of 8 times as many multiples is too long ({_LARGEST_DEFAULT} at most). Try: FixedPivot()."
            )
        return SizeGrid.monomers(unit, max(64, room))

    def prepare(self, grid: SizeGrid) -> PreparedMonomer:
        self.check(grid)
        return PreparedMonomer(grid)


@dataclass(frozen=True)
class PreparedMonomer:
    """The monomer scheme on one grid; nothing but the grid is needed."""

    grid: SizeGrid

    def parts(self, kernel: Any) -> Sequence[tuple[str, Any, Any]]:
        n = self.grid.sections
        if n > _DIRECT_SUM:
            volume = np.array(self.grid.volume)
            try:
                return [
                    (name, factored(rate, volume, f"kernel part {name!r}"), strength)
                    for name, rate, strength in kernel.part_functions()
                ]
            except RankError:
                if n > MATRIX_LIMIT:
                    raise
        matrices: Sequence[tuple[str, Any, Any]] = kernel.part_matrices(self.grid.volume)
        return matrices

    def aggregation(self, rates: FloatArray | FactoredKernel) -> Operator:
        if isinstance(rates, FactoredKernel):
            return FactoredOperator(rates)
        return MonomerOperator(np.ascontiguousarray(rates), np.array(self.grid.volume))

    def breakage(
        self, rate: FloatArray, parent: NDArray[np.int64], volume: FloatArray, count: FloatArray
    ) -> LinearOperator:
        if self.grid.sections > MATRIX_LIMIT:
            raise GridError(
                f"grid has {self.grid.sections} sections; breakage in Monomer() allows {MATRIX_LIMIT}, for its matrix. "
                "Try: FixedPivot() on SizeGrid.monomers_then_geometric(...)."
            )
        # a fragment between two multiples is shared between them by its volume
        matrix = _loops.fragment_matrix(np.array(self.grid.volume), 2, False, rate, parent, volume, count)
        return LinearOperator(matrix)


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
