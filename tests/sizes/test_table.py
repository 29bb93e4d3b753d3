"""Reading columns of text and turning them into shares, one step at a time."""

from __future__ import annotations

import numpy as np
import pytest

from aggsim.errors import DistributionError
from aggsim.sizes import _table


def read(text, size=0, value=1, delimiter=None, decimal="."):
    return _table.read_columns(text, size, value, delimiter, decimal)


@pytest.mark.parametrize(
    "text",
    [
        "1;2\n3;4\n5;6",
        "1\t2\n3\t4\n5\t6\n",
        "1,2\n3,4\n5,6",
        "  1   2\n3 4\n 5 6",
        "d,q\r\n1,2\r\n3,4\r\n5,6\r\n",
        "# 9,9\nd,q\n\n1,2\n# 8,8\n3,4\n,,\n5,6",
        '"1","2"\n"3","4"\n"5","6"',
        "1,2 %\n3,4 %\n5,6 %",
    ],
)
def test_columns_are_found_whatever_separates_them(text):
    sizes, values = read(text)
    np.testing.assert_array_equal(sizes, [1, 3, 5])
    np.testing.assert_array_equal(values, [2, 4, 6])


def test_columns_by_name_and_by_place():
    text = "run 7\nlow;high;n;q\n1;2;7;0.1\n2;4;8;0.2\n4;8;9;0.3"
    by_name = read(text, ("low", "high"), "q")
    by_place = read(text, (0, 1), 3)
    for got in (by_name, by_place):
        np.testing.assert_array_equal(got[0], [[1, 2], [2, 4], [4, 8]])
        np.testing.assert_array_equal(got[1], [0.1, 0.2, 0.3])


def test_a_blank_value_is_kept_as_a_gap_and_other_text_is_refused():
    assert np.isnan(read("1;2\n3;4\n5;6\n7;")[1][-1])
    with pytest.raises(DistributionError, match="line 4"):
        read("1;2\n3;4\n5;6\nsum;12")


def test_decimal_commas_do_not_mix_with_points():
    np.testing.assert_array_equal(read("1,5;2\n2,5;4\n3,5;6", decimal=",")[0], [1.5, 2.5, 3.5])
    with pytest.raises(DistributionError, match="rows of numbers"):
        read("1.5;2\n2.5;4\n3.5;6", decimal=",")


@pytest.mark.parametrize(
    ("sizes", "values", "form", "classes", "limits", "shares"),
    [
        ([1, 2, 4, 8], [1, 2, 1], "counts", "limits", [1, 2, 4, 8], [0.25, 0.5, 0.25]),
        ([1, 2, 4, 8], [1, 2, 1, 0], "counts", "lower", [1, 2, 4, 8], [0.25, 0.5, 0.25]),
        ([1, 2, 4, 8], [0, 1, 2, 1], "counts", "upper", [1, 2, 4, 8], [0.25, 0.5, 0.25]),
        ([1, 4, 16], [1, 2, 1], "counts", "mid-points", [0.5, 2, 8, 32], [0.25, 0.5, 0.25]),
        ([[1, 2], [2, 4], [4, 8]], [1, 2, 1], "counts", "limits", [1, 2, 4, 8], [0.25, 0.5, 0.25]),
        ([1, 2, 4, 8], [0, 0.25, 0.75, 1], "cumulative", "limits", [1, 2, 4, 8], [0.25, 0.5, 0.25]),
        ([1, 2, 4, 8], [0.25, 0.25, 0.0625], "density", "limits", [1, 2, 4, 8], [0.25, 0.5, 0.25]),
    ],
)
def test_forms_and_classes(sizes, values, form, classes, limits, shares):
    got_limits, got_shares, total = _table.class_shares(sizes, values, form, classes, False, 0.01)
    np.testing.assert_allclose(got_limits, limits, rtol=1e-14)
    np.testing.assert_allclose(got_shares, shares, rtol=1e-14)
    assert total == pytest.approx(4.0 if form == "counts" else 1.0, rel=1e-14)


def test_units_by_name_are_metres():
    assert [_table.metres(u) for u in ("m", "mm", "um", "nm", 1e-7)] == [1.0, 1e-3, 1e-6, 1e-9, 1e-7]
    with pytest.raises(DistributionError, match="size_unit=1e-6"):
        _table.metres("feet")
