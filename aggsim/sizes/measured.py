"""A starting distribution from the table that an instrument exports."""

from __future__ import annotations

import copy
import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path

import numpy as np
from numpy.typing import ArrayLike
from scipy.interpolate import CubicHermiteSpline, CubicSpline
from scipy.optimize import brentq

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import DistributionError
from aggsim.sizes import _table, distribution
from aggsim.sizes.distribution import StartingDistribution, amount_as_number
from aggsim.sizes.means import diameter_of, volume_of

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(12)


@dataclass(frozen=True, eq=False)
class Measured(StartingDistribution):
    """A measured distribution: shares of number or of volume in size classes.

    Made by `Measured.from_csv` or `Measured.from_classes`. The cumulative distribution of the measured
    quantity is a cubic spline through the class limits over ln d, made monotone [1]: each class holds exactly
    its share, and the density is continuous and nowhere negative. The other quantity follows from the particle
    volume.

    `class_limits` (n + 1,), diameters [m]; `class_shares` (n,) of the measured quantity, sum 1; `kind`, that
    quantity, "number" or "volume"; `number`, particles per volume of suspension [1/m3]; `summary`, what was
    read and assumed.

    Raises DistributionError for a table that is not a distribution.

    [1] Hyman (1983), SIAM J. Sci. Stat. Comput. 4, 645, doi:10.1137/0904045.
    """

    class_limits: FloatArray
    class_shares: FloatArray
    kind: str
    number: float
    summary: str = ""

    def __post_init__(self) -> None:
        _table.choice("kind", self.kind, ("number", "volume"), 'kind="volume" for laser diffraction')
        limits, shares, _ = _table.class_shares(
            self.class_limits, self.class_shares, "fraction", "limits", percent=False, tolerance=1e-9
        )
        for edge in (limits[0], limits[-1]):
            _checks.diameter("class_limits", edge)
        for name, array in (("class_limits", limits), ("class_shares", shares)):
            array.flags.writeable = False
            object.__setattr__(self, name, array)
        object.__setattr__(self, "number", _checks.scalar("number", self.number, "1/m3", above=0.0))

    @classmethod
    def from_classes(
        cls,
        limits: ArrayLike,
        shares: ArrayLike,
        *,
        kind: str,
        percent: bool = False,
        tolerance: float = 0.01,
        number: float | None = None,
        volume_fraction: float | None = None,
        mass_concentration: float | None = None,
        density: float | None = None,
    ) -> Measured:
        """Return the distribution with these shares between these class limits.

        `limits` (n + 1,), increasing diameters [m]; `shares` (n,) of `kind` "number" or "volume" [1, or %].
        Shares that add up to the whole within `tolerance` [1] are normalised. The amount of particles:
        `number` [1/m3], `volume_fraction` [1], or `mass_concentration` [kg/m3] with `density` [kg/m3].

        Raises DistributionError for shares that are negative or do not add up, limits that do not increase,
        fewer than three classes with content; InputError for an amount that is missing or impossible.
        """
        tolerance = _table.tolerated(tolerance)
        x = np.array(_checks.plain(limits, "m"), dtype=np.float64)
        parts = _table.class_shares(x, shares, "fraction", "limits", percent, tolerance)
        return cls._of(parts, kind, percent, "", number, volume_fraction, mass_concentration, density)

    @classmethod
    def from_csv(
        cls,
        path: str | Path,
        *,
        size_unit: float | str,
        kind: str,
        form: str,
        classes: str = "limits",
        size: _table.Column | tuple[_table.Column, _table.Column] = 0,
        value: _table.Column = 1,
        percent: bool = False,
        tolerance: float = 0.01,
        delimiter: str | None = None,
        decimal: str = ".",
        number: float | None = None,
        volume_fraction: float | None = None,
        mass_concentration: float | None = None,
        density: float | None = None,
    ) -> Measured:
        """Return the distribution in a delimited text file, as particle sizers export them.

        Parameters
        ----------
        path : str or Path
            Text file. Headers, blank lines and lines that start with # may precede the numbers.
        size_unit : float or str
            Metres per unit of size: 1e-6, or "um", "nm", "mm", "m".
        kind : str
            Quantity measured: "number" (counting, electrical sensing zone) or "volume" (laser diffraction).
        form : str
            "fraction" in each class, "counts" (fractions of any sum), "cumulative" undersize, "density" dQ/dd
            per unit of size, "log_density" dQ/dln d, "log10_density" dQ/dlog10 d.
        classes : str
            What the sizes are: "limits" (lower and upper in two columns; one column for "cumulative"),
            "lower" or "upper" limit of the class in the same row, or geometric "mid-points". With "lower" the
            last row, with "upper" the first row gives the missing limit and must hold 0 or a blank.
        size, value : int or str
            Columns, counted from 0 or named as in the header; a pair for lower and upper limits.
        percent : bool
            Values are percentages.
        tolerance : float
            Deviation of the sum from 1 (or 100) [1] that is normalised away; more is refused.
        delimiter, decimal : str
            Delimiter (found among tab, semicolon, comma and blanks if None) and decimal sign, "." or ",".
        number, volume_fraction, mass_concentration, density : float
            Amount as in `from_classes`.

        Raises
        ------
        DistributionError
            Where the file does not hold a distribution; the message names the row or value.
        InputError
            For an amount that is missing or impossible.
        """
        tolerance, unit = _table.tolerated(tolerance), _table.metres(size_unit)
        raw = Path(path).read_bytes()
        try:
            text = raw.decode("utf-8-sig")
        except UnicodeDecodeError:
            text = raw.decode(
                "latin-1"
            )  # every byte is a character there; only headers hold other than ASCII
        sizes, values = _table.read_columns(text, size, value, delimiter, decimal)
        try:
            for edge in (sizes.min(), sizes.max()):
                _checks.diameter("size", edge * unit)
        except ValueError as error:
            raise DistributionError(f"sizes times size_unit={size_unit!r}: {error}") from error
        limits, shares, total = _table.class_shares(sizes, values, form, classes, percent, tolerance)
        parts = (limits * unit, shares, total)
        name = f" in {Path(path).name}"
        return cls._of(parts, kind, percent, name, number, volume_fraction, mass_concentration, density)

    @classmethod
    def _of(
        cls,
        parts: tuple[FloatArray, FloatArray, float],
        kind: str,
        percent: bool,
        where: str,
        number: float | None,
        volume_fraction: float | None,
        mass_concentration: float | None,
        density: float | None,
    ) -> Measured:
        limits, shares, total = parts
        used = np.flatnonzero(shares)
        summary = (
            f"{used.size} {kind} classes{where} from {limits[used[0]]:.4g} to {limits[used[-1] + 1]:.4g} m; "
            f"the shares added up to {total:.6g}{' %' if percent else ''} and were divided by that; "
            "density within the classes from a monotone cubic spline of the cumulative share over ln d"
        )
        single = cls(limits, shares, kind, 1.0, summary)
        amount = amount_as_number(single.moment(1.0), number, volume_fraction, mass_concentration, density)
        return single * amount

    def __mul__(self, factor: float) -> Measured:
        changed = copy.copy(self)
        object.__setattr__(changed, "number", self.number * distribution.factor(factor))
        return changed

    @property
    def breaks(self) -> tuple[float, ...]:
        return tuple(self._edges.tolist())

    @cached_property
    def log_width(self) -> float:
        """Median width of the populated classes in ln v: no finer feature can be in the table."""
        return float(np.median(np.diff(np.log(self._edges))))

    @property
    def _support(self) -> tuple[float, float]:
        return float(self._edges[0]), float(self._edges[-1])

    @cached_property
    def _edges(self) -> FloatArray:
        """Volumes [m3] at the limits of the classes from the first to the last with content."""
        used = np.flatnonzero(self.class_shares)
        return volume_of(self.class_limits[used[0] : used[-1] + 2])

    @cached_property
    def _curve(self) -> CubicHermiteSpline[np.float64]:
        """Cumulative share over ln d: slopes of a spline, limited to what keeps a cubic monotone [1]."""
        log = np.log(self.class_limits)
        reached = np.append(0.0, np.cumsum(self.class_shares))
        rise = self.class_shares / np.diff(log)
        steepest = 3.0 * np.minimum(np.append(rise[:1], rise), np.append(rise, rise[-1:]))
        return CubicHermiteSpline(log, reached, np.clip(CubicSpline(log, reached)(log, 1), 0.0, steepest))

    @cached_property
    def _power(self) -> int:
        """Exponent of v in the measured quantity."""
        return 1 if self.kind == "volume" else 0

    def _per_volume(self, v: FloatArray) -> FloatArray:
        """Density of the measured quantity over v, integral 1, inside the edges."""
        slope = self._curve(np.log(np.clip(diameter_of(v), *self.class_limits[[0, -1]])), 1)
        return np.asarray(np.maximum(slope, 0.0) / (3.0 * v))  # round-off next to an empty class

    @cached_property
    def _nodes(self) -> tuple[FloatArray, FloatArray]:
        """Volumes [m3] and how much of the measured quantity they stand for, sum 1."""
        volumes, widths = distribution.nodes(self._edges, self.log_width)
        return volumes, self._per_volume(volumes) * widths

    @cached_property
    def _per_particle(self) -> float:
        """Measured quantity per particle: 1, or the mean volume [m3]."""
        volumes, content = self._nodes
        return float(1.0 / np.sum(content / volumes**self._power))

    def moment(self, k: float) -> float:
        if k == self._power:
            return self.number * self._per_particle
        volumes, content = self._nodes
        return float(self.number * self._per_particle * np.sum(content * volumes ** (k - self._power)))

    def density(self, volume: ArrayLike) -> FloatArray:
        v = np.asarray(volume, dtype=np.float64)
        inside = (v >= self._edges[0]) & (v <= self._edges[-1])
        safe = np.where(inside, v, self._edges[0])
        n = self.number * self._per_particle * self._per_volume(safe) / safe**self._power
        return np.asarray(np.where(inside, n, 0.0))

    def number_below(self, volume: ArrayLike) -> FloatArray:
        return self._below(volume, 0)

    def volume_below(self, volume: ArrayLike) -> FloatArray:
        return self._below(volume, 1)

    def _below(self, volume: ArrayLike, k: int) -> FloatArray:
        """Moment k of the particles up to `volume`: whole classes, then the part of the last one."""
        edges = self._edges
        v = np.clip(np.asarray(volume, dtype=np.float64), edges[0], edges[-1])
        if k == self._power:
            share = np.clip(self._curve(np.log(diameter_of(v))), 0.0, 1.0)
        else:
            at, content = self._nodes
            content = content * at ** float(k - self._power)
            whole = np.append(0.0, np.cumsum(content))[np.searchsorted(at, edges)]
            lower = np.clip(np.searchsorted(edges, v, side="right") - 1, 0, edges.size - 2)
            half = 0.5 * np.log(v / edges[lower])[..., None]
            inner = edges[lower][..., None] * np.exp(half * (1.0 + _NODES))
            part = self._per_volume(inner) * inner ** float(k - self._power + 1) * half
            share = whole[lower] + part @ _WEIGHTS
        return np.asarray(self.number * self._per_particle * share)

    def limits(self, share: float = 1e-9) -> tuple[float, float]:
        share = distribution.share(share)
        if share not in self._limits_found:  # a search each, and every run asks for the same few
            self._limits_found[share] = (
                self._reach(self.number_below, share * self.total_number),
                self._reach(self.volume_below, (1.0 - share) * self.total_volume),
            )
        return self._limits_found[share]

    @cached_property
    def _limits_found(self) -> dict[float, tuple[float, float]]:
        return {}

    def _reach(self, below: Callable[[float], FloatArray], wanted: float) -> float:
        """Volume [m3] at which a cumulative reaches what is wanted; an edge where round-off decides."""
        low, high = np.log(self._edges[[0, -1]]).tolist()

        def excess(log_volume: float) -> float:
            return float(below(math.exp(log_volume))) - wanted

        if excess(low) >= 0.0:
            return float(self._edges[0])
        if excess(high) <= 0.0:
            return float(self._edges[-1])
        return math.exp(brentq(excess, low, high, xtol=1e-12))
