"""One figure of the library against one from outside: the line of a verification record."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any, NamedTuple


@dataclass(frozen=True)
class Case:
    """What figures have in common.

    Attributes
    ----------
    group : str
        Chapter of the record.
    name : str
    source : str
        Author, year, journal or standard.
    basis : str
        What the tolerance allows for.
    """

    group: str
    name: str
    source: str
    basis: str

    def check(
        self,
        quantity: str,
        at: str,
        expected: Any,
        computed: Any,
        *,
        relative: float = 0.0,
        absolute: float = 0.0,
        least: bool = False,
    ) -> Check:
        """Compare two figures; the tolerance is `relative` plus `absolute` in the unit of the figure."""
        one, other = float(expected), float(computed)
        tolerance = float(relative + absolute / (abs(one) if one else 1.0))
        return Check(self, quantity, at, one, other, tolerance, least)

    def each(
        self, quantity: str, at: str, points: Any, expected: Any, computed: Any, **tolerance: Any
    ) -> Iterator[Check]:
        """Compare figures at several points; `at` says where, as in "{:g} C"."""
        for point, one, other in zip(points, expected, computed, strict=True):
            yield self.check(quantity, at.format(point), one, other, **tolerance)


class Check(NamedTuple):
    """One comparison."""

    case: Case
    quantity: str
    at: str
    expected: float
    computed: float
    tolerance: float
    least: bool = False  # `expected` is a lower limit

    @property
    def error(self) -> float:
        """Difference over the expected figure, or the difference where that is 0; what falls short of a limit."""
        difference = self.computed - self.expected
        if self.least:
            difference = min(difference, 0.0)
        return abs(difference) / (abs(self.expected) or 1.0)

    @property
    def passed(self) -> bool:
        """True where the error is within the tolerance; never of NaN."""
        return bool(self.error <= self.tolerance)

    @property
    def strain(self) -> float:
        """Error over tolerance, or a lower limit over the figure: 1 where the check is only just passed."""
        if self.least:
            return self.expected / self.computed if self.computed > 0.0 else math.inf
        if self.error == 0.0:
            return 0.0
        return self.error / self.tolerance if self.tolerance and self.error == self.error else math.inf

    def __str__(self) -> str:
        limit = "at least " if self.least else ""
        return (
            f"{self.case.name}: {self.quantity}, {self.at}: expected {limit}{self.expected:.12g}, "
            f"computed {self.computed:.12g}, error {self.error:.2g}, tolerance {self.tolerance:.2g}"
        )
