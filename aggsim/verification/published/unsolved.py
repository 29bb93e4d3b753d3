"""Kernels without a closed solution: tables of a direct solution of the discrete equation, monodisperse start.

The figures come from an independent solution of all 300 to 3600 sizes by direct sums and a Runge-Kutta method of 8th
order at rtol = 1e-11 to 1e-12, which gives the closed solution of the constant kernel to all digits. Units:
K(1, 1) = 1, N0 = 1. Stated tolerance 1e-7; figures printed to 7 digits are rounded to about that.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from aggsim._checks import FloatArray
from aggsim.kernels import Kernel
from aggsim.result import Result
from aggsim.schemes import FixedPivot
from aggsim.sizes import SizeGrid
from aggsim.solvers import simulate
from aggsim.verification.checks import Case, Check
from aggsim.verification.closed import MONO, SMOLUCHOWSKI
from aggsim.verification.published.account import closure
from aggsim.verification.reduced import brownian, every_size, shear
from aggsim.vessels import Batch

GROUP = "Aggregation: kernels without a closed solution"
SOURCE = (
    f"{SMOLUCHOWSKI} (equation and kernels); direct solution, every size resolved, Runge-Kutta of 8th order"
)
STATED = 1e-7

KMERS = np.array([1, 2, 3, 5, 10])

# t; n1, n2, n3, n5, n10, K = (i^a + j^a)(i^-a + j^-a) / 4 with a = 1/3
BROWNIAN_NUMBERS = np.array(
    [
        [0.5, 0.6395649878, 0.1276084686, 0.02576608759, 0.001062670309, 3.740043811e-7],
        [1, 0.4434170783, 0.1473189144, 0.04944629455, 0.005632302395, 2.513993404e-5],
        [2, 0.2481905169, 0.1237895936, 0.06213079702, 0.01579998328, 5.250637844e-4],
        [5, 0.07931054218, 0.05716808728, 0.04093437983, 0.02103962648, 0.004039024560],
        [10, 0.02580275591, 0.02229094988, 0.01873446035, 0.01309271604, 0.005343528282],
        [20, 0.006966964461, 0.006930039617, 0.006468606820, 0.005438082220, 0.003416617915],
        [50, 9.477339194e-4, 1.137352603e-3, 1.182520973e-3, 1.161308553e-3, 9.916126069e-4],
        [100, 1.677598691e-4, 2.406500603e-4, 2.731371175e-4, 2.972308575e-4, 2.950284756e-4],
    ]
)  # fmt: skip
# t; M0, M2, M3, M(1/3); number-based geometric standard deviation of diameter
BROWNIAN_MOMENTS = np.array(
    [
        [0.5, 0.7995005789, 1.50280858, 2.8917577, 0.848116899, 1.1156614],
        [1, 0.6653655988, 2.00968531, 5.5720796, 0.741805074, 1.1591427],
        [2, 0.4973839383, 3.03044500, 13.316997, 0.601320868, 1.2127805],
        [5, 0.2815910815, 6.11652665, 55.761719, 0.401783026, 1.2923804],
        [10, 0.1625025637, 11.28422635, 190.81825, 0.274269269, 1.3494769],
        [20, 0.0875614734, 21.63938197, 702.5692, 0.179782907, 1.3950169],
        [50, 0.0365090453, 52.72713778, 4171.9613, 0.099730826, 1.4308081],
        [100, 0.0184656958, 104.54709272, 16401.816, 0.063224963, 1.4418443],
    ]
)  # fmt: skip
MOMENT_ORDERS = [0.0, 2.0, 3.0, 1.0 / 3.0]

# t; M0, M2, M3, with a = 1 / 1.8; then n1, n2, n5, n10
FRACTAL_MOMENTS = np.array(
    [[1, 0.6629689706, 2.02784027, 5.7093360], [10, 0.1548560445, 11.84203429, 210.98009]]
)
FRACTAL_NUMBERS = np.array(
    [
        [1, 0.4415226946, 0.1458342336, 0.005898443801, 3.059954547e-5],
        [10, 0.02220059432, 0.02074571685, 0.01254188349, 0.005255212683],
    ]
)

# t; n1, n2, n3, n5, n10, K = (i^(1/3) + j^(1/3))^3 / 8
SHEAR_NUMBERS = np.array(
    [
        [0.25, 0.7853953974, 0.08254029587, 0.01258131591, 4.305233024e-4, 1.958859376e-7],
        [0.5, 0.6266841640, 0.1121763747, 0.02927082748, 0.002952236183, 2.026755093e-5],
        [1, 0.4160600914, 0.1117177455, 0.04414466450, 0.01032256042, 5.931892792e-4],
    ]
)  # fmt: skip
# t; M0, M2, M3
SHEAR_MOMENTS = np.array(
    [
        [0.25, 0.8832914038, 1.27968016, 2.0102883],
        [0.5, 0.7816255868, 1.62760758, 3.7555455],
        [1, 0.6154804143, 2.59351750, 11.547887],
    ]
)  # fmt: skip


@dataclass(frozen=True, eq=False)
class Unsolved:
    """A kernel with its tables of numbers (of the k-mers `kmers`) and moments; `sizes` are enough to resolve all."""

    name: str
    kernel: Callable[[], Kernel]
    sizes: int
    kmers: FloatArray
    numbers: FloatArray
    moments: FloatArray

    @property
    def times(self) -> list[float]:
        """Output times."""
        return [float(t) for t in self.moments[:, 0]]

    def resolved(self) -> Result:
        """Every size up to the last."""
        return _resolved(self)

    def on_sections(self) -> Result:
        """Six moments at 8 sections per doubling, rtol = 1e-10."""
        grid = SizeGrid.monomers_then_geometric(1.0, 2e4, per_doubling=8)
        scheme = FixedPivot(moments=6)
        return simulate(Batch(self.kernel()), MONO, self.times, grid=grid, scheme=scheme, rtol=1e-10)


@lru_cache(maxsize=8)
def _resolved(case: Unsolved) -> Result:
    return every_size(case.kernel(), case.times, case.sizes)


# of 1600 sizes the last hold 1e-11 of the volume at t = 100
BROWNIAN = Unsolved("Brownian kernel of spheres", brownian, 1600, KMERS, BROWNIAN_NUMBERS, BROWNIAN_MOMENTS)
FRACTAL = Unsolved(
    "Brownian kernel of aggregates with fractal dimension 1.8",
    lambda: brownian(1.0 / 1.8),
    400,
    np.array([1, 2, 5, 10]),
    FRACTAL_NUMBERS,
    FRACTAL_MOMENTS,
)
SHEAR = Unsolved("shear kernel of spheres", shear, 500, KMERS, SHEAR_NUMBERS, SHEAR_MOMENTS)
UNSOLVED = [BROWNIAN, FRACTAL, SHEAR]
NAMES = {0.0: "M0", 2.0: "M2", 3.0: "M3", 1.0 / 3.0: "M(1/3)"}


def kernels_without_solution() -> Iterator[Check]:
    """Every size resolved, and on sections."""
    for problem in UNSOLVED:
        for how, result, extra in (
            ("every size resolved", problem.resolved(), 0.0),
            # of order (ln 2 / 8)^6, largest early, when neighbouring sizes differ most
            ("six moments at 8 sections per doubling", problem.on_sections(), 1e-7),
        ):
            basis = "stated accuracy 1e-7" + (" and 1e-7 of the grid" if extra else "")
            case = Case(GROUP, f"{problem.name}, {how}", SOURCE, basis)
            if not extra:
                found = result.number[:, problem.kmers - 1]
                for time, row, values in zip(problem.times, problem.numbers, found, strict=True):
                    yield from case.each(
                        "number of k-mers",
                        f"k = {{}}, t = {time:g}",
                        problem.kmers,
                        row[1:],
                        values,
                        relative=STATED,
                    )
            for column, k in enumerate(MOMENT_ORDERS[: problem.moments.shape[1] - 1], start=1):
                printed, moment = problem.moments[:, column], result.moment(k)
                yield from case.each(
                    NAMES[k], "t = {:g}", problem.times, printed, moment, relative=STATED + extra
                )
            if problem is BROWNIAN:
                spread, printed = result.geometric_standard_deviation(0), problem.moments[:, -1]
                # a width is read less exactly than moments that births keep
                yield from case.each(
                    "geometric spread of diameter by number",
                    "t = {:g}",
                    problem.times,
                    printed,
                    spread,
                    relative=STATED + 2.5 * extra,
                )
            yield closure(f"{problem.name}, {how}", result)
