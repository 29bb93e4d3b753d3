"""Printed figures of the closed solutions of aggregation, and runs that must give them.

The figures were computed from the published formulas in 30-digit arithmetic; for exponential starts also F. Gelbard
and J. H. Seinfeld, J. Comput. Phys. 28 (1978) 357.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from scipy.interpolate import make_interp_spline

from aggsim._checks import FloatArray
from aggsim.inputs import Medium
from aggsim.kernels import constant
from aggsim.result import Result
from aggsim.schemes import FixedPivot
from aggsim.sizes import Monodisperse, SizeGrid
from aggsim.solvers import simulate
from aggsim.verification import closed
from aggsim.verification.checks import Case, Check
from aggsim.verification.closed import ClosedSolution
from aggsim.verification.published.account import closure
from aggsim.verification.published.physics import DECAY, SMOLUCHOWSKI, equal_pair
from aggsim.vessels import Batch

GROUP = "Aggregation: closed solutions"

Row = tuple[float, list[str], list[str]]  # time in units of the kernel; numbers or densities; moments

SIZES = np.array([1.0, 2.0, 3.0, 5.0, 10.0, 20.0])
POINTS = np.array([0.1, 0.5, 1.0, 2.0, 5.0, 10.0])


def rows(numbers: str, moments: str) -> list[Row]:
    """Lines of a time and six numbers or densities, and lines of the same times and their moments."""
    left, right = ([line.split() for line in text.strip().splitlines()] for text in (numbers, moments))
    assert [line[0] for line in left] == [line[0] for line in right]
    return [(float(a[0]), a[1:], b[1:]) for a, b in zip(left, right, strict=True)]


# T, with T = beta N0 t / 2: n_k / N0 for k = 1, 2, 3, 5, 10, 20; N / N0, M2, M3
CONSTANT_MONO = rows(
    """
    0.5  0.444444444444 0.148148148148 0.0493827160494 0.00548696844993 2.25801170779e-5 3.82396265439e-10
    1    0.25 0.125 0.0625 0.015625 4.8828125e-4 4.76837158203e-7
    2    0.111111111111 0.0740740740741 0.0493827160494 0.0219478737997 0.00289025498597 5.01214433036e-5
    5    0.0277777777778 0.0231481481481 0.0192901234568 0.0133959190672 0.00538351942966 8.69468443486e-4
    10   0.00826446280992 0.00751314800902 0.00683013455365 0.00564473930054 0.00350493899481 0.00135130570931
    """,
    """
    0.5  0.666666666667 2 5.5
    1    0.5 3 13
    2    0.333333333333 5 37
    5    0.166666666667 11 181
    10   0.0909090909091 21 661
    """,
)
# tau = B N0 t
SUM_MONO = rows(
    """
    0.1  0.822700890856 0.0711835429964 0.00923864951984 2.4015479892e-4 6.16194231539e-8 1.13318883871e-14
    0.5  0.409233516742 0.108642694852 0.0432634473783 0.0105873507835 7.38706920412e-4 1.0045552781e-5
    1    0.195514534153 0.0656829261613 0.0330991770597 0.0129709444049 0.00293681789363 4.20552093252e-4
    2    0.0570022398239 0.0207596746786 0.0113407147007 0.00522282148713 0.00177046151299 5.68304439382e-4
    3    0.0192506022768 0.00707282683189 0.00389792059552 0.00182699730812 6.47171854716e-4 2.2683757306e-4
    """,
    """
    0.1  0.904837418036 1.22140275816 1.77575647777
    0.5  0.606530659713 2.71828182846 13.2037901561
    1    0.367879441171 7.38905609893 123.623376253
    2    0.135335283237 54.5981500331 8136.01637414
    3    0.0497870683679 403.428793493 472058.2
    """,
)
# tau = C N0 t
PRODUCT_MONO = rows(
    """
    0.1  0.904837418036 0.0409365376539 0.00370409110341 6.31802770534e-5 1.01377711963e-8 1.45823104957e-15
    0.25 0.778800783071 0.0758163324641 0.0147614547732 0.00116579100285 8.62900737983e-6 2.64121077493e-9
    0.5  0.606530659713 0.0919698602929 0.0278912700186 0.00534407543124 3.62655774156e-4 9.33040656999e-6
    0.75 0.472366552741 0.0836738100557 0.029643531908 0.00775121018203 0.00114440493878 1.39367683337e-4
    0.9  0.406569659741 0.0743844996997 0.0272182326596 0.0075923048216 0.0013175564001 2.21677854842e-4
    """,
    """
    0.1  0.95 1.11111111111 1.37174211248
    0.25 0.875 1.33333333333 2.37037037037
    0.5  0.75 2 8
    0.75 0.625 4 64
    0.9  0.55 10 1000
    """,
)
# T; n v0 / N0 at v / v0 = 0.1, 0.5, 1, 2, 5, 10; M2, M3
CONSTANT_EXP = rows(
    """
    0.5  0.415780882236 0.318458360255 0.228185386237 0.117154283607 0.0158551081543 5.65615022818e-4
    1    0.237807356125 0.194700195768 0.151632664928 0.0919698602929 0.020521249656 0.00168448674977
    2    0.107468455609 0.0940535249878 0.0796145900638 0.0570463465592 0.0209861780931 0.00396377703858
    5    0.027318651495 0.0255567892953 0.023513381247 0.0199036475159 0.0120721724585 0.00524654452327
    10   0.00818967180403 0.00789721517577 0.00754628691142 0.00689051998409 0.00524575552843 0.00332967207875
    """,
    """
    0.5  3 13.5
    1    4 24
    2    6 54
    5    12 216
    10   22 726
    """,
)
# tau; M0 as well
SUM_EXP = rows(
    """
    0.5  0.528675618906 0.317287272748 0.182173986317 0.0755837724909 0.0144053651934 0.0026313244989
    1    0.313469530118 0.175861380696 0.0971838786182 0.041129135665 0.0100901713247 0.00296832859229
    2    0.112799174433 0.0592417343865 0.031440778407 0.0132225951289 0.00356021750983 0.00125547593408
    3    0.0411605920232 0.0210976783225 0.0110236779812 0.0046017522336 0.00124927183756 4.49580337623e-4
    """,
    """
    0.5  0.606530659713 5.43656365692 61.7785387651
    1    0.367879441171 14.7781121979 534.664578859
    2    0.135335283237 109.196300066 33350.9231
    3    0.0497870683679 806.857586985 1904439.0
    """,
)
# T
PRODUCT_EXP = rows(
    """
    0.1  0.895841600593 0.577550924982 0.335649635358 0.118288997334 0.00929903490178 5.70657813553e-4
    0.2  0.886935218774 0.549955470139 0.306230868387 0.103139318734 0.0101378038882 0.00116457528447
    0.3  0.878117383416 0.523678189662 0.279379215218 0.0897310276875 0.00986583013813 0.00152054433044
    0.4  0.8693872142 0.498656133992 0.254871792685 0.0779075541055 0.00896124860547 0.00157753830271
    """,
    """
    0.1  0.95 2.5 11.71875
    0.2  0.90 3.33333333 27.7777778
    0.3  0.85 5 93.75
    0.4  0.80 10 750
    """,
)


@dataclass(frozen=True, eq=False)
class Printed:
    """The figures of one problem: `rows` at times in `unit`, numbers or densities `at` sizes, moments of `orders`."""

    problem: ClosedSolution
    rows: list[Row]
    unit: str
    to_time: float
    at: FloatArray
    orders: tuple[int, ...]
    grid: SizeGrid  # 16 sections per doubling; above its top less than 1e-12 of M3

    @property
    def times(self) -> FloatArray:
        """Output times of a run."""
        return np.array([row[0] for row in self.rows]) * self.to_time


def _multiples(top: float) -> SizeGrid:
    return SizeGrid.monomers_then_geometric(1.0, top, per_doubling=16)


_SMOOTH = SizeGrid.geometric(smallest=1e-5, largest=3e5, per_doubling=16)
_HALF, _TAU = "beta N0 t / 2", "tau"
TABLES = [
    Printed(closed.CONSTANT_MONO, CONSTANT_MONO, _HALF, 2.0, SIZES, (0, 2, 3), _multiples(1e3)),
    Printed(closed.SUM_MONO, SUM_MONO, _TAU, 1.0, SIZES, (0, 2, 3), _multiples(1e5)),
    Printed(closed.PRODUCT_MONO, PRODUCT_MONO, _TAU, 1.0, SIZES, (0, 2, 3), _multiples(2e4)),
    Printed(closed.CONSTANT_EXP, CONSTANT_EXP, _HALF, 2.0, POINTS, (2, 3), _SMOOTH),
    Printed(closed.SUM_EXP, SUM_EXP, _TAU, 1.0, POINTS, (0, 2, 3), _SMOOTH),
    Printed(closed.PRODUCT_EXP, PRODUCT_EXP, _TAU, 1.0, POINTS, (0, 2, 3), _SMOOTH),
]


def run(table: Printed) -> Result:
    """Six moments, 16 sections per doubling, rtol = 1e-10."""
    problem = table.problem
    scheme = FixedPivot(moments=6)
    return simulate(
        Batch(problem.kernel), problem.start, table.times, grid=table.grid, scheme=scheme, rtol=1e-10
    )


def densities(result: Result, i: int, points: FloatArray) -> FloatArray:
    """n(v) at time i, by a quintic curve of ln n over ln v, whose own error is below h^6."""
    density, v = result.number[i] / result.grid.width, result.grid.volume
    used = (v > 0.01) & (v < 100.0) & (density > 1e-14)
    curve = make_interp_spline(np.log(v[used]), np.log(density[used]), k=5)
    return np.asarray(np.exp(curve(np.log(points))))


def _allowed(k: int, printed: str, discrete: bool) -> float:
    """Relative error of a moment."""
    if printed == "472058.2":  # printed to 1e-7; 1904439.0 to 3e-8
        return 1e-7
    return 1e-8 if k < 3 else 2e-8 if discrete else 5e-8


def closed_solutions() -> Iterator[Check]:
    """Numbers, densities and moments of runs against the printed figures.

    Errors in time of n_k, M0 and M2; of h^6 = 7e-9 of M3 and of densities, which fall like exp(-v / mean) and get
    steeper with v. Rare sizes carry what is lost when more sections are taken into use, 1e-12 N0 at most.
    """
    for table in TABLES:
        problem = table.problem
        case = Case(
            GROUP,
            problem.name,
            problem.source,
            "rtol = 1e-10, six moments at 16 sections per doubling: h^6 = 7e-9; printed digits",
        )
        result = run(table)
        for i, (time, numbers, moments) in enumerate(table.rows):
            when = f"{table.unit} = {time:g}"
            if problem.discrete:
                found = result.number[i, table.at.astype(int) - 1]
            else:
                found = densities(result, i, table.at)
            mean = problem.moments(table.times[i])[0]
            for size, printed, value in zip(table.at, numbers, found, strict=True):
                if problem.discrete:
                    yield case.check(
                        "number of k-mers",
                        f"k = {size:g}, {when}",
                        printed,
                        value,
                        relative=1e-8,
                        absolute=1e-12,
                    )
                else:
                    allowed = 3e-8 * (1.0 + (size * mean) ** 2 / 5.0)
                    yield case.check(
                        "density n(v)", f"v = {size:g}, {when}", printed, value, relative=allowed
                    )
            for k, printed in zip(table.orders, moments, strict=True):
                allowed = _allowed(k, printed, problem.discrete)
                yield case.check(f"M{k}", when, printed, result.moment(k)[i], relative=allowed)
        yield closure(f"aggregation: {problem.name}", result)


def half_life() -> Iterator[Check]:
    """Rapid coagulation in SI units, from water and spheres to the time at which half of the number is left."""
    diameter = 400e-9
    case = Case(
        GROUP,
        "half-life of rapid coagulation, 1e16 spheres of 400 nm per m3 in water at 20 C, as for equal spheres",
        SMOLUCHOWSKI,
        "interpolation between outputs",
    )
    start = Monodisperse(diameter=diameter, number=1e16)
    rate = equal_pair(Medium.water(temperature=293.15))
    result = simulate(Batch(constant(rate)), start, np.linspace(0.0, 40.0, 81))
    (_, printed), *_ = DECAY.values()
    yield case.check("half-life [s]", "3 mu/(4 kT N0)", printed, result.number_half_life(), relative=1e-4)
    yield closure("rapid coagulation", result)
