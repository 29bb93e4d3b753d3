"""Common rules for the design of rapid mixers and flocculation basins, each with its source."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from aggsim import _checks

Range = tuple[float | None, float | None]


@dataclass(frozen=True, kw_only=True)
class DesignRule:
    """Ranges that a code or a handbook asks of a mixed stage; None leaves an end open.

    Parameters
    ----------
    name : str
        Kind of stage, such as "flocculation".
    shear_rate : (low, high)
        G of each stage [1/s].
    detention_time : (low, high)
        Of all stages of this rule together [s].
    camp_number : (low, high)
        G t of all stages of this rule together [1].
    source : str
        Where the rule stands.

    Raises
    ------
    InputError
        If a range is not one.
    """

    name: str
    shear_rate: Range = (None, None)
    detention_time: Range = (None, None)
    camp_number: Range = (None, None)
    source: str

    def __post_init__(self) -> None:
        for name in ("shear_rate", "detention_time", "camp_number"):
            object.__setattr__(self, name, _range(name, getattr(self, name)))


@dataclass(frozen=True)
class Departure:
    """A figure of a plan that lies outside its design rule; `str` says it in words.

    Attributes
    ----------
    where : str
        The stage, or the stages of one rule together.
    medium : str or None
        None for a time, which is the same with every medium.
    quantity : str
        "G" [1/s], "time" [s] or "G t" [1].
    value : float
    limits : (low, high)
        What the rule allows, None where it is open.
    rule : DesignRule
    """

    where: str
    medium: str | None
    quantity: str
    value: float
    limits: Range
    rule: DesignRule

    def __str__(self) -> str:
        low, high = self.limits
        bound = f"below {low:g}" if low is not None and self.value < low else f"above {high:g}"
        unit = {"G": " 1/s", "time": " s", "G t": ""}[self.quantity]
        where = self.where if self.medium is None else f"{self.where}, {self.medium}"
        return f"{where}: {self.quantity} of {figures(self.value)}{unit} is {bound}{unit} ({self.rule.name})"


def outside(value: float, limits: Range) -> bool:
    """True for a value beyond one of the limits."""
    low, high = limits
    return (low is not None and value < low) or (high is not None and value > high)


def figures(value: float) -> str:
    """Three significant figures without a power of ten."""
    if value == 0.0 or not math.isfinite(value):
        return f"{value:g}"
    places = 2 - math.floor(math.log10(float(f"{abs(value):.2e}")))  # of the rounded value: 999.9 is 1000
    return f"{round(float(value), places):.{max(places, 0)}f}"


def _range(name: str, value: Any) -> Range:
    if not isinstance(value, (tuple, list)) or len(value) != 2:
        _checks.refuse(name, repr(value), "(low, high), None for an open end", "(10.0, 75.0)")
    low, high = (end if end is None else _checks.scalar(name, end, least=0.0) for end in value)
    if low is not None and high is not None and not low < high:
        _checks.refuse(name, repr(value), "(low, high) with low below high", f"({high:g}, {low:g})")
    return low, high


RAPID_MIX = DesignRule(
    name="rapid mix",
    shear_rate=(750.0, None),
    detention_time=(None, 30.0),
    source="Ten State Standards 4.1.2; Wisconsin Administrative Code NR 811.47(7)",
)
FLOCCULATION = DesignRule(
    name="flocculation",
    shear_rate=(10.0, 75.0),
    detention_time=(1800.0, None),
    camp_number=(3e4, 1e5),
    source=(
        "G and least Gt: Water Treatment Plant Design, Table 6.6, conventional and high-energy together; "
        "time: Utah Administrative Code R309-525-12; Gt up to 1e5: common practice"
    ),
)
CONVENTIONAL_FLOCCULATION = DesignRule(
    name="conventional flocculation",
    shear_rate=(10.0, 60.0),
    detention_time=(1000.0, 1500.0),
    camp_number=(3e4, 6e4),
    source="Water Treatment Plant Design, Table 6.6",
)
HIGH_ENERGY_FLOCCULATION = DesignRule(
    name="high-energy flocculation",  # ahead of direct filtration
    shear_rate=(20.0, 75.0),
    detention_time=(900.0, 1500.0),
    camp_number=(4e4, 7.5e4),
    source="Water Treatment Plant Design, Table 6.6",
)
