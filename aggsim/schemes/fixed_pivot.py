"""Fixed pivots: births are shared among the nearest pivots so that moments are kept."""

from __future__ import annotations

from dataclasses import dataclass

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.schemes import _loops
from aggsim.schemes.base import Scheme, SegmentScheme, continued, require_sections
from aggsim.sizes import SizeGrid, StartingDistribution, project, starting_grid

# Sections per doubling of the default grids: sizes within a few parts in 1000 (2) or 10,000 (4 and 6), also
# with settling, whose kink at equal sizes limits every order
PER_DOUBLING = {2: 8, 4: 4, 6: 4}


@dataclass(frozen=True)
class FixedPivot(Scheme):
    """Particles sit at the pivots x_k; a birth of volume v is interpolated between pivots.

        d/dt sum_k n_k f(x_k) = 1/2 sum_ij K_ij n_i n_j [ (I f)(x_i + x_j) - f(x_i) - f(x_j) ]

    where I f is the Lagrange interpolant of f over the `moments` nearest pivots, so that every birth keeps as
    many moments:

    - 2: orders 0 and 1 in v, number and volume; the fixed pivot technique [1]_, second order;
    - 4: orders 0, 1, 2, 3 in v, interpolation in v, fourth order;
    - 6: orders 0, 1/2, 1, 3/2, 2, 5/2 in v, interpolation in v**(1/2), sixth order.

    Orders 4 and 6 take up the idea of high-order moment conservation [2]_ on the same quadratic form. Births
    may then get small negative weights: the result reports the negative share of the volume, nothing is
    clipped. Towards the top of the grid the order falls to 2. Fragments of breakage are integrated against the
    same interpolation, over pivots that do not lie above their parent; what is smaller than the first pivot is
    counted there by volume.

    Parameters
    ----------
    moments : int
        2, 4 or 6.

    Raises
    ------
    InputError
        If moments is not 2, 4 or 6.

    Notes
    -----
    Quintic interpolation in v itself, moments 0 to 5, is less accurate on geometric grids (neighbouring pivots
    spread over a factor of three) and has growing modes where large particles take up small ones.

    References
    ----------
    .. [1] S. Kumar and D. Ramkrishna, Chem. Eng. Sci. 51 (1996) 1311, doi:10.1016/0009-2509(96)88489-2.
    .. [2] V. Alopaeus, M. Laakkonen and J. Aittamaa, Chem. Eng. Sci. 61 (2006) 6732,
       doi:10.1016/j.ces.2006.07.010.
    """

    moments: int = 6

    def __post_init__(self) -> None:
        if isinstance(self.moments, bool) or self.moments not in PER_DOUBLING:
            _checks.refuse(
                "moments", repr(self.moments), "2, 4 or 6", "6, the most accurate on smooth kernels"
            )

    def check(self, grid: SizeGrid) -> None:
        require_sections(grid, self.moments, self)

    def prepare(self, grid: SizeGrid) -> SegmentScheme:
        self.check(grid)
        pivots = continued(grid, self.moments // 2)
        half = self.moments == 6
        births = _loops.interpolation_births(pivots, grid.sections, self.moments, half)
        return SegmentScheme.build(grid, pivots, births, self.moments, half)

    @property
    def order(self) -> float:
        return float(self.moments)

    def default_grid(self, start: StartingDistribution, finer: float = 1.0) -> SizeGrid:
        return starting_grid(start, per_doubling=PER_DOUBLING[self.moments], finer=finer)

    def project(self, start: StartingDistribution, grid: SizeGrid) -> FloatArray:
        return project(start, grid, moments=self.moments)
