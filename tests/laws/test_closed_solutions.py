"""Every scheme against the closed solutions: constant, sum and product kernel, discrete and exponential start.

Tolerances. The three kernels are polynomials of degree below 2 in each volume, so the equations of the moments
close, and a scheme gets every moment of whole order that its births keep without any error of the grid: what is
left is the error in time (a few times rtol = 1e-10) and what passes the last section in use before more are
taken into use, up to 1e-9 of the volume each time, which weighs most in M3. Everything else has the order of the
scheme in h = ln 2 / per_doubling.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from scipy.interpolate import make_interp_spline

import aggsim as ag
from aggsim.verification import closed
from aggsim.verification.closed import ClosedSolution

Array = np.ndarray

RTOL = 1e-10
IN_TIME = 1e-8  # error of the moments that a scheme keeps
RARE = 1e-12  # of N0: error of the number of a rare size
ORDERS = [2, 4, 6]
KEPT = {2: [0, 1], 4: [0, 1, 2, 3], 6: [0, 1, 2]}  # whole orders of the moments that births keep
# error of M3 over h^6 with 6 moments; the largest found are 0.07, 0.76 and 1.2
THIRD = {"constant": 0.1, "sum": 1.0, "product": 1.5}
POINTS = np.array([0.1, 0.5, 1.0, 2.0, 5.0, 10.0])  # volumes at which densities are compared
SIZES = np.array([1, 2, 3, 5, 10, 20])  # k-mers whose numbers are compared

# output times of the discrete and of the continuous problem; up to 90 % of the way to gelation for the product
TIMES = {
    closed.CONSTANT_MONO: [1.0, 2.0, 4.0, 10.0, 20.0],
    closed.SUM_MONO: [0.1, 0.5, 1.0, 2.0],
    closed.PRODUCT_MONO: [0.1, 0.25, 0.5, 0.75, 0.9],
    closed.CONSTANT_EXP: [1.0, 2.0, 4.0, 10.0, 20.0],
    closed.SUM_EXP: [0.5, 1.0, 2.0],
    closed.PRODUCT_EXP: [0.1, 0.2, 0.3, 0.4, 0.45],
}
TOP = {"constant": 1e3, "sum": 1e5, "product": 2e4}  # above what holds 1e-12 of M3 at the last time


def named(problem: object) -> str:
    return problem.name if isinstance(problem, ClosedSolution) else repr(problem)


def kernel_name(problem: ClosedSolution) -> str:
    return problem.name.split()[0]


def top(problem: ClosedSolution) -> float:
    return TOP[kernel_name(problem)]


def tolerances(problem: ClosedSolution, moments: int, per_doubling: int) -> Array:
    """Of M0 to M3 with 4 or 6 moments; the tail that is lost is heavier on coarse grids."""
    kept = np.array([1e-8, 1e-8, 1e-6, 1e-5] if per_doubling == 3 else [1e-8, 1e-8, 3e-8, 3e-7])
    if moments == 6:
        kept[3] += THIRD[kernel_name(problem)] * (np.log(2.0) / per_doubling) ** 6
    return kept


def run(problem: ClosedSolution, scheme: ag.schemes.Scheme, grid: ag.SizeGrid) -> ag.Result:
    times = TIMES[problem]
    result = ag.simulate(ag.Batch(problem.kernel), problem.start, times, grid=grid, scheme=scheme, rtol=RTOL)
    assert np.abs(result.balance.closure).max() <= 1e-12
    return result


def moment_errors(result: ag.Result, problem: ClosedSolution) -> Array:
    """Relative errors of M0 to M3 (n_times, 4)."""
    exact = np.array([problem.moments(t) for t in result.times])
    return np.stack([result.moment(k) for k in range(4)], axis=-1) / exact - 1.0


# ---- discrete starts


@pytest.mark.parametrize(
    ("problem", "count", "times"),
    [
        (closed.CONSTANT_MONO, 400, [1.0, 2.0, 4.0, 10.0, 20.0]),
        (closed.SUM_MONO, 800, [0.1, 0.5, 1.0]),
        (closed.PRODUCT_MONO, 800, [0.1, 0.25, 0.5, 0.75]),
        (closed.PRODUCT_MONO, 1600, [0.9]),
    ],
    ids=["constant", "sum", "product", "product, 90 % to gelation"],
)
def test_monomer_has_errors_in_time_alone(problem: ClosedSolution, count: int, times: list[float]) -> None:
    """Where sizes above the last one matter, their share of each moment follows from the closed solution."""
    grid = ag.SizeGrid.monomers(1.0, count)
    result = ag.simulate(
        ag.Batch(problem.kernel), problem.start, times, grid=grid, scheme=ag.Monomer(), rtol=RTOL
    )
    above = np.arange(count + 1.0, 40 * count)
    errors = moment_errors(result, problem)
    for t, number, error in zip(times, result.number, errors, strict=True):
        exact = problem.number(grid.volume, t)
        missing = [problem.number(above, t) @ above**k / problem.moments(t)[k] for k in range(4)]
        assert (np.abs(error) <= IN_TIME + 2.0 * np.array(missing)).all()
        seen = exact > 1e-7
        np.testing.assert_allclose(number[seen], exact[seen], rtol=1e-7 + 10.0 * missing[1], atol=0.0)
        np.testing.assert_allclose(number, exact, rtol=1e-7 + 10.0 * missing[1], atol=RARE)


@pytest.mark.parametrize("problem", closed.DISCRETE, ids=named)
@pytest.mark.parametrize("moments", ORDERS)
def test_fixed_pivots_hold_the_kept_moments_and_the_small_sizes(
    problem: ClosedSolution, moments: int
) -> None:
    """With 16 sections per doubling the multiples up to 23 are pivots: all that is born there up to 20 is exact."""
    grid = ag.SizeGrid.monomers_then_geometric(1.0, top(problem), per_doubling=16)
    result = run(problem, ag.FixedPivot(moments=moments), grid)
    assert np.abs(moment_errors(result, problem)[:, KEPT[moments]]).max() <= IN_TIME
    for t, number in zip(result.times, result.number, strict=True):
        np.testing.assert_allclose(number[SIZES - 1], problem.number(1.0 * SIZES, t), rtol=IN_TIME, atol=RARE)


@pytest.mark.parametrize("problem", closed.DISCRETE, ids=named)
@pytest.mark.parametrize("moments", [4, 6])
@pytest.mark.parametrize("per_doubling", [3, 6])
def test_discrete_starts_keep_their_moments(problem: ClosedSolution, moments: int, per_doubling: int) -> None:
    grid = ag.SizeGrid.monomers_then_geometric(1.0, top(problem), per_doubling=per_doubling)
    result = run(problem, ag.FixedPivot(moments=moments), grid)
    assert (np.abs(moment_errors(result, problem)) <= tolerances(problem, moments, per_doubling)).all()
    assert result.balance.negative_share.max() <= (1e-5 if moments == 4 else 1e-7)


@pytest.mark.parametrize("problem", closed.DISCRETE, ids=named)
def test_sectional_holds_number_volume_and_singles(problem: ClosedSolution) -> None:
    """Nothing is born into the first section, and what leaves it depends on M0 and M1 alone."""
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=top(problem), per_doubling=3)
    result = run(problem, ag.Sectional(), grid)
    assert np.abs(moment_errors(result, problem)[:, :2]).max() <= 10 * IN_TIME  # its tail is heavier
    singles = [float(problem.number(np.array([1.0]), t)[0]) for t in result.times]
    np.testing.assert_allclose(result.number[:, 0], singles, rtol=10 * IN_TIME)


@pytest.mark.parametrize("rtol", [1e-5, 1e-6, 1e-7, 1e-8])
@pytest.mark.parametrize("per_doubling", [1, 2])
def test_the_sum_kernel_never_gels_on_coarse_grids_either(per_doubling: int, rtol: float) -> None:
    """M2 grows as exp(2 t) for ever, and the top of this grid stays far above the particles."""
    start = ag.Monodisperse(volume=1.0, number=1.0) + ag.Monodisperse(volume=4.0, number=0.2)
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=4096.0, per_doubling=per_doubling)
    times = np.array([0.2, 0.8, 1.5])
    result = ag.simulate(
        ag.Batch(ag.kernels.additive(0.3)),
        start,
        times,
        grid=grid,
        scheme=ag.FixedPivot(moments=2),
        rtol=rtol,
    )
    # d ln N / dt = -0.3 M1: volume that has left does not collide any more
    lost = 0.3 * times[-1] * result.balance.beyond_grid[-1] + 10 * rtol
    assert result.balance.beyond_grid[-1] <= 1e-4
    np.testing.assert_allclose(result.total_number(), 1.2 * np.exp(-0.3 * 1.8 * times), rtol=lost)


# ---- exponential starts


@pytest.mark.parametrize("problem", closed.CONTINUOUS, ids=named)
@pytest.mark.parametrize("moments", [4, 6])
@pytest.mark.parametrize("per_doubling", [3, 6])
def test_exponential_starts_keep_their_moments(
    problem: ClosedSolution, moments: int, per_doubling: int
) -> None:
    grid = ag.SizeGrid.geometric(smallest=1e-6, largest=10 * top(problem), per_doubling=per_doubling)
    result = run(problem, ag.FixedPivot(moments=moments), grid)
    assert (np.abs(moment_errors(result, problem)) <= tolerances(problem, moments, per_doubling)).all()


# Leading error of M2 over h^2 where births are shared linearly. Sharing a birth of volume v between pivots a < v < b
# adds (v - a)(b - v) to its v^2, on average (b - a)^2 / 6 = h^2 v^2 / 6, so that
#     dM2/dt = closed + h^2 / 12 sum_ij K_ij n_i n_j (v_i + v_j)^2,
# which the exact moments turn into these; sharing the start adds h^2 / 6 to M2(0) likewise. A partner smaller than
# the section beside it adds less than the average: under the sum kernel that is where most volume comes from.
LINEAR_SHARING: dict[ClosedSolution, Callable[[Array], Array]] = {
    closed.CONSTANT_EXP: lambda t: (t / 4 + 1 / 6) / (1 + t / 2),
    closed.SUM_EXP: lambda t: np.exp(t) - 5 / 6,
    closed.PRODUCT_EXP: lambda t: (1 / 3 - np.log1p(-2 * t) / 2 + 2 * t / 3) / (2 - 4 * t),
}


@pytest.mark.parametrize("scheme", [ag.FixedPivot(moments=2), ag.Sectional()], ids=repr)
@pytest.mark.parametrize("problem", closed.CONTINUOUS, ids=named)
def test_linear_sharing_errs_in_the_second_moment_as_it_must(
    problem: ClosedSolution, scheme: ag.schemes.Scheme
) -> None:
    """The next term in h^2 is of the size of the first one squared."""
    per_doubling = 8
    grid = ag.SizeGrid.geometric(smallest=1e-6, largest=100 * top(problem), per_doubling=per_doubling)
    result = run(problem, scheme, grid)
    errors = moment_errors(result, problem)
    expected = LINEAR_SHARING[problem](result.times) * (np.log(2.0) / per_doubling) ** 2
    assert np.abs(errors[:, :2]).max() <= IN_TIME
    least = 0.65 if problem is closed.SUM_EXP else 0.98
    assert (errors[:, 2] >= least * expected - 2.0 * expected**2).all()
    assert (errors[:, 2] <= 1.02 * expected + 2.0 * expected**2).all()


@pytest.mark.parametrize(("moments", "constant"), [(2, 0.5), (4, 0.8), (6, 4.0)])
@pytest.mark.parametrize("problem", closed.CONTINUOUS, ids=named)
def test_densities_are_those_of_the_closed_solution(
    problem: ClosedSolution, moments: int, constant: float
) -> None:
    """Relative error of n(v) at most C h^m (1 + (v / mean)^2 / 5), at 6 sections per doubling h = 0.1155.

    Beyond the mean n(v) falls like exp(-v / mean), whose derivatives in ln v grow with v / mean. C is 1.3 to 3
    times the largest found.
    """
    per_doubling = 6
    h = np.log(2.0) / per_doubling
    grid = ag.SizeGrid.geometric(smallest=1e-6, largest=top(problem), per_doubling=per_doubling)
    result = run(problem, ag.FixedPivot(moments=moments), grid)
    near = (grid.volume > 0.01) & (grid.volume < 100.0)
    for t, number in zip(result.times, result.number, strict=True):
        density = number / grid.width
        used = near & (density > 1e-12)
        # quintic in ln v: its own error is below h^6
        curve = make_interp_spline(np.log(grid.volume[used]), np.log(density[used]), k=5)
        error = np.exp(curve(np.log(POINTS))) / problem.number(POINTS, t) - 1.0
        steep = 1.0 + (POINTS * problem.moments(t)[0]) ** 2 / 5.0
        assert (np.abs(error) <= constant * h**moments * steep).all()


@pytest.mark.parametrize("scheme", [ag.FixedPivot(moments=m) for m in ORDERS] + [ag.Sectional()], ids=repr)
@pytest.mark.parametrize("problem", closed.CONTINUOUS, ids=named)
def test_a_finer_grid_is_nearer_to_the_closed_solution(
    problem: ClosedSolution, scheme: ag.schemes.Scheme
) -> None:
    """The largest error of v^2 n(v) at the pivots falls by 2^order for twice the sections, or not much less."""
    largest = []
    for per_doubling in (3, 6):
        grid = ag.SizeGrid.geometric(smallest=1e-4, largest=top(problem), per_doubling=per_doubling)
        x = grid.volume
        number = run(problem, scheme, grid).number[-1]
        exact = problem.number(x[x < 200.0], TIMES[problem][-1])
        got = (number / grid.width)[x < 200.0]
        largest.append(float(np.abs((got - exact) * x[x < 200.0] ** 2).max()))
    order = scheme.moments if isinstance(scheme, ag.FixedPivot) else 2
    assert largest[0] / largest[1] >= 0.4 * 2.0**order
