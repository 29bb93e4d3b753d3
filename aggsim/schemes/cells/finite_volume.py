"""The finite volume scheme: particle volume flows through the limits between cells."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from aggsim._checks import FloatArray
from aggsim.schemes.base import (
    LinearOperator,
    OnMatrices,
    Scheme,
    SegmentOperator,
    SegmentScheme,
    require_sections,
)
from aggsim.schemes.cells import _loops
from aggsim.schemes.cells.limits import continued_cells
from aggsim.sizes import SizeGrid


@dataclass(frozen=True)
class FiniteVolume(Scheme):
    """Cells exchange particle volume through their limits.

    With g(v) = v n(v), the aggregation equation is dg/dt = -dJ/dv, and J(e) is the flux of volume through e [1]_,

        J(e) = int_0^e g(u) int_(e - u)^inf K(u, w) g(w) / w dw du

    The volume x_k n_k of cell k stands at its midpoint x_k as u, and is spread evenly over the cell as w,

        J(e) = sum_(x_k < e) x_k n_k sum_j K_kj n_j s_j(e - x_k)
        x_k dn_k/dt = J(lower limit of k) - J(upper limit of k)

    where s_j(y) = ln(upper / y) / ln(upper / lower), between 0 and 1, is the share of the particles of cell j above
    y. Breakage is the flux through e from parents above it to fragments below it [2]_. Volume is kept. Number is
    not, to the order of the scheme. Numbers stay positive.

    Second order on geometric grids, and exact on multiples of a monomer. A large particle does not leave its cell
    by taking up one that is smaller than half the cell: where such growth matters (sum kernel, settling) the
    error of M2 falls more slowly, with an observed order of 1 on coarse grids and 1.6 at 20 sections per doubling.

    Notes
    -----
    Pivots stand midway in their cells, as published: on geometric grids the limits are harmonic means of
    neighbouring pivots; with their geometric means the error of M0 is three times larger. Volume past the top
    goes to cells of the continued grid, counted as beyond it, and is divided by their pivots to give a number.

    A fragment between two pivots brings its volume to both, in linear proportion: the flux through a limit,
    averaged over its place between the pivots. All fragments in one cell would be a first-order error for
    discrete fragments and for quadratures alike. A fragment smaller than the first pivot is counted there.

    References
    ----------
    .. [1] F. Filbet and P. Laurencot, SIAM J. Sci. Comput. 25 (2004) 2004, doi:10.1137/S1064827503429132.
    .. [2] J.-P. Bourgade and F. Filbet, Math. Comp. 77 (2008) 851, doi:10.1090/S0025-5718-07-02054-6.
    """

    def check(self, grid: SizeGrid) -> None:
        require_sections(grid, 2, self)

    def prepare(self, grid: SizeGrid) -> VolumeFluxes:
        self.check(grid)
        pivots, limits = continued_cells(grid, 1)
        births = _loops.flux_births(pivots, limits, grid.sections)
        return VolumeFluxes(grid, SegmentScheme.build(grid, pivots, births))


@dataclass(frozen=True, eq=False)
class VolumeFluxes(OnMatrices):
    """Where the volume of each pair of cells goes on one grid."""

    grid: SizeGrid
    births: SegmentScheme

    def aggregation(self, rates: FloatArray) -> SegmentOperator:
        return self.births.aggregation(rates)

    def breakage(
        self, rate: FloatArray, parent: NDArray[np.int64], volume: FloatArray, count: FloatArray
    ) -> LinearOperator:
        x = np.array(self.grid.volume)
        cell = np.clip(np.searchsorted(x, volume, side="right") - 1, 0, x.size - 2)
        upper = np.clip((volume - x[cell]) / (x[cell + 1] - x[cell]), 0.0, 1.0)
        matrix = np.zeros((x.size, x.size))
        np.add.at(matrix, (cell, parent), count * volume * (1.0 - upper) / x[cell])
        np.add.at(matrix, (cell + 1, parent), count * volume * upper / x[cell + 1])
        # what a parent keeps, less itself, from the volume that goes elsewhere
        np.fill_diagonal(matrix, 0.0)
        np.fill_diagonal(matrix, -(x @ matrix) / x)
        return LinearOperator(matrix * rate)
