"""The pages of a verification record: head, summary and tables of at most 120 columns."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Iterator, Sequence
from itertools import groupby

from aggsim.result import FIGURES
from aggsim.verification import effectivity, orders
from aggsim.verification.checks import Case, Check

WIDTH = 118
CAUTION = (
    "This record shows that the installed program solves its equations and reproduces published figures. It supports "
    "and never replaces validation of a model against the user's own jar tests, pilot trials and stability tests."
)
HOW_TO_READ = (
    "Each line of the tables stands for n figures of one kind; the one that comes nearest to its tolerance is printed, "
    "with the place where it is. Where a source gives a formula or an equation, the expected figures were worked out "
    "from it at high precision, apart from this program. The error is |computed - expected| / |expected|, or "
    "|computed| where 0 is expected. The CSV file beside this one has a line for every figure. Closed solutions are in "
    "units of the start or the feed: number 1, mean volume 1, and kernel 1 (constant), v + w (sum) or v w (product)."
)
_COLUMNS = (31, 24, 3, 12, 12, 7, 9, 4)
_LEFT = 2  # columns of words
_HEADER = ("quantity", "nearest to its tolerance", "n", "expected", "computed", "error", "tolerance", "")


def head(about: dict[str, str], verdict: str, failed: Sequence[Check]) -> str:
    """Title, date, versions, verdict, what failed, caution, how to read."""
    lines = ["VERIFICATION RECORD OF AGGSIM", "=" * WIDTH, ""]
    lines += [f"{name:12s}{value}" for name, value in about.items()]
    lines += ["", f"VERDICT: {verdict}"]
    for check in failed:
        lines += textwrap.wrap(f"FAILED: {check}", WIDTH, initial_indent="  ", subsequent_indent="          ")
    lines += ["", *textwrap.wrap(CAUTION, WIDTH), "", *textwrap.wrap(HOW_TO_READ, WIDTH)]
    return "\n".join(lines)


def summary(checks: Sequence[Check], quick: bool) -> str:
    """One line per group."""
    lines = [f"{'SUMMARY':60s}{'checks':>8s}{'passed':>8s}{'largest error / tolerance':>28s}", "-" * WIDTH]
    for number, (group, members) in enumerate(_by_group(checks).items(), start=1):
        strain = max(check.strain for check in members)
        passed = sum(check.passed for check in members)
        name = f"{number:2d}  {group}"
        lines.append(f"{name:60s}{len(members):8d}{passed:8d}{strain:28.2g}")
    lines.append(f"{'    all':60s}{len(checks):8d}{sum(check.passed for check in checks):8d}")
    if quick:
        lines.append("    not in a quick record: orders of convergence, error estimates")
    return "\n".join(lines)


def chapters(
    checks: Sequence[Check], observed: Sequence[orders.Row], estimates: Sequence[effectivity.Row]
) -> Iterator[str]:
    """One for each group; orders and error estimates have tables of their own."""
    for number, (group, members) in enumerate(_by_group(checks).items(), start=1):
        lines = [f"{number}  {group}", "=" * WIDTH]
        if group == orders.GROUP:
            lines += _orders(observed)
        else:
            lines += _figures(members)
        if group == effectivity.GROUP:
            lines += _estimates(estimates)
        yield "\n".join(lines)


def _figures(members: Sequence[Check]) -> list[str]:
    lines = [_row(_HEADER)]
    for case, of_case in groupby(members, key=lambda check: check.case):
        lines += ["", *_case(case)]
        kinds: dict[str, list[Check]] = {}
        for check in of_case:
            kinds.setdefault(check.quantity, []).append(check)
        for kind in kinds.values():
            lines += _line(kind)
    return lines


def _orders(rows: Sequence[orders.Row]) -> list[str]:
    """Errors at all refinements, and the slope through them."""
    lines = textwrap.wrap(
        "Relative error at so many sections per doubling of the volume, the slope of its logarithm, and the least "
        "slope that is asked for. The exact figures are those of closed solutions; for the Brownian and the shear "
        "kernel they come from FixedPivot(moments=6) at 16 sections per doubling. CellAverage and FiniteVolume are "
        "left out where they have no clear order.",
        WIDTH,
    )
    titles = f"  {'scheme':22s}{'figure':14s}{'sections per doubling: error':63s}{'slope':>6s}{'least':>6s}"
    lines += ["", titles]
    for problem, of_problem in groupby(rows, key=lambda row: row.problem):
        lines += ["", f"{problem[0].upper()}{problem[1:]}, exponential start"]
        for row in of_problem:
            errors = "  ".join(f"{q:2d}: {e:.1e}" for q, e in zip(row.refinements, row.errors, strict=True))
            result = "ok" if row.order >= row.least else "FAIL"
            slopes = f"{row.order:6.2f}{row.least:5.1f}  {result}"
            lines.append(f"  {row.scheme!r:22s}{row.quantity:14s}{errors:63s}{slopes}")
    return lines


def _estimates(rows: Sequence[effectivity.Row]) -> list[str]:
    """Share of figures whose estimate is safe and tight, and every figure that is not safe."""
    meaning = (
        f"Figures: {', '.join(FIGURES)} at three times each. Safe: the true error is within "
        f"{effectivity.SAFE:g} times the estimate. Tight: the estimate is within {effectivity.TIGHT:g} times the true "
        f"error, or {effectivity.TIGHT * effectivity.SMALLEST:g} where that is more. The last two columns are the "
        "largest true error and the largest estimate."
    )
    titles = f"{'figures':>8s}{'safe':>7s}{'tight':>7s}{'error':>10s}{'estimate':>10s}"
    lines = ["", *textwrap.wrap(meaning, WIDTH), "", f"  {'problem':58s}  {'mode':14s}{titles}"]
    for row in rows:
        shares = f"{row.safe / row.figures:7.0%}{row.tight / row.figures:7.0%}"
        found = f"{row.figures:8d}{shares}{row.error:10.1e}{row.estimate:10.1e}"
        lines.append(f"  {row.problem:58s}  {row.mode:14s}{found}")
    unmet = [row for row in rows if row.unmet]
    if unmet:
        lines += ["", f"Requests whose own estimate is above the {effectivity.ASKED:g} that was asked for"]
        lines += [
            f"  {row.problem}: estimate {row.estimate:.1e}, largest error {row.error:.1e}" for row in unmet
        ]
    unsafe = [f"{row.problem}, {row.mode}: {figure}" for row in rows for figure in row.outside]
    if unsafe:
        lines += ["", "Figures whose estimate is not safe"]
    for text in unsafe:
        lines += textwrap.wrap(text, WIDTH, initial_indent="  ", subsequent_indent="      ")
    return lines


def _by_group(checks: Iterable[Check]) -> dict[str, list[Check]]:
    found: dict[str, list[Check]] = {}
    for check in checks:
        found.setdefault(check.case.group, []).append(check)
    return found


def _case(case: Case) -> list[str]:
    lines = textwrap.wrap(case.name[0].upper() + case.name[1:], WIDTH)
    for title, words in (("Source: ", case.source), ("Tolerance: ", case.basis)):
        lines += textwrap.wrap(title + words, WIDTH, initial_indent="  ", subsequent_indent="    ")
    return lines


def _line(kind: Sequence[Check]) -> list[str]:
    """The figure that comes nearest to its tolerance, or the first that failed."""
    worst = max(kind, key=lambda check: (not check.passed, check.strain))
    result = "ok" if all(check.passed for check in kind) else "FAIL"
    expected = f">= {worst.expected:.6g}" if worst.least else f"{worst.expected:.6g}"
    tolerance = "" if worst.least else f"{worst.tolerance:.1e}"
    figures = (str(len(kind)), expected, f"{worst.computed:.6g}", f"{worst.error:.1e}", tolerance, result)
    words = [
        textwrap.wrap(text, w) or [""] for text, w in zip((worst.quantity, worst.at), _COLUMNS, strict=False)
    ]
    lines = [_row((words[0][0], words[1][0], *figures))]
    for k in range(1, max(map(len, words))):
        lines.append(_row([cell[k] if k < len(cell) else "" for cell in words]))
    return lines


def _row(cells: Sequence[str]) -> str:
    aligned = [
        f"{cell:{width}s}" if k < _LEFT else f"{cell:>{width}s}"
        for k, (cell, width) in enumerate(zip(cells, _COLUMNS, strict=False))
    ]
    return "  " + "  ".join(aligned).rstrip()
