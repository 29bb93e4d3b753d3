"""The numerical error of what a result reports, from runs that were made less exactly."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import SimulationError
from aggsim.result.readings import Readings
from aggsim.sizes import SizeGrid

FIGURES = ("number", "M2", "M3", "D[1,0]", "D[3,2]", "D[4,3]", "d10", "d50", "d90")
"""The figures that an accuracy is asked for: number, moments, mean diameters, quantiles by volume."""


def figures_of(state: Readings) -> dict[str, FloatArray]:
    """Values (...) of all figures of a state."""
    d10, d50, d90 = np.moveaxis(state.quantile_diameter(np.array([0.1, 0.5, 0.9])), -1, 0)
    return {
        "number": state.total_number(),
        "M2": state.moment(2),
        "M3": state.moment(3),
        "D[1,0]": state.mean_diameter(1, 0),
        "D[3,2]": state.mean_diameter(3, 2),
        "D[4,3]": state.mean_diameter(4, 3),
        "d10": d10,
        "d50": d50,
        "d90": d90,
    }


_NEAR = 1.2  # an error may pass zero; it counts as the largest within this factor in time
# On a grid that begins with whole monomers quantiles are read across a change of spacing, where their error passes
# zero from place to place: each counts as the largest of the three, within this factor in time, and half as much again
_QUANTILES = ("d10", "d50", "d90")
_NEAR_MONOMERS, _AT_MONOMERS = 2.1, 1.5


@dataclass(frozen=True, eq=False)
class Snapshot(Readings):
    """Numbers (n_times, n_sections) [1/m3] on a grid."""

    grid: SizeGrid
    number: FloatArray

    @cached_property
    def figures(self) -> dict[str, FloatArray]:
        """Values (n_times,) of all figures."""
        return figures_of(self)

    @classmethod
    def of(cls, result: Any) -> Snapshot:
        """The numbers of a Result."""
        return cls(result.grid, result.number)

    @classmethod
    def with_bottom(cls, result: Any) -> Snapshot:
        """The numbers of a Result, with those of the first section, where smaller fragments are counted, twice."""
        number = np.array(result.number)
        number[:, 0] *= 2.0
        return cls(result.grid, number)

    @classmethod
    def without_and_with_top(cls, result: Any) -> tuple[Snapshot, Snapshot]:
        """The numbers of a Result, and those with what passed the top put back there by volume."""
        number = np.array([result.number, result.number])
        number[1, :, -1] += result.balance.beyond_grid / result.grid.volume[-1]
        both = cls(result.grid, number)  # read together, which takes little longer than one
        return _Part(result.grid, number[0], both, 0), _Part(result.grid, number[1], both, 1)


@dataclass(frozen=True, eq=False)
class _Part(Snapshot):
    """One of several snapshots on a grid that are read together."""

    whole: Snapshot
    place: int

    @cached_property
    def figures(self) -> dict[str, FloatArray]:
        return {name: values[self.place] for name, values in self.whole.figures.items()}


@dataclass(frozen=True, eq=False)
class Comparison:
    """Two runs that differ in one respect, and how many times the difference exceeds the error of the result."""

    cause: str
    one: Snapshot
    other: Snapshot
    over: float

    def error(self, first: FloatArray, second: FloatArray) -> FloatArray:
        """Relative error of a reading of both runs; none where there is nothing yet, as in a tank of clear liquid."""
        size = np.nan_to_num(np.abs(first))
        missed = np.nan_to_num(np.abs(first - second))
        relative: FloatArray = np.divide(missed, size, out=np.zeros_like(size), where=size > 0.0)
        return relative / self.over


@dataclass(frozen=True, eq=False)
class ErrorEstimate:
    """Estimated relative error of every figure of a result, by cause.

    `error["d50"]` is that of a figure in `FIGURES` (n_times,), `error.of(lambda r: r.moment(1.5))` that of any
    other reading.

    Attributes
    ----------
    times : (n_times,) s
    comparisons : tuple of Comparison
        What the estimate is made of. Causes: "size and time" (one coarse run stands for both), "top" (what passed
        the top of the grid), and with breakage "bottom" (fragments smaller than the first section).
    apart : callable
        Makes the comparisons with the causes "size" (discretisation) and "time" (integration) apart, which takes
        one more coarse run.
    floor : float
        What no estimate goes below: a small share of the tolerance of the integration.
    asked : float or None
        The accuracy that was asked for.
    runs : int
        Runs that were made in all.
    """

    times: FloatArray
    comparisons: tuple[Comparison, ...]
    apart: Callable[[], tuple[Comparison, ...]] | None = field(default=None, repr=False)
    floor: float = 0.0
    asked: float | None = None
    runs: int = 1

    def parts(self, read: Callable[[Readings], FloatArray]) -> dict[str, FloatArray]:
        """Relative error (n_times,) of a reading by cause; the first call makes one more coarse run."""
        return {c.cause: self._envelope(c.error(read(c.one), read(c.other))) for c in self._separate}

    def of(self, read: Callable[[Readings], FloatArray]) -> FloatArray:
        """Relative error (n_times,) of a reading, all causes together."""
        pairs = self.comparisons
        return self._sum({c.cause: self._envelope(c.error(read(c.one), read(c.other))) for c in pairs})

    def __getitem__(self, figure: str) -> FloatArray:
        if figure not in FIGURES:
            raise KeyError(f"{figure!r} is not one of {FIGURES}; error.of(read) takes any other reading")
        return self._sum(self._parts_of(figure, self.comparisons))

    @cached_property
    def _separate(self) -> tuple[Comparison, ...]:
        return self.comparisons if self.apart is None else self.apart()

    def _sum(self, parts: dict[str, FloatArray]) -> FloatArray:
        total: FloatArray = np.sum(list(parts.values()), axis=0) + self.floor
        return total

    def _parts_of(self, figure: str, pairs: tuple[Comparison, ...]) -> dict[str, FloatArray]:
        """`parts` of a named figure, from readings that each run makes once."""
        out = {}
        for c in pairs:
            if figure in _QUANTILES and c.one.grid.monomer is not None and c.cause not in {"top", "bottom"}:
                errors = [c.error(c.one.figures[q], c.other.figures[q]) for q in _QUANTILES]
                out[c.cause] = self._envelope(_AT_MONOMERS * np.max(errors, axis=0), _NEAR_MONOMERS)
            else:
                out[c.cause] = self._envelope(c.error(c.one.figures[figure], c.other.figures[figure]))
        return out

    @cached_property
    def largest(self) -> float:
        """The largest relative error of all figures at all times [1]."""
        return max(float(np.nanmax(self[figure])) for figure in FIGURES)

    @property
    def worst(self) -> str:
        """The figure with the largest error."""
        return max(FIGURES, key=lambda figure: float(np.nanmax(self[figure])))

    @property
    def met(self) -> bool:
        """True where the accuracy that was asked for is met, or none was."""
        return self.asked is None or self.largest <= self.asked

    def by_cause(self) -> dict[str, float]:
        """Largest relative error of all figures at all times by cause; the first call makes one more coarse run."""
        out: dict[str, float] = {}
        for figure in FIGURES:
            for cause, values in self._parts_of(figure, self._separate).items():
                out[cause] = max(out.get(cause, 0.0), float(np.nanmax(values)))
        return out

    def _envelope(self, values: FloatArray, factor: float = _NEAR) -> FloatArray:
        """Largest value within a factor in time of each output."""
        if not values.any():
            return np.zeros_like(values)
        t = self.times
        near = (t[None, :] <= factor * t[:, None]) & (t[None, :] >= t[:, None] / factor)
        largest: FloatArray = np.where(near, np.nan_to_num(values)[None, :], 0.0).max(axis=1)
        return largest

    def __repr__(self) -> str:
        figures = ", ".join(f"{name} {np.nanmax(self[name]):.1e}" for name in FIGURES)
        asked = (
            "" if self.asked is None else f"; asked for {self.asked:g}: {'met' if self.met else 'NOT met'}"
        )
        return f"ErrorEstimate(largest: {figures}; {self.runs} runs{asked})"

    def __getstate__(self) -> dict[str, Any]:
        # what further runs are made from may not travel to another process
        return {**self.__dict__, "apart": None}


class Later:
    """An estimate that is made when it is asked for first, and kept."""

    def __init__(self, source: ErrorEstimate | Callable[[], ErrorEstimate]) -> None:
        """Take the estimate, or the function that makes it."""
        self._source = source

    @property
    def ready(self) -> bool:
        """True where the estimate is there already."""
        return isinstance(self._source, ErrorEstimate)

    def get(self) -> ErrorEstimate:
        """The estimate."""
        if not isinstance(self._source, ErrorEstimate):
            self._source = self._source()
        return self._source

    def __getstate__(self) -> dict[str, Any]:
        # what an estimate is made from (kernels, user functions) may not travel to another process
        return {"_source": self._source if self.ready else _gone}


def _gone() -> ErrorEstimate:
    raise SimulationError(
        "the error of this result was not estimated before it was saved or sent to another process. "
        "Try: a look at `result.error` there."
    )
