"""Figures, asked for what they draw: scales, labels, units and the data of the lines."""

from __future__ import annotations

import subprocess
import sys

import matplotlib as mpl
import matplotlib.pyplot as plt
import numpy as np
import pytest

from aggsim.errors import DistributionError, InputError
from aggsim.outputs import figures
from aggsim.result import Contributions
from aggsim.sizes import SizeGrid

LN_GSD = np.log(1.5)  # of the distributions in conftest.py


class Power:
    """Outer diameter that grows with the diameter of equal volume to the power 1.4."""

    def collision_diameter(self, volume):
        return 1e-7 * (np.cbrt(6.0 * volume / np.pi) / 1e-7) ** 1.4


def labels(ax) -> list[str]:
    return [text.get_text() for text in ax.get_legend().get_texts()]


def area(line) -> float:
    x, q = line.get_data()
    return float(np.trapezoid(q, np.log(x)))


DRAWERS = {
    "distribution": figures.distribution,
    "cumulative": figures.cumulative,
    "sizes": figures.sizes,
    "number": figures.number,
    "contributions": figures.contributions,
    "events": lambda result, ax=None: figures.contributions(result, share=False, ax=ax),
}


@pytest.mark.parametrize("draw", DRAWERS.values(), ids=DRAWERS)
def test_axis_in_axis_out(result, draw):
    before = mpl.rcParams.copy()
    _, ax = plt.subplots()
    assert draw(result, ax=ax) is ax
    assert plt.get_fignums() == [1]
    alone = draw(result)
    assert alone.figure is not ax.figure
    assert plt.get_fignums() == [1, 2]
    assert dict(mpl.rcParams) == dict(before)
    for shown in (ax, alone):
        shown.figure.canvas.draw()
        assert shown.get_xlabel().endswith("]")
        assert shown.get_ylabel().endswith("]")


@pytest.mark.parametrize("draw", DRAWERS.values(), ids=DRAWERS)
@pytest.mark.parametrize(
    "times",
    [[60.0, 120.0], [0.0, 1.0, 10.0, 1e2, 1e3, 1e4], np.geomspace(1.0, 1e6, 40), np.linspace(0, 9, 300)],
)
def test_any_spacing_of_times_can_be_drawn(make_result, draw, times):
    draw(make_result(times)).figure.canvas.draw()


def test_drawing_library_is_imported_by_figures_alone():
    code = "import sys, aggsim.outputs; sys.exit(any(name.startswith('matplotlib') for name in sys.modules))"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


@pytest.mark.parametrize("draw", DRAWERS.values(), ids=DRAWERS)
def test_outputs_without_particles_are_left_out(train_run, draw):
    assert not train_run.number[0].any()
    ax = draw(train_run)
    ax.figure.canvas.draw()
    for line in ax.lines:
        assert np.isfinite(np.asarray(line.get_ydata(), dtype=float)[1:]).all()


def test_first_curve_is_that_of_the_first_particles(train_run):
    assert labels(figures.distribution(train_run))[0] == "1.67 min"  # the second output, at 100 s
    x, d50 = figures.sizes(train_run, shares=[0.5], means=(), unit=1e-6).lines[0].get_data()
    np.testing.assert_allclose(d50, train_run.quantile_diameter(0.5) * 1e6, rtol=1e-12)
    assert (x[0], np.isnan(d50[0])) == (0.0, True)


@pytest.mark.parametrize("draw", [figures.distribution, figures.cumulative, figures.sizes, figures.number])
def test_nothing_at_all_is_refused(make_result, draw):
    empty = make_result(number=np.zeros((5, 101)), grid=SizeGrid.monomers(1e-20, 101))
    with pytest.raises(DistributionError, match="no particles"):
        draw(empty)
    assert plt.get_fignums() == []


def test_a_time_without_particles_is_refused(train_run):
    with pytest.raises(DistributionError, match="no particles"):
        figures.distribution(train_run, 0.0)


# distribution


@pytest.mark.parametrize("r", [0, 2, 3])
@pytest.mark.parametrize("structure", [None, Power()])
def test_area_under_each_density_is_one(result, r, structure):
    ax = figures.distribution(result, r=r, structure=structure)
    assert ax.get_xscale() == "log"
    assert ax.get_yscale() == "linear"
    assert len(ax.lines) == 5
    for line in ax.lines:
        # a smooth curve at 9 points per decade of volume, integrated by trapezia between them
        assert area(line) == pytest.approx(1.0, abs=2e-4)


def test_density_is_the_lognormal_that_went_in(result):
    ax = figures.distribution(result, [0.0], r=0, unit=1e-9)
    x, q = ax.lines[0].get_data()
    expected = np.exp(-0.5 * (np.log(x / 400.0) / LN_GSD) ** 2) / (np.sqrt(2.0 * np.pi) * LN_GSD)
    # the curve between pivots is a cubic with slopes of second order over steps of ln 2 / 9 = 0.19 ln(gsd)
    np.testing.assert_allclose(q[1:], expected[1:], atol=0.01 * expected.max())


def test_labels_name_the_kind_of_density_and_of_diameter(result):
    ax = figures.distribution(result, r=0)
    assert "q_{0}^*" in ax.get_ylabel()
    assert r"\ln x" in ax.get_ylabel()
    assert ax.get_xlabel().startswith("volume-equivalent diameter")
    assert figures.distribution(result, structure=Power()).get_xlabel().startswith("outer diameter")


def test_nearest_outputs_are_drawn_and_labelled_with_their_time(result):
    ax = figures.distribution(result, [100.0, 550.0, 3500.0])
    assert labels(ax) == ["0 min", "10 min", "60 min"]
    assert labels(figures.distribution(result, [500.0, 600.0, 700.0])) == ["10 min"]
    assert labels(figures.distribution(result, 1200.0, label="tank")) == ["tank, 20 min"]


def test_default_times_are_spread(make_result):
    even = make_result(np.linspace(0.0, 3600.0, 61))
    assert labels(figures.distribution(even)) == ["0 min", "15 min", "30 min", "45 min", "60 min"]
    # ln(median) grows in proportion to time here, so like steps of growth are like steps of time
    logarithmic = make_result(np.concatenate([[0.0], np.geomspace(1.0, 4000.0, 400)]))
    shown = [float(label.split()[0]) for label in labels(figures.distribution(logarithmic))]
    np.testing.assert_allclose(shown, np.array([0.0, 0.25, 0.5, 0.75, 1.0]) * 4000.0 / 60.0, rtol=0.02)


def test_curves_are_told_apart(result):
    ax = figures.distribution(result)
    assert len({tuple(line.get_color()) for line in ax.lines}) == 5
    ax = figures.sizes(result)
    assert len({line.get_color() for line in ax.lines}) == 4
    assert len({line.get_linestyle() for line in ax.lines}) == 3  # dotted counts as dashed here


# cumulative


@pytest.mark.parametrize("structure", [None, Power()])
@pytest.mark.parametrize("r", [0, 3])
def test_cumulative_curves_pass_the_quantiles(result, r, structure):
    ax = figures.cumulative(result, r=r, structure=structure, unit=1e-6)
    assert ax.get_ylim() == (0.0, 100.0)
    assert ax.get_ylabel().endswith("[%]")
    for line, quantiles in zip(
        ax.lines, result.quantile_diameter([0.1, 0.5, 0.9], r, structure) * 1e6, strict=True
    ):
        x, share = line.get_data()
        assert (np.diff(x) >= 0.0).all()
        assert (np.diff(share) >= -1e-9).all()
        assert (share[0], share[-1]) == (0.0, 100.0)
        # linear between points that stand 800 to the grid
        np.testing.assert_allclose(np.interp(quantiles, x, share), [10.0, 50.0, 90.0], atol=0.05)


def test_cumulative_of_one_size_is_a_step(make_result):
    grid = SizeGrid.monomers_then_geometric(1e-20, 1e-17)
    number = np.zeros((1, len(grid)))
    number[0, 0] = 1e14
    x, share = figures.cumulative(make_result([0.0], grid=grid, number=number), unit=1e-9).lines[0].get_data()
    assert np.interp(grid.diameter[0] * 1e9 * 0.999, x, share) == 0.0
    assert np.interp(grid.diameter[0] * 1e9 * 1.26, x, share) == pytest.approx(100.0)


# against time


def test_sizes_are_those_of_the_result(result):
    ax = figures.sizes(result)
    assert ax.get_yscale() == "log"
    assert ax.get_xlabel() == "time [min]"
    assert ax.get_ylabel() == "volume-equivalent diameter [µm]"
    assert labels(ax) == ["$d_{90}$", "$d_{50}$", "$d_{10}$", "D[4,3]"]
    expected = [*(result.quantile_diameter(p) for p in (0.9, 0.5, 0.1)), result.mean_diameter(4, 3)]
    for line, values in zip(ax.lines, expected, strict=True):
        x, y = line.get_data()
        np.testing.assert_allclose(x, result.times / 60.0)
        np.testing.assert_allclose(y, values * 1e6, rtol=1e-12)


def test_sizes_of_choice(result):
    ax = figures.sizes(result, shares=[0.5], means=[(1, 0), (3, 2)], r=0, unit=1e-9, label="run 7")
    assert labels(ax) == [r"run 7, $d_{50,\,0}$", "run 7, D[1,0]", "run 7, D[3,2]"]
    np.testing.assert_allclose(ax.lines[0].get_ydata(), result.quantile_diameter(0.5, 0) * 1e9)
    with pytest.raises(InputError, match="at least one"):
        figures.sizes(result, shares=[], means=[])


def test_outer_sizes_leave_out_means_unless_asked_for(result):
    ax = figures.sizes(result, structure=Power())
    assert ax.get_ylabel() == "outer diameter [µm]"
    assert labels(ax) == ["$d_{90}$", "$d_{50}$", "$d_{10}$"]
    np.testing.assert_allclose(
        ax.lines[1].get_ydata(), result.quantile_diameter(0.5, structure=Power()) * 1e6
    )
    ax = figures.sizes(result, structure=Power(), shares=[0.5], means=[(4, 3)])
    assert labels(ax)[-1] == "D[4,3] (volume-equivalent)"


def test_number_axis_shows_figures_for_small_and_large_changes(make_result):
    for growth in (1.0, 1.01, 1.5, 2.5, 10.0):
        ax = figures.number(make_result(growth=growth))
        ax.figure.canvas.draw()
        low, high = ax.get_ylim()
        shown = [t for t in ax.get_yticks() if low <= t <= high]
        assert len(shown) >= 2, growth


def test_history_is_sizes_above_number(result):
    axes = figures.history(result)
    assert axes.shape == (2,)
    np.testing.assert_allclose(axes[0].lines[1].get_ydata(), result.quantile_diameter(0.5) * 1e6)
    np.testing.assert_allclose(axes[1].lines[0].get_ydata(), result.total_number())
    assert axes[0].get_xlim() == axes[1].get_xlim()
    assert (axes[0].get_xlabel(), axes[1].get_xlabel()) == ("", "time [min]")


def test_history_over_logarithmic_times(make_result):
    axes = figures.history(make_result(np.concatenate([[0.0], np.geomspace(1.0, 1e4, 41)])))
    assert [ax.get_xscale() for ax in axes] == ["symlog", "symlog"]
    axes[0].figure.canvas.draw()


# contributions


def test_shares_are_stacked_to_the_whole(result):
    ax = figures.contributions(result)
    assert ax.get_ylim() == (0.0, 100.0)
    assert labels(ax) == ["brownian", "shear"]
    lower, upper = (area_.get_paths()[0].vertices for area_ in ax.collections)
    assert lower[:, 1].max() == pytest.approx(75.0)
    assert upper[:, 1].max() == pytest.approx(100.0)
    assert upper[:, 1].min() == pytest.approx(25.0)


def test_events_per_part_on_a_logarithmic_axis(make_result):
    starting = Contributions(
        {"a": (np.array([0.0, 1.0, 2.0, 3.0, 4.0]), np.ones(5)), "b": (np.ones(5), np.ones(5))}
    )
    ax = figures.contributions(make_result(contributions=starting), share=False)
    assert ax.get_yscale() == "log"
    np.testing.assert_array_equal(ax.lines[0].get_ydata(), [np.nan, 1.0, 2.0, 3.0, 4.0])
    assert labels(ax) == ["a", "b"]


def test_nothing_that_collides_can_be_drawn(make_result):
    idle = make_result(contributions=Contributions({"a": (np.zeros(5), np.zeros(5))}))
    for share in (True, False):
        figures.contributions(idle, share=share).figure.canvas.draw()


def test_contributions_need_parts_and_times(make_result):
    with pytest.raises(InputError, match="0 kernel parts"):
        figures.contributions(make_result(parts=False))
    with pytest.raises(InputError, match="1 output times"):
        figures.contributions(make_result([60.0]))
