"""The contract of a collision kernel, and its arithmetic: kernels add, scale and divide."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial
from typing import Any, ClassVar, NamedTuple, TypeAlias

import numpy as np
from numpy.typing import ArrayLike

from aggsim._checks import FloatArray, plain, refuse, scalar
from aggsim.errors import AggsimError, KernelError
from aggsim.kernels.strength import Strength

PairFunction: TypeAlias = Callable[[FloatArray, FloatArray], Any]
"""function(v, w) of two arrays of particle volumes [m3] that broadcast against each other."""

_SYMMETRY = 1e-10  # relative; round-off of any sane formula stays well below


@dataclass(frozen=True)
class Part:
    """One collision mechanism: scale * strength(time) * rate(v, w).

    Parameters
    ----------
    name : str
    rate : callable
        rate(v, w) -> collision rate [m3/s], symmetric, for arrays of volumes [m3] that broadcast.
    scale : float
        Factor [1], at least 0.
    strength : Strength, optional
        Factor in time [1].

    Raises
    ------
    KernelError
        If the name is empty, the rate cannot be called, or the scale is negative or not finite.
    """

    name: str
    rate: PairFunction
    scale: float = 1.0
    strength: Strength | None = None

    def __post_init__(self) -> None:
        if not isinstance(self.name, str) or not self.name:
            refuse("name", repr(self.name), "a text that is not empty", error=KernelError)
        if not callable(self.rate):
            refuse("rate", repr(self.rate), "a function rate(v, w) of two volumes [m3]", error=KernelError)
        scale = scalar("scale", self.scale, least=0.0, hint="a factor such as 0.3", error=KernelError)
        object.__setattr__(self, "scale", scale)


class PartMatrix(NamedTuple):
    """A part on a grid: `matrix` (n, n) [m3/s] includes the scale, `strength` is the factor in time."""

    name: str
    matrix: FloatArray
    strength: Strength | None


class PartFunction(NamedTuple):
    """A part as `rate(v, w)` [m3/s], which includes the scale; `strength` is the factor in time."""

    name: str
    rate: PairFunction
    strength: Strength | None


@dataclass(frozen=True, repr=False)
class Kernel:
    """A sum of named collision mechanisms.

    `kernel(v, w, time)` [m3/s] is the K of dn_k/dt = 1/2 sum_{i+j=k} K_ij n_i n_j - n_k sum_j K_kj n_j.
    Kernels are combined as formulas are written:

    - `a + b` and `sum([a, b])` join the parts; of equal names the later one gets " 2", " 3", ... appended;
    - `0.3 * a`, `a * 0.3` and `a / 40.0` scale every part;
    - `a * f` and `a / f` do so with a function f(v, w) of two volumes: an efficiency, a stability ratio;
    - `a * Strength(...)` makes every part depend on time;
    - `a["shear"]` is the kernel of that part alone.

    Parameters
    ----------
    parts : tuple of Part
        At least one, with different names.

    Raises
    ------
    KernelError
        If there is no part, two names are equal, or a factor is not allowed.
    """

    parts: tuple[Part, ...]

    # numpy numbers and arrays leave the arithmetic to this class
    __array_ufunc__: ClassVar[None] = None

    def __post_init__(self) -> None:
        parts = tuple(self.parts)
        if not parts or not all(isinstance(part, Part) for part in parts):
            refuse("parts", repr(self.parts), "one or more Part(name, rate)", error=KernelError)
        names = [part.name for part in parts]
        if len(set(names)) < len(names):
            refuse("names", names, "names that differ", "kernel.named(...) or a + b", error=KernelError)
        object.__setattr__(self, "parts", parts)

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the parts, in order."""
        return tuple(part.name for part in self.parts)

    def named(self, name: str) -> Kernel:
        """The kernel under another name; with several parts, "name: " is put before each of theirs."""
        if len(self.parts) == 1:
            return Kernel((replace(self.parts[0], name=name),))
        return Kernel(tuple(replace(part, name=f"{name}: {part.name}") for part in self.parts))

    def __getitem__(self, name: str) -> Kernel:
        if name not in self.names:
            refuse("name", repr(name), "one of " + ", ".join(map(repr, self.names)), error=KernelError)
        return Kernel((self.parts[self.names.index(name)],))

    def __call__(self, v: ArrayLike, w: ArrayLike, time: float = 0.0) -> FloatArray:
        """Collision rate [m3/s] of particles of volumes `v` and `w` [m3], which broadcast, at `time` [s].

        Raises
        ------
        KernelError
            If a volume is not positive and finite, or a part does not return collision rates.
        """
        first, second = _volumes("v", v), _volumes("w", w)
        total = np.zeros(np.broadcast_shapes(first.shape, second.shape))
        for part in self.parts:
            factor = 1.0 if part.strength is None else part.strength(time)
            total = total + factor * _evaluate(part, first, second)
        return total[()]

    def part_functions(self) -> tuple[PartFunction, ...]:
        """Every part as a function of two arrays of volumes [m3]: scaled, checked, without the factor in time."""
        return tuple(PartFunction(p.name, partial(_evaluate, p), p.strength) for p in self.parts)

    def part_matrices(self, volume: ArrayLike) -> tuple[PartMatrix, ...]:
        """Every part on all pairs of `volume` [m3], shape (n,): scaled, checked, without the factor in time.

        The matrices are exactly symmetric: what a formula leaves of asymmetry at round-off is averaged.

        Raises
        ------
        KernelError
            If a rate is negative, not finite, of the wrong shape, or asymmetric by more than 1e-10.
        """
        sizes = _volumes("volume", volume)
        if sizes.ndim != 1:
            refuse("volume", f"an array of shape {sizes.shape}", "shape (n,)", error=KernelError)
        out = []
        for part in self.parts:
            matrix = _evaluate(part, sizes[:, None], sizes[None, :])
            _require_symmetric(part.name, matrix, sizes)
            # halves first: the sum of two large rates must not overflow
            out.append(PartMatrix(part.name, 0.5 * matrix + 0.5 * matrix.T, part.strength))
        return tuple(out)

    def __add__(self, other: Any) -> Kernel:
        if isinstance(other, Kernel):
            parts = list(self.parts)
            for part in other.parts:
                parts.append(replace(part, name=_free_name(part.name, [p.name for p in parts])))
            return Kernel(tuple(parts))
        if isinstance(other, (int, float)) and other == 0:  # the start value of sum()
            return self
        return NotImplemented

    __radd__ = __add__  # reached from sum() only, whose start value is 0

    def __mul__(self, other: Any) -> Kernel:
        if isinstance(other, Kernel):
            refuse(
                "factor",
                "a kernel",
                "a number, a function of two volumes, or a Strength",
                "a + b for mechanisms that act side by side",
                error=KernelError,
            )
        if isinstance(other, Strength):
            return self._each(lambda part: replace(part, strength=_joined(part.strength, other)))
        if callable(other):
            return self._each(lambda part: replace(part, rate=_Times(part.rate, other)))
        number = scalar("factor", other, least=0.0, hint="a factor such as 0.3", error=KernelError)
        return self._each(lambda part: replace(part, scale=part.scale * number))

    __rmul__ = __mul__

    def __truediv__(self, other: Any) -> Kernel:
        if isinstance(other, (Kernel, Strength)):
            refuse(
                "divisor",
                f"a {type(other).__name__}",
                "a number above 0, or a function of two volumes such as a stability ratio",
                error=KernelError,
            )
        if callable(other):
            return self._each(lambda part: replace(part, rate=_Over(part.rate, other)))
        number = scalar("divisor", other, above=0.0, hint="a stability ratio such as 40", error=KernelError)
        return self._each(lambda part: replace(part, scale=part.scale / number))

    def _each(self, change: Callable[[Part], Part]) -> Kernel:
        return Kernel(tuple(change(part) for part in self.parts))

    def __repr__(self) -> str:
        terms = []
        for part in self.parts:
            scale = "" if part.scale == 1.0 else f"{part.scale:.6g} * "
            terms.append(f"{scale}{part.name}" + ("" if part.strength is None else " * strength(time)"))
        return f"Kernel({' + '.join(terms)})"


def from_function(function: PairFunction, *, name: str = "custom") -> Kernel:
    """A kernel from one's own formula.

    Parameters
    ----------
    function : callable
        function(v, w) -> collision rate [m3/s], symmetric and not negative, for arrays of particle volumes
        [m3] that broadcast: v (n, 1) and w (1, n) where a whole grid is asked for.
    name : str
        What the part is called in tables and figures.

    Raises
    ------
    KernelError
        If `function` cannot be called; when evaluated, if its values are not collision rates.
    """
    return Kernel((Part(name, function),))


@dataclass(frozen=True)
class _Times:
    rate: PairFunction
    factor: PairFunction

    def __call__(self, v: FloatArray, w: FloatArray) -> FloatArray:
        rate: FloatArray = np.asarray(self.rate(v, w)) * np.asarray(self.factor(v, w))
        return rate


@dataclass(frozen=True)
class _Over:
    rate: PairFunction
    divisor: PairFunction

    def __call__(self, v: FloatArray, w: FloatArray) -> FloatArray:
        rate: FloatArray = np.asarray(self.rate(v, w)) / np.asarray(self.divisor(v, w))
        return rate


def _joined(first: Strength | None, second: Strength) -> Strength:
    return second if first is None else first * second


def _free_name(name: str, taken: list[str]) -> str:
    if name not in taken:
        return name
    stem, _, tail = name.rpartition(" ")
    if not (tail.isdigit() and stem in taken):  # "shear 2" counts on to "shear 3"
        stem = name
    return next(trial for k in range(2, len(taken) + 3) if (trial := f"{stem} {k}") not in taken)


def _volumes(name: str, value: ArrayLike) -> FloatArray:
    try:
        out = np.asarray(plain(value, "m3"), dtype=np.float64)
    except (TypeError, ValueError):
        refuse(name, repr(value), "volumes above 0 [m3]", error=KernelError)
    bad = ~((out > 0.0) & (out < np.inf))
    if bad.any():
        refuse(name, f"{out[bad].flat[0]:g} m3", "finite, above 0 [m3]", error=KernelError)
    return out


def _evaluate(part: Part, v: FloatArray, w: FloatArray) -> FloatArray:
    """Scaled rate of a part on the broadcast shape of `v` and `w`, checked to be finite and not negative."""
    shape = np.broadcast_shapes(v.shape, w.shape)
    try:
        # what goes wrong in a formula shows in its values, which are checked below
        with np.errstate(all="ignore"):
            raw = part.scale * np.asarray(part.rate(v, w), dtype=np.float64)
    except AggsimError:
        raise
    except (TypeError, ValueError) as problem:
        raise KernelError(
            f"kernel part {part.name!r} could not be evaluated for v of shape {v.shape} and w of shape "
            f"{w.shape} ({problem}). Try: a formula that works on arrays (numpy.where in place of if, "
            f"numpy.sqrt in place of math.sqrt)."
        ) from problem
    try:
        rate: FloatArray = np.broadcast_to(raw, shape)
    except ValueError:
        refuse(
            f"kernel part {part.name!r}: rate",
            f"an array of shape {raw.shape}",
            f"the shape {shape} of the pairs v{v.shape}, w{w.shape}",
            "a formula that only combines v and w element by element",
            error=KernelError,
        )
    bad = ~((rate >= 0.0) & (rate < np.inf))
    if bad.any():
        where = tuple(np.argwhere(bad)[0])
        pair = [float(np.broadcast_to(size, shape)[where]) for size in (v, w)]
        refuse(
            f"kernel part {part.name!r}: rate for {_pair(*pair)}",
            f"{rate[where]:g} m3/s",
            "finite, at least 0 [m3/s]",
            "check the formula, its units, and every function that it is multiplied or divided by",
            error=KernelError,
        )
    return rate


def _require_symmetric(name: str, matrix: FloatArray, sizes: FloatArray) -> None:
    asymmetric = np.abs(matrix - matrix.T) > _SYMMETRY * np.maximum(matrix, matrix.T)
    if asymmetric.any():
        i, j = np.argwhere(asymmetric)[0]
        refuse(
            f"kernel part {name!r}: rate for {_pair(float(sizes[i]), float(sizes[j]))}",
            f"{matrix[i, j]:.12g} m3/s one way and {matrix[j, i]:.12g} m3/s the other",
            f"rates that agree to {_SYMMETRY:g}, since v meets w as often as w meets v",
            "a formula that does not change when v and w are exchanged",
            error=KernelError,
        )


def _pair(v: float, w: float) -> str:
    diameters = [(6.0 / math.pi * size) ** (1.0 / 3.0) for size in (v, w)]
    return f"volumes {v:g} and {w:g} m3 (diameters {diameters[0]:g} and {diameters[1]:g} m)"
