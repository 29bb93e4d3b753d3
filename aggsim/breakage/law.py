"""Breakage of single particles: a rate and what they break into."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any, ClassVar, NamedTuple, NoReturn, Protocol

import numpy as np
from numpy.typing import ArrayLike, NDArray

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import AggsimError, BreakageError

_SAME_SIZE = 1e-9  # relative; a pivot that stands for a primary particle may miss its volume by round-off
_QUADRATURE = 1e-7  # relative error of number or volume above which fragments are refused
_SPREAD = 1e-4  # least relative variance of fragment volumes with which their number can be corrected


class FragmentLaw(Protocol):
    """What every law of fragments offers."""

    def pieces(self, parent: FloatArray) -> FloatArray:
        """Mean number of fragments [1], at least 2, of parents (k,) [m3]."""

    def point_masses(
        self, volume: FloatArray, parents: NDArray[np.int64]
    ) -> tuple[NDArray[np.int64], FloatArray, FloatArray]:
        """Parent, volume [m3] and mean number (m,) of the fragments of the pivots `volume[parents]`."""


class FragmentTable(NamedTuple):
    """Breakage on a grid of n pivots, as m point masses.

    Attributes
    ----------
    rate : ndarray, shape (n,)
        Breakage rate of each pivot [1/s].
    parent : ndarray of int, shape (m,)
        Index of the pivot that breaks, in ascending order.
    volume : ndarray, shape (m,)
        Volume of a fragment [m3].
    count : ndarray, shape (m,)
        Mean number of such fragments per breakage [1].
    """

    rate: FloatArray
    parent: NDArray[np.int64]
    volume: FloatArray
    count: FloatArray  # type: ignore[assignment]  # in place of tuple.count


@dataclass(frozen=True, kw_only=True)
class Breakage:
    """Particles that fall apart by themselves or in the flow, whatever their neighbours do.

        dn(v)/dt = int_v^inf b(v, u) S(u) n(u) du - S(v) n(v)

    with the rate S and the density b of fragment volumes v from a parent u. `0.5 * breakage` scales the rate;
    `breakage * strength` makes it depend on time.

    Parameters
    ----------
    rate : callable
        rate(volume) -> S [1/s] for an array of volumes [m3]; see `rates`.
    fragments : fragment law
        b; see `fragments`. One's own law has `pieces(parent)` and `point_masses(volume, parents)`, and for
        `monte_carlo` also `sample(parent, generator)`.
    smallest : float, optional
        Particles of this volume or less do not break [m3]: that of a primary particle. Fragments may be smaller.
    strength : kernels.Strength, optional
        Factor in time [1].
    name : str
        What tables and figures call it.

    Raises
    ------
    BreakageError
        If an argument is of another kind.
    """

    rate: Callable[[FloatArray], Any]
    fragments: FragmentLaw
    smallest: float | None = None
    strength: Any = None
    name: str = "breakage"

    # numpy numbers leave the arithmetic to this class
    __array_ufunc__: ClassVar[None] = None

    def __post_init__(self) -> None:
        if not callable(self.rate):
            _refuse(
                "rate",
                repr(self.rate),
                "a function rate(volume) [1/s] of an array of volumes [m3]",
                "rates.power_law(coefficient=..., exponent=0.0) for a constant rate",
            )
        if isinstance(self.fragments, type) or not all(
            callable(getattr(self.fragments, duty, None)) for duty in ("pieces", "point_masses")
        ):
            _refuse(
                "fragments",
                repr(self.fragments),
                "a law of fragments with `pieces` and `point_masses`",
                "fragments.uniform_binary() with its brackets, or fragments.from_function(density, pieces)",
            )
        if self.smallest is not None:
            hint = "a volume in m3, such as Particles(...).volume"
            least = _checks.scalar("smallest", self.smallest, "m3", least=0.0, hint=hint, error=BreakageError)
            object.__setattr__(self, "smallest", least)
        if self.strength is not None and not _is_strength(self.strength):
            _refuse("strength", repr(self.strength), "a Strength", "Strength.steps(times, values)")
        if not isinstance(self.name, str) or not self.name:
            _refuse("name", repr(self.name), "a text that is not empty")

    def rates(self, volume: ArrayLike) -> FloatArray:
        """Breakage rates (n,) [1/s] of particles of `volume` (n,) [m3]; 0 up to `smallest`.

        Raises
        ------
        BreakageError
            If a rate is negative or not finite, or a volume is not positive.
        """
        x = _checks.array("volume", volume, "m3", above=0.0, error=BreakageError)
        out = np.zeros(x.shape)
        breaks = np.ones(x.shape, dtype=bool)
        if self.smallest is not None:
            breaks = x > self.smallest * (1.0 + _SAME_SIZE)
        size = x[breaks]
        if size.size == 0:
            return out
        try:
            # what goes wrong in a formula shows in its values, which are checked below
            with np.errstate(all="ignore"):
                rate = np.broadcast_to(np.asarray(self.rate(size), dtype=np.float64), size.shape)
        except AggsimError:
            raise
        except (TypeError, ValueError) as problem:
            raise BreakageError(
                f"{self.name!r}: the rate could not be evaluated for volumes of shape {size.shape} ({problem}). "
                f"Try: a formula rate(volume) that works on arrays (numpy.where in place of if)."
            ) from problem
        bad = ~((rate >= 0.0) & (rate < np.inf))
        if bad.any():
            where = int(np.flatnonzero(bad)[0])
            _refuse(
                f"{self.name!r}: rate of {_particle(size[where])}",
                f"{rate[where]:g} 1/s",
                "finite, at least 0 [1/s]",
                "check the formula and its units; volumes are in m3",
            )
        out[breaks] = rate
        return out

    def table(self, volume: ArrayLike) -> FragmentTable:
        """Rates and fragments of the pivots `volume` (n,) [m3], which increase.

        The point masses of each parent make up its volume and its number of pieces. Fragments with a density are
        Gauss quadratures inside the cells between pivots: integrals over a cell of the density times a polynomial
        of degree 5 in v or in v**(1/2) are exact to round-off. Pivots with the rate 0 have no fragments.

        Raises
        ------
        BreakageError
            If a rate is negative or not finite, or fragments do not make up their parent.
        """
        x = _checks.array("volume", volume, "m3", above=0.0, increasing=True, error=BreakageError)
        rate = self.rates(x)
        parents = np.flatnonzero(rate)
        if parents.size == 0:
            return FragmentTable(rate, parents, np.zeros(0), np.zeros(0))
        pieces = self._pieces(x[parents])
        parent, fragment, count = self.fragments.point_masses(x, parents)
        self._require_fragments(x, parents, parent, fragment, count)
        place = np.searchsorted(parents, parent)
        share = fragment / x[parent]
        sums: list[FloatArray] = [
            np.bincount(place, count * share**k, minlength=parents.size).astype(np.float64) for k in range(3)
        ]
        self._require_conserved(x[parents], pieces, sums)
        return FragmentTable(rate, parent, fragment, count * _correction(pieces, sums, place, share))

    def __mul__(self, other: Any) -> Breakage:
        if _is_strength(other):
            return replace(self, strength=other if self.strength is None else self.strength * other)
        hint = "a factor such as 0.5, or a Strength"
        factor = _checks.scalar("factor", other, least=0.0, hint=hint, error=BreakageError)
        if isinstance(self.rate, _Scaled):
            return replace(self, rate=_Scaled(self.rate.rate, self.rate.factor * factor))
        return replace(self, rate=_Scaled(self.rate, factor))

    __rmul__ = __mul__

    def _pieces(self, size: FloatArray) -> FloatArray:
        pieces = np.broadcast_to(np.asarray(self.fragments.pieces(size), dtype=np.float64), size.shape)
        bad = ~((pieces >= 2.0 * (1.0 - _SAME_SIZE)) & (pieces < np.inf))
        if bad.any():
            where = int(np.flatnonzero(bad)[0])
            _refuse(f"{self.name!r}: pieces of {_particle(size[where])}", f"{pieces[where]:g}", "at least 2")
        return pieces

    def _require_fragments(
        self,
        x: FloatArray,
        parents: NDArray[np.int64],
        parent: NDArray[np.int64],
        fragment: FloatArray,
        count: FloatArray,
    ) -> None:
        if (np.diff(parent) < 0).any() or not np.isin(parent, parents).all():
            _refuse(
                f"{self.name!r}: parents of the point masses",
                f"{parent}",
                "indices among `parents` in ascending order",
            )
        bad = ~((fragment > 0.0) & (fragment <= x[parent]) & (count >= 0.0) & (count < np.inf))
        if bad.any():
            where = int(np.flatnonzero(bad)[0])
            _refuse(
                f"{self.name!r}: fragments of {_particle(x[parent[where]])}",
                f"{count[where]:g} of {fragment[where]:g} m3",
                "volumes above 0 and at most the parent, numbers finite and at least 0",
            )

    def _require_conserved(self, size: FloatArray, pieces: FloatArray, sums: list[FloatArray]) -> None:
        hint = (
            "a density with int v b dv = parent and int b dv = pieces over 0 < v < parent; in shares z = v/parent, "
            "divide by the parent once"
        )
        wrong = ~(np.abs(sums[1] - 1.0) <= _QUADRATURE)
        if wrong.any():
            where = int(np.flatnonzero(wrong)[0])
            x, total = float(size[where]), float(size[where] * sums[1][where])
            change = f"{total - x:g} m3 created" if total > x else f"{x - total:g} m3 lost"
            _refuse(
                f"{self.name!r}: volume of all fragments of {_particle(x)}",
                f"{total:g} m3, {change},",
                f"the volume of the parent, {x:g} m3",
                hint,
            )
        wrong = ~(np.abs(sums[0] - pieces) <= _QUADRATURE * pieces)
        if wrong.any():
            where = int(np.flatnonzero(wrong)[0])
            _refuse(
                f"{self.name!r}: number of fragments of {_particle(size[where])}",
                f"{sums[0][where]:g}",
                f"pieces={pieces[where]:g}",
                hint,
            )


@dataclass(frozen=True)
class _Scaled:
    rate: Callable[[FloatArray], Any]
    factor: float

    def __call__(self, volume: FloatArray) -> FloatArray:
        rate: FloatArray = self.factor * np.asarray(self.rate(volume))
        return rate


def _correction(
    pieces: FloatArray, sums: list[FloatArray], place: NDArray[np.int64], share: FloatArray
) -> FloatArray:
    """Factors 1 + a + b z on the counts that take the last digits out of number and volume."""
    number, volume, square = sums
    missing, lost = pieces - number, 1.0 - volume
    spread = number * square - volume * volume
    both = spread > _SPREAD * number * square
    spread = np.where(both, spread, 1.0)
    a = np.where(both, (missing * square - lost * volume) / spread, lost / volume)
    b = np.where(both, (lost * number - missing * volume) / spread, 0.0)
    return 1.0 + a[place] + b[place] * share


def _is_strength(value: Any) -> bool:
    return callable(value) and callable(getattr(value, "on", None)) and hasattr(value, "jumps")


def _refuse(name: str, got: Any, allowed: str, hint: str = "") -> NoReturn:
    _checks.refuse(name, got, allowed, hint, error=BreakageError)


def _particle(volume: float) -> str:
    return f"a particle of {volume:g} m3 (diameter {(6.0 / math.pi * volume) ** (1.0 / 3.0):g} m)"
