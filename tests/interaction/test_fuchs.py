from __future__ import annotations

import math
from collections.abc import Callable
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from aggsim._checks import FloatArray
from aggsim.errors import AccuracyWarning, InputError
from aggsim.inputs import Medium, Particles
from aggsim.interaction.fuchs import capped_ratio, log_fuchs, log_stability_ratio, stability_ratio
from aggsim.interaction.models import ConstantCharge, ConstantPotential, Hamaker, LinearSuperposition
from aggsim.interaction.profile import PairEnergy, assembled_pair, pair_energy
from aggsim.interaction.repulsions import Born, Brush

KT = Medium(temperature=298.15, viscosity=0.89e-3, density=997.0).thermal_energy


def water(salt: float) -> Medium:
    return Medium(
        temperature=298.15,
        viscosity=0.89e-3,
        density=997.0,
        relative_permittivity=78.5,
        ionic_strength=salt,
    )


def grain(diameter: float, potential: float = 0.025, hamaker: float = 1e-20) -> Particles:
    return Particles(diameter=diameter, density=1055.0, hamaker=hamaker, surface_potential=potential)


def pair(diameter: float, salt: float, potential: float = 0.025, other: float | None = None) -> PairEnergy:
    second = None if other is None else grain(other, potential)
    return assembled_pair(grain(diameter, potential), water(salt), second)


def plain(function: Callable[[FloatArray], FloatArray], hydrodynamics: bool = False) -> float:
    """log W of two spheres of 200 nm, for an energy in kT as a function of h/R with R = 200 nm."""
    size = np.array([200e-9])
    return float(log_fuchs(lambda h, a, b: function(h / 200e-9) * KT, size, size, KT, hydrodynamics)[0])


def adaptive(energy: PairEnergy, hydrodynamics: bool) -> float:
    """log W by adaptive quadrature in ln h, cut into pieces, with the formula written out."""
    r1, r2 = 0.5 * energy.first.diameter, 0.5 * energy.second.diameter
    reach, a = r1 + r2, 2.0 * r1 * r2 / (r1 + r2)

    def logarithm(x: FloatArray) -> FloatArray:
        h = np.exp(x)
        u = h / a
        film = (6.0 * u**2 + 13.0 * u + 2.0) / (6.0 * u**2 + 4.0 * u) if hydrodynamics else 1.0
        return energy(h) / KT + np.log(film * reach * h / (reach + h) ** 2)

    x = np.linspace(math.log(1e-13), math.log(1e9 * reach), 20001)
    f = logarithm(x)
    top = float(f.max())
    cuts = [float(x[0]), *x[1:-1][(f[1:-1] > f[:-2]) & (f[1:-1] >= f[2:])].tolist()]
    if energy.barrier_separation is not None:
        centre = math.log(energy.barrier_separation)
        cuts += [centre + shift for shift in (-0.3, -0.1, -0.03, 0.0, 0.03, 0.1, 0.3)]
    cuts = sorted({*cuts, *np.linspace(x[0], x[-1], 12).tolist()})
    total = 0.0
    for low, high in pairwise(cuts):
        total += quad(
            lambda y: math.exp(float(logarithm(np.array(y))) - top),
            low,
            high,
            epsabs=0.0,
            epsrel=1e-10,
            limit=500,
        )[0]
    return top + math.log(total)


@pytest.mark.parametrize("hydrodynamics", [True, False])
@pytest.mark.parametrize(
    ("one", "other", "salt", "potential"),
    [
        (100e-9, 100e-9, 50.0, 0.025),
        (100e-9, 300e-9, 50.0, 0.025),
        (20e-9, 5e-6, 10.0, 0.020),
        (1e-6, 1e-6, 300.0, 0.030),
        (5e-6, 5e-6, 150.0, 0.025),
        (2e-9, 2e-9, 1.0, 0.1),
        (100e-6, 1e-6, 500.0, 0.04),
    ],
)
def test_against_adaptive_quadrature(
    one: float, other: float, salt: float, potential: float, hydrodynamics: bool
) -> None:
    energy = pair(one, salt, potential, other)
    # quadrature is asked for 1e-10 of every piece; the energy itself rounds at 1e-16 of up to 1e3 kT
    expected = adaptive(energy, hydrodynamics)
    assert log_stability_ratio(energy, hydrodynamics=hydrodynamics) == pytest.approx(
        expected, rel=0, abs=1e-8
    )


@pytest.mark.parametrize("height", [0.0, 1.0, 50.0, 200.0, 690.0, 1e4])
def test_a_constant_energy_multiplies(height: float) -> None:
    """Without film or structure W is exp(V/kT), since int R/(R + h)**2 dh is 1."""
    assert plain(lambda x: np.full_like(x, height)) == pytest.approx(height, rel=1e-9, abs=1e-9)


@pytest.mark.parametrize("strength", [0.1, 1.0, 10.0, 100.0, 1000.0])
def test_charge_without_screening_has_a_closed_form(strength: float) -> None:
    """V/kT = q R/(R + h) gives W = (exp(q) - 1)/q (Fuchs 1934, DOI 10.1007/BF01341386)."""
    expected = strength + math.log(-math.expm1(-strength) / strength)
    assert plain(lambda x: strength / (1.0 + x)) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("width", [0.3, 1e-2, 1e-3, 3e-4])
def test_a_narrow_peak_between_two_nodes_is_found(width: float) -> None:
    """V/kT = 30 - ((ln h - ln h0)/width)**2/2, whose integral Laplace's method gives."""

    def energy(x: FloatArray) -> FloatArray:
        return 30.0 - 0.5 * (np.log(x / 1.2345e-3) / width) ** 2

    # dh = h d(ln h)
    peak = 30.0 + math.log(1.2345e-3 * width * math.sqrt(2.0 * math.pi)) - 2.0 * math.log1p(1.2345e-3)
    # the next term of the expansion is of the order width**2
    assert plain(energy) == pytest.approx(peak, abs=width**2 + 1e-5)


def test_rough_energies_are_announced() -> None:
    with pytest.warns(AccuracyWarning, match="too rough"):
        found = plain(lambda x: np.where(x > 0.37, 0.0, 1.0))
    assert found == pytest.approx(math.log(1.0 + (math.e - 1.0) * 0.37 / 1.37), abs=1e-2)


def test_no_attraction_and_a_liquid_film_diverge() -> None:
    energy = pair_energy(grain(100e-9), water(10.0), van_der_waals=None)
    with pytest.raises(InputError, match=r"diverges at contact.*van_der_waals"):
        stability_ratio(energy)
    assert stability_ratio(energy, hydrodynamics=False) > 1.0


def test_a_wall_at_contact_lets_the_deep_minimum_hold() -> None:
    big, small = grain(400e-9), grain(100e-9)
    soft = log_stability_ratio(pair_energy(big, water(100.0)))
    hard = log_stability_ratio(pair_energy(big, water(100.0), short_range=Born(hamaker=1e-20)))
    # the wall adds a little to the barrier, and cannot make it lower
    assert soft < hard < soft + 0.1
    with pytest.raises(InputError, match="no minimum deeper"):
        stability_ratio(pair_energy(small, water(50.0), short_range=Born(hamaker=1e-20)))


def test_a_number_is_refused() -> None:
    with pytest.raises(InputError, match="pair_energy"):
        stability_ratio(3.0)  # type: ignore[arg-type]


def test_an_energy_that_is_no_number_is_refused() -> None:
    with pytest.raises(InputError, match="not a number"):
        plain(lambda x: np.where(x > 1.0, np.nan, 0.0))


@pytest.mark.parametrize("barrier", np.linspace(0.0, 200.0, 9))
def test_barriers_up_to_200_kt(barrier: float) -> None:
    """A parabolic barrier in ln h: W grows by exp(barrier) and never overflows or vanishes."""

    def energy(x: FloatArray) -> FloatArray:
        return barrier * np.exp(-0.5 * np.log(x / 0.01) ** 2) - 1e-3 / x

    found = plain(energy, hydrodynamics=True)
    assert math.isfinite(found)
    assert found > 0.7 * barrier - 10.0
    assert found <= barrier + 5.0


def test_the_ratio_stops_at_a_number_that_can_be_divided_by() -> None:
    energy = pair(1e-6, 1.0, 0.1)
    assert log_stability_ratio(energy) > 1000.0
    assert stability_ratio(energy) == 1e300
    assert capped_ratio(np.array([-5.0, 0.0]))[1] == 1.0


@given(
    st.floats(-8.7, -4.0),
    st.floats(-8.7, -4.0),
    st.floats(-4.0, math.log10(5000.0)),
    st.floats(0.0, 0.25),
    st.sampled_from([LinearSuperposition(), ConstantPotential(), ConstantCharge()]),
    st.booleans(),
)
def test_always_finite(
    one: float, other: float, salt: float, potential: float, model: object, hydrodynamics: bool
) -> None:
    first, second = grain(10.0**one, potential), grain(10.0**other, potential)
    energy = assembled_pair(first, water(10.0**salt), second, double_layer=model)  # type: ignore[arg-type]
    swapped = assembled_pair(second, water(10.0**salt), first, double_layer=model)  # type: ignore[arg-type]
    rapid = assembled_pair(first, water(10.0**salt), second, double_layer=None)
    found = log_stability_ratio(energy, hydrodynamics=hydrodynamics)
    assert math.isfinite(found)
    assert 0.1 < stability_ratio(energy, hydrodynamics=hydrodynamics) <= 1e300
    assert log_stability_ratio(swapped, hydrodynamics=hydrodynamics) == pytest.approx(
        found, rel=1e-9, abs=1e-9
    )
    # what only repels cannot make coagulation faster
    assert found >= log_stability_ratio(rapid, hydrodynamics=hydrodynamics) - 1e-8


@given(st.floats(-8.7, -5.0), st.floats(0.0, 3.5), st.floats(0.0, 0.2), st.floats(1.0, 1.5))
def test_monotone_in_potential_and_salt(diameter: float, salt: float, potential: float, more: float) -> None:
    size, dissolved = 10.0**diameter, 10.0**salt
    base = log_stability_ratio(pair(size, dissolved, potential))
    slack = 1e-9 * (1.0 + abs(base))
    assert log_stability_ratio(pair(size, dissolved, potential * more)) >= base - slack
    assert log_stability_ratio(pair(size, dissolved * more, potential)) <= base + slack


def test_a_brush_keeps_particles_apart() -> None:
    bare = log_stability_ratio(pair_energy(grain(100e-9), water(300.0)))
    brush = Brush(thickness=1e-9, volume_fraction=0.1, flory_parameter=0.45, molar_mass=2.0)
    energy = pair_energy(grain(100e-9), water(300.0), steric=brush)
    found = log_stability_ratio(energy)
    assert found > bare + 0.1
    # layers that begin and end at a separation make kinks: the accuracy that is promised, not more
    assert found == pytest.approx(adaptive(energy, True), rel=0, abs=1e-6)


def test_the_wrong_tail_makes_the_rapid_rate_too_fast() -> None:
    right = stability_ratio(pair_energy(grain(100e-9), water(1.0), double_layer=None))
    wrong = stability_ratio(
        pair_energy(grain(100e-9), water(1.0), double_layer=None, van_der_waals=Hamaker(derjaguin=True))
    )
    assert wrong < 0.95 * right
