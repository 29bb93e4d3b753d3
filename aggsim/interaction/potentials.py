"""Interaction energies [J] of two spheres as pure functions of their separation; everything broadcasts.

In every formula a1 and a2 are the radii, and a = a1 a2/(a1 + a2) is the radius of Derjaguin's approximation [1]_,
which holds where the separation and the range of the force are small against both radii.

References
----------
.. [1] B. V. Derjaguin (1934), Kolloid-Z. 69, 155, DOI 10.1007/BF01433225.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy import constants

from aggsim._checks import FloatArray, count, plain, refuse, scalar
from aggsim.inputs import Medium

_GREGORY = 5.32  # reference of retardation_gregory


def hamaker_spheres(h: ArrayLike, d1: ArrayLike, d2: ArrayLike, hamaker: ArrayLike) -> FloatArray:
    """Unretarded van der Waals energy [J] of two spheres at any separation [1]_.

    V = -A/6 [2 a1 a2/x + 2 a1 a2/y + ln(x/y)] with x = h (h + 2 a1 + 2 a2) and y = x + 4 a1 a2, computed in a
    form that does not lose digits far away, where V falls with h**-6.

    Parameters
    ----------
    h : array_like
        Separation of the surfaces [m], above 0.
    d1, d2 : array_like
        Diameters [m].
    hamaker : array_like
        Hamaker constant A across the medium [J].

    Raises
    ------
    InputError
        If a separation or a diameter is not positive and finite, or the Hamaker constant not finite.

    References
    ----------
    .. [1] H. C. Hamaker (1937), Physica 4, 1058, DOI 10.1016/S0031-8914(37)80203-7.
    """
    gap, first, second = _lengths(h, d1, d2)
    # with r = (y - x)/x the bracket is 2 [r (1 + r/2)/(2 (1 + r)) - ln(1 + r)/2]
    r = np.asarray(first * second / (gap * (gap + (first + second))))
    one = 1.0 + r
    shape = np.asarray(0.25 * r * (1.0 + 1.0 / one) - 0.5 * np.log(one))
    far = r < 0.22
    if far.any():
        # there the two terms cancel; with q = r/(2 + r) the bracket is 2 [q/(1 - q**2) - artanh q], the sum
        # over k of 4k/(2k + 1) q**(2k + 1), whose ninth term is below round-off
        q = r[far]
        q = q / (2.0 + q)
        square = q * q
        series = np.zeros_like(square)
        for k in range(8, 0, -1):
            series += 2.0 * k / (2.0 * k + 1.0)
            series *= square
        shape[far] = q * series
    return (-finite("hamaker", hamaker, "J") / 3.0 * shape)[()]


def hamaker_derjaguin(h: ArrayLike, d1: ArrayLike, d2: ArrayLike, hamaker: ArrayLike) -> FloatArray:
    """Unretarded van der Waals energy [J] of two spheres close together, V = -A a/(6 h).

    Between equal spheres of radius R it overstates the attraction by 2 % at h = 0.002 R, 9 % at 0.01 R, 69 % at 0.1 R.

    Parameters
    ----------
    h : array_like
        Separation of the surfaces [m], above 0.
    d1, d2 : array_like
        Diameters [m].
    hamaker : array_like
        Hamaker constant A across the medium [J].

    Raises
    ------
    InputError
        As `hamaker_spheres`.

    References
    ----------
    1. H. C. Hamaker (1937), Physica 4, 1058, DOI 10.1016/S0031-8914(37)80203-7.
    """
    gap, first, second = _lengths(h, d1, d2)
    return (-finite("hamaker", hamaker, "J") * derjaguin_radius(first, second) / (6.0 * gap))[()]


def retardation_gregory(h: ArrayLike, wavelength: float) -> FloatArray:
    """Factor [1] by which retardation weakens the van der Waals energy of two spheres [1]_.

    f = 1 - (b h/lambda) ln(1 + lambda/(b h)) with b = 5.32. It belongs to the Derjaguin form; as a factor on the exact
    form it is exact in the same limit h << a and an interpolation beyond it.

    Parameters
    ----------
    h : array_like
        Separation of the surfaces [m], above 0.
    wavelength : float
        Characteristic wavelength lambda of the dispersion interaction [m], about 100e-9 for most materials.

    Raises
    ------
    InputError
        If a separation or the wavelength is not positive and finite.

    References
    ----------
    .. [1] J. Gregory (1981), J. Colloid Interface Sci. 83, 138, DOI 10.1016/0021-9797(81)90018-7.
    """
    t = scalar("wavelength", wavelength, "m", above=0.0, hint="100e-9") / (_GREGORY * positive("h", h))
    # 1 - ln(1 + t)/t = t/2 - t**2/3 + t**3/4 ... where the difference would lose digits
    series = np.zeros_like(t)
    for k in range(9, 1, -1):
        series = t * (1.0 / k - series)
    return np.where(t < 0.01, series, 1.0 - np.log1p(t) / t)[()]


def linear_superposition(
    h: ArrayLike,
    d1: ArrayLike,
    d2: ArrayLike,
    psi1: ArrayLike,
    psi2: ArrayLike,
    medium: Medium,
    valence: int = 1,
) -> FloatArray:
    """Double-layer energy [J] by linear superposition of the undisturbed layers [1]_ [2]_.

    V = 64 pi eps a (kT/(z e))**2 tanh(z e psi1/(4 kT)) tanh(z e psi2/(4 kT)) exp(-kappa h), in a symmetric
    electrolyte, for kappa a1 and kappa a2 above 5 and best for kappa h above 1. It lies between
    constant potential and constant charge.

    Parameters
    ----------
    h : array_like
        Separation of the surfaces [m], above 0.
    d1, d2 : array_like
        Diameters [m].
    psi1, psi2 : array_like
        Surface potentials [V].
    medium : Medium
        With permittivity and ionic strength.
    valence : int
        z of the counter-ions, 1 to 6.

    Raises
    ------
    InputError
        If a separation or a diameter is not positive and finite, a potential not finite, or the medium has no
        permittivity or no ions.

    References
    ----------
    .. [1] G. M. Bell, S. Levine, L. N. McCartney (1970), J. Colloid Interface Sci. 33, 335,
       DOI 10.1016/0021-9797(70)90228-6.
    .. [2] J. Gregory (1975), J. Colloid Interface Sci. 51, 44, DOI 10.1016/0021-9797(75)90081-8.
    """
    gap, first, second = _lengths(h, d1, d2)
    permittivity, kappa = _double_layer(medium)
    thermal = medium.thermal_energy / (constants.e * count("valence", valence, most=6))  # kT/(z e) [V]
    charges = np.tanh(finite("psi1", psi1, "V") / (4.0 * thermal))
    charges = charges * np.tanh(finite("psi2", psi2, "V") / (4.0 * thermal))
    strength = 64.0 * np.pi * permittivity * thermal**2 * charges * derjaguin_radius(first, second)
    return (strength * np.exp(-kappa * gap))[()]


def constant_potential(
    h: ArrayLike, d1: ArrayLike, d2: ArrayLike, psi1: ArrayLike, psi2: ArrayLike, medium: Medium
) -> FloatArray:
    """Double-layer energy [J] of surfaces that keep their potential [1]_.

    V = pi eps a [(psi1 + psi2)**2 ln(1 + e) + (psi1 - psi2)**2 ln(1 - e)], e = exp(-kappa h); for kappa a1 and kappa a2
    above 5 and potentials up to about 50 mV. Unequal potentials attract near contact.

    Parameters
    ----------
    h : array_like
        Separation of the surfaces [m], above 0.
    d1, d2 : array_like
        Diameters [m].
    psi1, psi2 : array_like
        Surface potentials [V].
    medium : Medium
        With permittivity and ionic strength.

    Raises
    ------
    InputError
        As `linear_superposition`.

    References
    ----------
    .. [1] R. Hogg, T. W. Healy, D. W. Fuerstenau (1966), Trans. Faraday Soc. 62, 1638,
       DOI 10.1039/TF9666201638.
    """
    strength, alike, unlike, plus, minus = _hogg_healy_fuerstenau(h, d1, d2, psi1, psi2, medium)
    return (strength * (alike * plus + unlike * minus))[()]


def constant_charge(
    h: ArrayLike, d1: ArrayLike, d2: ArrayLike, psi1: ArrayLike, psi2: ArrayLike, medium: Medium
) -> FloatArray:
    """Double-layer energy [J] of surfaces that keep their charge [1]_ [2]_.

    V = -pi eps a [(psi1 + psi2)**2 ln(1 - e) + (psi1 - psi2)**2 ln(1 + e)], e = exp(-kappa h), with the potentials of
    the surfaces far apart; for kappa a1 and kappa a2 above 5 and potentials up to about 50 mV.

    Parameters
    ----------
    h : array_like
        Separation of the surfaces [m], above 0.
    d1, d2 : array_like
        Diameters [m].
    psi1, psi2 : array_like
        Surface potentials far apart [V].
    medium : Medium
        With permittivity and ionic strength.

    Raises
    ------
    InputError
        As `linear_superposition`.

    References
    ----------
    .. [1] G. R. Wiese, T. W. Healy (1970), Trans. Faraday Soc. 66, 490, DOI 10.1039/TF9706600490.
    .. [2] R. Hogg, T. W. Healy, D. W. Fuerstenau (1966), Trans. Faraday Soc. 62, 1638,
       DOI 10.1039/TF9666201638.
    """
    strength, alike, unlike, plus, minus = _hogg_healy_fuerstenau(h, d1, d2, psi1, psi2, medium)
    return (-strength * (alike * minus + unlike * plus))[()]


def positive(name: str, value: ArrayLike, unit: str = "m") -> FloatArray:
    """`value` as an array of any shape, refused unless every entry is above 0 and finite."""
    out: FloatArray = np.asarray(plain(value, unit), dtype=np.float64)
    # two reductions are quicker than a mask, and the mask is wanted in a refusal only
    if out.size and not (out.min() > 0.0 and out.max() < np.inf):
        bad = ~((out > 0.0) & (out < np.inf))
        hint = "a separation of the surfaces: 1 nm is 1e-9 m; the formulas diverge at contact"
        refuse(name, f"{out[bad].flat[0]:g} {unit}", f"finite, above 0 [{unit}]", hint if name == "h" else "")
    return out


def finite(name: str, value: ArrayLike, unit: str) -> FloatArray:
    """`value` as an array of any shape, refused unless every entry is finite."""
    out: FloatArray = np.asarray(plain(value, unit), dtype=np.float64)
    bad = ~np.isfinite(out)
    if bad.any():
        refuse(name, f"{out[bad].flat[0]:g} {unit}", f"finite [{unit}]")
    return out


def _lengths(h: ArrayLike, d1: ArrayLike, d2: ArrayLike) -> tuple[FloatArray, FloatArray, FloatArray]:
    return positive("h", h), positive("d1", d1), positive("d2", d2)


def derjaguin_radius(d1: FloatArray, d2: FloatArray) -> FloatArray:
    """a = a1 a2/(a1 + a2) [m] of diameters [m]."""
    return 0.5 * d1 * d2 / (d1 + d2)


def _double_layer(medium: Medium) -> tuple[float, float]:
    """Permittivity [F/m] and kappa [1/m] of a medium with ions."""
    if medium.relative_permittivity is None:
        refuse(
            "relative_permittivity",
            None,
            "a number of at least 1 where a double layer is asked for",
            f"Medium(..., relative_permittivity=...) for {medium.name!r}; water has 78.4 at 25 C",
        )
    if medium.ionic_strength == 0.0:
        refuse(
            "ionic_strength",
            "0 mol/m3",
            "above 0 [mol/m3] where a double layer is asked for, which has no end without ions",
            "Medium.water(ionic_strength=...): 1 mmol/L is 1 mol/m3; deionised water left in air has about 2e-3 mol/m3",
        )
    return constants.epsilon_0 * medium.relative_permittivity, 1.0 / medium.debye_length


def _hogg_healy_fuerstenau(
    h: ArrayLike, d1: ArrayLike, d2: ArrayLike, psi1: ArrayLike, psi2: ArrayLike, medium: Medium
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray, FloatArray]:
    """pi eps a, (psi1 + psi2)**2, (psi1 - psi2)**2, ln(1 + e) and ln(1 - e) with e = exp(-kappa h)."""
    gap, first, second = _lengths(h, d1, d2)
    permittivity, kappa = _double_layer(medium)
    one, two = finite("psi1", psi1, "V"), finite("psi2", psi2, "V")
    scaled = kappa * gap
    plus = np.log1p(np.exp(-scaled))
    # each form where it keeps its digits: near contact, and far away
    minus = np.where(scaled < 0.7, np.log(-np.expm1(-scaled)), np.log1p(-np.exp(-np.maximum(scaled, 0.7))))
    strength = np.pi * permittivity * derjaguin_radius(first, second)
    return strength, (one + two) ** 2, (one - two) ** 2, plus, minus
