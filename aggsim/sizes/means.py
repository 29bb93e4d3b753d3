"""Moments, mean diameters, quantiles and densities of particles that sit at the pivots of a size grid.

Every function takes `volume` (n,), the increasing pivots [m3], and `number` (..., n), the particles per
section [1/m3], size axis last. The section index kappa is the coordinate of everything that needs more than a
sum: pivot k sits at kappa = k, its section reaches from k - 1/2 to k + 1/2, and n_k is the density dN/dkappa
at its pivot. On a monomer grid this reads: k monomers stand for the cell from k - 1/2 to k + 1/2.

References: [1] ISO 9276-1:1998 (densities and cumulative distributions of type r); [2] ISO 9276-2:2014 (mean
sizes from moments); [3] van Leer (1979), J. Comput. Phys. 32, 101, doi:10.1016/0021-9991(79)90145-1.
"""

from __future__ import annotations

import math
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import DistributionError, GridError
from aggsim.sizes._smooth import SizeCurve, by_kind

_LONE_SECTION = 1e-9  # a section with all but this share of the weight is the whole distribution


class Structure(Protocol):
    """What a particle looks like from outside, such as a fractal floc."""

    def collision_diameter(self, volume: FloatArray, /) -> FloatArray:
        """Outer diameter [m] of particles with this volume of solids [m3]."""


def diameter_of(volume: ArrayLike) -> FloatArray:
    """Return the diameter [m] of the sphere with this `volume` [m3]: d = (6 v / pi)^(1/3)."""
    return np.asarray(np.cbrt(np.asarray(volume, dtype=np.float64) * (6.0 / math.pi)))


def volume_of(diameter: ArrayLike) -> FloatArray:
    """Return the volume [m3] of the sphere with this `diameter` [m]: v = pi d^3 / 6."""
    return np.asarray(np.asarray(diameter, dtype=np.float64) ** 3 * (math.pi / 6.0))


def moment(volume: ArrayLike, number: ArrayLike, k: float) -> FloatArray:
    """Return the volume moment M_k = sum n v^k [m^(3k) / m3], shape (...); k is any real number."""
    v, n = _state(volume, number)
    return np.asarray(n @ v ** _checks.scalar("k", k))


def mean_diameter(volume: ArrayLike, number: ArrayLike, p: float, q: float) -> FloatArray:
    """Return the moment-ratio mean diameter D[p,q] [m], shape (...).

    D[p,q] = (M_p / M_q)^(1/(p-q)), M_k = sum n d^k; for p = q its limit exp(sum n d^p ln d / sum n d^p) [2].
    D[1,0] is the arithmetic mean, D[3,2] the Sauter mean, D[4,3] the De Brouckere mean.

    Raises DistributionError where nothing is there.
    """
    p, q = _checks.scalar("p", p), _checks.scalar("q", q)
    v, n = _state(volume, number)
    log_d = np.log(diameter_of(v))
    scale = log_d.mean()  # keeps powers of 1e-7 m within floating-point range
    upper = _positive(n @ np.exp(p * (log_d - scale)))
    if p == q:
        mean = (n * np.exp(p * (log_d - scale))) @ (log_d - scale) / upper
    else:
        lower = _positive(n @ np.exp(q * (log_d - scale)))
        mean = (np.log(upper) - np.log(lower)) / (p - q)
    return np.asarray(np.exp(scale + mean))


def geometric_standard_deviation(volume: ArrayLike, number: ArrayLike, r: float = 3.0) -> FloatArray:
    """Return the geometric standard deviation of diameter [1], shape (...).

    It is exp(standard deviation of ln d), each size weighted with n d^r; r = 0 number, 3 volume.
    Raises DistributionError where nothing is there.
    """
    v, n = _state(volume, number)
    weight, total = _weight(v, n, r)
    log_d = np.log(diameter_of(v))
    share = weight / total[..., None]
    spread = log_d - (share @ log_d)[..., None]
    variance = np.sum(share * spread**2, axis=-1)
    return np.asarray(np.exp(np.sqrt(np.maximum(variance, 0.0))))  # round-off of a single size


def span(d10: ArrayLike, d50: ArrayLike, d90: ArrayLike) -> FloatArray:
    """Return the span (d90 - d10) / d50 [1] of three quantile diameters [m]."""
    return np.asarray((np.asarray(d90, dtype=np.float64) - np.asarray(d10)) / np.asarray(d50))


def section_width(volume: ArrayLike) -> FloatArray:
    """Return the width dv/dkappa [m3] (n,) that belongs to each pivot.

    It is the slope of v = a + b exp(c kappa) through a pivot and its two neighbours: exactly v ln(ratio) on a
    geometric grid, exactly one monomer on a monomer grid, and in between where one turns into the other.

    Raises GridError for fewer than two pivots.
    """
    curve = SizeCurve.through(_pivots(volume))
    return curve.slope_at_pivots()


def section_limits(volume: ArrayLike) -> FloatArray:
    """Return the volumes [m3] (n + 1,) at the limits of the sections, kappa = -1/2, 1/2, ... n - 1/2.

    Raises GridError for fewer than two pivots.
    """
    v = _pivots(volume)
    limits = SizeCurve.through(v).volume_at(np.arange(v.size + 1, dtype=np.float64) - 0.5)
    if limits[0] <= 0.0:  # arithmetic sizes that start far from one step: mirror in log size instead
        limits[0] = v[0] ** 2 / limits[1]
    return limits


def density(volume: ArrayLike, number: ArrayLike, r: float = 3.0, *, log: bool = True) -> FloatArray:
    """Return the density of type r at the pivots [1], shape (..., n): q_r* = dQ_r/dln d [1].

    `r`: 0 counts number, 2 surface, 3 volume; any real number from 0 on is allowed. `log=False` gives
    q_r = dQ_r/dd [1/m].
    Raises DistributionError where nothing is there.
    """
    v, n = _state(volume, number)
    weight, total = _weight(v, n, r)
    log_density = weight / total[..., None] * (3.0 * v / section_width(v))
    return log_density if log else np.asarray(log_density / diameter_of(v))


def cumulative(volume: ArrayLike, number: ArrayLike, size: ArrayLike, r: float = 3.0) -> FloatArray:
    """Return the share Q_r [1] of quantity r in particles up to volume `size` [m3] [1].

    Shape number.shape[:-1] + size.shape. Inverse of `quantile_diameter`: zero below the first pivot, one from
    the last pivot on.
    Raises DistributionError where nothing is there.
    """
    v, n = _state(volume, number)
    at = np.asarray(size, dtype=np.float64)
    flat = np.atleast_1d(at).ravel()
    weight, total = _weight(v, n, r)
    rows = weight.reshape(-1, v.size) / total.reshape(-1, 1)
    if v.size == 1:
        share = np.zeros((rows.shape[0], flat.size))
    else:
        kappa = SizeCurve.through(v).kappa_at(np.clip(flat, v[0], v[-1]))
        share = by_kind(rows, kappa.size, lambda smooth: smooth.below(kappa))
    share = np.where(flat < v[0], 0.0, np.where(flat >= v[-1], 1.0, share))
    return np.asarray(share.reshape(weight.shape[:-1] + at.shape))


def quantile_diameter(
    volume: ArrayLike,
    number: ArrayLike,
    p: ArrayLike,
    r: float = 3.0,
    structure: Structure | None = None,
) -> FloatArray:
    """Return the diameter [m] below which the share `p` of quantity r lies [1].

    Shape number.shape[:-1] + p.shape. `p` [1]: between 0 and 1, a number or an array. `r`: 0 counts number,
    2 surface, 3 volume of solids. `structure`: reports its outer diameter in place of that of the sphere of
    equal volume; what is counted stays the same.

    The weight n_k d_k^r is read as density over kappa, interpolated by a cubic spline and integrated; no
    quantile lies outside the pivots. Where a spline would undershoot by more than 5e-3 of the whole or miss the
    sum by 1e-2 (jumps, single sizes, noise) the density is piecewise linear with limited slopes [3], a section
    that towers above both neighbours narrows towards its pivot, and negative entries are levelled out. A
    section that holds all but 1e-9 of the weight is itself the answer.

    Raises DistributionError where nothing is there.
    """
    v, n = _state(volume, number)
    wanted = np.asarray(p, dtype=np.float64)
    flat = np.atleast_1d(wanted).ravel()
    if flat.size == 0 or not ((flat > 0.0) & (flat < 1.0)).all():
        _checks.refuse("p", wanted, "shares between 0 and 1, both excluded", "p=0.5 for the median")
    weight, total = _weight(v, n, r)
    rows = weight.reshape(-1, v.size) / total.reshape(-1, 1)
    if v.size == 1:
        size = np.full((rows.shape[0], flat.size), v[0])
    else:
        kappa = by_kind(rows, flat.size, lambda smooth: smooth.inverse(flat))
        size = SizeCurve.through(v).volume_at(np.clip(kappa, 0.0, v.size - 1.0))
        largest = np.argmax(rows, axis=-1)
        lone = np.abs(1.0 - rows[np.arange(rows.shape[0]), largest]) <= _LONE_SECTION
        size[lone] = v[largest[lone], None]
    diameter = diameter_of(size) if structure is None else np.asarray(structure.collision_diameter(size))
    return np.asarray(diameter.reshape(weight.shape[:-1] + wanted.shape))


def _pivots(volume: ArrayLike) -> FloatArray:
    return _checks.array("volume", volume, "m3", above=0.0, increasing=True, error=GridError)


def _state(volume: ArrayLike, number: ArrayLike) -> tuple[FloatArray, FloatArray]:
    v = _pivots(volume)
    n = np.asarray(number, dtype=np.float64)
    if n.ndim == 0 or n.shape[-1] != v.size:
        _checks.refuse(
            "number", f"an array of shape {n.shape}", f"shape (..., {v.size}): one value per pivot"
        )
    if not np.isfinite(n).all():
        _checks.refuse("number", "an array with NaN or infinity", "finite values", error=DistributionError)
    return v, n


def _weight(volume: FloatArray, number: FloatArray, r: float) -> tuple[FloatArray, FloatArray]:
    """n d^r in units of the largest pivot (no powers of 1e-7 m), and its positive sum."""
    r = _checks.scalar("r", r, least=0.0, hint="r=0 for number, 2 for surface, 3 for volume")
    weight = number * (volume / volume[-1]) ** (r / 3.0)
    return weight, _positive(weight.sum(axis=-1))


def _positive(total: FloatArray) -> FloatArray:
    total = np.asarray(total)
    if not (total > 0.0).all():
        raise DistributionError(
            "number holds no particles (its sum is zero or negative): it has no mean, quantile or density. "
            "Try: leave out the times at which nothing is left."
        )
    return total
