"""The observed order of every scheme in moments and quantiles, on smooth kernels and on one with a kink.

Errors are taken at a few refinements of a geometric grid, far above the error in time (rtol = 1e-11); the order
is the slope of ln error against ln(sections per doubling), fitted over all of them. `pytest -s` prints the table.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

import closed_solutions as closed
import numpy as np
import pytest
from reference_runs import brownian, settling, shear
from scipy import integrate, optimize, special

import aggsim as ag
from aggsim.sizes import means

Array = np.ndarray

SHARES = np.array([0.1, 0.5, 0.9])
SECOND = [ag.FixedPivot(moments=2), ag.Sectional()]
FOURTH = ag.FixedPivot(moments=4)
SIXTH = ag.FixedPivot(moments=6)
ALL = [*SECOND, FOURTH, SIXTH]
# refinements in the asymptotic range of each: coarser grids are no grids for a distribution, finer ones meet
# round-off and the error of the quantile itself
REFINEMENTS = {SECOND[0]: (2, 3, 4, 6), SECOND[1]: (2, 3, 4, 6), FOURTH: (3, 4, 6, 8), SIXTH: (2, 3, 4)}

EXPONENTIAL = ag.Exponential(mean_volume=1.0, number=1.0)

Measure = Callable[[ag.Result], Array]


def run(
    kernel: ag.kernels.Kernel,
    start: ag.StartingDistribution,
    time: float,
    scheme: ag.schemes.Scheme,
    q: float,
) -> ag.Result:
    grid = ag.SizeGrid.geometric(smallest=1e-6, largest=4000.0, per_doubling=q)
    return ag.simulate(ag.Batch(kernel), start, time, grid=grid, scheme=scheme, rtol=1e-11)


def order(errors: Array, refinements: Sequence[float]) -> float:
    slope, _ = np.polyfit(np.log(refinements), np.log(np.abs(errors)), 1)
    return float(-slope)


def report(title: str, scheme: ag.schemes.Scheme, errors: Array, p: float) -> None:
    print(f"{title:34s} {scheme!r:22s} order {p:5.2f}  errors " + " ".join(f"{e:9.2e}" for e in errors))


def assert_order(scheme: ag.schemes.Scheme, p: float) -> None:
    if scheme in SECOND:
        assert 1.7 <= p <= 2.3
    else:
        assert p >= (3.5 if scheme is FOURTH else 5.0)


# ---- constant and sum kernel: closed references


def exact_quantiles(problem: closed.ClosedSolution, t: float) -> Array:
    """Diameters below which 10, 50 and 90 % of the volume lie."""
    if problem is closed.CONSTANT_EXP:  # v n(v) is a gamma distribution of shape 2
        return means.diameter_of(special.gammaincinv(2.0, SHARES) * (1.0 + t / 2.0))

    def below(log_v: float) -> float:
        options = {"epsabs": 1e-13, "epsrel": 1e-12, "limit": 200}
        return float(
            integrate.quad(
                lambda s: float(np.exp(2 * s) * problem.number(np.exp(s), t)), -25.0, log_v, **options
            )[0]
        )

    roots = [optimize.brentq(lambda s, p=p: below(s) - p, -5.0, 6.0, xtol=1e-12) for p in SHARES]
    return means.diameter_of(np.exp(roots))


def exact_moment(problem: closed.ClosedSolution, t: float, k: float) -> float:
    if problem is closed.CONSTANT_EXP:
        return float(special.gamma(k + 1.0) * (1.0 + t / 2.0) ** (k - 1.0))
    options = {"epsabs": 0.0, "epsrel": 1e-11, "limit": 400, "points": [-2.0, 0.0, 2.0, 4.0]}
    return float(
        integrate.quad(
            lambda s: float(np.exp((k + 1) * s) * problem.number(np.exp(s), t)), -30.0, 7.0, **options
        )[0]
    )


@pytest.mark.parametrize("scheme", ALL, ids=repr)
@pytest.mark.parametrize(
    ("problem", "time"), [(closed.CONSTANT_EXP, 20.0), (closed.SUM_EXP, 1.0)], ids=["constant", "sum"]
)
def test_order_on_closed_solutions(
    problem: closed.ClosedSolution, time: float, scheme: ag.schemes.Scheme
) -> None:
    """M2 is exact from 4 moments on, so M(4/3) stands in for it there. The error of a single quantile may change
    its sign on the way, that of three together does not."""
    refinements = REFINEMENTS[scheme]
    results = [run(problem.kernel, problem.start, time, scheme, q) for q in refinements]
    k = 2.0 if scheme in SECOND else 4.0 / 3.0
    moment = np.array([r.moment(k)[0] for r in results]) / exact_moment(problem, time, k) - 1.0
    exact = exact_quantiles(problem, time)
    quantiles = np.array([r.quantile_diameter(SHARES)[0] for r in results]) / exact - 1.0
    together = np.sqrt((quantiles**2).mean(axis=1))
    for title, errors in ((f"M{k:.3g}", moment), ("d50", quantiles[:, 1]), ("d10, d50, d90", together)):
        p = order(errors, refinements)
        report(f"{problem.name.split(',')[0]}, {title}", scheme, errors, p)
        assert_order(scheme, p)
    if scheme not in SECOND:
        m2 = np.array([r.moment(2)[0] for r in results]) / problem.moments(time)[2] - 1.0
        assert np.abs(m2).max() <= 1e-7  # the tail that is lost while sections are taken into use


# ---- smooth kernels without a closed solution: the same scheme of 6 moments, four times finer, as reference


@pytest.mark.parametrize("scheme", ALL, ids=repr)
@pytest.mark.parametrize(("kernel", "time"), [(brownian(), 20.0), (shear(), 1.0)], ids=["brownian", "shear"])
def test_order_on_smooth_kernels(kernel: ag.kernels.Kernel, time: float, scheme: ag.schemes.Scheme) -> None:
    """The reference is right to 1e-8: 16 and 12 per doubling agree to that."""

    def measures(result: ag.Result) -> Array:
        return np.concatenate(
            [[result.moment(0)[0], result.moment(2)[0]], result.quantile_diameter(SHARES)[0]]
        )

    refinements = REFINEMENTS[scheme]
    exact = measures(run(kernel, EXPONENTIAL, time, SIXTH, 16))
    errors = (
        np.array([measures(run(kernel, EXPONENTIAL, time, scheme, q)) for q in refinements]) / exact - 1.0
    )
    together = np.sqrt((errors[:, 2:] ** 2).mean(axis=1))
    columns = {"M0": errors[:, 0], "M2": errors[:, 1], "d50": errors[:, 3], "d10, d50, d90": together}
    for title, column in columns.items():
        p = order(column, refinements)
        report(f"{kernel.names[0]}, {title}", scheme, column, p)
        assert_order(scheme, p)


# ---- a kernel with a kink


def test_a_kink_in_the_kernel_brings_every_scheme_down_to_second_order() -> None:
    """Differential settling is zero at equal sizes like |v - w|: pairs within one section see a kernel that no
    polynomial through pivots follows, an error of h^2 whatever the number of moments. Reference: Richardson's
    extrapolation of 12 and 24 sections per doubling at that order."""
    start, time = ag.Gamma(mean_volume=1.0, shape=2.0, number=1.0), 0.3

    def measures(scheme: ag.schemes.Scheme, q: int) -> Array:
        result = run(settling(), start, time, scheme, q)
        return np.array([result.moment(0)[0], result.moment(2)[0]])

    coarse, fine = measures(SIXTH, 12), measures(SIXTH, 24)
    exact = fine + (fine - coarse) / 3.0
    refinements = (3, 4, 6, 8)
    size = {}
    for scheme in (SECOND[0], FOURTH, SIXTH):
        errors = np.array([measures(scheme, q) for q in refinements]) / exact - 1.0
        for k, title in enumerate(("M0", "M2")):
            p = order(errors[:, k], refinements)
            report(f"settling, {title}", scheme, errors[:, k], p)
            assert 1.5 <= p <= 3.0
        size[scheme] = np.abs(errors[0])
    # the order falls, the error still does not exceed that of linear sharing, and M2 gains by far
    assert size[FOURTH][0] < size[SECOND[0]][0]
    assert size[FOURTH][1] < 0.1 * size[SECOND[0]][1]
