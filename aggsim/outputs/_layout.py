"""The house layout of text tables: aligned columns, units below their names, notes and the caution at the end."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence

import numpy as np

from aggsim._checks import FloatArray
from aggsim.result import Result, SteadyState

CAUTION = (
    "The model supports and does not replace jar tests, pilot trials or stability tests; "
    "local codes and licensed practice decide."
)
ROWS = 11  # rows without `times`, so that an hour in minutes comes in steps of six
_WIDTH = 100  # characters per line of the notes

Column = tuple[str, str, list[str]]  # name, unit, cells


def page(columns: Sequence[Column], notes: Sequence[str], closing: Sequence[str]) -> str:
    """A table, its notes line by line, and closing sentences that are wrapped, above the caution."""
    wrapped = [line for sentence in closing for line in textwrap.wrap(sentence, _WIDTH)]
    return "\n".join([*_aligned(columns), "", *notes, *wrapped, CAUTION])


def closing(result: Result) -> list[str]:
    """How the run ended, and how well the volume is kept."""
    balance = result.balance
    closure = float(np.abs(balance.closure).max())
    negative = abs(float(balance.negative_share.max()))
    whole = "what was there or came in" if balance.inward else "the start"
    return [
        f"Run {result.status}",
        f"Volume balance closes to {closure:.1e} of {whole}; at most {negative:.1e} in negative sections.",
    ]


def steady(state: SteadyState) -> list[str]:
    """Whether a steady state is stable, and how well the volume is kept."""
    balance = state.balance
    kind = "stable" if state.stable else "not stable"
    return [
        f"Steady state: {kind}, relaxes in {state.relaxation_time:.4g} s.",
        f"Rates close to {abs(balance.closure):.1e} of what flows in; "
        f"{abs(balance.negative_share):.1e} of the volume in negative sections.",
    ]


def times(values: FloatArray) -> list[str]:
    """Times to four significant figures, without idle zeros and powers of ten."""
    return [np.format_float_positional(v, 4, fractional=False, trim="-") for v in values]


def decimals(values: FloatArray) -> list[str]:
    """Values with one number of decimals, which gives the smallest three significant figures; - for NaN."""
    there = values[~np.isnan(values)]
    digits = int(np.clip(2 - np.floor(np.log10(there.min())), 0, 12)) if there.size else 0
    return ["-" if np.isnan(v) else f"{v:.{digits}f}" for v in values]


def fixed(values: FloatArray, digits: int) -> list[str]:
    """Values with this number of decimals; - for NaN."""
    return ["-" if np.isnan(v) else f"{v:.{digits}f}" for v in values]


def percent(shares: FloatArray) -> list[str]:
    """Shares in percent to three decimals, smaller ones with their power of ten, 0 for round-off."""
    return [_percent(100.0 * share) for share in shares.tolist()]


def one_line(name: str) -> str:
    """A name as a heading: line breaks and runs of blanks as one blank."""
    return " ".join(name.split())


def _percent(value: float) -> str:
    if abs(value) < 1e-10:
        return "0"
    return f"{value:.3f}" if abs(value) >= 5e-4 else f"{value:.1e}"


def _aligned(columns: Sequence[Column]) -> list[str]:
    """Lines of right-aligned columns, each (name, unit, cells)."""
    table = [[name, unit, *cells] for name, unit, cells in columns]
    widths = [max(map(len, cells)) for cells in table]
    lines = [
        "  ".join(cell.rjust(width) for cell, width in zip(row, widths, strict=True)).rstrip()
        for row in zip(*table, strict=True)
    ]
    rule = "-" * (sum(widths) + 2 * (len(widths) - 1))
    return [*lines[:2], rule, *lines[2:]]
