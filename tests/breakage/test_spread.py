"""Integrals of the densities over the cells between pivots, against closed forms."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from scipy import integrate, special

from aggsim.breakage import fragments
from aggsim.errors import BreakageError

POWERS = [0.0, 0.5, 1.0, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0]
# geometric, one wide cell, then finer and finer
GRID = 1e-21 * np.concatenate([2.0 ** (np.arange(12) / 3.0), 200.0 * 1.05 ** np.arange(12)])
PARENT = GRID.size - 1
EDGES = np.concatenate([[0.0], GRID / GRID[-1]])


def over_cells(law: Any, power: float, grid: np.ndarray = GRID) -> np.ndarray:
    """Integrals of b (v/u)**power over each cell, for the last pivot as the parent u."""
    last = grid.size - 1
    parent, volume, count = law.point_masses(grid, np.array([last]))
    assert (parent == last).all()
    out: np.ndarray = np.bincount(
        np.searchsorted(grid, volume), count * (volume / grid[-1]) ** power, minlength=grid.size
    )
    return out


@pytest.mark.parametrize("power", POWERS)
@pytest.mark.parametrize("exponent", [0.0, -0.25, -0.5, -0.7, -0.99])
def test_power_law(exponent: float, power: float) -> None:
    top = exponent + power + 1.0
    exact = (exponent + 2.0) / top * np.diff(EDGES**top)
    # rtol: round-off of the difference of two powers in cells of 5 %; Jacobi rules lose digits towards -1
    rtol = 2e-12 if exponent > -0.9 else 1e-11
    np.testing.assert_allclose(over_cells(fragments.power_law(exponent=exponent), power), exact, rtol=rtol)


@pytest.mark.parametrize("power", POWERS)
@pytest.mark.parametrize("shape", [0.0, 0.7, 2.0, 3.0])
def test_parabola(shape: float, power: float) -> None:
    """u b = C + (1 - C/2)(24 z**2 - 24 z + 6), term by term."""
    z = EDGES ** (power + 1.0)
    terms = (
        shape * z / (power + 1.0),
        (1.0 - shape / 2.0) * 24.0 * EDGES**2 * z / (power + 3.0),
        -(1.0 - shape / 2.0) * 24.0 * EDGES * z / (power + 2.0),
        (1.0 - shape / 2.0) * 6.0 * z / (power + 1.0),
    )
    exact = np.diff(sum(terms))
    # atol: the terms are of size 1 and cancel where the parabola is near 0
    np.testing.assert_allclose(
        over_cells(fragments.parabolic(shape=shape), power), exact, rtol=1e-11, atol=1e-14
    )


@pytest.mark.parametrize("power", POWERS)
@pytest.mark.parametrize("shape", [0.01, 0.3, 1.0, 2.5, 3.0, 6.5, 12.3])
def test_beta(shape: float, power: float) -> None:
    factor = 2.0 * math.exp(special.betaln(shape + power, shape) - special.betaln(shape, shape))
    exact = factor * np.diff(special.betainc(shape + power, shape, EDGES))
    # atol: incomplete beta functions are of size 1, their differences lose what they have in common
    np.testing.assert_allclose(over_cells(fragments.beta(shape=shape), power), exact, rtol=1e-11, atol=1e-14)


@pytest.mark.parametrize("shape", [7.3, 9.0, 15.0, 40.0, 100.0, 1000.0])
@pytest.mark.parametrize("power", POWERS)
def test_a_hump_on_a_coarse_grid(power: float, shape: float) -> None:
    law, grid = fragments.beta(shape=shape), np.array([0.3, 0.45, 0.55, 1.0])
    factor = 2.0 * math.exp(special.betaln(shape + power, shape) - special.betaln(shape, shape))
    exact = factor * np.diff(special.betainc(shape + power, shape, np.concatenate([[0.0], grid])))
    # rtol: logarithms of size 1000 carry a round-off of 1e-12; atol: `exact` is a difference from 1 at the top
    np.testing.assert_allclose(over_cells(law, power, grid), exact, rtol=1e-11, atol=1e-15)


@pytest.mark.parametrize("power", POWERS)
@pytest.mark.parametrize(
    ("median_share", "gsd"), [(0.1, 1.5), (0.5, 1.05), (0.97, 1.01), (0.02, 6.0), (0.3, 20.0)]
)
def test_lognormal(median_share: float, gsd: float, power: float) -> None:
    law = fragments.lognormal(median_share=median_share, gsd=gsd)
    mu, sigma = math.log(median_share), math.log(gsd)

    def partial(order: float, share: float) -> float:
        """int_0^share f z**order dz in closed form."""
        if share <= 0.0:
            return 0.0
        depth = (math.log(share) - mu) / sigma - order * sigma
        scale = math.exp(order * mu + 0.5 * (order * sigma) ** 2) / special.ndtr(-mu / sigma)
        return float(scale * special.ndtr(depth))

    def remainder(low: float, high: float) -> float:
        """int f(1 - z) z**power dz over (low, high), in the logarithm of 1 - z."""
        start = max(math.log1p(-high) if high < 1.0 else -np.inf, mu - 12.0 * sigma)
        stop = min(math.log1p(-low), mu + 12.0 * sigma)
        if stop <= start:
            return 0.0
        norm = math.sqrt(2.0 * math.pi) * sigma * special.ndtr(-mu / sigma)
        cuts = np.linspace(start, stop, 13)
        return sum(
            integrate.quad(
                lambda y: math.exp(-0.5 * ((y - mu) / sigma) ** 2) * abs(math.expm1(y)) ** power / norm,
                a,
                b,
                epsabs=1e-15,
                epsrel=1e-12,
            )[0]
            for a, b in pairwise(cuts)
        )

    exact = [
        partial(power, high) - partial(power, low) + remainder(low, high) for low, high in pairwise(EDGES)
    ]
    # atol: tails beyond nine standard deviations, and the differences of `partial`
    np.testing.assert_allclose(over_cells(law, power), exact, rtol=1e-10, atol=3e-14)


@pytest.mark.parametrize("power", POWERS)
def test_an_own_density_is_resolved(power: float) -> None:
    """The law z**(-0.6), and a tent, whose kink lies inside a cell."""
    own = fragments.from_function(lambda v, u: 1.4 / u * (v / u) ** -0.6, pieces=3.5)
    np.testing.assert_allclose(
        over_cells(own, power), over_cells(fragments.power_law(exponent=-0.6), power), rtol=1e-11, atol=1e-12
    )
    tent = fragments.from_function(lambda v, u: 2.0 / u * np.maximum(0.0, 4.0 - 16.0 * abs(v / u - 0.6)), 2.0)
    grid = np.array([0.2, 0.34, 0.9, 1.0])
    left, right = (0.6 - 0.25, 0.6 + 0.25)

    def rising(z: float) -> float:
        return 32.0 * (z ** (power + 2.0) / (power + 2.0) - left * z ** (power + 1.0) / (power + 1.0))

    def falling(z: float) -> float:
        return 32.0 * (right * z ** (power + 1.0) / (power + 1.0) - z ** (power + 2.0) / (power + 2.0))

    exact = rising(0.6) - rising(left) + falling(right) - falling(0.6)
    assert over_cells(tent, power, grid)[2] == pytest.approx(exact, rel=1e-11)


@pytest.mark.parametrize("least", 0.1 * 1.0007 ** np.arange(40.0))
def test_jumps_of_an_own_density_are_resolved(least: float) -> None:
    """No fragments below a share of the parent and none above its complement, wherever that is in a cell."""
    most = 1.0 - least
    height = 2.0 / (most - least)
    law = fragments.from_function(
        lambda v, u: np.where((v > least * u) & (v < most * u), height / u, 0.0), 2.0
    )
    # rel: what may hide between a jump and the nearest node
    assert over_cells(law, 0.0).sum() == pytest.approx(2.0, rel=1e-9)
    assert over_cells(law, 2.0).sum() == pytest.approx(height / 3.0 * (most**3 - least**3), rel=1e-9)


@pytest.mark.parametrize(
    ("law", "value"),
    [
        (fragments.uniform_binary(), 2.0),
        (fragments.parabolic(shape=0.0), 1.5),  # 6 (1 - 2 z)**2
        (fragments.beta(shape=3.0), 60.0 * (3.0 / 16.0) ** 2),  # 60 z**2 (1 - z)**2
        (fragments.power_law(exponent=-0.5), 3.0),  # 1.5 z**-0.5
        (fragments.from_function(lambda v, u: 2.0 / u + 0.0 * v, 2.0), 2.0),
    ],
)
def test_density_at_a_quarter_of_the_parent(law: Any, value: float) -> None:
    assert law.density(0.25e-18, 1e-18) == pytest.approx(value * 1e18, rel=1e-14)
    assert isinstance(law.density(0.25e-18, 1e-18), float)
    assert law.density(np.full((3, 1), 0.25e-18), np.full(2, 1e-18)).shape == (3, 2)


def test_lognormal_density_at_its_median() -> None:
    sigma = math.log(1.5)
    at_median = 1.0 / (0.1 * sigma * math.sqrt(2.0 * math.pi) * special.ndtr(math.log(10.0) / sigma))
    other = math.exp(-0.5 * (math.log(9.0) / sigma) ** 2) / 9.0
    density = fragments.lognormal(median_share=0.1, gsd=1.5).density(0.1, 1.0)
    assert density == pytest.approx(at_median * (1.0 + other), rel=1e-13)


def test_there_is_no_density_beyond_the_parent() -> None:
    density = fragments.power_law(exponent=-0.5).density([0.0, 1.0, 2.0], 1.0)
    np.testing.assert_array_equal(density, 0.0)


@pytest.mark.parametrize(
    ("density", "words"),
    [
        (lambda v, u: -2.0 / u + 0.0 * v, r"=-.* 1/m3 is not allowed.*at least 0"),
        (lambda v, u: np.nan * v / u, "nan"),
        (lambda v, u: np.log(0.0 * v / u), "inf"),
        (lambda v, u: 2.0 / u if v < u else 0.0, r"numpy\.where"),
        (lambda v: v, "could not be evaluated"),
        (lambda v, u: np.ones(7), "shape"),
    ],
)
def test_what_is_no_density_is_refused(density: Any, words: str) -> None:
    with pytest.raises(BreakageError, match=words):
        fragments.from_function(density, 2.0).point_masses(GRID, np.array([PARENT]))
