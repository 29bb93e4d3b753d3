"""Measured distributions: tables as particle sizers export them, and tables that are no distribution."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from aggsim.errors import DistributionError, InputError
from aggsim.sizes import LogNormal, Measured, means

LIMITS = np.array([0.1, 0.2, 0.4, 0.8, 1.6, 3.2])  # um
SHARES = np.array([0.05, 0.25, 0.4, 0.25, 0.05])
AMOUNT = {"volume_fraction": 1e-4}


@pytest.fixture
def table(tmp_path):
    def write(text, encoding="utf-8"):
        path = tmp_path / "psd.csv"
        path.write_bytes(text.encode(encoding))
        return path

    return write


def volume(path, **options):
    return Measured.from_csv(
        path, **{"size_unit": 1e-6, "kind": "volume", "form": "fraction"} | AMOUNT | options
    )


def assert_is_the_table(found):
    np.testing.assert_allclose(found.class_limits, LIMITS * 1e-6, rtol=1e-12)
    np.testing.assert_allclose(found.class_shares, SHARES, rtol=1e-12)
    assert found.total_volume == pytest.approx(1e-4, rel=1e-14)


# ---- shapes of tables


def test_two_columns_of_limits_with_headers_and_comments(table):
    rows = "\n".join(f"{a},{b},{100 * q}" for a, b, q in zip(LIMITS, LIMITS[1:], SHARES, strict=False))
    path = table(f"Sample,latex 7\nObscuration,12.3 %\n\n# a comment\nLower,Upper,Volume (%)\n{rows}\n\n")
    assert_is_the_table(volume(path, size=(0, 1), value=2, percent=True))
    assert_is_the_table(
        volume(path, size=("Lower", "Upper"), value="Volume (%)", percent=True, size_unit="um")
    )


def test_semicolons_and_decimal_commas_in_an_old_encoding(table):
    points = np.append(0, np.cumsum(SHARES)) * 100
    rows = "\n".join(f"{a:g};{q:g}".replace(".", ",") for a, q in zip(LIMITS, points, strict=True))
    path = table(f"Größe (µm);Summe (%)\n{rows}\n", encoding="latin-1")
    assert_is_the_table(volume(path, form="cumulative", percent=True, decimal=","))
    with pytest.raises(DistributionError, match='decimal=","'):
        volume(path, form="cumulative", percent=True)


@pytest.mark.parametrize("mark", ["\t", "   ", ", "])
def test_other_delimiters_and_a_byte_order_mark(table, mark):
    text = (
        "\ufeffsize"
        + mark
        + "q\n"
        + "\n".join(f"{a}{mark}{q}" for a, q in zip(LIMITS, [*SHARES, 0], strict=True))
    )
    assert_is_the_table(volume(table(text), classes="lower"))


def test_a_delimiter_of_choice(table):
    text = "\n".join(f"{a}|{q}" for a, q in zip(LIMITS, [0, *SHARES], strict=True))
    assert_is_the_table(volume(table(text), classes="upper", delimiter="|"))


@pytest.mark.parametrize("blank", ["0", "0.0", ""])
def test_one_limit_per_row(table, blank):
    lower = "\n".join(f"{a};{q}" for a, q in zip(LIMITS, [*SHARES, blank], strict=True))
    assert_is_the_table(volume(table(lower), classes="lower"))
    if blank:
        upper = "\n".join(f"{a};{q}" for a, q in zip(LIMITS, [blank, *SHARES], strict=True))
        assert_is_the_table(volume(table(upper), classes="upper"))


def test_geometric_mid_points(table):
    middle = np.sqrt(LIMITS[1:] * LIMITS[:-1])
    text = "\n".join(f"{m:.17g} {q}" for m, q in zip(middle, SHARES, strict=True))
    assert_is_the_table(volume(table(text), classes="mid-points"))


@pytest.mark.parametrize(
    ("form", "width"),
    [
        ("density", np.diff(LIMITS)),
        ("log_density", np.diff(np.log(LIMITS))),
        ("log10_density", np.diff(np.log10(LIMITS))),
    ],
)
def test_densities(table, form, width):
    text = "\n".join(
        f"{a:.17g} {b:.17g} {q:.17g}" for a, b, q in zip(LIMITS, LIMITS[1:], SHARES / width, strict=False)
    )
    assert_is_the_table(volume(table(text), form=form, size=(0, 1), value=2))


def test_counts_of_an_electrical_sensing_zone(table):
    text = "\n".join(
        f"{a} {b} {q}" for a, b, q in zip(LIMITS, LIMITS[1:], [120, 600, 960, 600, 120], strict=False)
    )
    path = table(text)
    found = Measured.from_csv(
        path, size_unit="um", kind="number", form="counts", size=(0, 1), value=2, number=2.4e12
    )
    np.testing.assert_allclose(found.class_shares, SHARES, rtol=1e-12)
    assert found.total_number == pytest.approx(2.4e12, rel=1e-14)
    with pytest.raises(DistributionError, match="form='counts'"):
        Measured.from_csv(
            path, size_unit="um", kind="number", form="fraction", size=(0, 1), value=2, number=2.4e12
        )


@pytest.mark.parametrize(
    ("unit", "factor"), [("nm", 1e-9), ("µm", 1e-6), ("μm", 1e-6), ("mm", 1e-3), (1e-8, 1e-8)]
)
def test_units_of_size(table, unit, factor):
    text = "\n".join(f"{a} {b} {q}" for a, b, q in zip(LIMITS * 5, LIMITS[1:] * 5, SHARES, strict=False))
    found = volume(table(text), size_unit=unit, size=(0, 1), value=2)
    np.testing.assert_allclose(found.class_limits, LIMITS * 5 * factor, rtol=1e-12)


def test_sums_within_the_tolerance_are_normalised_and_said_so(table):
    text = "\n".join(f"{a} {b} {q * 99.4}" for a, b, q in zip(LIMITS, LIMITS[1:], SHARES, strict=False))
    found = volume(table(text), size=(0, 1), value=2, percent=True)
    assert_is_the_table(found)
    assert "99.4 %" in found.summary
    assert "psd.csv" in found.summary
    assert "5 volume classes" in found.summary
    with pytest.raises(DistributionError, match=r"a sum of 99.4 .*100 within 0.1 %"):
        volume(table(text), size=(0, 1), value=2, percent=True, tolerance=1e-3)


# ---- what the distribution says


@pytest.mark.parametrize("kind", ["number", "volume"])
def test_every_class_holds_its_share_of_what_was_measured(kind):
    found = Measured.from_classes(LIMITS * 1e-6, SHARES, kind=kind, **AMOUNT)
    edges = means.volume_of(LIMITS * 1e-6)
    below = found.number_below if kind == "number" else found.volume_below
    whole = found.total_number if kind == "number" else found.total_volume
    np.testing.assert_allclose(np.diff(below(edges)) / whole, SHARES, rtol=1e-12)
    v, n = found.quadrature(edges)
    weight = n if kind == "number" else n * v
    shares = np.bincount(np.searchsorted(edges, v) - 1, weight) / whole
    np.testing.assert_allclose(shares, SHARES, rtol=1e-12)
    np.testing.assert_allclose(found.breaks, edges, rtol=1e-14)
    np.testing.assert_array_equal(found.density(edges[[0, -1]] * [0.99, 1.01]), 0.0)
    assert (found.density(np.geomspace(edges[0], edges[-1], 500)) >= 0).all()
    assert found.log_width == pytest.approx(3 * math.log(2), rel=1e-12)


def test_number_and_volume_tables_of_one_law_agree():
    law = LogNormal(median_diameter=1e-6, gsd=1.6, volume_fraction=1e-4)
    limits = np.geomspace(0.05e-6, 30e-6, 61)
    edges = means.volume_of(limits)
    for kind, below in (("number", law.number_below), ("volume", law.volume_below)):
        shares = np.diff(below(edges))
        found = Measured.from_classes(limits, shares / shares.sum(), kind=kind, **AMOUNT)
        # four classes per standard deviation of ln d: the spline is fourth order, the tails end at 30 um
        assert found.total_number == pytest.approx(law.total_number, rel=5e-5)
        assert found.moment(2) == pytest.approx(law.moment(2), rel=5e-4)
        inner = np.geomspace(*law.limits(0.05), 50)
        np.testing.assert_allclose(found.density(inner), law.density(inner), rtol=3e-3)


def test_empty_classes_stay_empty_and_ends_are_cut():
    limits = np.geomspace(1e-7, 3e-6, 9)
    shares = [0.0, 0.1, 0.3, 0.0, 0.0, 0.4, 0.2, 0.0]
    found = Measured.from_classes(limits, shares, kind="volume", **AMOUNT)
    edges = means.volume_of(limits)
    np.testing.assert_allclose(found.breaks, edges[1:-1], rtol=1e-14)
    np.testing.assert_allclose(
        found.density(np.geomspace(edges[3] * 1.001, edges[5] * 0.999, 30)), 0.0, atol=1e-9
    )
    assert found.number_below(edges[1]) == 0.0
    assert found.limits(1e-9)[0] >= edges[1]
    assert found.limits(1e-9)[1] <= edges[-2] * (1 + 1e-12)
    assert found.limits(1e-16)[1] == pytest.approx(edges[-2], rel=1e-6)


@given(
    st.lists(st.floats(0.0, 1.0), min_size=4, max_size=30).filter(lambda q: sum(x > 1e-3 for x in q) > 2),
    st.sampled_from(["number", "volume"]),
)
def test_any_shares_give_a_distribution(shares, kind):
    content = np.array(shares)
    content[content < 1e-3] = 0.0
    content /= content.sum()
    limits = np.geomspace(1e-7, 1e-5, content.size + 1)
    found = Measured.from_classes(limits, content, kind=kind, **AMOUNT)
    v = np.geomspace(1e-22, 1e-14, 300)
    assert (found.density(v) >= 0).all()
    for below, whole in ((found.number_below, found.total_number), (found.volume_below, found.total_volume)):
        reached = below(v)
        assert (np.diff(reached) >= -1e-13 * whole).all()
        assert reached[-1] == pytest.approx(whole, rel=1e-12)


def test_tables_are_read_only_and_do_not_share_memory():
    shares = SHARES.copy()
    found = Measured.from_classes(LIMITS * 1e-6, shares, kind="volume", **AMOUNT)
    shares[0] = 9.0
    assert found.class_shares[0] == pytest.approx(0.05)
    with pytest.raises(ValueError, match="read-only"):
        found.class_shares[0] = 9.0


# ---- refusals


def classes(limits, shares, **options):
    return Measured.from_classes(limits, shares, **{"kind": "volume"} | AMOUNT | options)


@pytest.mark.parametrize(
    ("limits", "shares", "message"),
    [
        (LIMITS * 1e-6, [0.1, -0.1, 0.5, 0.3, 0.2], r"shares\[1\]=-0.1"),
        (LIMITS * 1e-6, SHARES * 0.9, "a sum of 0.9"),
        (LIMITS * 1e-6, SHARES * 100, "percent=True"),
        (LIMITS * 1e-6, [0.5, 0.5, 0.0, 0.0, 0.0], "2 classes with content"),
        (LIMITS * 1e-6, SHARES[:-1], "one limit more than values"),
        (LIMITS * 1e-6, [0.05, math.nan, 0.4, 0.25, 0.05], r"values\[1\]=nan"),
        (LIMITS[::-1] * 1e-6, SHARES, "reverse a table that falls"),
        (np.append(0.0, LIMITS[1:]) * 1e-6, SHARES, "leave out a row for size 0"),
        (LIMITS, SHARES, "diameters are in metres"),
        ([], [], "empty"),
    ],
)
def test_classes_that_are_no_distribution_are_refused(limits, shares, message):
    with pytest.raises(InputError, match=message):
        classes(limits, shares)


def test_a_sum_of_one_is_refused_as_percent():
    with pytest.raises(DistributionError, match="percent=False"):
        classes(LIMITS * 1e-6, SHARES, percent=True)


@pytest.mark.parametrize(
    "options",
    [
        {"kind": "mass"},
        {"form": "histogram"},
        {"classes": "edges"},
        {"percent": "yes"},
        {"size_unit": "inch"},
        {"size_unit": 0.0},
        {"size_unit": 1e6},
        {"tolerance": 2.0},
        {"decimal": ";"},
        {"delimiter": "ab"},
        {"size": "Diameter"},
        {"value": 7},
    ],
    ids=str,
)
def test_options_that_do_not_exist_are_refused(table, options):
    path = table("\n".join(f"{a} {q}" for a, q in zip(LIMITS, [*SHARES, 0], strict=True)))
    with pytest.raises(InputError):
        volume(path, **{"classes": "lower"} | options)
    assert_is_the_table(volume(path, classes="lower"))


CUMULATIVE = {"form": "cumulative", "percent": True}


@pytest.mark.parametrize(
    ("text", "options", "message"),
    [
        ("0.1 0\n0.2 40\n0.4 30\n0.8 100", CUMULATIVE, "undersize values that never fall"),
        ("0.1 100\n0.2 60\n0.4 30\n0.8 0", CUMULATIVE, "if they are oversize"),
        ("0.1 0\n0.2 40\n0.4 60\n0.8 90", CUMULATIVE, "add a last row"),
        ("0.1 20\n0.2 40\n0.4 60\n0.8 100", CUMULATIVE, "add a first row"),
        ("0.1 0\n0.2 0.4\n0.4 0.6\n0.8 1", CUMULATIVE, "percent=False"),
        ("0.1 0\n0.2 40\n0.4 60\n0.8 100", {"form": "cumulative"}, "percent=True"),
        ("0.1 0\n0.2 \n0.4 60\n0.8 100", CUMULATIVE, r"values\[1\]=nan"),
        ("0.1 0\n0.2 40\n0.2 60\n0.8 100", CUMULATIVE, "strictly increase"),
        ("0.1 0\n0.2 40\n0.4 60\n0.8 100\nmean 0.3", CUMULATIVE, "line 5='mean 0.3'"),
        ("0.1 0\n0.2 40\n0.4 60\n0.8 100", CUMULATIVE | {"classes": "lower"}, "one size per row"),
        ("0.1 0.2\n0.2 0.4\n0.4 0.4\n0.8 0.1", {"classes": "lower"}, "this row has no other limit"),
        ("0.1 0.2\n0.2 0.4\n0.4 0.4\n0.8 0.1", {}, "classes='lower' or 'upper'"),
        ("0.1 0.2\n0.2 0.4\n0.4 0.4", {"classes": "upper"}, "this row has no other limit"),
        ("0.1 0.2\n0.2 0.4\n0.25 0.2\n0.8 0.2", {"classes": "mid-points"}, "spaced evenly"),
        ("1 2 0.3\n2 4 0.3\n5 8 0.4", {"size": (0, 1), "value": 2}, "without gap or overlap"),
        ("1 2 0.3\n2 4 0.3\n4 3 0.4", {"size": (0, 1), "value": 2}, "increase"),
        ("1 2 0.3\n2 4 0.3\n4 8 0.4", {"size": (0, 1), "value": 2, "classes": "lower"}, "two size columns"),
        ("100 0\n200 40\n400 60\n80000 100", CUMULATIVE, "diameters are in metres"),
        ("a b\nc d", {}, "without 3 rows of numbers"),
        ("", {}, "no lines"),
        ("0.1 inf\n0.2 0.4\n0.4 0.4\n0.8 0", {"classes": "lower"}, "inf"),
    ],
)
def test_files_that_hold_no_distribution_are_refused(table, text, options, message):
    with pytest.raises(DistributionError, match=message):
        volume(table(text), **options)


def test_a_missing_file_is_the_usual_error(tmp_path):
    with pytest.raises(FileNotFoundError):
        volume(tmp_path / "none.csv")
