"""Kernels as short sums of products: every rate within the tolerance, or a refusal that says so."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import aggsim as ag
from aggsim.errors import KernelError
from aggsim.schemes import low_rank
from aggsim.schemes.low_rank import TOLERANCE, RankError, factored

Array = np.ndarray

WATER = ag.Medium.water(temperature=298.15)
AIR = ag.Medium.air(temperature=293.15)
LATEX = ag.Particles(diameter=400e-9, density=1055.0, hamaker=9e-21)
SMOKE = ag.Particles(diameter=5e-9, density=1800.0)
FLOCS = ag.Fractal(LATEX, dimension=1.8)
SPHERES = ag.Compact(LATEX)
MIXING = ag.Flow(shear_rate=50.0)
UNIT = np.pi / 6.0 * 400e-9**3
SOOT = np.pi / 6.0 * 5e-9**3
EFFICIENCY = ag.kernels.shear_efficiency(SPHERES, WATER, MIXING)


def random_pairs(n: int, seed: int = 7) -> tuple[Array, Array]:
    """Pairs even in the index and even in its logarithm."""
    random = np.random.default_rng(seed)
    wide = (n ** random.random((2, 5000))).astype(int) - 1
    return tuple(np.hstack([wide, random.integers(0, n, (2, 5000))]))


def largest_error(kernel: ag.kernels.Kernel, volume: Array, products: object) -> float:
    i, j = random_pairs(volume.size)
    exact = kernel(volume[i], volume[j])
    return float(np.max(np.abs(products.rates(i, j) - exact) / exact))


# (d_i + d_j)(1/d_i + 1/d_j) = 2 + d_i/d_j + d_j/d_i and (d_i + d_j)**3; in their sum, d_j**2 and 1/d_j both go with d_i
EXACT = {
    "constant": (ag.kernels.constant(3e-18), 1.0, 1),
    "additive": (ag.kernels.additive(2.0), 1.0, 2),
    "multiplicative": (ag.kernels.multiplicative(1e15), UNIT, 1),
    "Brownian, spheres": (ag.kernels.brownian(SPHERES, WATER), UNIT, 3),
    "Brownian, fractal": (ag.kernels.brownian(FLOCS, WATER), UNIT, 3),
    "shear, spheres": (ag.kernels.shear(SPHERES, MIXING), UNIT, 4),
    "shear, fractal": (ag.kernels.shear(FLOCS, MIXING), UNIT, 4),
    "Brownian and shear": (ag.kernels.brownian(SPHERES, WATER) + ag.kernels.shear(SPHERES, MIXING), UNIT, 4),
}


@pytest.mark.parametrize("sizes", [2000, 100_000])
@pytest.mark.parametrize("case", EXACT)
def test_sums_of_products_are_found_at_the_rank_that_algebra_gives(case: str, sizes: int) -> None:
    kernel, unit, rank = EXACT[case]
    volume = unit * np.arange(1.0, sizes + 1.0)
    products = factored(kernel, volume)
    assert products.row.shape[0] == rank
    # round-off, times the ratio of the terms to their sum, up to 50
    assert largest_error(kernel, volume, products) <= 5e-14


@pytest.mark.parametrize(
    ("kernel", "unit", "most"),
    [
        (ag.kernels.brownian_in_gas(ag.Compact(SMOKE), AIR), SOOT, 34),
        (ag.kernels.shear(SPHERES, MIXING) * EFFICIENCY, UNIT, 20),
        (ag.kernels.brownian(SPHERES, WATER) + ag.kernels.shear(SPHERES, MIXING) * EFFICIENCY, UNIT, 20),
    ],
    ids=["Brownian in gas", "shear with efficiency", "Brownian and shear with efficiency"],
)
def test_smooth_kernels_keep_the_tolerance(kernel: ag.kernels.Kernel, unit: float, most: int) -> None:
    volume = unit * np.arange(1.0, 100_001.0)
    products = factored(kernel, volume)
    assert products.row.shape[0] <= most
    assert largest_error(kernel, volume, products) <= TOLERANCE


exponents = st.floats(-0.6, 1.0)


@given(
    terms=st.lists(st.tuples(st.floats(0.01, 1.0), exponents, exponents), min_size=1, max_size=3),
    power=st.floats(0.3, 3.0),
    root=st.floats(0.2, 1.0),
    unit=st.floats(1e-24, 1e3),
)
def test_random_smooth_kernels_keep_the_tolerance_on_every_pair(
    terms: list[tuple[float, float, float]], power: float, root: float, unit: float
) -> None:
    def rate(v: Array, w: Array) -> Array:
        v, w = v / unit, w / unit
        products = sum(c * (v**a * w**b + v**b * w**a) for c, a, b in terms)
        return 1e-18 * (products + (v**root + w**root) ** power)

    volume = unit * np.arange(1.0, 401.0)
    exact = rate(volume[:, None], volume[None, :])
    products = factored(rate, volume)
    assert (np.abs(products.matrix() - exact) <= TOLERANCE * exact).all()


@pytest.mark.parametrize(
    "kernel",
    [
        lambda v, w: 1.0 + np.abs(np.cbrt(v) ** 2 - np.cbrt(w) ** 2),
        lambda v, w: np.maximum(v, w),
        lambda v, w: np.exp(-((np.log(v) - np.log(w)) ** 2)),  # smooth, but far pairs are a part in 1e57
    ],
    ids=["kink at equal sizes", "larger of the two", "narrow"],
)
def test_kernels_of_high_rank_are_refused(kernel: object) -> None:
    with pytest.raises(
        RankError, match=r"the kernel is no sum of 40 products.*allowed.*Try: fewer.*FixedPivot"
    ):
        factored(kernel, np.arange(1.0, 100_001.0))


def test_settling_is_refused_by_its_name() -> None:
    kernel = ag.kernels.settling(SPHERES, WATER)
    volume = UNIT * np.arange(1.0, 20_001.0)
    with pytest.raises(RankError, match=r"^settling is 0 for two particles of 3\.35e-20 m3.*Try"):
        factored(kernel, volume, "settling")
    with pytest.raises(RankError, match="is no sum of 40 products"):
        factored(kernel + ag.kernels.brownian(SPHERES, WATER), volume)


def test_a_feature_between_the_sizes_of_the_sample_is_found_out() -> None:
    def bump(v: Array) -> Array:  # a fiftieth as wide as the sample is dense there
        return np.exp(-(((v - 30_300.0) / 60.0) ** 2))

    with pytest.raises(RankError, match="is no sum of 1 products between the sizes"):
        factored(lambda v, w: 1.0 + 1e-9 * bump(v) * bump(w), np.arange(1.0, 100_001.0))


def test_an_asymmetric_kernel_is_refused() -> None:
    with pytest.raises(KernelError, match=r"the other way round.*Try"):
        factored(lambda v, w: v + 1.001 * w, np.arange(1.0, 2001.0))


def test_a_kernel_of_zeros_has_no_products() -> None:
    volume = np.arange(1.0, 2001.0)
    products = factored(0.0 * ag.kernels.additive(1.0), volume)
    assert products.row.shape[0] == 0
    np.testing.assert_array_equal(volume @ products, np.zeros(2000))


def test_products_stand_where_a_matrix_would() -> None:
    volume = UNIT * np.arange(1.0, 1501.0)
    kernels = [ag.kernels.brownian(FLOCS, WATER), ag.kernels.shear(FLOCS, MIXING), ag.kernels.constant(1e-17)]
    first, second, third = (factored(kernel, volume) for kernel in kernels)
    matrix = sum(kernels)(volume[:, None], volume[None, :])
    total = sum([first, second, third])
    assert [k.row.shape[0] for k in (first, second, third, total)] == [3, 4, 1, 4]
    np.testing.assert_allclose(total.matrix(), matrix, rtol=1e-13)
    number = np.random.default_rng(3).uniform(0.0, 1e15, (4, volume.size))
    np.testing.assert_allclose(number @ total, number @ matrix, rtol=1e-13)
    np.testing.assert_allclose(number[0] @ total, number[0] @ matrix, rtol=1e-13)


def test_a_sum_of_too_many_products_keeps_them_all(monkeypatch: pytest.MonkeyPatch) -> None:
    volume = UNIT * np.arange(1.0, 1501.0)
    first = factored(ag.kernels.brownian(FLOCS, WATER), volume)
    second = factored(ag.kernels.shear(ag.Fractal(LATEX, dimension=2.1), MIXING), volume)
    joined = first + second
    monkeypatch.setattr(low_rank, "MOST_PRODUCTS", 5)
    stacked = first + second
    assert (joined.row.shape[0], stacked.row.shape[0]) == (6, 7)
    np.testing.assert_allclose(stacked.matrix(), joined.matrix(), rtol=1e-13)
