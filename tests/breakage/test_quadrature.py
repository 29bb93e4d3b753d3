from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.polynomial import legendre

from aggsim.breakage._quadrature import (
    Panels,
    cells,
    ends,
    finer,
    halved,
    nearer,
    points,
    refined,
    to_ends,
    to_legendre,
)

GRID = 1e-21 * np.array([1.0, 1.5, 2.0, 3.0, 7.0, 7.001, 20.0])
PARENTS = np.array([0, 2, 5, 6])


def shares(panels: Panels) -> tuple[np.ndarray, np.ndarray]:
    """Lower and upper end of each panel as shares of the fragment."""
    low = np.where(panels.upper, 1.0 - panels.high, panels.low)
    high = np.where(panels.upper, 1.0 - panels.low, panels.high)
    return low, high


def test_cells_cover_every_parent_and_cross_no_pivot() -> None:
    panels = cells(GRID[PARENTS], GRID)
    low, high = shares(panels)
    assert (np.diff(panels.parent) >= 0).all()
    for place, parent in enumerate(PARENTS):
        mine = panels.parent == place
        order = np.argsort(low[mine])
        starts, ends = low[mine][order], high[mine][order]
        assert starts[0] == 0.0
        assert ends[-1] == 1.0
        np.testing.assert_allclose(starts[1:], ends[:-1], rtol=1e-15)
        inner = np.concatenate([GRID[:parent] / GRID[parent], [0.25, 0.5, 0.75]])
        for pivot in inner:
            assert np.min(np.abs(starts - pivot)) < 1e-15


def test_slivers_of_round_off_are_left_out() -> None:
    grid = 2.0 ** (np.arange(13) / 3.0)  # 1/4 and 1/2 are ratios of pivots, up to round-off
    low, high = shares(cells(grid, grid))
    assert (high - low).min() > 1e-3


def test_close_pivots_keep_their_digits() -> None:
    grid = np.array([1.0, 3.0, 3.0 * (1.0 + 1e-9)])
    panels = cells(grid[2:], grid)
    top = panels.only(panels.upper & (panels.low == 0.0))
    assert top.high == pytest.approx((grid[2] - grid[1]) / grid[2], rel=1e-15)


def test_halves_meet_in_the_middle_of_their_variable() -> None:
    panels = cells(GRID[PARENTS], GRID)
    both = halved(panels)
    n = panels.low.size
    np.testing.assert_array_equal(both.low[:n], panels.low)
    np.testing.assert_array_equal(both.high[n:], panels.high)
    np.testing.assert_array_equal(both.high[:n], both.low[n:])
    upper = panels.upper
    np.testing.assert_allclose(both.high[:n][upper], 0.5 * (panels.low + panels.high)[upper], rtol=1e-15)
    roots = 0.5 * (np.sqrt(panels.low) + np.sqrt(panels.high))
    np.testing.assert_allclose(both.high[:n][~upper], (roots**2)[~upper], rtol=1e-15)


def test_finer_panels_are_the_halves_in_order() -> None:
    panels = cells(GRID[PARENTS], GRID)
    fine = finer(panels)
    assert (np.diff(fine.parent) >= 0).all()
    np.testing.assert_array_equal(np.sort(fine.low), np.sort(halved(panels).low))


def test_refining_ends_where_nothing_is_too_wide() -> None:
    panels = refined(cells(GRID[PARENTS], GRID), lambda p: p.high - p.low > 0.02)
    assert (panels.high - panels.low).max() <= 0.02
    assert (np.diff(panels.parent) >= 0).all()
    assert np.bincount(panels.parent, panels.high - panels.low) == pytest.approx(np.ones(4), rel=1e-14)


def test_refining_has_a_limit() -> None:
    start = cells(GRID[PARENTS], GRID)
    panels = refined(start, lambda p: np.ones(p.low.shape, dtype=bool))
    assert start.low.size < panels.low.size <= start.low.size + 200 * PARENTS.size
    assert np.bincount(panels.parent, panels.high - panels.low) == pytest.approx(np.ones(4), rel=1e-12)


@pytest.mark.parametrize("power", [0.0, 0.5, 1.0, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0])
def test_powers_of_the_share_are_integrated_to_round_off_in_every_panel(power: float) -> None:
    panels = cells(GRID[PARENTS], GRID)
    at = points(panels)
    low, high = shares(panels)
    computed = (at.weight * at.share**power).sum(axis=1)
    exact = (high ** (power + 1.0) - low ** (power + 1.0)) / (power + 1.0)
    # the exact difference loses digits where the panel is narrow: 7.001 beside 7 has a width of 1e-4
    np.testing.assert_allclose(computed, exact, rtol=1e-11)
    np.testing.assert_allclose(at.share + at.rest, 1.0, rtol=1e-15)


@given(lower=st.floats(-0.98, 6.0), upper=st.floats(-0.98, 6.0))
def test_singular_ends(lower: float, upper: float) -> None:
    """z**lower near 0 and (1 - z)**upper near 1, times z**2 or (1 - z)**2."""
    panels = cells(np.ones(1), np.ones(1))
    first = panels.only(~panels.upper & (panels.low == 0.0))
    last = panels.only(panels.upper & (panels.low == 0.0))
    at = points(first, (lower, upper))
    # rtol: the rule itself carries round-off near exponents of -1
    assert (at.weight * at.share ** (lower + 2.0)).sum() == pytest.approx(
        0.25 ** (lower + 3.0) / (lower + 3.0), rel=1e-11
    )
    at = points(last, (lower, upper))
    assert (at.weight * at.rest ** (upper + 2.0)).sum() == pytest.approx(
        0.25 ** (upper + 3.0) / (upper + 3.0), rel=1e-11
    )


@pytest.mark.parametrize("power", [0.0, 0.5, 1.0, 2.5, 5.0])
def test_powers_are_carried_to_the_ends(power: float) -> None:
    panels = cells(GRID[PARENTS], GRID)
    share, rest = ends(panels)
    low, high = shares(panels)
    assert (share > low[:, None]).all()
    assert (share < high[:, None]).all()
    np.testing.assert_allclose(share + rest, 1.0, rtol=1e-15)
    # atol: interpolation of degree 11 in 1 - z is no more than close for roots of z; at the ends round-off grows
    np.testing.assert_allclose(points(panels).share ** power @ to_ends(), share**power, rtol=0, atol=1e-9)


@pytest.mark.parametrize("degree", [0, 1, 5, 11])
def test_legendre_series_of_what_the_nodes_hold(degree: int) -> None:
    """Of a power of the variable, z**(1/2) below 1/2 and 1 - z above; the panel is 2 wide for the series."""
    panels = cells(GRID[PARENTS], GRID)
    at = points(panels)
    near = np.where(panels.upper[:, None], at.rest, np.sqrt(at.share))
    width = np.where(panels.upper, panels.high - panels.low, np.sqrt(panels.high) - np.sqrt(panels.low))
    jacobian = np.where(panels.upper[:, None], 1.0, 2.0 * near)
    series = (at.weight / jacobian * near**degree) @ to_legendre()
    position = np.linspace(0.0, 1.0, 7)
    place = nearer(panels, position)
    place = np.where(panels.upper[:, None], place, np.sqrt(place))
    value = legendre.legval(2.0 * position - 1.0, series.T)
    # in narrow panels that begin at a share of nearly 1 the series has digits of the largest power alone
    np.testing.assert_allclose(value / (0.5 * width[:, None]), place**degree, rtol=0, atol=1e-13)
