"""A check: its error, its tolerance, and when it is passed."""

from __future__ import annotations

import math

import pytest

from aggsim.verification.checks import Case

CASE = Case("group", "case", "source", "digits")


def test_errors_are_relative() -> None:
    check = CASE.check("size [m]", "here", 2e-6, 2.002e-6, relative=2e-3)
    assert check.error == pytest.approx(1e-3)
    assert check.strain == pytest.approx(0.5)
    assert check.passed
    assert not CASE.check("size [m]", "here", 2e-6, 2.002e-6, relative=0.9e-3).passed


def test_absolute_tolerances_are_in_the_unit_of_the_figure() -> None:
    assert CASE.check("energy [kT]", "here", -4.0, -4.4, absolute=0.41).passed
    assert not CASE.check("energy [kT]", "here", -4.0, -4.4, absolute=0.39).passed


def test_errors_are_absolute_where_nothing_is_expected() -> None:
    check = CASE.check("closure", "here", 0.0, -3e-12, absolute=1e-11)
    assert check.error == pytest.approx(3e-12)
    assert check.passed


def test_a_lower_limit_may_be_exceeded() -> None:
    over, under = (CASE.check("order", "here", 3.5, value, least=True) for value in (4.0, 3.4))
    assert over.passed
    assert over.error == 0.0
    assert over.strain == pytest.approx(3.5 / 4.0)
    assert not under.passed
    assert under.strain > 1.0


@pytest.mark.parametrize("least", [False, True])
def test_what_is_not_a_number_fails(least: bool) -> None:
    check = CASE.check("size", "here", 1.0, math.nan, relative=1.0, least=least)
    assert not check.passed
    assert check.strain == math.inf


def test_each_point_has_a_check() -> None:
    checks = list(CASE.each("number", "t = {:g}", [1.0, 2.0], [5.0, 6.0], [5.0, 7.0], relative=1e-3))
    assert [check.at for check in checks] == ["t = 1", "t = 2"]
    assert [check.passed for check in checks] == [True, False]
    assert str(checks[1]) == "case: number, t = 2: expected 6, computed 7, error 0.17, tolerance 0.001"
    with pytest.raises(ValueError, match="argument"):
        list(CASE.each("number", "{}", [1.0], [5.0, 6.0], [5.0]))
