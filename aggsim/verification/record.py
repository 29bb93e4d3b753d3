"""The verification record: all checks of the library, as text for a file and as a table for other programs."""

from __future__ import annotations

import csv
import io
import os
import platform
import time
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from datetime import datetime
from importlib.metadata import version

from aggsim.verification import effectivity, layout, orders
from aggsim.verification.checks import Case, Check
from aggsim.verification.published import (
    account,
    aggregation,
    breakage,
    interaction,
    physics,
    self_preserving,
    sizes,
    unsolved,
)

Group = Callable[[], Iterator[Check]]

QUICK: tuple[Group, ...] = (
    physics.water_properties,
    physics.collision_rates,
    physics.settling_speeds,
    physics.mixing_power,
    sizes.mean_sizes,
    interaction.energies,
    interaction.stability,
    aggregation.closed_solutions,
    aggregation.half_life,
    unsolved.kernels_without_solution,
    self_preserving.self_preserving,
    breakage.breakage_alone,
    breakage.equilibria,
    breakage.stirred_tanks,
)
"""What does not take long."""

COLUMNS = (
    "group",
    "case",
    "quantity",
    "at",
    "expected",
    "computed",
    "error",
    "tolerance",
    "limit",
    "passed",
    "source",
    "tolerance_allows_for",
)


@dataclass(frozen=True)
class Record:
    """What was checked, when, where, and what came of it."""

    checks: tuple[Check, ...]
    orders: tuple[orders.Row, ...]
    estimates: tuple[effectivity.Row, ...]
    quick: bool
    about: dict[str, str]

    @property
    def failed(self) -> tuple[Check, ...]:
        """Checks that are not passed."""
        return tuple(check for check in self.checks if not check.passed)

    @property
    def verdict(self) -> str:
        """One sentence."""
        if not self.failed:
            return f"all {len(self.checks)} checks passed."
        return f"{len(self.failed)} of {len(self.checks)} checks FAILED."

    def text(self) -> str:
        """The record as text of at most 120 columns."""
        parts = [
            layout.head(self.about, self.verdict, self.failed),
            layout.summary(self.checks, self.quick),
            *layout.chapters(self.checks, self.orders, self.estimates),
        ]
        return "\n\n".join(parts) + f"\n\nVERDICT: {self.verdict}\n"

    def csv(self) -> str:
        """One line per check, with a header."""
        out = io.StringIO()
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(COLUMNS)
        for check in self.checks:
            case = check.case
            figures = (check.expected, check.computed, check.error, check.tolerance)
            limit = "at least" if check.least else "within"
            passed = "yes" if check.passed else "no"
            named = (case.group, case.name, check.quantity, check.at)
            writer.writerow([*named, *map(repr, figures), limit, passed, case.source, case.basis])
        return out.getvalue()


def make(release: str, *, quick: bool = False, report: Callable[[str], None] | None = None) -> Record:
    """Carry out all checks; `release` is the version of aggsim, `report` is told what is being done."""
    began = time.perf_counter()
    tell = report or (lambda message: None)
    checks: list[Check] = []
    for group in QUICK:
        tell(group.__name__.replace("_", " "))
        checks += carried_out(group.__name__, group)
    checks.sort(key=lambda check: check.case == account.CASE)  # last, whichever run it comes from
    observed: list[orders.Row] = []
    estimates: list[effectivity.Row] = []

    def order_checks() -> Iterator[Check]:
        observed.extend(orders.rows())
        return orders.checks(observed)

    def estimate_checks() -> Iterator[Check]:
        estimates.extend(effectivity.rows())
        return effectivity.checks(estimates)

    if not quick:
        tell("orders of convergence")
        checks += carried_out("orders", order_checks)
        tell("error estimates")
        checks += carried_out("error estimates", estimate_checks)
    about = surroundings(release, quick) | {"Time taken": f"{time.perf_counter() - began:.0f} s"}
    return Record(tuple(checks), tuple(observed), tuple(estimates), quick, about)


def carried_out(name: str, group: Callable[[], Iterable[Check]]) -> Iterator[Check]:
    """Checks of a group; one that cannot be carried out to its end is one more check that failed."""
    try:
        yield from group()
    except Exception as problem:  # whatever goes wrong belongs in the record
        what = f"{type(problem).__name__}: {problem}"
        case = Case("Checks that could not be carried out", name.replace("_", " "), "-", "-")
        yield case.check("carried out to the end", what, 1.0, 0.0)


def surroundings(release: str, quick: bool) -> dict[str, str]:
    """Date, versions, machine."""
    libraries = ", ".join(f"{name} {version(name)}" for name in ("numpy", "scipy", "numba"))
    return {
        "Date": datetime.now().astimezone().strftime("%Y-%m-%d %H:%M %z"),
        "aggsim": release,
        "Python": f"{platform.python_version()} ({platform.python_implementation()}), {libraries}",
        "Platform": f"{platform.platform()}, {platform.machine()}, {os.cpu_count()} cores",
        "Extent": "quick: without orders of convergence and error estimates" if quick else "full",
    }
