"""The observed order of convergence of every scheme in moments, mean sizes and quantiles.

Errors are taken at a few refinements of a geometric grid; the order is the slope of ln error against ln(sections per
doubling), fitted over all of them. `Monomer` resolves every size and has no error of the grid.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import NamedTuple

import numpy as np

from aggsim._checks import FloatArray
from aggsim.kernels import additive, constant
from aggsim.result import Result, Snapshot
from aggsim.schemes import CellAverage, FiniteVolume, FixedPivot, Scheme, Sectional
from aggsim.sizes import SizeGrid
from aggsim.solvers import simulate
from aggsim.verification import closed, truth
from aggsim.verification.checks import Case, Check
from aggsim.verification.reduced import brownian, shear
from aggsim.verification.truth import QUANTILES, Figures
from aggsim.vessels import Batch, Vessel

GROUP = "Orders of convergence"

LINEAR, SECTIONAL, AVERAGE, FLUX = FixedPivot(moments=2), Sectional(), CellAverage(), FiniteVolume()
FOURTH, SIXTH = FixedPivot(moments=4), FixedPivot(moments=6)
SECOND = (LINEAR, SECTIONAL, AVERAGE, FLUX)
SCHEMES: tuple[Scheme, ...] = (*SECOND, FOURTH, SIXTH)

# refinements in the asymptotic range of each: coarser grids are no grids for a distribution, finer ones meet
# round-off and the error of the quantile itself
REFINEMENTS: dict[Scheme, tuple[int, ...]] = {
    LINEAR: (2, 3, 4, 6),
    SECTIONAL: (2, 3, 4, 6),
    AVERAGE: (2, 3, 4, 6, 8),
    FLUX: (2, 3, 4, 6, 8),
    FOURTH: (3, 4, 6, 8),
    SIXTH: (2, 3, 4),
}
# with breakage the error of 4 moments changes its sign at some 6 sections per doubling
WITH_BREAKAGE = REFINEMENTS | {FOURTH: (8, 12, 16), SIXTH: (3, 4, 6, 8)}
# what is asked for; the error of cell averages depends on which births share a cell and may pass zero on the way
LEAST: dict[Scheme, float] = {LINEAR: 1.7, SECTIONAL: 1.7, AVERAGE: 1.3, FLUX: 1.7, FOURTH: 3.5, SIXTH: 5.0}
ALL_QUANTILES = (
    "d10, d50, d90"  # the error of one may change its sign on the way, that of three together does not
)


@dataclass(frozen=True, eq=False)
class Problem:
    """An exponential start, what happens to it, and the exact figures at `times`."""

    name: str
    vessel: Vessel
    times: tuple[float, ...]
    exact: Callable[[Problem], Figures]
    quantities: tuple[str, ...]
    kept: tuple[str, ...] = ()  # of them, what schemes of order 4 and 6 have exactly
    sizes: tuple[float, float] = (1e-6, 4000.0)
    refinements: dict[Scheme, tuple[int, ...]] | None = None
    schemes: tuple[Scheme, ...] = SCHEMES

    def run(self, scheme: Scheme, per_doubling: float) -> Result:
        """On a geometric grid, with an error in time far below that of the grid."""
        low, high = self.sizes
        grid = SizeGrid.geometric(smallest=low, largest=high, per_doubling=per_doubling)
        rtol = 1e-8 if scheme in (AVERAGE, FLUX) else 1e-11  # their kinks take many steps
        return simulate(self.vessel, closed.EXPONENTIAL, self.times, grid=grid, scheme=scheme, rtol=rtol)

    @cached_property
    def known(self) -> Figures:
        """Exact figures."""
        return self.exact(self)

    def rows(self, scheme: Scheme) -> Iterator[Row]:
        """Observed orders of a scheme."""
        refinements = (self.refinements or REFINEMENTS)[scheme]
        found = [Snapshot.of(self.run(scheme, q)).figures for q in refinements]
        exact = self.known
        errors = {f: np.array([one[f] / exact[f] - 1.0 for one in found]) for f in exact}
        errors[ALL_QUANTILES] = np.concatenate([errors[f] for f in QUANTILES], axis=-1)
        for quantity in self.quantities:
            if quantity in self.kept and scheme not in SECOND:
                continue
            if quantity == "d50" and scheme in (AVERAGE, FLUX):
                continue
            together = np.sqrt((errors[quantity] ** 2).mean(axis=-1))
            slope = -np.polyfit(np.log(refinements), np.log(together), 1)[0]
            yield Row(self.name, scheme, quantity, refinements, together, float(slope), LEAST[scheme])


class Row(NamedTuple):
    """One observed order, with the errors at the refinements (sections per doubling) that it comes from."""

    problem: str
    scheme: Scheme
    quantity: str
    refinements: tuple[int, ...]
    errors: FloatArray
    order: float
    least: float


def _aggregation(problem: closed.ClosedSolution) -> Callable[[Problem], Figures]:
    return lambda self: truth.aggregation(problem, self.times).exact()


def _by_refinement(problem: Problem) -> Figures:
    """The scheme of 6 moments, four times finer, right to 1e-8: 16 and 12 per doubling agree to that."""
    return Snapshot.of(problem.run(SIXTH, 16)).figures


def _breakage(problem: Problem) -> Figures:
    return truth.breaking(closed.B1).exact()


CLOSED, SMOOTH = ("M2", "D[4,3]", "d50", ALL_QUANTILES), ("number", "M2", "d50", ALL_QUANTILES)
PROBLEMS = [
    Problem(
        "constant kernel", Batch(constant(1.0)), (20.0,), _aggregation(closed.CONSTANT_EXP), CLOSED, ("M2",)
    ),
    Problem(
        "sum kernel",
        Batch(additive(1.0)),
        (1.0,),
        _aggregation(closed.SUM_EXP),
        CLOSED,
        ("M2",),
        # fluxes do not resolve how large particles take up small ones, cell averages are of no clear order there
        schemes=(LINEAR, SECTIONAL, FOURTH, SIXTH),
    ),
    Problem("Brownian kernel", Batch(brownian()), (20.0,), _by_refinement, SMOOTH),
    Problem("shear kernel", Batch(shear()), (1.0,), _by_refinement, SMOOTH),
    Problem(
        "breakage, S = v",
        Batch(None, breakage=closed.uniform(1.0, 1.0)),
        closed.B1.times,
        _breakage,
        ("M2", ALL_QUANTILES),
        sizes=(32.0 * 2.0**-24, 32.0),
        refinements=WITH_BREAKAGE,
    ),
]


def rows() -> list[Row]:
    """Every scheme on every problem."""
    return [row for problem in PROBLEMS for scheme in problem.schemes for row in problem.rows(scheme)]


def checks(table: Sequence[Row]) -> Iterator[Check]:
    """Observed orders against what is asked for."""
    for row in table:
        closed_form = row.problem not in ("Brownian kernel", "shear kernel")
        source = "closed solution" if closed_form else "FixedPivot(moments=6), 16 sections per doubling"
        case = Case(
            GROUP, row.problem, source, "what few refinements leave open below the order of the scheme"
        )
        at = f"{row.scheme!r}, {row.refinements[0]} to {row.refinements[-1]} per doubling"
        yield case.check(f"order in {row.quantity}", at, row.least, row.order, least=True)
