"""From the text of an instrument's table to shares in size classes; pure functions, no file access."""

from __future__ import annotations

import csv
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import DistributionError

UNITS = {"m": 1.0, "mm": 1e-3, "um": 1e-6, "µm": 1e-6, "μm": 1e-6, "micron": 1e-6, "nm": 1e-9}
FORMS = ("fraction", "counts", "cumulative", "density", "log_density", "log10_density")
CLASSES = ("limits", "lower", "upper", "mid-points")
_LEAST_CLASSES = 3  # with content; fewer say too little about a shape
_UNEVEN = 2.0  # ratio of neighbouring log spacings beyond which mid-points leave the limits open
_SAME_LIMIT = 1e-3  # relative difference of one upper limit and the next lower one that rounding explains

Column = int | str


def choice(name: str, value: Any, allowed: tuple[str, ...], hint: str = "") -> str:
    """Return a table option, refused unless it is one of those allowed."""
    if not isinstance(value, str) or value not in allowed:
        _checks.refuse(name, repr(value), " or ".join(map(repr, allowed)), hint, error=DistributionError)
    return value


def metres(unit: Any) -> float:
    """Return metres per unit of size, from a number or the name of a unit."""
    if isinstance(unit, str):
        if unit not in UNITS:
            choice("size_unit", unit, tuple(UNITS), "size_unit=1e-6 for sizes in micrometres")
        return UNITS[unit]
    return _checks.scalar(
        "size_unit",
        unit,
        "m",
        least=1e-10,
        most=1.0,
        hint='metres per unit of the table: 1e-6 or "um" for micrometres',
        error=DistributionError,
    )


def tolerated(tolerance: Any) -> float:
    """Return the deviation of a sum from its whole that is normalised away."""
    return _checks.scalar(
        "tolerance", tolerance, least=0.0, most=0.2, hint="tolerance=0.01 for 1 %", error=DistributionError
    )


def read_columns(
    text: str, size: Column | tuple[Column, Column], value: Column, delimiter: str | None, decimal: str
) -> tuple[FloatArray, FloatArray]:
    """Return sizes (rows,) or (rows, 2) and values (rows,) of a delimited text; blank values are NaN.

    Lines before the first row of numbers are headers; blank lines and lines that start with # are left out.
    """
    wanted = [*size, value] if isinstance(size, tuple) else [size, value]
    choice("decimal", decimal, (".", ","))
    if delimiter is not None and (len(delimiter) != 1 or delimiter == decimal):
        _checks.refuse(
            "delimiter", repr(delimiter), "one character that is not the decimal sign", 'delimiter=";"'
        )
    lines = [
        (i, line) for i, line in enumerate(text.splitlines(), 1) if line.strip() and line.strip()[0] != "#"
    ]
    candidates = [delimiter] if delimiter else [mark for mark in ("\t", ";", ",", " ") if mark != decimal]
    for mark in candidates:
        rows = [(i, _cells(line, mark)) for i, line in lines]
        rows = [(i, cells) for i, cells in rows if any(cells)]
        table = _numbers(rows, wanted, decimal)
        if len(table) >= _LEAST_CLASSES:
            array = np.array(table)
            return (array[:, :2] if isinstance(size, tuple) else array[:, 0]), array[:, -1]
    first = lines[0][1].strip()[:60] if lines else "no lines"
    return _checks.refuse(
        "table",
        f"a file without {_LEAST_CLASSES} rows of numbers in columns {wanted} (it starts: {first})",
        "rows of sizes and values, columns counted from 0 or named as in the header",
        f'delimiter=";", decimal="{"," if decimal == "." else "."}", or other columns',
        error=DistributionError,
    )


def class_shares(
    sizes: ArrayLike, values: ArrayLike, form: str, classes: str, percent: bool, tolerance: float
) -> tuple[FloatArray, FloatArray, float]:
    """Return class limits (n + 1,), shares (n,) that sum to one, and their sum as it came.

    Sizes are in any one unit; `form` and `classes` as in `Measured.from_csv`.
    """
    choice("form", form, FORMS)
    choice("classes", classes, CLASSES)
    if not isinstance(percent, bool):
        _checks.refuse("percent", repr(percent), "True or False", error=DistributionError)
    x, y = np.array(sizes, dtype=np.float64), np.array(values, dtype=np.float64)
    if form == "cumulative":
        if classes != "limits" or x.ndim != 1:
            _checks.refuse(
                "classes",
                repr(classes),
                "'limits' and one size per row for form='cumulative'",
                error=DistributionError,
            )
        limits, content = _increasing(x), _steps(_valid(y, x.size), percent, tolerance)
    else:
        limits, content = _classes(x, y, classes)
        if form == "density":
            content = content * np.diff(limits)
        elif form == "log_density":
            content = content * np.diff(np.log(limits))
        elif form == "log10_density":
            content = content * np.diff(np.log10(limits))
    if (content < 0.0).any():
        k = int(np.argmin(content))
        _checks.refuse(
            f"shares[{k}]",
            f"{content[k]:g}",
            "shares of at least 0",
            "check the column",
            error=DistributionError,
        )
    populated = int((content > 0.0).sum())
    if populated < _LEAST_CLASSES:
        _checks.refuse(
            "shares",
            f"{populated} classes with content",
            f"at least {_LEAST_CLASSES}",
            "Monodisperse or LogNormal for a distribution that is narrower than the classes",
            error=DistributionError,
        )
    total = float(content.sum())
    whole = 100.0 if percent else 1.0
    if form != "counts" and abs(total / whole - 1.0) > tolerance:
        hint = (
            f"tolerance={abs(total / whole - 1):.2g} if the table is cut off, form='counts' for plain counts"
        )
        if abs(total * (0.01 if whole == 1.0 else 100.0) / whole - 1.0) <= tolerance:
            hint = f"percent={not percent}"
        _checks.refuse(
            "shares",
            f"a sum of {total:g}",
            f"{whole:g} within {100 * tolerance:g} %",
            hint,
            error=DistributionError,
        )
    return limits, content / total, total


def _cells(line: str, mark: str) -> list[str]:
    if mark == " ":
        return line.split()
    return [cell.strip() for cell in next(csv.reader([line], delimiter=mark))]


def _numbers(rows: list[tuple[int, list[str]]], wanted: list[Column], decimal: str) -> list[list[float]]:
    """Rows of the wanted columns from the first that is all numbers on; empty where there is none."""
    names = {column for column in wanted if isinstance(column, str)}
    places: list[int] = [column for column in wanted if isinstance(column, int)]
    if names:
        header = next((k for k, (_, cells) in enumerate(rows) if names <= set(cells)), None)
        if header is None:
            return []
        cells = rows[header][1]
        places = [column if isinstance(column, int) else cells.index(column) for column in wanted]
        rows = rows[header + 1 :]
    table: list[list[float]] = []
    for line, cells in rows:
        found = [_number(cells[p], decimal) if 0 <= p < len(cells) else None for p in places]
        if len(table) > 0 and found[-1] is None and (places[-1] >= len(cells) or not cells[places[-1]]):
            found[-1] = float("nan")  # a blank: allowed where a row holds a limit only
        numbers = [number for number in found if number is not None]
        if len(numbers) == len(found):
            table.append(numbers)
        elif table:
            _checks.refuse(
                f"line {line}",
                repr(" ".join(cells))[:60],
                "numbers only, once the rows of numbers have begun",
                "remove what follows the table, or start such lines with #",
                error=DistributionError,
            )
    return table


def _number(cell: str, decimal: str) -> float | None:
    if decimal == ",":
        if "." in cell:
            return None
        cell = cell.replace(",", ".")
    try:
        return float(cell.rstrip("% "))
    except ValueError:
        return None


def _increasing(sizes: FloatArray) -> FloatArray:
    return _checks.array(
        "sizes",
        sizes,
        above=0.0,
        increasing=True,
        hint="sizes above 0 in increasing order; leave out a row for size 0, reverse a table that falls",
        error=DistributionError,
    )


def _valid(values: FloatArray, rows: int) -> FloatArray:
    return _checks.array("values", values, size=rows, hint="a number in each row", error=DistributionError)


def _steps(reached: FloatArray, percent: bool, tolerance: float) -> FloatArray:
    """Contents of the classes between the points of a cumulative undersize curve."""
    whole = 100.0 if percent else 1.0
    steps = np.diff(reached)
    if (steps < 0.0).any():
        k = int(np.argmax(steps < 0.0))
        _checks.refuse(
            f"cumulative[{k + 1}]",
            f"{reached[k + 1]:g} after {reached[k]:g}",
            "undersize values that never fall",
            f"{whole:g} minus the values if they are oversize",
            error=DistributionError,
        )
    if abs(reached[0]) > tolerance * whole:
        _checks.refuse(
            "cumulative[0]",
            f"{reached[0]:g}",
            f"0 within {100 * tolerance:g} % of the whole, so that the smallest class has a lower limit",
            "add a first row with the size below which nothing lies",
            error=DistributionError,
        )
    if abs(reached[-1] / whole - 1.0) > tolerance:
        other = abs(reached[-1] * (0.01 if not percent else 100.0) / whole - 1.0) <= tolerance
        _checks.refuse(
            "cumulative[-1]",
            f"{reached[-1]:g}",
            f"{whole:g} within {100 * tolerance:g} %",
            f"percent={not percent}" if other else "add a last row with the size above which nothing lies",
            error=DistributionError,
        )
    return np.asarray(steps)


def _classes(x: FloatArray, y: FloatArray, classes: str) -> tuple[FloatArray, FloatArray]:
    """Limits and the value of each class."""
    if x.ndim == 2:
        if classes != "limits":
            _checks.refuse("classes", repr(classes), "'limits' for two size columns", error=DistributionError)
        lower, upper = _increasing(x[:, 0]), _increasing(x[:, 1])
        gap = np.abs(upper[:-1] / lower[1:] - 1.0) > _SAME_LIMIT
        if gap.any() or upper[-1] <= lower[-1]:
            k = int(np.argmax(gap)) if gap.any() else lower.size - 1
            after = f"then from {lower[k + 1]:g}" if gap.any() else "at the end"
            _checks.refuse(
                "limits",
                f"a class from {lower[k]:g} to {upper[k]:g}, {after}",
                "classes that follow each other without gap or overlap",
                "add empty classes where the instrument left some out",
                error=DistributionError,
            )
        return np.append(lower, upper[-1]), _valid(y, lower.size)
    x = _increasing(x)
    if classes == "mid-points":
        return _limits_around(x), _valid(y, x.size)
    if classes == "limits":
        if y.size != x.size - 1:
            _checks.refuse(
                "classes",
                "'limits' with one size per value",
                "one limit more than values, or a lower and an upper column",
                "size=(0, 1), classes='lower' or 'upper' for one limit per value, or classes='mid-points'",
                error=DistributionError,
            )
        return x, _valid(y, x.size - 1)
    unused = -1 if classes == "lower" else 0
    if y.size != x.size or not (np.isnan(y[unused]) or y[unused] == 0.0):
        _checks.refuse(
            f"values[{unused}]",
            f"{y[unused]:g}",
            f"0 or a blank: with classes={classes!r} this row has no other limit",
            "add a row with the missing limit and the value 0",
            error=DistributionError,
        )
    return x, _valid(y[:-1] if classes == "lower" else y[1:], x.size - 1)


def _limits_around(middle: FloatArray) -> FloatArray:
    """Limits half-way in log size between mid-points, the outer ones by reflection."""
    log = np.log(middle)
    steps = np.diff(log)
    uneven = steps[1:] / steps[:-1]
    if middle.size < _LEAST_CLASSES or uneven.max() > _UNEVEN or uneven.min() < 1.0 / _UNEVEN:
        _checks.refuse(
            "mid-points",
            "log spacings that differ more than twofold from one class to the next",
            "at least three mid-points, spaced evenly in log size",
            "classes='limits' with a lower and an upper column",
            error=DistributionError,
        )
    inner = 0.5 * (log[1:] + log[:-1])
    return np.asarray(np.exp(np.concatenate([[2.0 * log[0] - inner[0]], inner, [2.0 * log[-1] - inner[-1]]])))
