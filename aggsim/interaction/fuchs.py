"""The stability ratio: how many times slower particles stick than they meet by diffusion alone."""

from __future__ import annotations

import math
import warnings
from collections.abc import Callable
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from aggsim._checks import FloatArray, refuse
from aggsim.errors import AccuracyWarning, InputError
from aggsim.interaction.profile import PairEnergy

EnergyFunction: TypeAlias = Callable[[FloatArray, FloatArray, FloatArray], FloatArray]
"""energy(h, first diameter, second diameter) [J], arrays in metres that broadcast."""

_CONTACT, _FAR = -42.0, 3.25  # range of t: h/R from 6e-19, where only a divergent integrand is left, to 4e12
_NEGLIGIBLE = 26.0  # parts of the integrand below exp(-26) = 5e-12 of its peak are cut off
_DIVERGENT = 16.0  # an integrand that is above exp(-16) of its peak at the lower end of t and does not fall
_FIRST_INTERVALS, _MOST_INTERVALS = 64, 2**14
_AGREEMENT = 3e-4  # between step and double step; the finer sum is then far better than this
_RESOLVED = 2.0  # second difference of the logarithm; below it no peak can hide between two nodes
_HOLDING = 20.0  # depth [kT] of a minimum that particles do not leave: exp(-20) = 2e-9
_EXTREME = 1e9  # kT; beyond any barrier, so that differences of what lies higher stay finite
_BLOCK = 2**16  # nodes
_LARGEST = 1e300

_Indices: TypeAlias = NDArray[np.intp]


def stability_ratio(energy: PairEnergy, *, hydrodynamics: bool = True) -> float:
    """Stability ratio W [1] of a pair: the diffusion-limited rate of collision over the rate with interaction.

    W = (r1 + r2) int_0^inf B exp(V/kT)/(r1 + r2 + h)**2 dh [1]_. With hydrodynamics
    B = (6 u**2 + 13 u + 2)/(6 u**2 + 4 u), u = h/a, is the resistance of the liquid between the spheres [2]_;
    a = 2 r1 r2/(r1 + r2) extends this fit for equal spheres to unequal ones, with the right limits near contact
    and far away. Without hydrodynamics B = 1. W is below 1 where attraction outweighs the resistance.

    Parameters
    ----------
    energy : PairEnergy
        From `pair_energy`.
    hydrodynamics : bool
        Whether the liquid between the particles slows their approach.

    Returns
    -------
    float
        At most 1e300; `log_stability_ratio` has no such limit.

    Raises
    ------
    InputError
        If the integral diverges at contact: no attraction, or a repulsion that no attraction overcomes and no
        minimum below -20 kT or so in front of it. (With such a minimum the integral begins there.)

    Warns
    -----
    AccuracyWarning
        If the energy is too rough for an accuracy of 1e-6.

    References
    ----------
    .. [1] N. Fuchs (1934), Z. Phys. 89, 736, DOI 10.1007/BF01341386.
    .. [2] E. P. Honig, G. J. Roebersen, P. H. Wiersema (1971), J. Colloid Interface Sci. 36, 97,
       DOI 10.1016/0021-9797(71)90202-1.
    """
    return float(capped_ratio(np.array(log_stability_ratio(energy, hydrodynamics=hydrodynamics))))


def log_stability_ratio(energy: PairEnergy, *, hydrodynamics: bool = True) -> float:
    """Natural logarithm of `stability_ratio` [1], finite for any height of the barrier.

    Parameters, errors and warnings are those of `stability_ratio`.
    """
    if not isinstance(energy, PairEnergy):
        refuse("energy", repr(energy), "PairEnergy", "pair_energy(particles, medium)")
    first, second = (np.array([particle.diameter]) for particle in (energy.first, energy.second))
    thermal = energy.medium.thermal_energy
    return float(log_fuchs(energy.between, first, second, thermal, hydrodynamics)[0])


def capped_ratio(logarithm: FloatArray) -> FloatArray:
    """exp(logarithm), at most 1e300."""
    ratio: FloatArray = np.minimum(np.exp(np.minimum(logarithm, 700.0)), _LARGEST)
    return ratio


def log_fuchs(
    energy: EnergyFunction,
    first: FloatArray,
    second: FloatArray,
    thermal_energy: float,
    hydrodynamics: bool,
) -> FloatArray:
    """Logarithm of the integral of Fuchs [1] for pairs of diameters `first` and `second` [m], shape (pairs,).

    In t, with h = (r1 + r2) exp(t + exp(t)), the integrand dies out at both ends, and the trapezoidal rule
    converges faster than any power of its step (Takahasi, Mori 1974, DOI 10.2977/prims/1195192451). Each pair
    gets the window where its integrand counts, and half the step until the sum stands still.
    """
    out = np.empty(first.size)

    def logarithm(pairs: _Indices, t: FloatArray) -> FloatArray:
        one, two = first[pairs, None], second[pairs, None]
        return _log_integrand(t, energy, one, two, thermal_energy, hydrodynamics)

    # pairs, the window of each, and the logarithm of the integrand at equidistant nodes
    work: list[tuple[_Indices, FloatArray, FloatArray, FloatArray]] = []

    def begin_with(pairs: _Indices, low: FloatArray, high: FloatArray) -> None:
        t = np.linspace(low, high, _FIRST_INTERVALS + 1, axis=-1)
        work.append((pairs, low, high, logarithm(pairs, t)))

    for pairs in _blocks(np.arange(first.size), _FIRST_INTERVALS):
        low, high = np.full(pairs.size, _CONTACT), np.full(pairs.size, _FAR)
        begin_with(pairs, low, high)
        begin = _first_node(work[-1][-1], hydrodynamics)
        if begin.any():
            work.pop()
            begin_with(pairs, low + begin * (high - low) / _FIRST_INTERVALS, high)
    rough = 0.0
    while work:
        pairs, low, high, f = work.pop()
        intervals = f.shape[-1] - 1
        step = (high - low) / intervals
        out[pairs], off, begin, end, resolved = _trapezoid(f, step)
        unfinished = ~resolved | (off > _AGREEMENT)
        narrower = end - begin < 0.6 * intervals
        crop, halve = np.flatnonzero(unfinished & narrower), np.flatnonzero(unfinished & ~narrower)
        if crop.size:
            start = low[crop]
            begin_with(pairs[crop], start + begin[crop] * step[crop], start + end[crop] * step[crop])
        if intervals >= _MOST_INTERVALS:
            rough = max(rough, float(off[halve].max(initial=0.0)))
            continue
        for part in _blocks(halve, 2 * intervals):
            between = low[part, None] + step[part, None] * (np.arange(intervals) + 0.5)
            finer = np.empty((part.size, 2 * intervals + 1))
            finer[:, ::2], finer[:, 1::2] = f[part], logarithm(pairs[part], between)
            work.append((pairs[part], low[part], high[part], finer))
    if rough > 0.0:
        warnings.warn(
            f"the stability ratio is good to about {rough:.1g} only: the energy is too rough for more. "
            f"Try: an energy that is smooth in the separation.",
            AccuracyWarning,
            stacklevel=3,
        )
    return out


def _blocks(indices: _Indices, intervals: int) -> list[_Indices]:
    """Parts of `indices` that are worked on at once, so that the arrays stay in the cache."""
    parts = math.ceil(indices.size * intervals / _BLOCK)
    return np.array_split(indices, parts) if parts else []


def _log_integrand(
    t: FloatArray,
    energy: EnergyFunction,
    first: FloatArray,
    second: FloatArray,
    thermal_energy: float,
    hydrodynamics: bool,
) -> FloatArray:
    """Logarithm of the integrand over t: V/kT + ln(B h (r1 + r2) (1 + exp(t))/(r1 + r2 + h)**2)."""
    reach = 0.5 * (first + second)
    stretch = np.exp(t)
    gap = np.exp(t + stretch)  # h/(r1 + r2)
    weight = gap * (1.0 + stretch) / ((1.0 + gap) * (1.0 + gap))
    if hydrodynamics:
        u = gap * (2.0 * reach * reach / (first * second))  # h/a with a = 2 r1 r2/(r1 + r2)
        weight *= 1.0 + (9.0 * u + 2.0) / ((6.0 * u + 4.0) * u)
    h = gap * reach
    f: FloatArray = np.array(energy(h, first, second))
    f /= thermal_energy
    f += np.log(weight)
    highest, lowest = float(f.max()), float(f.min())
    if math.isnan(highest):
        where = float(h[np.isnan(f)][0])
        refuse(f"energy at h={where:.3g} m", "not a number", "an energy [J] for every h > 0")
    if highest > _EXTREME or lowest < -_EXTREME:
        np.clip(f, -_EXTREME, _EXTREME, out=f)
    return f


def _trapezoid(
    f: FloatArray, step: FloatArray
) -> tuple[FloatArray, FloatArray, _Indices, _Indices, NDArray[np.bool_]]:
    """Integral of exp(f), shape (pairs, nodes): its logarithm, and how far the sum of the double step is off.

    Also the first and last node of the window that counts, and whether no peak can hide between the nodes.
    """
    top = f.max(axis=-1)
    below = f - top[:, None]
    # a narrow peak between two nodes shows in the bend of the logarithm, which is smooth where exp is steep
    bend = np.zeros_like(f)
    inner = bend[:, 1:-1]
    np.add(below[:, 2:], below[:, :-2], out=inner)
    inner -= below[:, 1:-1]
    inner -= below[:, 1:-1]
    np.abs(inner, out=inner)
    counts = below + bend > -_NEGLIGIBLE
    bend *= counts
    resolved = bend.max(axis=-1) < _RESOLVED
    share = np.exp(below, out=below)
    total = share.sum(axis=-1)
    off = np.abs(2.0 * share[:, ::2].sum(axis=-1) / total - 1.0)
    last = f.shape[-1] - 1
    begin = np.maximum(counts.argmax(axis=-1) - 1, 0)
    end = np.minimum(last - counts[:, ::-1].argmax(axis=-1) + 1, last)
    return top + np.log(total * step), off, begin, end, resolved


def _first_node(f: FloatArray, hydrodynamics: bool) -> _Indices:
    """Node where the integral begins: 0, or a deep minimum that holds the particles where a wall bars contact."""
    wall = f[:, 0] > f.max(axis=-1) - _DIVERGENT
    wall &= f[:, 1] - f[:, 0] < 0.5 * (_FAR - _CONTACT) / _FIRST_INTERVALS
    near = int(_FIRST_INTERVALS * _CONTACT / (_CONTACT - _FAR))  # nodes up to t = 0; far away f falls too
    deepest = f[:, :near].argmin(axis=-1)
    beyond = np.where(np.arange(f.shape[-1]) >= deepest[:, None], f, -np.inf).max(axis=-1)
    if (wall & (beyond - f[:, :near].min(axis=-1) < _HOLDING)).any():
        film = "the liquid film bars the last step unless an attraction" if hydrodynamics else "no attraction"
        raise InputError(
            f"the integral for the stability ratio diverges at contact: {film} overcomes the repulsion, and there is "
            f"no minimum deeper than some 20 kT that would hold the particles. Try: van_der_waals=Hamaker() where it "
            f"was left out, or short_range=None where that makes the wall."
        )
    return np.where(wall, deepest, 0)
