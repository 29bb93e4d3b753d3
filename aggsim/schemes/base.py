"""The contract of a discretisation scheme.

A new scheme is one class with these duties:

1. Be a frozen dataclass whose fields are its options, checked at construction.
2. `check(grid)`: raise GridError where the scheme cannot work on the grid.
3. `order`, of convergence in the spacing of the grid, and `default_grid(start, finer)`: a grid that suits the
   scheme for a starting distribution, with `finer` times the usual sections per doubling.
4. `project(start, grid)`: the starting numbers (n_sections,); number and volume exact.
5. `prepare(grid)`: everything that depends on the grid alone; returns an object whose `aggregation(matrix)`
   turns a kernel matrix (n_sections, n_sections) [m3/s] into an Operator, and whose `breakage(...)` does so with
   a table of fragments. `OnMatrices` gives it the `parts` of a kernel as matrices.
6. The Operator adds rates and their exact Jacobian to arrays that it is given. Their first entries are
   n_sections numbers, then the number and the volume that passed the top (BEYOND entries); what follows is not
   its own. Particle volume, the top included, must be kept to round-off:
   sum x_k rate_k + rate of the volume beyond = 0.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

from aggsim._checks import FloatArray
from aggsim.errors import GridError
from aggsim.schemes import _loops
from aggsim.sizes import SizeGrid, StartingDistribution, project, starting_grid

Births = tuple[
    NDArray[np.int64], NDArray[np.int64], FloatArray
]  # first target, targets, weights of each pair

LARGEST_PAIRS = (
    20_000  # sections; a matrix over all pairs of more does not fit in the memory of an ordinary machine
)
BEYOND = 2  # entries after the sections: number and volume beyond the top of the grid


class Operator(Protocol):
    """Rates of change of one process on one grid, a function of the numbers alone."""

    def add_rates(self, number: FloatArray, factor: float, out: FloatArray) -> float:
        """Add factor * rates to `out` (n_sections + 2 or more,); return a number, not finite if any rate is."""

    def add_jacobian(self, number: FloatArray, factor: float, out: FloatArray) -> None:
        """Add factor * d rate / d number to `out` (n_sections + 2 or more, the same)."""


class Prepared(Protocol):
    """A scheme on one grid."""

    @property
    def grid(self) -> SizeGrid:
        """The grid."""

    def parts(self, kernel: Any) -> Sequence[tuple[str, Any, Any]]:
        """Parts of a kernel (name, rates, strength), with rates in the form that `aggregation` takes.

        Rates of several parts add, and `number @ rates` is the rate at which each size collides.
        """

    def aggregation(self, rates: Any) -> Operator:
        """Operator of aggregation; rates are the kernel matrix (n_sections, n_sections) [m3/s], as a rule."""

    def breakage(
        self, rate: FloatArray, parent: NDArray[np.int64], volume: FloatArray, count: FloatArray
    ) -> Operator:
        """Operator of breakage at `rate` (n_sections,) [1/s].

        An event in section parent[t] leaves count[t] (m,) fragments of volume[t] [m3], for every t; the fragments
        of a section have its volume in all.
        """


class Scheme(ABC):
    """A way to turn the aggregation equation into ordinary differential equations for section numbers."""

    @abstractmethod
    def check(self, grid: SizeGrid) -> None:
        """Raise GridError where the scheme cannot work on `grid`."""

    @abstractmethod
    def prepare(self, grid: SizeGrid) -> Prepared:
        """Compute what depends on the grid alone."""

    @property
    def order(self) -> float:
        """Order of convergence with the spacing of the grid on smooth kernels; infinite where size is exact."""
        return 2.0

    def default_grid(self, start: StartingDistribution, finer: float = 1.0) -> SizeGrid:
        """Grid for a starting distribution, with modest room to grow and `finer` times the usual sections."""
        return starting_grid(start, per_doubling=8, finer=finer)

    def coarser(self, grid: SizeGrid, factor: float) -> SizeGrid:
        """A grid for the scheme with about `factor` times fewer sections, to judge the error on `grid` by."""
        return grid.coarser(factor)

    def project(self, start: StartingDistribution, grid: SizeGrid) -> FloatArray:
        """Numbers (n_sections,) [1/m3] that stand for `start`."""
        return project(start, grid, moments=2)


class OnMatrices:
    """A prepared scheme that takes its kernels as matrices over all pairs of pivots."""

    grid: SizeGrid

    def parts(self, kernel: Any) -> Sequence[tuple[str, Any, Any]]:
        matrices: Sequence[tuple[str, Any, Any]] = kernel.part_matrices(self.grid.volume)
        return matrices


@dataclass(frozen=True, eq=False)
class SegmentOperator:
    """A quadratic form stored as long dot products (see `_loops`)."""

    segments: NDArray[np.uint64]
    section: NDArray[np.int64]
    coefficient: FloatArray

    def add_rates(self, number: FloatArray, factor: float, out: FloatArray) -> float:
        total: float = _loops.segment_rates(
            self.segments, self.section, self.coefficient, number, factor, out
        )
        return total

    def add_jacobian(self, number: FloatArray, factor: float, out: FloatArray) -> None:
        _loops.segment_jacobian(self.segments, self.section, self.coefficient, number, factor, out)


@dataclass(frozen=True, eq=False)
class LinearOperator:
    """Rates matrix @ number; the matrix (n_sections, n_sections) [1/s] is upper triangular, as in breakage."""

    matrix: FloatArray

    def add_rates(self, number: FloatArray, factor: float, out: FloatArray) -> float:
        total: float = _loops.triangular_rates(self.matrix, number, factor, out)
        return total

    def add_jacobian(self, number: FloatArray, factor: float, out: FloatArray) -> None:
        n = self.matrix.shape[0]
        out[:n, :n] += factor * self.matrix


@dataclass(frozen=True, eq=False)
class SegmentScheme(OnMatrices):
    """A table of where each birth lands, and the segments that follow from it, on one grid."""

    grid: SizeGrid
    pivots: FloatArray  # those of the grid, continued past the largest birth
    births: Births
    segments: NDArray[np.uint64]
    section: NDArray[np.int64]
    order: int  # of the interpolation that shares fragments, in v or (half) in v**(1/2)
    half: bool

    @classmethod
    def build(
        cls, grid: SizeGrid, pivots: FloatArray, births: Births, order: int = 2, half: bool = False
    ) -> SegmentScheme:
        segments, section = _loops.layout(births[0], births[1], grid.sections)
        return cls(grid, pivots, births, segments, section, order, half)

    def aggregation(self, rates: FloatArray) -> SegmentOperator:
        kernel = np.ascontiguousarray(rates)
        coefficient = _loops.fill(*self.births, self.segments, self.section, self.pivots, kernel)
        return SegmentOperator(self.segments, self.section, coefficient)

    def breakage(
        self, rate: FloatArray, parent: NDArray[np.int64], volume: FloatArray, count: FloatArray
    ) -> LinearOperator:
        return LinearOperator(
            _loops.fragment_matrix(
                np.array(self.grid.volume), self.order, self.half, rate, parent, volume, count
            )
        )


def continued(grid: SizeGrid, more: int) -> FloatArray:
    """Pivots of the grid, continued by its last ratio past twice the last one and by `more` on top of that.

    The continuation takes part in the scheme like the grid itself, but what lands there is counted as beyond
    the grid. Without it, a particle of the last section would leave the grid with any collision at all, at a
    rate that makes the system stiff for nothing.
    """
    x = grid.volume
    ratio = float(x[-1] / x[-2])
    steps = int(np.ceil(np.log(2.0) / np.log(ratio) + 1e-9)) + 1 + more
    return np.concatenate([x, x[-1] * ratio ** np.arange(1.0, steps + 1.0)])


def require_sections(grid: SizeGrid, least: int, scheme: object) -> None:
    """Raise GridError where the grid has too few sections for the scheme, or too many for all pairs of them."""
    if grid.sections > LARGEST_PAIRS:
        raise GridError(
            f"grid has {grid.sections} sections; {scheme!r} allows {LARGEST_PAIRS}, for its matrices over all pairs. "
            "Try: a geometric grid, or Monomer() on SizeGrid.monomers(...)."
        )
    if grid.sections < least:
        raise GridError(
            f"grid has {grid.sections} sections; {scheme!r} needs at least {least}. "
            "Try: a larger `largest` or more sections per doubling."
        )
