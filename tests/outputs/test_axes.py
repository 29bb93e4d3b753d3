"""Axes: ticks as plain numbers, time axes after the outputs, several results on one axis."""

from __future__ import annotations

import matplotlib.pyplot as plt
import numpy as np
import pytest

from aggsim.errors import InputError
from aggsim.outputs import _axes, figures

LN_GSD = np.log(1.5)  # of the distributions in conftest.py


def labels(ax) -> list[str]:
    return [text.get_text() for text in ax.get_legend().get_texts()]


def test_size_axis_has_plain_numbers(result):
    ax = figures.distribution(result, unit=1e-9)
    ax.figure.canvas.draw()
    low, high = ax.get_xlim()
    ticks = [t for t in ax.get_xticks() if low <= t <= high]
    texts = [
        text.get_text() for text, t in zip(ax.get_xticklabels(), ax.get_xticks(), strict=True) if t in ticks
    ]
    assert len(ticks) >= 3
    assert [float(text) for text in texts] == pytest.approx(ticks)


def test_second_result_on_the_same_axis(make_result):
    coarse, fine = make_result(first=2e-6), make_result(first=100e-9)
    ax = figures.distribution(coarse, [0.0])
    low, high = ax.get_xlim()
    top = ax.get_ylim()[1]
    figures.distribution(fine, [3600.0], label="fine", ax=ax)
    assert labels(ax) == ["0 s", "fine, 60 min"]
    assert ax.get_xlabel().endswith("[µm]")  # and not nm, which would suit the second alone
    x, q = ax.lines[1].get_data()
    d50 = 0.2 * np.exp(3.0 * LN_GSD**2)  # Hatch and Choate (1929), um
    assert x[q.argmax()] == pytest.approx(d50, rel=0.03)
    assert ax.get_xlim()[0] < low
    assert ax.get_xlim()[1] == high
    assert ax.get_ylim()[1] == pytest.approx(top, rel=1e-3)  # equal peaks, met by different points
    assert ax.lines[0].get_linestyle() != ax.lines[1].get_linestyle()
    with pytest.raises(InputError, match="unit=1e-09 m"):
        figures.distribution(fine, unit=1e-9, ax=ax)


def test_two_results_against_one_time_axis(make_result):
    short, long = (
        make_result(np.linspace(0.0, 100.0, 51)),
        make_result(np.linspace(0.0, 7200.0, 51), growth=4.0),
    )
    ax = figures.sizes(short, shares=[0.5], means=[], label="short")
    figures.sizes(long, shares=[0.5], means=[], label="long", ax=ax)
    assert ax.get_xlabel() == "time [s]"
    assert ax.get_xlim() == (0.0, 7200.0)
    np.testing.assert_allclose(ax.lines[1].get_xdata(), long.times)
    assert ax.lines[0].get_color() != ax.lines[1].get_color()
    low, high = ax.get_ylim()
    for line in ax.lines:
        assert low < line.get_ydata().min() < line.get_ydata().max() < high


@pytest.mark.parametrize(
    ("times", "scale", "unit"),
    [
        (np.linspace(0.0, 3600.0, 1001), "linear", "min"),
        (np.linspace(0.0, 60.0, 7), "linear", "s"),
        (np.linspace(0.0, 180 * 86400.0, 181), "linear", "d"),
        (np.geomspace(1.0, 1e4, 41), "log", "s"),
        (np.concatenate([[0.0], np.geomspace(1.0, 1e4, 41)]), "symlog", "s"),
        ([3600.0], "linear", "min"),
        ([0.0], "linear", "s"),
    ],
)
def test_time_axis_follows_the_spacing_of_the_outputs(make_result, times, scale, unit):
    run = make_result(times)
    ax = figures.number(run)
    assert ax.get_xscale() == scale
    assert ax.get_xlabel() == f"time [{unit}]"
    assert ax.get_yscale() == "log"
    assert ax.get_ylabel().endswith("[1/m³]")
    x, y = ax.lines[0].get_data()
    np.testing.assert_allclose(y, run.total_number())
    assert x.size == run.times.size
    low, high = ax.get_xlim()
    assert low <= x.min() <= x.max() <= high * (1.0 + 1e-12)
    ax.figure.canvas.draw()


@pytest.mark.parametrize(("low", "high"), [(0.3, 0.35), (90.0, 150.0), (0.2, 3.0), (0.1, 30.0), (0.01, 1e4)])
def test_any_range_of_sizes_gets_three_to_twelve_figures(low, high):
    _, ax = plt.subplots()
    ax.set(xscale="log", xlim=(low, high))
    _axes.log_size(ax.xaxis, low, high)
    shown = [tick for tick in ax.get_xticks() if low <= tick <= high]
    assert 3 <= len(shown) <= 12


def test_colours_are_distinct():
    assert len(set(_axes.COLOURS)) == 8
    assert len({tuple(colour) for colour in _axes.sequence(12)}) == 12
    # dark to bright: the order of times survives a grey print
    grey = [0.299 * r + 0.587 * g + 0.114 * b for r, g, b, _ in _axes.sequence(12)]
    assert (np.diff(grey) > 0.0).all()


def test_size_axis_on_either_side():
    _, ax = plt.subplots()
    for part in (ax.xaxis, ax.yaxis):
        unit = _axes.size_axis(part, 2e-6, 8e-6, None, "diameter")
        assert (unit.size, part.get_label_text()) == (1e-6, "diameter [µm]")
        assert part.get_scale() == "log"
        np.testing.assert_allclose(part.get_view_interval(), [2.0, 8.0])
    ax.plot([3.0], [3.0])
    _axes.size_axis(ax.yaxis, 1e-6, 4e-6, None, "diameter")  # takes in what was drawn
    np.testing.assert_allclose(ax.get_ylim(), [1.0, 8.0])
    assert _axes.around(np.array([2e-6, 1e-6])) == pytest.approx((1e-6 / 1.1, 2.2e-6))


def test_curves_have_looks_and_names_of_their_own():
    looks = [_axes.look(k, 100) for k in range(8)]
    assert len({look["color"] for look in looks}) == 8
    assert "marker" not in looks[0]
    assert _axes.look(0, 3)["marker"] == "o"
    assert _axes.named("", ["a", "b"]) == ["a", "b"]
    assert _axes.named("run", ["a", "b"]) == ["run, a", "run, b"]


def test_a_legend_beside_the_axis_may_have_a_title():
    _, ax = plt.subplots()
    ax.plot([1.0], label="curve")
    _axes.legend(ax, True, "at t = 5 min")
    assert ax.get_legend().get_title().get_text() == "at t = 5 min"
    _axes.legend(ax, False, "at t = 6 min")
    assert ax.get_legend().get_title().get_text() == ""
