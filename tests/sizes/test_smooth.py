"""The size curve and the two readings of a cumulative distribution over the section index."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from aggsim.sizes._smooth import Cumulative, SizeCurve

GRIDS = {
    "geometric": 2.0 ** (np.arange(20) / 3),
    "monomers": np.arange(1.0, 20.0),
    "both": np.concatenate([np.arange(1.0, 5.0), 4 * 2 ** (np.arange(1, 20) / 3)]),
    "wild": np.array([1.0, 1.001, 40.0, 41.0, 41.01, 9000.0]),
    "two": np.array([3.0, 7.0]),
}


@pytest.mark.parametrize("x", list(GRIDS.values()), ids=list(GRIDS))
def test_size_curve_passes_through_the_pivots_and_rises(x):
    curve = SizeCurve.through(x)
    np.testing.assert_allclose(curve.volume_at(np.arange(x.size, dtype=float)), x, rtol=1e-13)
    assert (np.diff(curve.volume_at(np.linspace(0, x.size - 1, 3001))) > 0).all()


@pytest.mark.parametrize("x", [GRIDS["geometric"], GRIDS["monomers"], GRIDS["both"]])
def test_slope_is_the_derivative_on_both_sides_of_a_pivot(x):
    curve, k, h = SizeCurve.through(x), np.arange(1.0, x.size - 1), 1e-6
    slope = curve.slope_at_pivots()[1:-1]
    # one-sided differences: truncation of the order of h
    for side in (h, -h):
        np.testing.assert_allclose((curve.volume_at(k + side) - x[1:-1]) / side, slope, rtol=1e-5)


@given(st.lists(st.floats(0.0, 1.0), min_size=1, max_size=20))
def test_index_is_the_inverse_of_size(places):
    for x in GRIDS.values():
        curve = SizeCurve.through(x)
        v = x[0] + np.array(places) * (x[-1] - x[0])
        kappa = curve.kappa_at(v)
        # a section can be nearly flat: bisection of kappa to 4e-15 leaves that times the slope
        np.testing.assert_allclose(curve.volume_at(kappa), v, rtol=1e-10)
        np.testing.assert_allclose(curve.kappa_at(x), np.arange(x.size), atol=1e-14)


def test_spline_resolves_a_bell_and_admits_that_it_misses_a_peak():
    k = np.arange(31.0)
    bell = np.exp(-0.5 * ((k - 15) / 3) ** 2)
    peak = np.where(k == 15, 1.0, 0.0)
    edge = 0.2**k
    rows = np.stack([row / row.sum() for row in (bell, peak, edge)])
    smooth, resolved = Cumulative.spline(rows)
    assert resolved.tolist() == [True, False, False]
    assert smooth.rows(resolved).below(np.array([-0.5, 15.0, 30.5]))[0] == pytest.approx(
        [0, 0.5, 1], abs=1e-9
    )


def test_limited_keeps_the_content_of_every_section_and_narrows_a_lone_one():
    rows = np.array([[1.0, 3.0, 4.0, 2.0, 0.0, 0.0], [0.0, 0.01, 1.0, 0.01, 0.0, 0.0]])
    rows /= rows.sum(axis=-1, keepdims=True)
    limited = Cumulative.limited(rows)
    at = limited.below(np.arange(7) - 0.5)
    np.testing.assert_allclose(np.diff(at, axis=-1), rows, atol=1e-14)
    d10, d90 = limited.inverse(np.array([0.1, 0.9]))[1]
    assert d90 - d10 < 0.02  # half-width (0.01 + 0.01) / 2, 80 % of it between the two
    assert d10 + d90 == pytest.approx(4.0, abs=1e-9)


@given(st.lists(st.floats(-0.02, 1.0), min_size=3, max_size=15).filter(lambda q: sum(q) > 0.5))
def test_limited_never_falls(weights):
    row = np.array([weights]) / sum(weights)
    reached = Cumulative.limited(row).below(np.linspace(-0.5, len(weights) - 0.5, 400))[0]
    assert (np.diff(reached) >= -1e-14).all()
    assert reached[0] == pytest.approx(0.0, abs=1e-14)
    assert reached[-1] == pytest.approx(1.0, rel=1e-13)
