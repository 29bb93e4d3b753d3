"""How good error estimates are: estimate against true error of every figure of a result."""

from __future__ import annotations

import warnings
from collections.abc import Iterator, Sequence
from typing import NamedTuple

import numpy as np

from aggsim.errors import AccuracyWarning, SimulationError
from aggsim.result import FIGURES, Snapshot
from aggsim.solvers import simulate
from aggsim.verification import truth
from aggsim.verification.checks import Case, Check
from aggsim.verification.published.unsolved import UNSOLVED
from aggsim.verification.truth import Problem

GROUP = "Error estimates"

ASKED = 1e-3  # the accuracy that is requested
SAFE = 3.0  # a true error may be so many times its estimate,
TIGHT = 10.0  # and an estimate so many times the true error, or
SMALLEST = 1e-8  # what of it counts
SAFE_SHARE, TIGHT_SHARE = 0.95, 0.80  # of the figures, that is promised

DEFAULT, REQUEST = "default run", f"accuracy={ASKED:g}"


class Row(NamedTuple):
    """One problem in one mode: figures, how many of them are safe and tight, largest true error and estimate."""

    problem: str
    mode: str
    figures: int
    safe: int
    tight: int
    error: float
    estimate: float
    outside: tuple[str, ...]  # figures that are not safe

    @property
    def unmet(self) -> bool:
        """True for a request whose own estimate is above what was asked for."""
        return self.mode == REQUEST and not self.estimate <= ASKED


def rows() -> list[Row]:
    """All problems in both modes."""
    problems = [*truth.problems(), *(truth.unsolved(problem) for problem in UNSOLVED)]
    return [row for problem in problems for row in effectivity(problem)]


def effectivity(problem: Problem) -> Iterator[Row]:
    """A default run and a request for an accuracy."""
    exact = problem.exact()
    for mode, accuracy in ((DEFAULT, None), (REQUEST, ASKED)):
        with warnings.catch_warnings():
            # the record itself says which requests were not met (`Row.unmet`)
            warnings.filterwarnings("ignore", "the accuracy asked for", AccuracyWarning)
            result = simulate(problem.vessel, problem.start, problem.times, accuracy=accuracy)
        found = Snapshot.of(result).figures
        known = {name: np.isfinite(exact[name]) for name in FIGURES}
        errors = {name: np.abs(found[name] / exact[name] - 1.0) for name in FIGURES}
        try:
            estimates = {name: result.error[name] for name in FIGURES}
            without: tuple[str, ...] = ()
        except SimulationError as refusal:  # counts as not safe
            estimates = {name: np.full(len(problem.times), np.nan) for name in FIGURES}
            without = (f"no estimate: {refusal}",)
        safe = {name: known[name] & (errors[name] <= SAFE * estimates[name]) for name in FIGURES}
        tight = {
            name: known[name] & (estimates[name] <= TIGHT * np.maximum(errors[name], SMALLEST))
            for name in FIGURES
        }
        outside = without or tuple(
            f"{name} at t = {t:g}: error {error:.1e}, estimate {estimate:.1e}"
            for name in FIGURES
            for t, error, estimate, good, counts in zip(
                problem.times, errors[name], estimates[name], safe[name], known[name], strict=True
            )
            if counts and not good
        )
        yield Row(
            problem.name,
            mode,
            sum(int(one.sum()) for one in known.values()),
            sum(int(one.sum()) for one in safe.values()),
            sum(int(one.sum()) for one in tight.values()),
            float(np.nanmax(list(errors.values()))),
            float(np.max(list(estimates.values()))),
            outside,
        )


def shares(table: Sequence[Row], mode: str) -> tuple[float, float]:
    """Safe and tight share of all figures of a mode."""
    chosen = [row for row in table if row.mode == mode]
    figures = sum(row.figures for row in chosen)
    return sum(row.safe for row in chosen) / figures, sum(row.tight for row in chosen) / figures


def checks(table: Sequence[Row]) -> Iterator[Check]:
    """The promised shares, and the accuracy that was requested."""
    case = Case(
        GROUP,
        "estimates against true errors",
        "closed solutions; every size resolved where there is none",
        "shares that are promised",
    )
    for mode in (DEFAULT, REQUEST):
        safe, tight = shares(table, mode)
        at = f"{sum(row.figures for row in table if row.mode == mode)} figures"
        yield case.check(f"{mode}: safe share", at, SAFE_SHARE, safe, least=True)
        yield case.check(f"{mode}: tight share", at, TIGHT_SHARE, tight, least=True)
    worst = max((row for row in table if row.mode == REQUEST), key=lambda row: row.error)
    yield case.check(f"{REQUEST}: largest true error", worst.problem, 0.0, worst.error, absolute=ASKED)
