"""Error estimates keep the promised shares, and the table tells where they do not."""

from __future__ import annotations

from dataclasses import replace

import pytest

from aggsim.result import FIGURES
from aggsim.verification import closed, effectivity, truth
from aggsim.verification.effectivity import DEFAULT, REQUEST, Row


@pytest.mark.parametrize("mode", [DEFAULT, REQUEST])
def test_the_promised_shares(estimates: list[Row], mode: str) -> None:
    safe, tight = effectivity.shares(estimates, mode)
    unsafe = [f"{row.problem}: {text}" for row in estimates if row.mode == mode for text in row.outside]
    assert safe >= effectivity.SAFE_SHARE, unsafe
    assert tight >= effectivity.TIGHT_SHARE


def test_the_accuracy_that_was_requested(estimates: list[Row]) -> None:
    missed = {
        row.problem: row.error for row in estimates if row.mode == REQUEST and row.error > effectivity.ASKED
    }
    assert missed == {}


def test_every_problem_has_both_modes(estimates: list[Row]) -> None:
    assert len(estimates) == 2 * (len(truth.problems()) + len(effectivity.UNSOLVED))
    assert {row.mode for row in estimates} == {DEFAULT, REQUEST}
    assert all(row.figures == 3 * len(FIGURES) for row in estimates)


def test_a_falsified_truth_is_told() -> None:
    problem = truth.aggregation(closed.CONSTANT_EXP, (5.0, 10.0, 20.0))
    exact = problem.exact()
    false = replace(problem, exact=lambda: exact | {"d50": 1.01 * exact["d50"]})
    default, request = effectivity.effectivity(false)
    assert default.safe == default.figures - 3
    assert len(default.outside) == 3
    assert default.outside[0].startswith("d50 at t = 5: error 9.9e-03, estimate ")
    failed = [check for check in effectivity.checks([default, request]) if not check.passed]
    assert {check.quantity for check in failed} >= {
        "default run: safe share",
        "accuracy=0.001: largest true error",
    }


def test_figures_that_are_not_known_do_not_count() -> None:
    problem = truth.aggregation(closed.CONSTANT_EXP, (5.0, 10.0, 20.0))
    exact = problem.exact()
    unknown = exact["d90"] * float("nan")
    default, _ = effectivity.effectivity(replace(problem, exact=lambda: exact | {"d90": unknown}))
    assert default.figures == 3 * (len(FIGURES) - 1)
    assert default.safe == default.figures
