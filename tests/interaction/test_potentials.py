"""Van der Waals and double-layer energies: limits, symmetry, monotony, refusals."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import constants
from scipy.integrate import quad

from aggsim.errors import InputError
from aggsim.inputs import Medium
from aggsim.interaction import potentials as p

LENGTHS = st.floats(1e-9, 1e-5)
GAPS = st.floats(1e-12, 1e-5)
POTENTIALS = st.floats(-0.1, 0.1)
CHARGED = [p.linear_superposition, p.constant_potential, p.constant_charge]
ATTRACTIONS = [p.hamaker_spheres, p.hamaker_derjaguin]


def salt(strength: float = 10.0) -> Medium:
    return Medium(
        temperature=298.15,
        viscosity=0.89e-3,
        density=997.0,
        relative_permittivity=78.5,
        ionic_strength=strength,
    )


def printed_hamaker(h: float, a1: float, a2: float, hamaker: float) -> float:
    """The formula as Hamaker (1937) prints it."""
    r = a1 + a2 + h
    x, y = r**2 - (a1 + a2) ** 2, r**2 - (a1 - a2) ** 2
    return -hamaker / 6.0 * (2 * a1 * a2 / x + 2 * a1 * a2 / y + math.log(x / y))


@given(h=st.floats(1e-9, 1e-7), d1=st.floats(5e-8, 1e-6), d2=st.floats(5e-8, 1e-6))
def test_hamaker_is_the_printed_formula_where_that_keeps_its_digits(h: float, d1: float, d2: float) -> None:
    value = p.hamaker_spheres(h, d1, d2, 1e-20)
    # the differences of squares and the logarithm of the printed form lose up to five digits here
    assert value == pytest.approx(printed_hamaker(h, 0.5 * d1, 0.5 * d2, 1e-20), rel=1e-9)


@pytest.mark.parametrize("share", [0.0999, 0.1, 0.1001])
def test_hamaker_series_joins_the_closed_form(share: float) -> None:
    # equal spheres of diameter 1: q = 1/(2 x + 1) with x = h (h + 2)
    h = math.sqrt(1.0 + (1.0 / share - 1.0) / 2.0) - 1.0
    bracket = share / (1.0 - share**2) - math.atanh(share)
    # the difference loses two to three digits
    assert p.hamaker_spheres(h, 1.0, 1.0, 3.0) == pytest.approx(-bracket, rel=1e-12)


def test_hamaker_far_away_is_london_between_two_volumes() -> None:
    """-16 A a1**3 a2**3/(9 R**6), the sum of r**-6 over two small bodies."""
    a1, a2, h = 50e-9, 200e-9, 1e-3
    london = -16.0 / 9.0 * 1e-20 * (a1 * a2) ** 3 / (a1 + a2 + h) ** 6
    assert p.hamaker_spheres(h, 2 * a1, 2 * a2, 1e-20) == pytest.approx(london, rel=1e-6)


@given(d1=LENGTHS, d2=LENGTHS)
def test_hamaker_near_contact_is_derjaguin(d1: float, d2: float) -> None:
    h = 1e-9 * min(d1, d2)
    ratio = p.hamaker_spheres(h, d1, d2, 1e-20) / p.hamaker_derjaguin(h, d1, d2, 1e-20)
    # the next term is of the order h/a ln(h/a), 2e-8 h/a per e-fold
    assert ratio == pytest.approx(1.0, rel=3e-7)


@pytest.mark.parametrize("form", ATTRACTIONS)
@given(h=GAPS, d1=LENGTHS, d2=LENGTHS)
def test_attraction_is_symmetric_negative_and_linear(
    form: Callable[..., Any], h: float, d1: float, d2: float
) -> None:
    value = form(h, d1, d2, 1e-20)
    assert value < 0.0
    assert form(h, d2, d1, 1e-20) == pytest.approx(value, rel=1e-12)
    assert form(h, d1, d2, 3e-20) == pytest.approx(3.0 * value, rel=1e-14)
    assert form(1.01 * h, d1, d2, 1e-20) > value


def test_retardation_follows_from_plates_by_derjaguin() -> None:
    """The energy per area A/(12 pi h**2 (1 + 5.32 h/lambda)) of plates, integrated (Gregory 1981)."""
    wavelength, h = 100e-9, 7e-9
    plates, _ = quad(lambda x: 1.0 / (x * x * (1.0 + 0.0532 * x)), 7.0, np.inf, epsabs=0.0, epsrel=1e-10)
    assert p.retardation_gregory(h, wavelength) == pytest.approx(plates * 7.0, rel=1e-9)


@given(h=st.floats(1e-14, 1e-2))
def test_retardation_weakens_and_falls(h: float) -> None:
    factor = p.retardation_gregory(h, 100e-9)
    assert 0.0 < factor <= 1.0
    assert p.retardation_gregory(1.1 * h, 100e-9) < factor


def test_retardation_has_its_limits() -> None:
    assert p.retardation_gregory(1e-18, 100e-9) == pytest.approx(1.0, rel=1e-8)
    far = 1e-3
    # 1/2 1/(b h/lambda) less a third of its square
    assert p.retardation_gregory(far, 100e-9) == pytest.approx(100e-9 / (2 * 5.32 * far), rel=2e-5)
    around = p.retardation_gregory(np.array([1.0 - 1e-9, 1.0 + 1e-9]) * 100e-9 / (5.32 * 0.01), 100e-9)
    assert around[0] == pytest.approx(around[1], rel=1e-8)


@pytest.mark.parametrize("form", CHARGED)
@given(h=GAPS, d1=LENGTHS, d2=LENGTHS, psi1=POTENTIALS, psi2=POTENTIALS)
def test_double_layer_is_symmetric_in_the_pair_and_in_the_sign(
    form: Callable[..., Any], h: float, d1: float, d2: float, psi1: float, psi2: float
) -> None:
    value = form(h, d1, d2, psi1, psi2, salt())
    assert form(h, d2, d1, psi2, psi1, salt()) == pytest.approx(value, rel=1e-12)
    assert form(h, d1, d2, -psi1, -psi2, salt()) == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize("form", CHARGED)
@given(h=st.floats(1e-10, 1e-8), psi=st.floats(1e-3, 0.1), strength=st.floats(0.1, 1000.0))
def test_repulsion_of_equals_grows_with_potential_and_falls_with_separation_and_salt(
    form: Callable[..., Any], h: float, psi: float, strength: float
) -> None:
    value = form(h, 2e-7, 2e-7, psi, psi, salt(strength))
    assert value > 0.0
    assert form(h, 2e-7, 2e-7, 1.05 * psi, 1.05 * psi, salt(strength)) > value
    assert form(1.05 * h, 2e-7, 2e-7, psi, psi, salt(strength)) < value
    assert form(h, 2e-7, 2e-7, psi, psi, salt(1.05 * strength)) < value
    # a sphere against a twice as large one: a grows by 4/3
    assert form(h, 2e-7, 4e-7, psi, psi, salt(strength)) == pytest.approx(4.0 / 3.0 * value, rel=1e-12)


@given(h=st.floats(1e-11, 1e-7), psi=st.floats(1e-3, 0.1))
def test_boundary_conditions_bracket_each_other(h: float, psi: float) -> None:
    pair = (h, 2e-7, 3e-7, psi, psi, salt())
    assert p.constant_potential(*pair) < p.constant_charge(*pair)


@pytest.mark.parametrize("h", [20e-9, 60e-9])
def test_all_three_agree_far_apart_at_low_potential(h: float) -> None:
    values = [form(h, 2e-7, 3e-7, 1e-4, 2e-4, salt(100.0)) for form in CHARGED]
    # tanh x = x - x**3/3 with x = e psi/(4 kT) = 2e-3, and e**-20 for the second term of the logarithms
    assert values == pytest.approx([values[0]] * 3, rel=1e-5)


def test_without_charge_nothing_is_left() -> None:
    for form in CHARGED:
        assert form(1e-9, 2e-7, 3e-7, 0.0, 0.0, salt()) == 0.0
    # a neutral surface still feels a charged one, but not by superposition
    assert p.linear_superposition(1e-9, 2e-7, 3e-7, 0.02, 0.0, salt()) == 0.0
    assert p.constant_potential(1e-9, 2e-7, 3e-7, 0.02, 0.0, salt()) < 0.0
    assert p.constant_charge(1e-9, 2e-7, 3e-7, 0.02, 0.0, salt()) > 0.0


def test_opposite_charges_attract() -> None:
    for form in CHARGED:
        assert form(1e-9, 2e-7, 3e-7, 0.02, -0.02, salt()) < 0.0


def test_little_salt_leaves_the_energy_at_contact() -> None:
    """With kappa h -> 0, constant potential gives 2 pi eps R psi**2 ln 2 (equal spheres of radius R)."""
    thin = salt(1e-12)
    limit = 2.0 * math.pi * constants.epsilon_0 * 78.5 * 1e-7 * 0.02**2 * math.log(2.0)
    # kappa h = 1e-7, of which half reaches the logarithm
    value = p.constant_potential(1e-9, 2e-7, 2e-7, 0.02, 0.02, thin)
    assert value == pytest.approx(limit, rel=2e-6)


def test_high_valence_saturates_superposition_at_lower_potential() -> None:
    one = p.linear_superposition(1e-9, 2e-7, 2e-7, 0.3, 0.3, salt(), 1)
    three = p.linear_superposition(1e-9, 2e-7, 2e-7, 0.3, 0.3, salt(), 3)
    # tanh(0.3 V/4 kT/e) = 0.994, tanh of three times that is 1
    assert three / one == pytest.approx(1.0 / 9.0 / math.tanh(0.075 / 0.0256926) ** 2, rel=1e-5)


def test_everything_broadcasts() -> None:
    h, d1, d2 = np.geomspace(1e-10, 1e-7, 5), np.array([[1e-7], [2e-7]]), np.full((3, 1, 1), 3e-7)
    for form in ATTRACTIONS:
        assert form(h, d1, d2, 1e-20).shape == (3, 2, 5)
        assert form(h, d1, d2, 1e-20)[1, 1, 3] == form(h[3], 2e-7, 3e-7, 1e-20)
    for charged in CHARGED:
        values = charged(h, d1, d2, 0.02, 0.03, salt())
        assert values.shape == (3, 2, 5)
        assert values[1, 1, 3] == pytest.approx(charged(h[3], 2e-7, 3e-7, 0.02, 0.03, salt()), rel=1e-14)


@pytest.mark.parametrize("h", [0.0, -1e-9, math.nan, math.inf])
@pytest.mark.parametrize("form", ATTRACTIONS)
def test_separations_that_are_none_are_refused(form: Callable[..., Any], h: float) -> None:
    with pytest.raises(InputError, match=r"h=.* m is not allowed"):
        form(np.array([1e-9, h]), 1e-7, 1e-7, 1e-20)


def test_other_bad_values_are_refused() -> None:
    with pytest.raises(InputError, match="d2="):
        p.hamaker_spheres(1e-9, 1e-7, 0.0, 1e-20)
    with pytest.raises(InputError, match="hamaker=nan J"):
        p.hamaker_spheres(1e-9, 1e-7, 1e-7, math.nan)
    with pytest.raises(InputError, match="psi1=inf V"):
        p.constant_charge(1e-9, 1e-7, 1e-7, math.inf, 0.0, salt())
    with pytest.raises(InputError, match="wavelength="):
        p.retardation_gregory(1e-9, -1e-7)
    with pytest.raises(InputError, match="valence="):
        p.linear_superposition(1e-9, 1e-7, 1e-7, 0.02, 0.02, salt(), 0)


@pytest.mark.parametrize("form", CHARGED)
def test_a_double_layer_needs_permittivity_and_ions(form: Callable[..., Any]) -> None:
    with pytest.raises(InputError, match="ionic_strength=0 mol/m3"):
        form(1e-9, 1e-7, 1e-7, 0.02, 0.02, salt(0.0))
    plain = Medium(temperature=298.15, viscosity=1e-3, density=1000.0, ionic_strength=1.0)
    with pytest.raises(InputError, match="relative_permittivity=None"):
        form(1e-9, 1e-7, 1e-7, 0.02, 0.02, plain)
