"""Density curves, and measured classes beside them."""

from __future__ import annotations

import numpy as np
import pytest

from aggsim.errors import DistributionError
from aggsim.outputs import _curves, figures
from aggsim.sizes import Measured, SizeGrid

LN_GSD = np.log(1.5)  # of the distributions in conftest.py
LIMITS = np.geomspace(200e-9, 4e-6, 9)
SHARES = np.array([0.02, 0.08, 0.15, 0.25, 0.25, 0.15, 0.08, 0.02])


class Power:
    """Outer diameter that grows with the diameter of equal volume to the power 1.4."""

    def collision_diameter(self, volume):
        return 1e-7 * (np.cbrt(6.0 * volume / np.pi) / 1e-7) ** 1.4


def labels(ax) -> list[str]:
    return [text.get_text() for text in ax.get_legend().get_texts()]


def test_curve_passes_through_the_densities_at_the_pivots(result):
    x, q = figures.distribution(result, [3600.0], unit=1e-6).lines[0].get_data()
    at = [np.abs(x - d).argmin() for d in result.grid.diameter * 1e6]
    np.testing.assert_allclose(q[at[1:]], result.density(3)[-1, 1:], rtol=1e-9, atol=1e-12)


def test_density_over_outer_diameters(result):
    x, q = figures.distribution(result, [0.0], structure=Power(), unit=1e-9).lines[0].get_data()
    expected = 1e-7 * (result.quantile_diameter(0.5)[0] / 1e-7) ** 1.4 * 1e9
    assert x[q.argmax()] == pytest.approx(
        expected, rel=0.06
    )  # the points of the curve lie 0.01 apart in ln x
    # x^1.4 stretches ln x by 1.4, so the peak of a lognormal falls by 1.4
    assert q.max() == pytest.approx(1.0 / (1.4 * np.sqrt(2.0 * np.pi) * LN_GSD), rel=5e-3)


def test_one_size_is_a_vertical_line(make_result):
    grid = SizeGrid.monomers_then_geometric(1e-20, 1e-17)
    number = np.zeros((2, len(grid)))
    number[0, 0] = 1e14
    number[1, :20] = np.geomspace(1e13, 1e10, 20)
    ax = figures.distribution(make_result([0.0, 600.0], grid=grid, number=number), unit=1e-9)
    assert labels(ax) == ["0 min (one size)", "10 min"]
    x, y = ax.lines[0].get_data()
    np.testing.assert_allclose(x, grid.diameter[0] * 1e9)
    assert list(y) == [0, 1]  # in units of the height of the axis
    assert ax.get_ylim()[1] < 5.0  # the curve decides on the scale
    assert ax.lines[1].get_data()[1].max() < ax.get_ylim()[1]
    figures.distribution(make_result([0.0], grid=grid, number=number[:1])).figure.canvas.draw()


def test_measured_classes_are_stairs_with_area_one(result):
    ax = figures.distribution(result, measured=(LIMITS, SHARES), unit=1e-6)
    stairs = ax.patches[0].get_data()
    np.testing.assert_allclose(stairs.edges, LIMITS * 1e6)
    assert np.sum(stairs.values * np.diff(np.log(stairs.edges))) == pytest.approx(1.0, rel=1e-12)
    assert labels(ax)[-1] == "measured"
    ax = figures.cumulative(result, measured=(LIMITS, SHARES), unit=1e-6)
    x, y = ax.lines[-1].get_data()
    np.testing.assert_allclose(x, LIMITS * 1e6)
    np.testing.assert_allclose(y, 100.0 * np.concatenate([[0.0], np.cumsum(SHARES)]))


def test_measured_start_is_drawn_in_its_own_quantity(result):
    start = Measured.from_classes(LIMITS, SHARES, kind="volume", volume_fraction=1e-5)
    ax = figures.distribution(result, measured=start)
    np.testing.assert_allclose(ax.patches[0].get_data().values, SHARES / np.diff(np.log(LIMITS)))
    with pytest.raises(DistributionError, match=r"distribution by volume .* r=3"):
        figures.distribution(result, r=0, measured=start)


@pytest.mark.parametrize(
    ("measured", "message"),
    [
        ((LIMITS, 100.0 * SHARES), "divide percentages by 100"),
        ((LIMITS, 0.5 * SHARES), "sum 1"),
        ((LIMITS[1:], SHARES), "7 values"),
        ((LIMITS[::-1], SHARES), "increase"),
        ((LIMITS, -SHARES), "at least 0"),
        (SHARES, "class limits"),
        ("psd.csv", "class limits"),
    ],
)
def test_other_measured_values_are_refused(result, measured, message):
    for draw in (figures.distribution, figures.cumulative):
        with pytest.raises(DistributionError, match=message):
            draw(result, measured=measured)


@pytest.mark.parametrize("degree", [0, 1])
def test_straight_lines_stay_straight(degree):
    x = np.array([0.0, 0.4, 1.0, 1.1, 3.0])
    fine, curve = _curves._akima(x, 1.0 + degree * x)
    np.testing.assert_allclose(curve, 1.0 + degree * fine, rtol=1e-12)


def test_curve_of_two_points_is_their_line():
    x, curve = _curves._akima(np.array([1.0, 3.0]), np.array([2.0, 6.0]))
    np.testing.assert_allclose(curve, 2.0 * x, rtol=1e-12)


def test_flats_stay_flat_beside_a_step():
    _, curve = _curves._akima(np.arange(8.0), np.array([0.0, 0.0, 0.0, 0.0, 1.0, 1.0, 1.0, 1.0]))
    assert curve.min() >= -1e-12
    assert curve.max() <= 1.0 + 1e-12


def test_curve_converges_to_a_smooth_function():
    errors = []
    for n in (41, 81):
        x = np.linspace(-4.0, 4.0, n)
        fine, curve = _curves._akima(x, np.exp(-0.5 * x**2))
        errors.append(np.abs(curve - np.exp(-0.5 * fine**2)).max())
    assert errors[0] < 5e-3
    assert errors[1] < errors[0] / 3.5  # second order, but for the peak
