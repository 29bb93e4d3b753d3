"""Units that suit the figures, and the outputs nearest to the times asked for."""

from __future__ import annotations

import numpy as np
import pytest

from aggsim.errors import InputError, TimesError
from aggsim.outputs import _units, figures


def labels(ax) -> list[str]:
    return [text.get_text() for text in ax.get_legend().get_texts()]


@pytest.mark.parametrize(
    ("first", "unit", "glyph", "factor"),
    [(400e-9, None, "[µm]", 1e6), (100e-9, None, "[nm]", 1e9), (400e-9, 1e-9, "[nm]", 1e9)],
)
def test_unit_of_size_follows_the_data_or_the_wish(make_result, first, unit, glyph, factor):
    run = make_result(first=first)
    ax = figures.distribution(run, [0.0], unit=unit)
    assert ax.get_xlabel().endswith(glyph)
    low, high = ax.get_xlim()
    d10, d90 = run.quantile_diameter([0.1, 0.9])[0] * factor
    assert low < d10 < d90 < high


@pytest.mark.parametrize("draw", [figures.distribution, figures.cumulative, figures.sizes])
@pytest.mark.parametrize("unit", [1e-5, 0.0, -1e-6, "um", np.nan])
def test_other_units_are_refused(result, draw, unit):
    with pytest.raises(InputError, match="unit="):
        draw(result, unit=unit)


@pytest.mark.parametrize("times", [[-1.0], [0.0, 3601.0], [np.nan], [], "start"])
def test_times_outside_the_run_are_refused(result, times):
    with pytest.raises(TimesError, match="times"):
        figures.distribution(result, times)


def test_times_get_the_unit_that_suits_each_where_no_unit_suits_all(make_result):
    run = make_result([0.0, 5.0, 600.0, 36000.0, 864000.0])
    assert labels(figures.distribution(run)) == ["0 s", "5 s", "10 min", "10 h", "10 d"]


def test_structure_must_grow_with_volume(result):
    class Constant:
        def collision_diameter(self, volume):
            return np.full(volume.shape, 1e-6)

    with pytest.raises(InputError, match="outer diameter increases"):
        figures.distribution(result, structure=Constant())


@pytest.mark.parametrize(
    ("lengths", "name"),
    [
        ([1e-9], "nm"),
        ([1e-7, 5e-7], "nm"),
        ([4e-7, 5e-6], "um"),
        ([1e-4], "um"),
        ([2e-3], "mm"),
        ([1.2], "m"),
    ],
)
def test_length_unit(lengths, name):
    assert _units.length_unit(np.array(lengths)).name == name


@pytest.mark.parametrize(
    ("time", "name"),
    [(0.0, "s"), (1e-3, "s"), (119.0, "s"), (120.0, "min"), (7199.0, "min"), (7200.0, "h"), (172800.0, "d")],
)
def test_time_unit(time, name):
    assert _units.time_unit(time).name == name


@pytest.mark.parametrize(
    ("count", "at_most", "expected"),
    [
        (1, 5, [0]),
        (2, 5, [0, 1]),
        (5, 5, [0, 1, 2, 3, 4]),
        (61, 5, [0, 15, 30, 45, 60]),
        (61, 11, list(range(0, 61, 6))),
        (8, 5, [0, 2, 4, 5, 7]),  # no stride of 7 gives 3 to 5 outputs
        (10, 5, [0, 3, 6, 9]),
    ],
)
def test_evenly(count, at_most, expected):
    assert _units.evenly(count, at_most) == expected


def test_quantities_with_a_unit_are_understood(result):
    class Minutes:
        """As the common units libraries do it."""

        def __init__(self, value):
            self.value = value

        def to_value(self, unit):
            assert unit == "s"
            return 60.0 * self.value

    assert _units.chosen_times(result, Minutes(20.0), 5) == [2]


def test_nearest_output_to_one_time(result):
    assert _units.chosen_time(result, None) == 4
    assert [_units.chosen_time(result, time) for time in (0.0, 899.0, 901.0, 3600.0)] == [0, 1, 2, 4]
    for time, message in (
        (-1.0, "0 to 3600 s"),
        (3601.0, "0 to 3600 s"),
        (np.nan, "finite"),
        ("start", "finite"),
    ):
        with pytest.raises(TimesError, match=f"time=.* {message}"):
            _units.chosen_time(result, time)
