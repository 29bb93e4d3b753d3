"""The text of a record: width, headings, what failed."""

from __future__ import annotations

from aggsim.verification import layout, orders
from aggsim.verification.checks import Case
from aggsim.verification.effectivity import Row
from aggsim.verification.record import Record

CASE = Case("Group", "spheres in water", "A. Author, Journal 1 (1999) 1", "digits printed")
GOOD = CASE.check("speed [m/s]", "10 um", 1.0, 1.0 + 1e-7, relative=1e-6)
NEARER = CASE.check("speed [m/s]", "20 um", 1.0, 1.0 + 9e-7, relative=1e-6)
BAD = CASE.check("a quantity with a long name that must be wrapped [kg/m3]", "50 um", 2.0, 2.1, relative=1e-6)
ABOUT = {"Date": "2026-01-01 12:00 +0000", "aggsim": "1.2.3"}


def test_head_names_what_failed() -> None:
    text = layout.head(ABOUT, "1 of 2 checks FAILED.", [BAD])
    assert "Date        2026-01-01 12:00 +0000" in text
    assert "VERDICT: 1 of 2 checks FAILED." in text
    assert "FAILED: spheres in water: a quantity" in text
    words = " ".join(text.split())
    assert "never replaces validation of a model against the user's own jar tests, pilot trials" in words


def test_a_line_shows_the_figure_nearest_to_its_tolerance() -> None:
    (chapter,) = layout.chapters([GOOD, NEARER, BAD], [], [])
    lines = chapter.splitlines()
    assert lines[0] == "1  Group"
    assert "Spheres in water" in lines
    assert "  Source: A. Author, Journal 1 (1999) 1" in lines
    assert "  Tolerance: digits printed" in lines
    (speed,) = (line for line in lines if "speed [m/s]" in line)
    assert speed.split() == ["speed", "[m/s]", "20", "um", "2", "1", "1", "9.0e-07", "1.0e-06", "ok"]
    assert chapter.count("FAIL") == 1
    assert max(map(len, lines)) <= layout.WIDTH


def test_a_failed_figure_is_shown_before_one_that_is_nearer_to_its_tolerance() -> None:
    worst = CASE.check("speed [m/s]", "30 um", 1.0, float("nan"), relative=1e-6)
    (chapter,) = layout.chapters([NEARER, worst, GOOD], [], [])
    (speed,) = (line for line in chapter.splitlines() if "speed [m/s]" in line)
    assert speed.split()[2:] == ["30", "um", "3", "1", "nan", "nan", "1.0e-06", "FAIL"]


def test_tables_of_orders_and_estimates() -> None:
    observed = [row for scheme in (orders.LINEAR, orders.AVERAGE) for row in orders.PROBLEMS[0].rows(scheme)]
    text = f"d50 at t = 1: error 1.0e-02, estimate 1.0e-03 {'and more ' * 12}"
    estimates = [Row(f"{'problem ' * 7}", "accuracy=0.001", 27, 26, 20, 1e-2, float("nan"), (text,))]
    checks = [*orders.checks(observed), Case("Error estimates", "a", "b", "c").check("d", "e", 1.0, 1.0)]
    first, second = layout.chapters(checks, observed, estimates)
    assert "Constant kernel, exponential start" in first
    assert first.count("FixedPivot(moments=2)") == 4
    assert "2.03  1.7  ok" in first
    assert "    96%    74%   1.0e-02       nan" in second
    assert "Figures whose estimate is not safe" in second
    assert max(len(line) for line in f"{first}\n{second}".splitlines()) <= layout.WIDTH


def test_the_summary_of_a_quick_record_says_what_is_missing() -> None:
    text = layout.summary([GOOD, BAD], quick=True)
    assert "1  Group" in text
    assert "not in a quick record: orders of convergence, error estimates" in text
    assert "not in a quick" not in layout.summary([GOOD], quick=False)


def test_verdict() -> None:
    assert Record((GOOD,), (), (), True, {}).verdict == "all 1 checks passed."
    assert Record((GOOD, BAD), (), (), True, {}).verdict.startswith("1 of 2 checks FAILED")
