"""Fragments that are spread over all sizes up to their parent."""

from __future__ import annotations

import math
from abc import ABC, abstractmethod
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy import special

from aggsim._checks import FloatArray, refuse
from aggsim.breakage import _quadrature, _sampling
from aggsim.breakage._quadrature import Mask, Panels
from aggsim.errors import AggsimError, BreakageError

PointMasses = tuple[NDArray[np.int64], FloatArray, FloatArray]

_TAIL = 9.0  # standard deviations; what lies beyond is below round-off
_HUMP = 3.0  # standard deviations that one rule resolves
_PRECISION = 1e-13
_JUMP = 1e-10
_SMALLEST_SHARE = 1e-60  # an unknown density is not resolved any closer to the ends
_PAIRED = 1e-7  # share of all fragments that may lack their counterpart
_KNOWN = 1e-9  # least share whose complement tells it apart
_WHOLE = 1e-9  # relative; an exponent such as -2/3 makes a whole number of pieces up to round-off


class SpreadLaw(ABC):
    """Fragments with a density b(v, u) of volumes v from 0 to that of the parent u."""

    @abstractmethod
    def pieces(self, parent: ArrayLike) -> FloatArray:
        """Mean number of fragments [1] of a parent of volume `parent` [m3], of any shape."""

    @abstractmethod
    def density(self, volume: ArrayLike, parent: ArrayLike) -> FloatArray:
        """Mean number of fragments per volume [1/m3] at `volume` of a `parent` [m3], which broadcast."""

    def point_masses(self, volume: FloatArray, parents: NDArray[np.int64]) -> PointMasses:
        """Quadrature of the fragments of the pivots `volume[parents]` inside the cells between pivots.

        Parameters
        ----------
        volume : ndarray, shape (n,)
            Pivots, increasing [m3].
        parents : ndarray of int, shape (k,)
            Indices of the pivots that break, increasing.

        Returns
        -------
        parent, volume, count : ndarray, shape (m,) each
            Index of the parent, volume [m3] and mean number [1] of fragments.
        """
        panels = self._panels(volume, parents)
        size = volume[parents[panels.parent]][:, None]
        at = _quadrature.points(panels, self._exponents())
        count = (at.weight * self._share_density(at.share, at.rest, size)).ravel()
        there = count != 0.0
        parent = np.repeat(parents[panels.parent], at.share.shape[1])
        return parent[there], (at.share * size).ravel()[there], count[there]

    @abstractmethod
    def sample(self, parent: FloatArray, generator: np.random.Generator) -> FloatArray:
        """Fragments of one breakage of each parent, drawn at random.

        Parameters
        ----------
        parent : ndarray, shape (m,)
            Volumes [m3].
        generator : numpy.random.Generator
            The only source of chance.

        Returns
        -------
        ndarray, shape (m, k)
            Volumes [m3]; each row adds up to its parent. A piece below the range of floats is 0.

        Raises
        ------
        BreakageError
            If the law does not say what the fragments of a single event are.
        """

    @abstractmethod
    def _share_density(self, share: FloatArray, rest: FloatArray, parent: FloatArray) -> FloatArray:
        """u b(z u, u) for z = `share` and 1 - z = `rest`, neither of them 0."""

    def _exponents(self) -> tuple[float, float]:
        """Powers of z and of 1 - z that the density goes with at the ends."""
        return 0.0, 0.0

    def _panels(self, volume: FloatArray, parents: NDArray[np.int64]) -> Panels:
        return _quadrature.refined(_quadrature.cells(volume[parents], volume), self._too_wide)

    def _too_wide(self, panels: Panels) -> Mask:
        """Panels on which the density is no polynomial of low degree."""
        return np.zeros(panels.low.shape, dtype=bool)


class ShareLaw(SpreadLaw):
    """Fragments whose shares of the parent follow one law for parents of all sizes."""

    def pieces(self, parent: ArrayLike) -> FloatArray:
        return np.full(np.shape(parent), self._number())[()]

    def density(self, volume: ArrayLike, parent: ArrayLike) -> FloatArray:
        v, u = np.broadcast_arrays(np.asarray(volume, dtype=np.float64), np.asarray(parent, dtype=np.float64))
        out = np.zeros(v.shape)
        inside = (v > 0.0) & (v < u)
        v, u = v[inside], u[inside]
        out[inside] = self._share_density(v / u, (u - v) / u, u) / u
        return out[()]

    def _number(self) -> float:
        return 2.0


@dataclass(frozen=True)
class Parabolic(ShareLaw):
    """See `fragments.parabolic`."""

    shape: float

    def _share_density(self, share: FloatArray, rest: FloatArray, parent: FloatArray) -> FloatArray:
        return self.shape + (6.0 - 3.0 * self.shape) * (share - rest) ** 2

    def sample(self, parent: FloatArray, generator: np.random.Generator) -> FloatArray:
        # a mixture of the uniform law and that of C = 0, 3 (2 z - 1)**2, or of C = 3, 6 z (1 - z)
        uniform = generator.random(parent.size)
        if self.shape <= 2.0:
            chance = 1.0 - 0.5 * self.shape
            other = 0.5 + 0.5 * np.cbrt(generator.uniform(-1.0, 1.0, parent.size))
        else:
            chance = self.shape - 2.0
            other = generator.beta(2.0, 2.0, parent.size)
        return _sampling.pair(parent, np.where(generator.random(parent.size) < chance, other, uniform))


@dataclass(frozen=True)
class Beta(ShareLaw):
    """See `fragments.beta`."""

    shape: float

    def _share_density(self, share: FloatArray, rest: FloatArray, parent: FloatArray) -> FloatArray:
        # powers of 4 z (1 - z) neither overflow nor lose digits for a large shape
        q = self.shape
        factor = 8.0 * math.exp(-(q * math.log(4.0) + special.betaln(q, q)))
        return factor * (4.0 * share * rest) ** (q - 1.0)

    def sample(self, parent: FloatArray, generator: np.random.Generator) -> FloatArray:
        return _sampling.dirichlet(parent, 2, self.shape, generator)

    def _exponents(self) -> tuple[float, float]:
        return self.shape - 1.0, self.shape - 1.0

    def _too_wide(self, panels: Panels) -> Mask:
        wide = _doubles(panels)
        if self.shape > 6.0:  # beyond a polynomial that one rule resolves
            near = np.stack([panels.low, panels.high])
            low, high = (self.shape - 1.0) * np.log(np.maximum(4.0 * near * (1.0 - near), 1e-300))
            wide |= (high - low > 0.5 * _HUMP**2) & (high > -0.5 * _TAIL**2)
        return wide


@dataclass(frozen=True)
class PowerLaw(ShareLaw):
    """See `fragments.power_law`."""

    exponent: float

    def _number(self) -> float:
        return (self.exponent + 2.0) / (self.exponent + 1.0)

    def _share_density(self, share: FloatArray, rest: FloatArray, parent: FloatArray) -> FloatArray:
        return (self.exponent + 2.0) * share**self.exponent

    def sample(self, parent: FloatArray, generator: np.random.Generator) -> FloatArray:
        number = self._number()
        pieces = round(number)
        if abs(number - pieces) > _WHOLE * number:
            below, above = (f"{(2 - p) / (p - 1):.12g} ({p} pieces)" for p in (int(number), int(number) + 1))
            refuse(
                "exponent of fragments that are drawn at random",
                f"{self.exponent:g}, {number:g} pieces on average,",
                "(2 - p)/(p - 1) with a whole number p of pieces",
                f"{below} or {above}; or simulate, which needs averages",
                error=BreakageError,
            )
        return _sampling.dirichlet(parent, pieces, 1.0 / (pieces - 1), generator)

    def _exponents(self) -> tuple[float, float]:
        return self.exponent, 0.0

    def _too_wide(self, panels: Panels) -> Mask:
        return _doubles(panels)


@dataclass(frozen=True)
class LogNormalPair(ShareLaw):
    """See `fragments.lognormal`."""

    median_share: float
    gsd: float

    def _share_density(self, share: FloatArray, rest: FloatArray, parent: FloatArray) -> FloatArray:
        return self._one(share) + self._one(rest)

    def sample(self, parent: FloatArray, generator: np.random.Generator) -> FloatArray:
        sigma = math.log(self.gsd)
        below_whole = special.ndtr(-math.log(self.median_share) / sigma)
        depth = special.ndtri(below_whole * generator.random(parent.size))
        # the law ends at 1, round-off a little later
        return _sampling.pair(parent, np.minimum(self.median_share * np.exp(sigma * depth), 1.0))

    def _one(self, share: FloatArray) -> FloatArray:
        sigma = math.log(self.gsd)
        below_whole = special.ndtr(-math.log(self.median_share) / sigma)
        depth = np.log(share / self.median_share) / sigma
        return np.exp(-0.5 * depth * depth) / (math.sqrt(2.0 * math.pi) * sigma * below_whole * share)

    def _too_wide(self, panels: Panels) -> Mask:
        sigma = math.log(self.gsd)
        first = self.median_share * math.exp(-_TAIL * sigma)
        last = self.median_share * math.exp(_TAIL * sigma)
        low, high = panels.low, panels.high
        near = (low < last) & (high > first) & (high > low * (1.0 + 1e-9) * min(math.exp(2.0 * sigma), 2.0))
        # the other piece, a share of at least 1/2
        far = (1.0 - high < last) & (1.0 - low > first) & (high - low > sigma)
        return near | far


@dataclass(frozen=True)
class FunctionLaw(SpreadLaw):
    """See `fragments.from_function`."""

    function: Callable[[FloatArray, FloatArray], Any]
    number: float | Callable[[FloatArray], Any]

    def pieces(self, parent: ArrayLike) -> FloatArray:
        u = np.asarray(parent, dtype=np.float64)
        number = self.number(u) if callable(self.number) else self.number
        return np.broadcast_to(np.asarray(number, dtype=np.float64), u.shape)[()]

    def density(self, volume: ArrayLike, parent: ArrayLike) -> FloatArray:
        v, u = np.asarray(volume, dtype=np.float64), np.asarray(parent, dtype=np.float64)
        shape = np.broadcast_shapes(v.shape, u.shape)
        try:
            # what goes wrong in a formula shows in its values, which are checked below
            with np.errstate(all="ignore"):
                out: FloatArray = np.broadcast_to(np.asarray(self.function(v, u), dtype=np.float64), shape)
        except AggsimError:
            raise
        except (TypeError, ValueError) as problem:
            raise BreakageError(
                f"the density of fragments could not be evaluated for volumes of shape {v.shape} and parents of "
                f"shape {u.shape} ({problem}). Try: a formula density(v, parent) that works on arrays "
                f"(numpy.where in place of if, numpy.exp in place of math.exp)."
            ) from problem
        bad = ~((out >= 0.0) & (out < np.inf))
        if bad.any():
            where = tuple(np.argwhere(bad)[0])
            v, u = (np.broadcast_to(size, shape)[where] for size in (v, u))
            refuse(
                f"density of fragments of {v:g} m3 from a parent of {u:g} m3",
                f"{out[where]:g} 1/m3",
                "finite, at least 0 [1/m3]",
                "check the formula; v is below its parent",
                error=BreakageError,
            )
        return out[()]

    def sample(self, parent: FloatArray, generator: np.random.Generator) -> FloatArray:
        if parent.size == 0:
            return np.zeros((0, 2))
        size, place = np.unique(parent, return_inverse=True)
        # panels on which an integral is right are halved, so that the polynomials are right as well
        panels = _quadrature.finer(self._resolved(size, np.zeros(0)))
        at = _quadrature.points(panels)
        count = at.weight * self._share_density(at.share, at.rest, size[panels.parent][:, None])
        self._require_pairs(size, panels, at, count)
        # the smaller one of the two
        small = ~panels.upper
        return _sampling.pair(parent, _sampling.shares(panels.only(small), count[small], place, generator))

    def _require_pairs(
        self, size: FloatArray, panels: Panels, at: _quadrature.Points, count: FloatArray
    ) -> None:
        """Refuse fragments of `size` (k,) [m3] that are not always a piece and the rest."""
        hint = "a law of `fragments`, one's own with a method `sample`, or simulate, which needs averages"
        pieces = self.pieces(size)
        wrong = np.flatnonzero(~(np.abs(pieces - 2.0) <= 2.0 * _PAIRED))
        if wrong.size:
            i = wrong[0]
            refuse(
                "pieces of fragments that are drawn at random",
                f"{pieces[i]:g} for a parent of {size[i]:g} m3",
                "2, since an average does not say how more pieces share their parent",
                hint,
                error=BreakageError,
            )
        known = np.minimum(at.share, at.rest) > _KNOWN
        share, rest = np.where(known, at.rest, at.share), np.where(known, at.share, at.rest)
        mirrored = at.weight * self._share_density(share, rest, size[panels.parent][:, None])
        lonely = np.bincount(panels.parent, np.abs(count - mirrored).sum(axis=1))
        number = np.bincount(panels.parent, count.sum(axis=1))
        wrong = np.flatnonzero((lonely > 2.0 * _PAIRED) | (np.abs(number - 2.0) > 2.0 * _PAIRED))
        if wrong.size:
            i = wrong[0]
            refuse(
                "density of fragments that are drawn at random",
                f"a law with {number[i]:g} fragments of {size[i]:g} m3, {lonely[i]:g} without a counterpart,",
                "two fragments, with equal densities at v and parent - v",
                hint,
                error=BreakageError,
            )

    def _share_density(self, share: FloatArray, rest: FloatArray, parent: FloatArray) -> FloatArray:
        return parent * self.density(share * parent, parent)

    def _panels(self, volume: FloatArray, parents: NDArray[np.int64]) -> Panels:
        return self._resolved(volume[parents], volume)

    def _resolved(self, size: FloatArray, volume: FloatArray) -> Panels:
        """Panels of parents of `size` (k,) [m3], cut at the pivots `volume` (n,) [m3], that hold the density."""
        scale = np.stack([self.pieces(size), np.ones(size.shape)], axis=1)

        def unresolved(panels: Panels) -> Mask:
            whole, gap = self._amounts(panels, size)
            halves, _ = self._amounts(_quadrature.halved(panels), size)
            error = np.abs(halves[: len(whole)] + halves[len(whole) :] - whole)
            limit = scale[panels.parent]
            wide = (error > _PRECISION * limit).any(axis=1) | (gap > _JUMP * limit[:, 0])
            least = np.where(panels.upper, _PRECISION, _SMALLEST_SHARE)
            return np.logical_and(wide, panels.high > least)

        return _quadrature.refined(_quadrature.cells(size, volume), unresolved)

    def _amounts(self, panels: Panels, size: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Number and share of the volume (m, 2) in panels; number (m,) that a jump beside an end would hide."""
        parent = size[panels.parent][:, None]
        at = _quadrature.points(panels)
        density = self._share_density(at.share, at.rest, parent)
        count = at.weight * density
        # no node is within 1 % of an end
        step = self._share_density(*_quadrature.ends(panels), parent) - density @ _quadrature.to_ends()
        gap = 0.01 * (panels.high - panels.low) * np.abs(step).max(axis=1)
        return np.stack([count.sum(axis=1), (count * at.share).sum(axis=1)], axis=1), gap


def _doubles(panels: Panels) -> Mask:
    """Panels away from the ends over which the share more than doubles: too much for a power of it."""
    return (panels.low > 0.0) & (panels.high > 2.0 * (1.0 + 1e-9) * panels.low)
