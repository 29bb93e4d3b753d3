"""The cell average technique: births of a cell are averaged, then shared with one neighbouring pivot."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from aggsim._checks import FloatArray
from aggsim.schemes.base import OnMatrices, Scheme, require_sections
from aggsim.schemes.cells import _loops
from aggsim.schemes.cells.limits import continued_cells
from aggsim.sizes import SizeGrid, StartingDistribution, starting_grid

# Sections per doubling of the default grid: sizes within a few parts in 1000, also with settling
PER_DOUBLING = 4
ON_A_LIMIT = 1e-12  # relative; what is so near a limit from below belongs above it


@dataclass(frozen=True)
class CellAverage(Scheme):
    """Particles sit at the pivots x_k; the births of a cell are shared as one, by their mean volume.

    With B_k births per second in the cell of x_k, and v_k their mean volume,

        x_k gets  B_k (x_q - v_k) / (x_q - x_k)
        x_q gets  B_k (v_k - x_k) / (x_q - x_k),    q = k + 1 where v_k >= x_k, else k - 1

    for aggregation [1]_ and breakage [2]_. Number and volume of all births are kept, as by
    FixedPivot(moments=2), but births on both sides of a pivot do not spread: at equal sections the error of M2
    is at least 4 times smaller, that of M0 at least 1.5 times. Second order, with a factor that varies with the
    sections per doubling, because they decide which births share a cell. Breakage is averaged apart from
    aggregation, and so are parts of a kernel with different factors in time.

    Notes
    -----
    What is shared, B_k (v_k - x_k), is the volume of the births in excess of the pivot: nothing is divided by the
    births, and a cell without births is no special case. The rates are continuous and piecewise quadratic
    (breakage: linear) in the numbers. The Jacobian is exact but for states with v_k = x_k or B_k = 0, where it is
    the derivative from the side of larger means, q = k + 1. A mean that passes its pivot is a kink in time: steep
    kernels take 2 to 4 times the evaluations of smooth schemes at rtol = 1e-6, and more at tighter ones.

    Pivots stand midway in their cells, as published: on geometric grids the limits are harmonic means of
    neighbouring pivots. Births past the top are shared on the continued grid and counted as beyond it. A
    fragment smaller than the first pivot is counted there by volume.

    References
    ----------
    .. [1] J. Kumar, M. Peglow, G. Warnecke, S. Heinrich and L. Morl, Chem. Eng. Sci. 61 (2006) 3327,
       doi:10.1016/j.ces.2005.12.014.
    .. [2] J. Kumar, M. Peglow, G. Warnecke and S. Heinrich, Powder Technol. 182 (2008) 81.
    """

    def check(self, grid: SizeGrid) -> None:
        require_sections(grid, 2, self)

    def default_grid(self, start: StartingDistribution, finer: float = 1.0) -> SizeGrid:
        return starting_grid(start, per_doubling=PER_DOUBLING, finer=finer)

    def prepare(self, grid: SizeGrid) -> AverageCells:
        self.check(grid)
        n = grid.sections
        pivots, limits = continued_cells(grid, 1)
        pivots = pivots[: n + 2]  # sharing below the top reaches one cell past it, the next takes the rest
        first, run = _loops.birth_runs(pivots, limits, n)
        return AverageCells(grid, pivots, limits[: n + 1], first, run)


@dataclass(frozen=True, eq=False)
class AverageCells(OnMatrices):
    """The cells of all births on one grid."""

    grid: SizeGrid
    pivots: FloatArray  # two past the top
    limits: FloatArray
    first: NDArray[np.int64]
    run: NDArray[np.uint64]

    def aggregation(self, rates: FloatArray) -> AverageOperator:
        kernel = np.array(rates, order="C")
        np.fill_diagonal(kernel, 0.5 * np.diag(kernel))
        return AverageOperator(kernel, self.pivots, self.first, self.run)

    def breakage(
        self, rate: FloatArray, parent: NDArray[np.int64], volume: FloatArray, count: FloatArray
    ) -> AverageFragments:
        x = np.array(self.grid.volume)
        n = x.size
        cell = np.searchsorted(self.limits[1:n] * (1.0 - ON_A_LIMIT), volume, side="right")
        small = volume < x[0]
        born, excess = np.zeros((n, n)), np.zeros((n, n))
        np.add.at(born, (cell, parent), np.where(small, count * (volume / x[0]), count))
        np.add.at(excess, (cell, parent), np.where(small, 0.0, count * (volume - x[cell])))
        # fragments in the cell of their parent, less the parent, from the volume that goes elsewhere
        np.fill_diagonal(born, 0.0)
        np.fill_diagonal(born, -(x @ born + excess.sum(axis=0)) / x)
        return AverageFragments(born * rate, excess * rate, x)


@dataclass(frozen=True, eq=False)
class AverageOperator:
    """Aggregation with averaged births; the kernel matrix (n, n) [m3/s] has half its diagonal."""

    kernel: FloatArray
    pivots: FloatArray
    first: NDArray[np.int64]
    run: NDArray[np.uint64]

    def add_rates(self, number: FloatArray, factor: float, out: FloatArray) -> float:
        total: float = _loops.average_rates(
            self.kernel, self.pivots, self.first, self.run, number, factor, out
        )
        return total

    def add_jacobian(self, number: FloatArray, factor: float, out: FloatArray) -> None:
        _loops.average_jacobian(self.kernel, self.pivots, self.first, self.run, number, factor, out)


@dataclass(frozen=True, eq=False)
class AverageFragments:
    """Breakage with averaged births.

    Times the numbers, `born` (n, n) [1/s] is the net births in each cell and `excess` (n, n) [m3/s] their volume
    in excess of its pivot.
    """

    born: FloatArray
    excess: FloatArray
    pivots: FloatArray

    def add_rates(self, number: FloatArray, factor: float, out: FloatArray) -> float:
        n = self.pivots.size
        born, excess = self.born @ number[:n], self.excess @ number[:n]
        total: float = _loops.share_average(self.pivots, n, born, excess, factor, out)
        return total

    def add_jacobian(self, number: FloatArray, factor: float, out: FloatArray) -> None:
        n = self.pivots.size
        side = self.excess @ number[:n]
        _loops.share_average_slopes(self.pivots, n, self.born, self.excess, side, factor, out)
