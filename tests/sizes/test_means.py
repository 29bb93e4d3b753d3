"""Means, quantiles and densities against closed forms, their order of convergence, and what is refused."""

from __future__ import annotations

import math
import time

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import special

from aggsim.errors import DistributionError, GridError, InputError
from aggsim.sizes import means

SHARES = np.array([0.1, 0.5, 0.9])


def geometric(per_doubling: float, low: float, high: float) -> tuple[np.ndarray, float]:
    step = math.log(2.0) / per_doubling
    return np.exp(np.arange(math.log(low), math.log(high), step)), step


def lognormal(per_doubling: float, gsd: float = 1.5) -> tuple[np.ndarray, np.ndarray]:
    """Unit number median volume; n_k = n(x_k) x_k ln(ratio)."""
    s = 3.0 * math.log(gsd)
    x, step = geometric(per_doubling, math.exp(-8 * s), math.exp(14 * s))
    return x, np.exp(-0.5 * (np.log(x) / s) ** 2) / (math.sqrt(2 * math.pi) * s) * step


def exponential(per_doubling: float) -> tuple[np.ndarray, np.ndarray]:
    x, step = geometric(per_doubling, 1e-12, 300.0)
    return x, np.exp(-x) * x * step


def lognormal_quantile(p: np.ndarray, r: float, gsd: float = 1.5) -> np.ndarray:
    s = 3.0 * math.log(gsd)
    return means.diameter_of(np.exp(r / 3.0 * s**2 + s * special.ndtri(p)))


def exponential_quantile(p: np.ndarray, r: float) -> np.ndarray:
    return means.diameter_of(special.gammaincinv(1.0 + r / 3.0, p))


def test_diameter_and_volume_of_a_sphere_are_inverse():
    assert means.volume_of(2e-6) == pytest.approx(math.pi / 6 * 8e-18, rel=1e-15)
    d = np.array([1e-9, 4e-7, 1e-3])
    np.testing.assert_allclose(means.diameter_of(means.volume_of(d)), d, rtol=1e-15)


@pytest.mark.parametrize("k", [-1.0, 0.0, 1.0 / 3.0, 1.0, 2.0])
def test_moment_is_the_sum_for_every_leading_axis(k):
    x = np.array([1.0, 2.0, 5.0]) * 1e-20
    n = np.arange(12.0).reshape(2, 2, 3) * 1e15
    np.testing.assert_allclose(means.moment(x, n, k), (n * x**k).sum(axis=-1), rtol=1e-14)


@pytest.mark.parametrize(("p", "q"), [(1, 0), (3, 0), (3, 2), (4, 3), (6, 5), (-1, 2), (3, 3), (0, 0)])
def test_mean_diameters_of_a_lognormal_are_those_of_hatch_and_choate(p, q):
    # trapezoids in ln v of a Gaussian converge beyond all orders, so only round-off is left
    x, n = lognormal(6.0)
    expected = means.diameter_of(1.0) * math.exp((p + q) / 2 * math.log(1.5) ** 2)
    assert means.mean_diameter(x, n, p, q) == pytest.approx(expected, rel=1e-12)


def test_mean_diameter_is_continuous_where_its_orders_meet():
    x, n = exponential(3.0)
    # (p - q) = 1e-6 leaves a difference quotient: truncation and round-off of 1e-16/1e-6
    assert means.mean_diameter(x, n, 3 + 1e-6, 3) == pytest.approx(means.mean_diameter(x, n, 3, 3), rel=1e-6)


@pytest.mark.parametrize("r", [0, 2, 3])
def test_geometric_standard_deviation_is_the_one_put_in(r):
    x, n = lognormal(6.0, gsd=1.6)
    assert means.geometric_standard_deviation(x, n, r) == pytest.approx(1.6, rel=1e-11)


def test_geometric_standard_deviation_of_one_size_is_one():
    assert means.geometric_standard_deviation([1.0, 2.0, 4.0], [0.0, 5.0, 0.0]) == 1.0


def test_span():
    assert means.span(1.0, 2.0, 4.0) == 1.5


@pytest.mark.parametrize("r", [0, 2, 3])
@pytest.mark.parametrize(
    ("sampled", "quantile"), [(lognormal, lognormal_quantile), (exponential, exponential_quantile)]
)
def test_quantiles_of_smooth_laws_are_right_and_of_fourth_order(sampled, quantile, r):
    errors = []
    for per_doubling in (3.0, 6.0):
        d = means.quantile_diameter(*sampled(per_doubling), SHARES, r=r)
        errors.append(np.abs(d / quantile(SHARES, r) - 1.0).max())
    assert errors[0] < 3e-5
    assert errors[1] < errors[0] / 2**3.8  # fourth order, less a little for the next term


@pytest.mark.parametrize("r", [0, 2, 3])
def test_cumulative_of_a_smooth_law_is_right(r):
    x, n = exponential(6.0)
    size = np.array([[0.01, 0.3], [1.0, 4.0]])
    expected = special.gammainc(1.0 + r / 3.0, size)
    np.testing.assert_allclose(means.cumulative(x, n, size, r), expected, atol=1e-6)  # fourth order, as above


@pytest.mark.parametrize("r", [0, 2, 3])
def test_density_of_a_smooth_law_is_right(r):
    x, n = lognormal(6.0)
    z = (np.log(means.diameter_of(x)) - np.log(lognormal_quantile(np.array(0.5), r))) / math.log(1.5)
    expected = np.exp(-0.5 * z**2) / (math.sqrt(2 * math.pi) * math.log(1.5))
    np.testing.assert_allclose(means.density(x, n, r), expected, rtol=1e-11, atol=1e-14)
    linear = means.density(x, n, r, log=False)
    np.testing.assert_allclose(linear * means.diameter_of(x), expected, rtol=1e-11, atol=1e-14)


def test_leading_axes_are_kept_in_front():
    x, n = exponential(3.0)
    many = np.stack([n, 2 * n, n[::-1]])[:, None]
    assert means.quantile_diameter(x, many, 0.5).shape == (3, 1)
    assert means.quantile_diameter(x, many, SHARES).shape == (3, 1, 3)
    assert means.quantile_diameter(x, n, 0.5).shape == ()
    assert means.cumulative(x, many, x[:4]).shape == (3, 1, 4)
    assert means.density(x, many).shape == many.shape
    assert means.mean_diameter(x, many, 4, 3).shape == (3, 1)
    one = means.quantile_diameter(x, n[::-1], SHARES)
    np.testing.assert_allclose(means.quantile_diameter(x, many, SHARES)[2, 0], one, rtol=1e-12)


def test_widths_and_limits_of_geometric_and_monomer_grids_are_exact():
    x, step = geometric(3.0, 1e-21, 1e-15)
    np.testing.assert_allclose(means.section_width(x), x * step, rtol=1e-12)
    np.testing.assert_allclose(means.section_limits(x)[1:-1], np.sqrt(x[1:] * x[:-1]), rtol=1e-12)
    np.testing.assert_allclose(means.section_limits(x)[0], x[0] * math.exp(-step / 2), rtol=1e-12)
    monomers = 3e-20 * np.arange(1, 40)
    np.testing.assert_allclose(means.section_width(monomers), 3e-20, rtol=1e-12)
    np.testing.assert_allclose(means.section_limits(monomers), 3e-20 * (np.arange(40) + 0.5), rtol=1e-12)


def test_widths_pass_from_monomers_to_a_geometric_grid_without_a_jump():
    ratio = 2 ** (1 / 3)
    x = np.concatenate([[1.0, 2.0, 3.0, 4.0], 4.0 * ratio ** np.arange(1, 30)])
    width = means.section_width(x)
    np.testing.assert_allclose(width[:3], 1.0, rtol=1e-12)
    np.testing.assert_allclose(width[4:], x[4:] * math.log(ratio), rtol=1e-12)
    assert 1.0 < width[3] < width[4]
    # sum over sections of a smooth law against the sum over every monomer
    m = np.arange(1.0, 3000.0)
    assert np.sum(x * np.exp(-x / 60) * width) == pytest.approx(np.sum(m * np.exp(-m / 60)), rel=3e-4)


@given(st.lists(st.floats(1e-3, 1e3), min_size=2, max_size=20), st.integers(0, 100))
def test_size_curve_rises_on_any_grid(steps, seed):
    x = np.cumsum(steps)
    limits = means.section_limits(x)
    assert (np.diff(limits) > 0).all()
    assert (limits > 0).all()
    assert (means.section_width(x) > 0).all()
    n = np.random.default_rng(seed).random(x.size) + 0.01
    d = means.quantile_diameter(x, n, np.linspace(0.02, 0.98, 25))
    assert (np.diff(d) >= -1e-12 * d[1:]).all()


@given(
    st.lists(st.floats(-0.01, 1.0), min_size=4, max_size=30).filter(lambda n: sum(n) > 0.5),
    st.sampled_from([0, 2, 3]),
)
def test_quantile_and_cumulative_are_inverse_inside_the_pivots(numbers, r):
    x = 2.0 ** np.arange(len(numbers))
    weight = np.array(numbers) * x ** (r / 3)
    if weight.sum() <= 0.01 * np.abs(weight).sum() or weight.max() >= (1 - 1e-9) * weight.sum():
        return
    p = np.linspace(0.05, 0.95, 19)
    d = means.quantile_diameter(x, numbers, p, r)
    back = means.cumulative(x, numbers, means.volume_of(d), r)
    inside = (d > means.diameter_of(x[0]) * (1 + 1e-9)) & (d < means.diameter_of(x[-1]) * (1 - 1e-9))
    # a narrowed section can be 1e-9 wide over kappa, which the rounding of d cannot resolve
    wide = np.abs(means.cumulative(x, numbers, means.volume_of(d * (1 + 1e-12)), r) - back) < 1e-9
    np.testing.assert_allclose(back[inside & wide], p[inside & wide], atol=1e-8)
    share = means.cumulative(x, numbers, np.geomspace(0.5, 2 * x[-1], 200), r)
    assert share[0] == 0.0
    assert share[-1] == 1.0


@pytest.mark.parametrize("r", [0, 2, 3])
def test_one_size_is_every_quantile(r):
    x = means.volume_of(1e-7) * np.arange(1, 30)
    for k in (0, 7, 28):
        n = np.zeros(29)
        n[k] = 1e15
        n[(k + 1) % 29] = 1e3
        np.testing.assert_array_equal(means.quantile_diameter(x, n, SHARES, r), means.diameter_of(x[k]))
    np.testing.assert_array_equal(means.quantile_diameter([5.0], [2.0], SHARES, r), means.diameter_of(5.0))


def test_quantiles_of_monomers_start_at_the_monomer_and_rise_smoothly():
    # constant kernel from monomers: n_k = T^(k-1) / (1+T)^(k+1); nothing is smaller than a monomer
    k = np.arange(1.0, 200.0)
    x = means.volume_of(4e-7) * k
    times = np.concatenate([[1e-6], np.geomspace(1e-3, 10.0, 150)])[:, None]
    n = times ** (k - 1) / (1 + times) ** (k + 1)
    for r in (0, 3):
        d = means.quantile_diameter(x, n, SHARES, r)
        assert (d >= 4e-7 * (1 - 1e-12)).all()
        assert (np.diff(d, axis=0) >= -1e-12 * d[1:]).all()
        np.testing.assert_allclose(d[0], 4e-7, rtol=1e-5)
    # late, the cells from k - 1/2 to k + 1/2 give the continuous median; the sum over sizes is the reference
    late = n[-1] * k
    reached = np.cumsum(late) / late.sum()
    expected = np.interp(0.5, reached, k + 0.5) * means.volume_of(4e-7)
    assert means.quantile_diameter(x, n[-1], 0.5) == pytest.approx(means.diameter_of(expected), rel=1e-4)


def test_box_and_noise_give_monotone_quantiles_inside_the_box():
    x = 2.0 ** np.arange(20)
    box = np.where((np.arange(20) >= 5) & (np.arange(20) < 12), 1.0, 0.0)
    p = np.linspace(0.001, 0.999, 300)
    d = means.quantile_diameter(x, box, p, r=0)
    kappa = np.log2(means.volume_of(d))
    np.testing.assert_allclose(kappa, 4.5 + 7 * p, atol=1e-9)  # piecewise constant: exact
    noise = np.random.default_rng(1).random((20, 20)) - 0.02
    assert (np.diff(means.quantile_diameter(x, noise, p, r=0), axis=-1) >= -1e-12).all()


def test_structure_changes_the_reported_size_only():
    class Twice:
        def collision_diameter(self, volume):
            return 2.0 * means.diameter_of(volume)

    x, n = exponential(3.0)
    plain = means.quantile_diameter(x, n, SHARES)
    np.testing.assert_allclose(
        means.quantile_diameter(x, n, SHARES, structure=Twice()), 2 * plain, rtol=1e-14
    )


def test_a_hundred_times_three_quantiles_take_less_than_fifty_milliseconds():
    x, n = exponential(2.0)
    many = np.tile(n, (100, 1))
    means.quantile_diameter(x, many, SHARES)
    best = math.inf
    for _ in range(5):
        begin = time.perf_counter()
        means.quantile_diameter(x, many, SHARES)
        best = min(best, time.perf_counter() - begin)
    assert best < 0.05


@given(st.floats(0.1, 1e20), st.floats(-30, 30))
def test_scaling_numbers_changes_nothing_and_scaling_sizes_scales_diameters(amount, power):
    x, n = exponential(3.0)
    size = 10.0**power
    d = means.quantile_diameter(x, n, SHARES)
    np.testing.assert_allclose(
        means.quantile_diameter(x * size, n * amount, SHARES), d * size ** (1 / 3), rtol=1e-9
    )
    assert means.mean_diameter(x * size, n * amount, 4, 3) == pytest.approx(
        means.mean_diameter(x, n, 4, 3) * size ** (1 / 3), rel=1e-12
    )


@pytest.mark.parametrize("p", [0.0, 1.0, -0.1, 50.0, [0.1, 1.5], [], math.nan])
def test_shares_outside_zero_to_one_are_refused(p):
    with pytest.raises(InputError, match="between 0 and 1"):
        means.quantile_diameter([1.0, 2.0], [1.0, 1.0], p)


@pytest.mark.parametrize("number", [[0.0, 0.0, 0.0], [-1.0, 0.0, 0.0], [[1.0, 1.0, 1.0], [0.0, 0.0, 0.0]]])
def test_nothing_there_is_said(number):
    x = [1.0, 2.0, 4.0]
    for ask in (
        lambda: means.quantile_diameter(x, number, 0.5),
        lambda: means.cumulative(x, number, 1.5),
        lambda: means.density(x, number),
        lambda: means.mean_diameter(x, number, 4, 3),
        lambda: means.geometric_standard_deviation(x, number),
    ):
        with pytest.raises(DistributionError, match="no particles"):
            ask()


def test_malformed_arguments_are_refused():
    with pytest.raises(InputError, match=r"shape \(2,\)"):
        means.moment([1.0, 2.0, 4.0], [1.0, 2.0], 1)
    with pytest.raises(InputError, match="number"):
        means.moment([1.0, 2.0], 3.0, 1)
    with pytest.raises(DistributionError, match="NaN"):
        means.moment([1.0, 2.0], [1.0, math.nan], 1)
    with pytest.raises(InputError, match="increase"):
        means.moment([2.0, 1.0], [1.0, 1.0], 1)
    with pytest.raises(InputError, match="r="):
        means.density([1.0, 2.0], [1.0, 1.0], -1)
    for width in (means.section_width, means.section_limits):
        with pytest.raises(GridError, match="one pivot"):
            width([1.0])
    with pytest.raises(InputError, match="k="):
        means.moment([1.0, 2.0], [1.0, 1.0], math.inf)
