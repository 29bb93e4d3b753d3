"""Schemes against each other, and integration methods against each other, on the same case."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from reference_runs import MONODISPERSE, brownian, every_size, grid_of, shear
from scheme_cases import operator_for, rates_of
from scipy.interpolate import CubicSpline
from scipy.optimize import brentq

import aggsim as ag
from aggsim.sizes import means

ORDERS = [2, 4, 6]


@given(seed=st.integers(0, 2**32 - 1), per_doubling=st.integers(1, 6))
def test_sectional_is_the_fixed_pivot_of_two_moments_on_its_grid(seed: int, per_doubling: int) -> None:
    """Both keep number and volume in two neighbouring sections, which leaves no choice."""
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=256.0, per_doubling=per_doubling)
    number = np.random.default_rng(seed).uniform(0.0, 1.0, grid.sections)
    one = rates_of(operator_for(ag.Sectional(), shear(), grid), number)
    two = rates_of(operator_for(ag.FixedPivot(moments=2), shear(), grid), number)
    scale = np.append(np.full(grid.sections + 1, np.abs(one[:-1]).max()), np.abs(one[-1]))
    assert (np.abs(one - two) <= 1e-12 * scale).all()


@pytest.mark.parametrize("moments", ORDERS)
def test_every_order_is_exact_where_all_sizes_are_pivots(moments: int) -> None:
    """On a grid of monomers all births are pivots, so a run with fixed pivots is a run of the discrete equation."""
    grid = ag.SizeGrid.monomers(1.0, 300)
    runs = [
        ag.simulate(ag.Batch(brownian()), MONODISPERSE, [1.0, 10.0], grid=grid, scheme=scheme, rtol=1e-9)
        for scheme in (ag.FixedPivot(moments=moments), ag.Monomer())
    ]
    np.testing.assert_allclose(runs[0].number, runs[1].number, rtol=1e-8, atol=1e-13)
    assert runs[0].moment(3)[-1] == pytest.approx(runs[1].moment(3)[-1], rel=1e-9)


def test_a_physical_case_agrees_between_all_schemes() -> None:
    """A latex that coagulates in a stirred salt solution: Brownian motion and shear, in SI units.

    M2 grows to 8 times its start, mostly among sizes that are pivots (up to 12 at 8 per doubling), so the errors
    of order m are a small part of h^m, h = ln 2 / 8. The purely geometric grid lacks most small multiples.
    """
    medium = ag.Medium.water(temperature=298.15)
    particles = ag.Compact(ag.Particles(diameter=400e-9, density=1055.0))
    kernel = ag.kernels.brownian(particles, medium) / 2.0
    kernel = kernel + 0.5 * ag.kernels.shear(particles, ag.Flow(shear_rate=20.0))
    start = ag.Monodisperse(diameter=400e-9, volume_fraction=1e-5)
    volume = float(np.pi / 6.0 * 400e-9**3)
    times = [500.0, 2500.0]
    grid = ag.SizeGrid.monomers_then_geometric(volume, 3000.0 * volume, per_doubling=8)
    geometric = ag.SizeGrid.geometric(smallest=volume, largest=3000.0 * volume, per_doubling=8)
    exact = ag.simulate(
        ag.Batch(kernel),
        start,
        times,
        grid=ag.SizeGrid.monomers(volume, 600),
        scheme=ag.Monomer(),
        rtol=1e-10,
    )
    assert exact.balance.beyond_grid[-1] <= 1e-12 * exact.balance.initial
    assert exact.moment(2)[-1] / (exact.balance.initial * volume) == pytest.approx(8.2, abs=0.1)
    h = np.log(2.0) / 8
    for scheme, used, tolerance in (
        (ag.FixedPivot(moments=2), grid, 0.3 * h**2),
        (ag.Sectional(), geometric, h**2),
        (ag.FixedPivot(moments=4), grid, 0.01 * h**4),
        (ag.FixedPivot(moments=6), grid, 0.01 * h**6 + 1e-9),
    ):
        result = ag.simulate(ag.Batch(kernel), start, times, grid=used, scheme=scheme, rtol=1e-10)
        assert np.abs(result.balance.closure).max() <= 1e-12
        np.testing.assert_allclose(result.number[:, 0], exact.number[:, 0], rtol=tolerance)
        for k in (0, 2):
            np.testing.assert_allclose(result.moment(k), exact.moment(k), rtol=tolerance)


@pytest.mark.parametrize("moments", ORDERS)
def test_integration_methods_agree_within_their_tolerance(moments: int) -> None:
    """Adams and backward differences, Radau: errors of reported figures are a few times rtol."""
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 2000.0, per_doubling=3)
    rtol = 1e-7
    runs = [
        ag.simulate(
            ag.Batch(brownian()),
            MONODISPERSE,
            [5.0, 30.0],
            grid=grid,
            scheme=ag.FixedPivot(moments=moments),
            method=method,
            rtol=rtol,
        )
        for method in (ag.methods.LSODA(), ag.methods.BDF(), ag.methods.Radau())
    ]
    tight = ag.simulate(
        ag.Batch(brownian()),
        MONODISPERSE,
        [5.0, 30.0],
        grid=grid,
        scheme=ag.FixedPivot(moments=moments),
        rtol=1e-11,
    )
    for result in runs:
        for k in (0, 2):
            np.testing.assert_allclose(result.moment(k), tight.moment(k), rtol=20 * rtol)
        assert np.abs(result.balance.closure).max() <= 1e-11


# ---- Brownian kernel, monodisperse start, mean size about 54 at t = 100: sections against every single size


def true_volume_quantiles(shares: list[float]) -> np.ndarray:
    """Diameters from all k-mers at t = 100: k monomers stand for the cell from k - 1/2 to k + 1/2, so that the
    cumulative volume is known at half-integers; a cubic spline through it is right to 1e-6 at these sizes."""
    result = every_size()
    k = result.grid.volume
    volume = np.cumsum(result.number[-1] * k)
    curve = CubicSpline(np.append(0.5, k + 0.5), np.append(0.0, volume) / volume[-1])
    sizes = [brentq(lambda v, share=share: curve(v) - share, 1.0, 1000.0) for share in shares]
    return means.diameter_of(sizes)


def sections(count: int, per_doubling: float, moments: int, rtol: float = 1e-9) -> ag.Result:
    return ag.simulate(
        ag.Batch(brownian()),
        MONODISPERSE,
        100.0,
        grid=grid_of(count, per_doubling),
        scheme=ag.FixedPivot(moments=moments),
        rtol=rtol,
    )


@pytest.mark.parametrize(("moments", "second"), [(4, 1e-4), (6, 3e-5)])
def test_forty_sections_give_the_second_moment_and_the_quantiles(moments: int, second: float) -> None:
    result, truth = sections(40, 3.0, moments), every_size()
    assert result.moment(2)[0] == pytest.approx(truth.moment(2)[-1], rel=second)
    assert result.moment(0)[0] == pytest.approx(truth.moment(0)[-1], rel=1e-4)
    got = result.quantile_diameter([0.5, 0.9])[0]
    np.testing.assert_allclose(got, true_volume_quantiles([0.5, 0.9]), rtol=1e-3)


@pytest.mark.parametrize("per_doubling", [6.0, 6.8])
def test_eighty_sections_of_six_moments_are_right_to_a_millionth(per_doubling: float) -> None:
    result, truth = sections(80, per_doubling, 6), every_size()
    for k in (0, 2):
        assert result.moment(k)[0] == pytest.approx(truth.moment(k)[-1], rel=1e-6)


def test_the_truth_is_resolved_to_much_better_than_what_is_asked() -> None:
    """1600 sizes miss 2e-12 of the volume. The library reads n_k as the density at k, the spline above as the mean
    of the cell: the volume up to there differs by (f'(k) - f'(1)) / 24, f = k n_k, which moves k by that over f."""
    truth = every_size()
    assert truth.balance.beyond_grid[-1] <= 1e-11
    shares = [0.1, 0.5, 0.9]
    expected = true_volume_quantiles(shares)
    k = means.volume_of(expected)
    f = truth.grid.volume * truth.number[-1]
    slope = np.gradient(f)
    at = np.rint(k).astype(int) - 1
    bound = (np.abs(slope[at]) + np.abs(slope[0])) / (24.0 * f[at]) / (3.0 * k)
    assert (np.abs(truth.quantile_diameter(shares)[-1] / expected - 1.0) <= 1.1 * bound).all()
    assert bound[1] <= 1e-5
