"""The record of this installation: all quick checks pass; text and table hold what a quality manager needs."""

from __future__ import annotations

import csv
import io
import platform
from collections.abc import Iterator
from importlib.metadata import version

import pytest

import aggsim as ag
from aggsim.verification import layout, record
from aggsim.verification.checks import Case, Check


def test_all_quick_checks_pass(quick: record.Record) -> None:
    assert quick.failed == ()
    assert len(quick.checks) >= 900


def test_the_text_names_sources_versions_and_the_verdict(quick: record.Record) -> None:
    text = quick.text()
    words = " ".join(text.split())
    for check in quick.checks:
        assert " ".join(check.case.source.split()) in words
        assert check.case.group in text
    for name in ("numpy", "scipy", "numba"):
        assert f"{name} {version(name)}" in text
    assert f"aggsim      {ag.__version__}" in text
    assert platform.python_version() in text
    assert platform.machine() in text
    assert quick.about["Date"] in text
    assert text.endswith(f"VERDICT: all {len(quick.checks)} checks passed.\n")
    assert "never replaces validation" in words


def test_the_text_fits_a_page_and_every_terminal(quick: record.Record) -> None:
    text = quick.text()
    assert max(map(len, text.splitlines())) <= layout.WIDTH
    assert text.isascii()


def test_the_table_has_a_line_per_check(quick: record.Record) -> None:
    rows = list(csv.DictReader(io.StringIO(quick.csv())))
    assert len(rows) == len(quick.checks)
    assert tuple(rows[0]) == record.COLUMNS
    for row, check in zip(rows, quick.checks, strict=True):
        assert float(row["expected"]) == check.expected
        assert float(row["computed"]) == check.computed
        assert float(row["error"]) <= float(row["tolerance"])
        assert row["passed"] == "yes"
        assert row["source"] == check.case.source


def test_the_account_closes_in_every_run(quick: record.Record) -> None:
    closures = [check for check in quick.checks if check.case.group == "Volume account"]
    assert len(closures) >= 25
    assert max(check.error for check in closures) <= 1e-12
    assert quick.checks[-1] in closures  # after all others


def test_what_cannot_be_carried_out_is_a_failed_check() -> None:
    def broken() -> Iterator[Check]:
        yield Case("group", "case", "source", "basis").check("a", "b", 1.0, 1.0)
        raise ZeroDivisionError("no such luck")

    first, last = record.carried_out("broken", broken)
    assert first.passed
    assert not last.passed
    assert last.at == "ZeroDivisionError: no such luck"


def test_progress_is_reported(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(record, "QUICK", ())
    told: list[str] = []
    made = record.make("1.2.3", quick=True, report=told.append)
    assert made.about["Extent"].startswith("quick")
    assert told == []


def test_a_full_record_has_orders_and_estimates(monkeypatch: pytest.MonkeyPatch, estimates) -> None:
    problem = record.orders.PROBLEMS[0]
    observed = list(problem.rows(record.orders.LINEAR))
    monkeypatch.setattr(record, "QUICK", ())
    monkeypatch.setattr(record.orders, "rows", lambda: observed)
    monkeypatch.setattr(record.effectivity, "rows", lambda: estimates)
    told: list[str] = []
    made = record.make("1.2.3", report=told.append)
    assert told == ["orders of convergence", "error estimates"]
    assert made.orders == tuple(observed)
    assert made.estimates == tuple(estimates)
    assert len(made.checks) == len(observed) + 5
    assert "1  Orders of convergence" in made.text()
    assert "2  Error estimates" in made.text()
