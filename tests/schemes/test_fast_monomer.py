"""The discrete equation by convolutions against the direct sum over pairs, exact sums and closed solutions."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scheme_cases import discrete_equation, jacobian_of, rates_of
from scipy.integrate import solve_ivp

import aggsim as ag
from aggsim.errors import GridError
from aggsim.schemes.fast_monomer import FactoredOperator
from aggsim.schemes.low_rank import factored
from aggsim.schemes.monomer import MonomerOperator
from aggsim.verification.closed import CONSTANT_MONO, SUM_MONO, ClosedSolution

Array = np.ndarray

WATER = ag.Medium.water(temperature=298.15)
LATEX = ag.Particles(diameter=400e-9, density=1055.0)
MIXING = ag.Flow(shear_rate=50.0)
UNIT = np.pi / 6.0 * 400e-9**3
SIZES = 5000

KERNELS = {
    "constant": (ag.kernels.constant(1.0), 1.0),
    "additive": (ag.kernels.additive(1.0), 1.0),
    "multiplicative": (ag.kernels.multiplicative(1.0), 1.0),
    "Brownian, spheres": (ag.kernels.brownian(ag.Compact(LATEX), WATER), UNIT),
    "Brownian, fractal": (ag.kernels.brownian(ag.Fractal(LATEX, dimension=1.8), WATER), UNIT),
    "shear": (ag.kernels.shear(ag.Fractal(LATEX, dimension=2.1), MIXING), UNIT),
    # no finite sum of products, 9 to the tolerance
    "smooth": (ag.kernels.from_function(lambda v, w: np.sqrt(np.cbrt(v) + np.cbrt(w))), 1.0),
}

K = np.arange(1.0, SIZES + 1.0)
with np.errstate(under="ignore"):
    STATES = {
        "monodisperse": np.where(K == 1.0, 1.0, 0.0),
        "tau = 0.1, falls by 20 per size": CONSTANT_MONO.number(K, 0.2),
        "tau = 20": CONSTANT_MONO.number(K, 40.0),
        "late, over the top": np.exp(-K / 500.0),
        "power law": K**-2.5,
        "many monomers, few large ones": np.exp(-K / 3.0) + 1e-12 * np.exp(-K / 250.0),
        "gap": np.where((K <= 2.0) | ((K > 3000.0) & (K <= 3010.0)), 1.0, 0.0),
        "uppermost sizes": np.where(K > SIZES - 10, 1.0, 0.0),
        "tail of round-off": np.where(
            K < 900.0, np.exp(-K / 20.0), 1e-30 * np.random.default_rng(5).standard_normal(SIZES)
        ),
    }


@lru_cache(maxsize=1)  # a matrix takes 200 MB
def operators(name: str) -> tuple[MonomerOperator, FactoredOperator]:
    kernel, unit = KERNELS[name]
    volume = unit * K
    matrix = kernel(volume[:, None], volume[None, :])
    return MonomerOperator(matrix, volume), FactoredOperator(factored(kernel, volume))


@pytest.mark.parametrize("state", STATES)
@pytest.mark.parametrize("kernel", KERNELS)
def test_moments_change_as_by_the_direct_sum_and_volume_is_kept(kernel: str, state: str) -> None:
    direct, fast = operators(kernel)
    number = STATES[state]
    expected, rates = rates_of(direct, number), rates_of(fast, number)
    lost = np.abs(number) * (direct.matrix @ np.abs(number))
    gross = np.abs(expected[:-2]) + 2.0 * lost
    # the kernel agrees to 1e-10 at worst, and to 1e-13 where it is a sum of products exactly
    for k in range(4):
        assert abs((rates - expected)[:-2] @ K**k) <= 1e-12 * (gross @ K**k)
    scale = np.abs(expected[-2:]) + 1e-16 * np.array([lost.sum(), lost @ direct.volume])
    assert (np.abs(rates - expected)[-2:] <= 3e-12 * scale).all()
    # what is left is the round-off of this sum
    assert abs(rates[:-2] @ direct.volume + rates[-1]) <= 2e-15 * (lost @ direct.volume)


def factored_operator(name: str) -> FactoredOperator:
    kernel, unit = KERNELS[name]
    return FactoredOperator(factored(kernel, unit * K))


def test_nothing_passes_the_top_of_a_grid_that_is_half_empty() -> None:
    fast = factored_operator("Brownian, fractal")
    number = np.where(2.0 * K <= SIZES, np.exp(-K / 500.0), 0.0)
    rates = rates_of(fast, number)
    volume = fast.kernel.volume
    gross = float(np.abs(rates[:-2]) @ volume)
    assert rates[-2] == 0.0
    assert rates[-1] == 0.0
    assert abs(rates[:-2] @ volume) <= 3e-16 * gross


@given(
    seed=st.integers(0, 2**32 - 1),
    n=st.integers(2, 700),
    used=st.floats(0.01, 1.0),
    decay=st.floats(0.0, 3.0),
    peak=st.floats(1e-20, 1e20),
)
def test_every_size_changes_as_the_equation_says(
    seed: int, n: int, used: float, decay: float, peak: float
) -> None:
    k = np.arange(1.0, n + 1.0)
    random = np.random.default_rng(seed)
    number = peak * random.uniform(0.0, 1.0, n) * k**-decay * (k <= np.ceil(used * n))
    kernel = ag.kernels.from_function(
        lambda v, w: (np.cbrt(v) + np.cbrt(w)) * (1 / np.cbrt(v) + 1 / np.cbrt(w))
    )
    rates = rates_of(FactoredOperator(factored(kernel, k)), number)
    matrix = kernel(k[:, None], k[None, :])
    expected = rates_of(MonomerOperator(matrix, k), number)
    # births of one block share the error of the largest one; decay**3 over a block of a factor of 4 is 64
    gross = np.abs(expected) + np.concatenate([number * (matrix @ number), [0.0, 0.0]])
    assert (np.abs(rates - expected) <= 1e-13 * gross.max()).all()
    assert np.abs(rates - expected)[:n] @ k**3 <= 1e-13 * (gross[:n] @ k**3)


def test_the_plain_equation_gives_the_same() -> None:
    number = np.random.default_rng(11).uniform(0.0, 1.0, 150)
    k = np.arange(1.0, 151.0)
    kernel = ag.kernels.additive(1.0)
    plain = discrete_equation(kernel(k[:, None], k[None, :]), number)
    rates = rates_of(FactoredOperator(factored(kernel, k)), number)
    assert (np.abs(rates - plain.rates) <= 1e-13 * plain.gross.max()).all()


def test_rates_add_with_their_factor_and_scale_with_the_square() -> None:
    fast = factored_operator("shear")
    number = STATES["tau = 20"]
    once = rates_of(fast, number)
    state = np.concatenate([1e-30 * number, np.zeros(5)])  # more entries than its own
    out = np.full(state.size, 1e-300)
    out[-3:] = 7.0
    fast.add_rates(state, 3.0, out)
    np.testing.assert_allclose(out[:-3] - 1e-300, 3e-60 * once, rtol=1e-12, atol=1e-75 * np.abs(once).max())
    np.testing.assert_array_equal(out[-3:], 7.0)


def test_what_is_not_finite_shows_in_the_total() -> None:
    fast = factored_operator("constant")
    out = np.zeros(SIZES + 2)
    for bad in (np.nan, np.inf):
        state = np.zeros(SIZES + 2)
        state[[0, 7]] = 1.0, bad
        assert not np.isfinite(fast.add_rates(state, 1.0, out))
    assert fast.add_rates(np.zeros(SIZES + 2), 1.0, np.zeros(SIZES + 2)) == 0.0


def test_a_kernel_of_zeros_changes_nothing() -> None:
    operator = FactoredOperator(factored(0.0 * ag.kernels.additive(1.0), K))
    np.testing.assert_array_equal(rates_of(operator, STATES["late, over the top"]), 0.0)


def test_the_jacobian_is_that_of_the_direct_sum() -> None:
    kernel = ag.kernels.shear(ag.Compact(LATEX), MIXING)
    volume = UNIT * np.arange(1.0, 301.0)
    number = np.random.default_rng(2).uniform(0.0, 1e15, 300)
    fast = jacobian_of(FactoredOperator(factored(kernel, volume)), number)
    direct = jacobian_of(MonomerOperator(kernel(volume[:, None], volume[None, :]), volume), number)
    np.testing.assert_allclose(fast, direct, rtol=1e-12, atol=1e-13 * np.abs(direct).max())


def test_a_jacobian_that_does_not_fit_is_refused() -> None:
    operator = FactoredOperator(factored(ag.kernels.constant(1.0), np.arange(1.0, 8002.0)))
    with pytest.raises(GridError, match=r"Jacobian of 8001 sections.*8000.*Try: an explicit method"):
        operator.add_jacobian(np.ones(8003), 1.0, np.zeros((1, 1)))


@pytest.mark.parametrize("kernel", ["additive", "Brownian, fractal", "shear"])
@pytest.mark.parametrize("tau", [0.1, 30.0, 1000.0])
def test_moments_change_as_the_equation_says_at_a_hundred_thousand_sizes(kernel: str, tau: float) -> None:
    rates_of_pairs, unit = KERNELS[kernel]
    k = np.arange(1.0, 100_001.0)
    factors = factored(rates_of_pairs, unit * k)
    with np.errstate(under="ignore"):
        number = CONSTANT_MONO.number(k, 2.0 * tau)
    rates = rates_of(FactoredOperator(factors), number)
    met, met_by_size = number @ factors, (k * number) @ factors
    # d/dt sum n k^p = 1/2 sum K n n ((i + j)^p - i^p - j^p); next to nothing passes the top
    change = {0: -0.5 * number @ met, 2: (k * number) @ met_by_size, 3: 3.0 * (k * k * number) @ met_by_size}
    for p, expected in change.items():
        assert rates[:-2] @ k**p == pytest.approx(expected, rel=1e-12)
    assert abs(rates[:-2] @ k + rates[-1] / unit) <= 1e-15 * (k * number) @ met


def test_what_a_power_law_sends_past_the_top_is_the_rest_of_its_births() -> None:
    k = np.arange(1.0, 100_001.0)
    number = k**-2.5
    factors = factored(ag.kernels.constant(2.0), k)
    rates = rates_of(FactoredOperator(factors), number)
    assert rates[:-1].sum() == pytest.approx(-(number.sum() ** 2), rel=1e-13)
    # partners of size i that take it past the top, one size at a time
    upper = np.cumsum(number[::-1])
    assert rates[-2] == pytest.approx(number @ upper, rel=1e-12)
    assert rates[-1] == pytest.approx(2.0 * (k * number) @ upper, rel=1e-12)


@pytest.mark.parametrize(
    ("problem", "times", "sizes"),
    [(CONSTANT_MONO, (0.02, 0.2, 2.0, 40.0), 3000), (SUM_MONO, (0.01, 0.1, 1.0), 600)],
    ids=["constant", "sum"],
)
def test_a_run_meets_the_closed_solution_in_every_moment(
    problem: ClosedSolution, times: tuple[float, ...], sizes: int
) -> None:
    k = np.arange(1.0, sizes + 1.0)
    operator = FactoredOperator(factored(problem.kernel, k))
    rtol = 1e-8

    def rates(time: float, state: Array) -> Array:
        out = np.zeros(state.size)
        operator.add_rates(state, 1.0, out)
        return out

    start = np.concatenate([[1.0], np.zeros(sizes + 1)])
    atol = 1e-6 * rtol * np.concatenate([1.0 / k, [1.0, 1.0]])
    run = solve_ivp(rates, (0.0, times[-1]), start, "DOP853", times, rtol=rtol, atol=atol)
    for time, state in zip(times, run.y.T, strict=True):
        assert abs(state[:-2] @ k + state[-1] - 1.0) <= 1e-13
        for p, exact in enumerate(problem.moments(time)):
            assert state[:-2] @ k**p == pytest.approx(exact, rel=3.0 * rtol)
