"""One wording for every refusal: argument name, what came, what is allowed, what to try."""

from __future__ import annotations

import math
from typing import Any, NoReturn

import numpy as np
from numpy.typing import NDArray

from aggsim.errors import InputError

FloatArray = NDArray[np.float64]

SMALLEST_DIAMETER = 1e-10  # m, an atom
LARGEST_DIAMETER = 2e-2  # m, beyond any floc; a larger figure is a slip of units


def refuse(
    name: str, got: Any, allowed: str, hint: str = "", *, error: type[InputError] = InputError
) -> NoReturn:
    """Raise `error` in the house wording."""
    message = f"{name}={got} is not allowed; allowed: {allowed}."
    if hint:
        message += f" Try: {hint}"
    raise error(message)


def plain(value: Any, unit: str) -> Any:
    """Value of a quantity in `unit`; numbers and arrays come back unchanged.

    Quantities of the common units libraries are recognised by their methods. They must be converted before
    numpy sees them, because `numpy.asarray` drops the unit without a word.
    """
    if hasattr(value, "to_value"):
        return value.to_value(unit or "")
    if hasattr(value, "to") and hasattr(value, "magnitude"):
        return value.to(unit or "dimensionless").magnitude
    return value


def scalar(
    name: str,
    value: Any,
    unit: str = "",
    *,
    above: float | None = None,
    least: float | None = None,
    most: float | None = None,
    below: float | None = None,
    hint: str = "",
    error: type[InputError] = InputError,
) -> float:
    """Return `value` as a finite float inside the stated limits (`above` and `below` exclude the limit)."""
    allowed = _describe(unit, above, least, most, below)
    raw = plain(value, unit)
    if isinstance(raw, (str, bytes, bool)) or raw is None:
        refuse(name, repr(value), allowed, hint or "pass a plain number", error=error)
    try:
        number = float(raw)
    except (TypeError, ValueError):
        refuse(name, repr(value), allowed, hint or "pass a plain number", error=error)
    outside = (
        not math.isfinite(number)
        or (above is not None and not number > above)
        or (least is not None and not number >= least)
        or (most is not None and not number <= most)
        or (below is not None and not number < below)
    )
    if outside:
        refuse(name, _with_unit(number, unit), allowed, hint, error=error)
    return number


def count(name: str, value: Any, *, least: int = 1, most: int | None = None, hint: str = "") -> int:
    """Return `value` as an int of at least `least` (and at most `most`)."""
    allowed = f"a whole number, at least {least}" + (f", at most {most}" if most is not None else "")
    if isinstance(value, bool) or not isinstance(value, (int, np.integer)):
        refuse(name, repr(value), allowed, hint)
    if value < least or (most is not None and value > most):
        refuse(name, value, allowed, hint)
    return int(value)


def diameter(name: str, value: Any) -> float:
    """Return a particle diameter [m]; a size that no particle has is refused, with a guess at the unit meant."""
    number = scalar(name, value, "m", above=0.0, hint="a diameter in metres, such as 400e-9 for 400 nm")
    if number > LARGEST_DIAMETER:
        raise InputError(
            f"{name}={number:g} m is larger than a particle can be (at most {LARGEST_DIAMETER:g} m); "
            f"diameters are in metres. Try: {number:g}e-6 if you meant {number:g} um, "
            f"{number:g}e-9 if you meant {number:g} nm."
        )
    if number < SMALLEST_DIAMETER:
        raise InputError(
            f"{name}={number:g} m is smaller than an atom (at least {SMALLEST_DIAMETER:g} m); diameters are in metres. "
            f"Try: check the power of ten, and that this is not a volume [m3]."
        )
    return number


def array(
    name: str,
    value: Any,
    unit: str = "",
    *,
    above: float | None = None,
    least: float | None = None,
    most: float | None = None,
    size: int | None = None,
    increasing: bool = False,
    hint: str = "",
    error: type[InputError] = InputError,
) -> FloatArray:
    """Return `value` as a new one-dimensional float array that is finite, not empty and inside the limits."""
    allowed = "a one-dimensional array, " + _describe(unit, above, least, most, None)
    try:
        out: FloatArray = np.array(plain(value, unit), dtype=np.float64)
    except (TypeError, ValueError):
        refuse(name, repr(value), allowed, hint, error=error)
    if out.ndim != 1:
        refuse(name, f"an array of shape {out.shape}", allowed, hint, error=error)
    if out.size == 0:
        refuse(name, "an empty array", allowed, hint, error=error)
    if size is not None and out.size != size:
        refuse(name, f"an array of {out.size} values", f"{size} values", hint, error=error)
    bad = ~np.isfinite(out)
    if above is not None:
        bad |= ~(out > above)
    if least is not None:
        bad |= ~(out >= least)
    if most is not None:
        bad |= ~(out <= most)
    if bad.any():
        where = int(np.flatnonzero(bad)[0])
        refuse(f"{name}[{where}]", _with_unit(float(out[where]), unit), allowed, hint, error=error)
    if increasing and out.size > 1:
        steps = np.diff(out)
        if not (steps > 0).all():
            where = int(np.flatnonzero(~(steps > 0))[0])
            refuse(
                f"{name}[{where + 1}]",
                f"{out[where + 1]:g} after {out[where]:g}",
                "values that strictly increase",
                hint or "sort them and remove repeats",
                error=error,
            )
    return out


def _describe(
    unit: str, above: float | None, least: float | None, most: float | None, below: float | None
) -> str:
    limits = ["finite"]
    if above is not None:
        limits.append(f"above {above:g}")
    if least is not None:
        limits.append(f"at least {least:g}")
    if most is not None:
        limits.append(f"at most {most:g}")
    if below is not None:
        limits.append(f"below {below:g}")
    return ", ".join(limits) + (f" [{unit}]" if unit else "")


def _with_unit(number: float, unit: str) -> str:
    return f"{number:g} {unit}".rstrip()
