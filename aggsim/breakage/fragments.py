"""What a particle breaks into.

Every law has `pieces(parent)`, the mean number of fragments of a parent volume [m3], `point_masses`, which puts the
fragments of many parents on a grid, and `sample(parent, generator)`, which draws those of single events at random.
Laws with a density b(v, u) of fragment volumes v from a parent u also have `density(volume, parent)` [1/m3]; z = v/u
is the share of the parent. Each conserves volume for each parent.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.breakage._discrete import EqualPieces, Erosion
from aggsim.breakage._spread import Beta, FunctionLaw, LogNormalPair, Parabolic, PowerLaw
from aggsim.errors import BreakageError


def uniform_binary() -> Parabolic:
    """Two fragments, every split equally likely: b = 2/u [1]_.

    References
    ----------
    .. [1] R. M. Ziff, E. D. McGrady (1985), J. Phys. A 18, 3027, DOI 10.1088/0305-4470/18/15/026.
    """
    return Parabolic(2.0)


def equal_binary() -> EqualPieces:
    """Two fragments of half the parent each."""
    return EqualPieces(2)


def ternary() -> EqualPieces:
    """Three fragments of a third of the parent each."""
    return EqualPieces(3)


def erosion(piece_volume: float) -> Erosion:
    """A small piece of always the same volume, and the remainder.

    A parent of less than two pieces splits into two equal halves, so that the piece is never the larger fragment.

    Parameters
    ----------
    piece_volume : float
        [m3], above 0; that of a primary particle where single particles are torn off.

    Raises
    ------
    BreakageError
        If the volume is not positive and finite.
    """
    return Erosion(
        _checks.scalar(
            "piece_volume",
            piece_volume,
            "m3",
            above=0.0,
            hint="a volume in m3, such as Particles(...).volume",
            error=BreakageError,
        )
    )


def parabolic(*, shape: float) -> Parabolic:
    """Two fragments with a symmetric parabola of shares: u b = C + (1 - C/2)(24 z**2 - 24 z + 6) [1]_.

    C is the density at equal halves. The form was written down from memory of the source.

    Parameters
    ----------
    shape : float
        C [1], 0 to 3: 0 for a U shape without equal halves, 2 for the uniform law, 3 for a hump without small
        pieces.

    Raises
    ------
    BreakageError
        If the shape is outside its range.

    References
    ----------
    .. [1] P. J. Hill, K. M. Ng (1996), AIChE J. 42, 1600, DOI 10.1002/aic.690420611.
    """
    hint = "2 for uniform, less for unequal pieces, more for equal ones"
    return Parabolic(_checks.scalar("shape", shape, least=0.0, most=3.0, hint=hint, error=BreakageError))


def beta(*, shape: float) -> Beta:
    """Two fragments with a symmetric beta law of shares: u b = 2 (z (1 - z))**(q - 1)/B(q, q).

    The standard deviation of z is 1/(2 (2 q + 1)**(1/2)).

    Parameters
    ----------
    shape : float
        q [1], 0.01 to 1000: below 1 a U shape, 1 uniform, above 1 a hump around equal halves.

    Raises
    ------
    BreakageError
        If the shape is outside its range.
    """
    hint = "1 for uniform, 3 for a broad hump; equal_binary() is the limit of large values"
    return Beta(_checks.scalar("shape", shape, least=0.01, most=1000.0, hint=hint, error=BreakageError))


def power_law(*, exponent: float) -> PowerLaw:
    """Fragments with a power law of volumes: u b = (nu + 2) z**nu, in (nu + 2)/(nu + 1) pieces on average [1]_.

    Parameters
    ----------
    exponent : float
        nu [1], -0.99 to 0: 0 is the uniform law with two pieces, -1/2 makes three. The number of pieces grows without
        limit towards -1; above 0 it would be less than two.

    Raises
    ------
    BreakageError
        If the exponent is outside its range.

    References
    ----------
    .. [1] E. D. McGrady, R. M. Ziff (1987), Phys. Rev. Lett. 58, 892, DOI 10.1103/PhysRevLett.58.892.
    """
    hint = "0 for two pieces, -0.5 for three; p pieces need (2 - p)/(p - 1)"
    return PowerLaw(
        _checks.scalar("exponent", exponent, least=-0.99, most=0.0, hint=hint, error=BreakageError)
    )


def lognormal(*, median_share: float, gsd: float) -> LogNormalPair:
    """Two fragments: the share of one follows a lognormal law that is cut off at 1, the other is the remainder.

    u b = f(z) + f(1 - z), f(z) = exp(-ln(z/z50)**2/(2 s**2))/(z s (2 pi)**(1/2) F) with s = ln(gsd) and F the
    part of the lognormal law below 1. An assumption for pieces of a typical size, common practice.

    Parameters
    ----------
    median_share : float
        z50 [1], median share of the one piece before the cut; above 0, below 1.
    gsd : float
        Geometric standard deviation of its volume [1], 1.01 to 20.

    Raises
    ------
    BreakageError
        If a value is outside its range.
    """
    share = _checks.scalar("median_share", median_share, above=0.0, below=1.0, error=BreakageError)
    hint = "a geometric standard deviation such as 1.5; equal_binary() or erosion(...) have no spread"
    return LogNormalPair(
        share, _checks.scalar("gsd", gsd, least=1.01, most=20.0, hint=hint, error=BreakageError)
    )


def from_function(
    density: Callable[[FloatArray, FloatArray], Any], pieces: float | Callable[[FloatArray], Any]
) -> FunctionLaw:
    """Fragments from one's own density.

    Its integrals int b dv = pieces and int b v dv = u over v from 0 to u are checked for every parent when the law
    is put on a grid; cells are cut until they come out.

    Parameters
    ----------
    density : callable
        density(v, parent) -> mean number of fragments per volume [1/m3], for arrays of volumes [m3] that
        broadcast, 0 < v < parent.
    pieces : float or callable
        Mean number of fragments [1], at least 2, or pieces(parent) for an array of parents.

    Raises
    ------
    BreakageError
        If an argument is of another kind; when put on a grid, if the density is negative or not finite, or its
        integrals are not the pieces and the parent.
    """
    if not callable(density):
        _checks.refuse(
            "density", repr(density), "a function density(v, parent) of two volumes [m3]", error=BreakageError
        )
    if not callable(pieces):
        pieces = _checks.scalar(
            "pieces", pieces, least=2.0, hint="2 for binary breakage", error=BreakageError
        )
    return FunctionLaw(density, pieces)
