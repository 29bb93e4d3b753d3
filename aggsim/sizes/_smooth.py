"""Smooth functions of the section index kappa: particle volume, and cumulative distributions.

Pivot k sits at kappa = k and its section reaches from k - 1/2 to k + 1/2.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline

from aggsim._checks import FloatArray
from aggsim.errors import GridError

_NEGATIVE_SHARE = 5e-3  # a spline that undershoots more than this does not resolve the distribution
_SUM_DIFFERS = 1e-2  # nor does one whose integral differs by more from the sum over the sections
_STEPS = 14  # of Newton's method with halving; a cubic needs some 6, a bend at an end a few more
_SETTLED = 4e-15  # in kappa
_HALVINGS = 48  # bisections of one section: kappa to 4e-15
_WILD_BEND = 3.0  # half the change of bend along a section; from 4 on the curve would not rise everywhere


@dataclass(frozen=True)
class SizeCurve:
    """v(kappa), smooth and rising: between pivots v = v_k + step_k expm1(c s) / expm1(c) with s = kappa - k.

    The bend c goes linearly from its value at the left pivot to that at the right one, each of which is the
    logarithm of the ratio of the steps on both sides, so that slopes agree.
    """

    pivot: FloatArray
    step: FloatArray
    left_bend: FloatArray
    right_bend: FloatArray

    @classmethod
    def through(cls, volume: FloatArray) -> SizeCurve:
        if volume.size < 2:
            raise GridError("volume has one pivot; a section width needs at least two. Try: a finer grid.")
        step = np.diff(volume)
        bend = np.log(step[1:] / step[:-1]) if volume.size > 2 else np.log(volume[1:] / volume[:1])
        if volume.size == 2:  # nothing but the ratio is known: geometric
            return cls(volume, step, bend, bend)
        return cls(volume, step, np.append(bend[:1], bend), np.append(bend, bend[-1:]))

    def slope_at_pivots(self) -> FloatArray:
        last = self.right_bend[-1:]
        step, bend = np.append(self.step, self.step[-1:] * np.exp(last)), np.append(self.left_bend, last)
        flat = bend == 0.0
        return np.asarray(step * np.where(flat, 1.0, bend / np.where(flat, 1.0, np.expm1(bend))))

    def volume_at(self, kappa: FloatArray) -> FloatArray:
        left = np.clip(np.floor(kappa).astype(np.intp), 0, self.step.size - 1)
        s = kappa - left
        mean = 0.5 * (self.left_bend[left] + self.right_bend[left])
        half = 0.5 * (self.right_bend[left] - self.left_bend[left])
        bend = mean + np.clip(half, -_WILD_BEND, _WILD_BEND) * (2.0 * np.clip(s, 0.0, 1.0) - 1.0)
        flat = bend == 0.0
        rise = np.where(flat, s, np.expm1(bend * s) / np.where(flat, 1.0, np.expm1(bend)))
        return np.asarray(self.pivot[left] + self.step[left] * rise)

    def kappa_at(self, volume: FloatArray) -> FloatArray:
        """Inverse of `volume_at` between the first and the last pivot."""
        left = np.clip(np.searchsorted(self.pivot, volume, side="right") - 1, 0, self.step.size - 1)
        low = left.astype(np.float64)
        high = low + 1.0
        for _ in range(_HALVINGS):
            middle = 0.5 * (low + high)
            below = self.volume_at(middle) <= volume
            low, high = np.where(below, middle, low), np.where(below, high, middle)
        return np.asarray(np.where(volume == self.pivot[left], left, 0.5 * (low + high)))


@dataclass(frozen=True)
class Cumulative:
    """Q(kappa) of several rows: a polynomial in kappa - origin_j on piece j, highest power first.

    knots (rows or 1, m + 1); reached (rows, m + 1), Q at the knots; origin (m,); power (degree + 1, rows, m).
    """

    knots: FloatArray
    reached: FloatArray
    origin: FloatArray
    power: FloatArray

    @classmethod
    def spline(cls, weight: FloatArray) -> tuple[Cumulative, NDArray[np.bool_]]:
        """Cubic spline of the weight, and for each row whether it resolves the distribution."""
        n = weight.shape[-1]
        curve = CubicSpline(np.arange(n), weight, axis=-1)
        integral = curve.antiderivative()
        first, last = integral(-0.5), integral(n - 0.5)
        total = last - first
        inner = np.arange(1, n - 1, dtype=np.float64)
        fine = (np.arange(4 * n) + 0.5) / 4.0 - 0.5
        undershoot = -np.minimum(curve(fine), 0.0).sum(axis=-1) / 4.0
        resolved = (undershoot <= _NEGATIVE_SHARE) & (np.abs(total - 1.0) <= _SUM_DIFFERS)
        total = np.where(resolved, total, 1.0)
        power = np.moveaxis(integral.c, 1, 2) / total[:, None]
        power[-1] -= (first / total)[:, None]
        reached = np.concatenate([first[:, None], integral(inner), last[:, None]], axis=-1)
        knots = np.concatenate([[-0.5], inner, [n - 0.5]])[None]
        origin = np.arange(n - 1, dtype=np.float64)
        return cls(knots, (reached - first[:, None]) / total[:, None], origin, power), resolved

    @classmethod
    def limited(cls, weight: FloatArray) -> Cumulative:
        """Piecewise linear density with limited slopes on sections that narrow where a size stands alone."""
        rows, n = weight.shape
        sums = np.maximum.accumulate(np.maximum(np.cumsum(weight, axis=-1), 0.0), axis=-1)
        sums = np.concatenate([np.zeros((rows, 1)), sums], axis=-1) / sums[:, -1:]
        held = np.diff(sums, axis=-1)
        padded = np.concatenate([held[:, 1:2], held, held[:, -2:-1]], axis=-1)
        left, right = held - padded[:, :-2], padded[:, 2:] - held
        neighbours = padded[:, :-2] + padded[:, 2:]
        narrow = held > neighbours
        half = np.where(narrow, 0.5 * neighbours / np.where(narrow, held, 1.0), 0.5)
        half = np.maximum(half, 1e-12)  # a lone size keeps a width that can be divided by
        steepest = np.minimum(2.0 * np.minimum(np.abs(left), np.abs(right)), 0.5 * np.abs(left + right))
        slope = np.where(left * right > 0.0, np.sign(left) * steepest, 0.0)
        pivot = np.arange(n, dtype=np.float64)
        knots = np.stack([pivot - half, pivot + half], axis=-1).reshape(rows, 2 * n)
        reached = np.stack([sums[:, :-1], sums[:, 1:]], axis=-1).reshape(rows, 2 * n)
        # in a section Q = below + held/2 - slope/8 + held t + slope t^2/2 with t = (kappa - k)/(2 half)
        power = np.zeros((3, rows, 2 * n - 1))
        power[0, :, ::2] = 0.5 * slope / (2.0 * half) ** 2
        power[1, :, ::2] = held / (2.0 * half)
        power[2, :, ::2] = sums[:, :-1] + 0.5 * held - slope / 8.0
        power[2, :, 1::2] = sums[:, 1:-1]
        origin = np.repeat(pivot, 2)[:-1]
        return cls(knots, reached, origin, power)

    def rows(self, which: NDArray[np.bool_]) -> Cumulative:
        return Cumulative(self.knots, self.reached[which], self.origin, self.power[:, which])

    def below(self, kappa: FloatArray) -> FloatArray:
        """Q (rows, m) at kappa (m,)."""
        rows = self.reached.shape[0]
        knots = np.broadcast_to(self.knots, self.reached.shape)
        piece = (knots[:, None, 1:-1] <= kappa[None, :, None]).sum(axis=-1)
        value = self._value(piece, np.broadcast_to(kappa, (rows, kappa.size)))
        return np.clip(value, 0.0, 1.0)

    def inverse(self, p: FloatArray) -> FloatArray:
        """Kappa (rows, m) where Q first reaches p (m,)."""
        rows = np.arange(self.reached.shape[0])[:, None]
        climbed = np.maximum.accumulate(self.reached, axis=-1)
        piece = (climbed[:, None, 1:-1] < p[None, :, None]).sum(axis=-1)
        knots = np.broadcast_to(self.knots, self.reached.shape)
        low, high = knots[rows, piece], knots[rows, piece + 1]
        origin = self.origin[piece]
        low, high = low - origin, high - origin
        powers = [power[rows, piece] for power in self.power]  # looked up once, not at every step
        offset = 0.5 * (low + high)
        with np.errstate(divide="ignore", invalid="ignore"):
            for _ in range(_STEPS):
                value, slope = powers[0], np.zeros_like(offset)
                for power in powers[1:]:
                    slope = slope * offset + value
                    value = value * offset + power
                short = value < p
                low, high = np.where(short, offset, low), np.where(short, high, offset)
                # Newton's step where it stays inside, halving elsewhere
                step = offset - (value - p) / slope
                before = offset
                offset = np.where((step >= low) & (step <= high), step, 0.5 * (low + high))
                if np.abs(offset - before).max() <= _SETTLED:
                    break
        return np.asarray(origin + offset)

    def _value(self, piece: NDArray[np.intp], kappa: FloatArray) -> FloatArray:
        rows = np.arange(self.reached.shape[0])[:, None]
        offset = kappa - self.origin[piece]
        value = np.zeros_like(kappa)
        for power in self.power:
            value = value * offset + power[rows, piece]
        return value


def by_kind(rows: FloatArray, size: int, ask: Callable[[Cumulative], FloatArray]) -> FloatArray:
    """Ask the spline of the rows it resolves, the limited reconstruction of the others."""
    answer = np.empty((rows.shape[0], size))
    smooth, resolved = Cumulative.spline(rows)
    if resolved.any():
        answer[resolved] = ask(smooth.rows(resolved))
    if not resolved.all():
        answer[~resolved] = ask(Cumulative.limited(rows[~resolved]))
    return answer
