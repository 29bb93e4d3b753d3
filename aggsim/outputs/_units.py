"""Units in which sizes and times are shown, and the output times that are shown."""

from __future__ import annotations

from typing import Any, NamedTuple, NoReturn, Protocol

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import TimesError
from aggsim.result import Result


class Structure(Protocol):
    """Gives the outer diameter of aggregates, such as a fractal structure."""

    def collision_diameter(self, volume: FloatArray, /) -> FloatArray:
        """Outer diameter [m] of particles with this volume of solids [m3]."""


class Unit(NamedTuple):
    """A unit to show values in: `size` in SI, and its name as plain text."""

    size: float
    name: str

    @property
    def glyph(self) -> str:
        """Name with the micro sign, for figures."""
        return self.name.replace("um", "µm")


LENGTHS = (Unit(1e-9, "nm"), Unit(1e-6, "um"), Unit(1e-3, "mm"), Unit(1.0, "m"))
_LOG_LIKE = 0.2  # a median of the times below this share of the last tells a logarithmic spacing
TIMES = (Unit(1.0, "s"), Unit(60.0, "min"), Unit(3600.0, "h"), Unit(86400.0, "d"))


def length_unit(lengths: FloatArray, unit: float | None = None) -> Unit:
    """The unit asked for [m], or the one in which the middle (in log) of their range reads best."""
    if unit is not None:
        size = _checks.scalar("unit", unit, "m", above=0.0, hint="unit=1e-6 for micrometres")
        for known in LENGTHS:
            if abs(size - known.size) <= 1e-9 * known.size:
                return known
        _checks.refuse(
            "unit", f"{size:g} m", "1e-9 (nm), 1e-6 (um), 1e-3 (mm) or 1 (m)", "unit=1e-6 for micrometres"
        )
    middle = float(np.sqrt(lengths.min() * lengths.max()))
    # 0.5 um is read more easily than 500 nm only beside larger sizes, so a unit starts at 0.6 of itself
    fitting = [known for known in LENGTHS if middle >= 0.6 * known.size]
    return fitting[-1] if fitting else LENGTHS[0]


def time_unit(time: float) -> Unit:
    """The unit in which `time` [s] reads best: the largest of which there are at least 2."""
    fitting = [known for known in TIMES if time >= 2.0 * known.size]
    return fitting[-1] if fitting else TIMES[0]


def table_time_unit(times: FloatArray) -> Unit:
    """The unit of a column of increasing times [s], which suits the middle one."""
    return time_unit(float(times[times.size // 2]))


def time_labels(times: FloatArray) -> list[str]:
    """Each time with its unit: one unit for all where it suits the shortest too, else the best for each."""
    common = time_unit(float(times[-1]))
    positive = times[times > 0.0]
    one = positive.size == 0 or positive[0] >= 0.1 * common.size
    units = [common if one else time_unit(float(t)) for t in times]
    return [f"{t / unit.size:.3g} {unit.name}" for t, unit in zip(times, units, strict=True)]


def log_like(times: FloatArray) -> bool:
    """True where output times [s] are spaced rather as their logarithms than as themselves."""
    positive = times[times > 0.0]
    return positive.size >= 3 and float(np.median(positive)) < _LOG_LIKE * float(positive[-1])


def evenly(count: int, at_most: int) -> list[int]:
    """At most so many of `count` indices with the first and the last, at one stride if half as many allow it."""
    for kept in range(min(at_most, count), at_most // 2, -1):
        if kept > 1 and (count - 1) % (kept - 1) == 0:
            return list(range(0, count, (count - 1) // (kept - 1)))
    return sorted(set(np.linspace(0, count - 1, min(at_most, count)).round().astype(int).tolist()))


def chosen_times(result: Result, times: Any, at_most: int) -> list[int]:
    """Indices of the output times nearest to `times` [s], or at most so many spread over the run.

    Raises TimesError for a time before the first or after the last output.
    """
    known = getattr(result, "times", None)
    if known is None:
        _checks.refuse(
            "result",
            f"a {type(result).__name__}",
            "the Result of simulate",
            "figures.train and tables.train, which take a steady state too",
        )
    if times is None:
        return evenly(known.size, at_most)
    raw = _checks.plain(times, "s")
    wanted = _checks.array("times", [raw] if np.ndim(raw) == 0 else raw, "s", error=TimesError)
    for k, time in enumerate(wanted.tolist()):
        _require_inside(f"times[{k}]", time, known)
    return sorted(set(np.abs(known[:, None] - wanted).argmin(axis=0).tolist()))


def chosen_time(result: Result, time: float | None) -> int:
    """Index of the output time nearest to `time` [s], the last without it.

    Raises TimesError for a time before the first or after the last output.
    """
    known = result.times
    if time is None:
        return known.size - 1
    wanted = _checks.scalar("time", time, "s", error=TimesError)
    _require_inside("time", wanted, known)
    return int(np.abs(known - wanted).argmin())


def _require_inside(name: str, time: float, known: FloatArray) -> None:
    slack = 1e-9 * float(known[-1])
    if not known[0] - slack <= time <= known[-1] + slack:
        _checks.refuse(
            name,
            f"{time:g} s",
            f"from the first to the last output time, {known[0]:g} to {known[-1]:g} s",
            "a time in seconds; the output nearest to it is shown",
            error=TimesError,
        )


def refuse_time(name: str, value: Any) -> NoReturn:
    """Refuse a time for a state that has none."""
    _checks.refuse(name, repr(value), "None, since a steady state has no times", error=TimesError)


def quantity(r: float) -> float:
    """Type of quantity r of ISO 9276-1, checked."""
    return _checks.scalar("r", r, least=0.0, hint="r=0 for number, 2 for surface, 3 for volume")


def shown_diameter(volume: FloatArray, sphere: FloatArray, structure: Structure | None) -> FloatArray:
    """Diameter on the size axis [m]: that of the sphere of equal volume, or the outer one of `structure`."""
    if structure is None:
        return sphere
    outer = np.asarray(structure.collision_diameter(volume), dtype=np.float64)
    if outer.shape != volume.shape or not (np.diff(outer) > 0.0).all() or not outer[0] > 0.0:
        _checks.refuse(
            "structure",
            repr(structure),
            "a structure whose outer diameter increases with the volume",
            "Fractal(particles, dimension=2.1)",
        )
    return outer


def kind_of_diameter(structure: Structure | None) -> str:
    """What the diameter on an axis is called."""
    return "volume-equivalent diameter" if structure is None else "outer diameter"
