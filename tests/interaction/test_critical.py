from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from aggsim.errors import InputError, ValidityWarning
from aggsim.inputs import Medium, Particles
from aggsim.interaction.critical import (
    critical_coagulation_closed_form,
    critical_coagulation_concentration,
    critical_ionic_strength,
)
from aggsim.interaction.fuchs import log_stability_ratio
from aggsim.interaction.models import ConstantCharge, ConstantPotential, Hamaker, LinearSuperposition
from aggsim.interaction.profile import pair_energy
from aggsim.interaction.repulsions import Hydration

LATEX = Particles(diameter=200e-9, density=1055.0, hamaker=9e-21, surface_potential=-0.025)
WATER = Medium.water(temperature=298.15)
NEAR = Hamaker(derjaguin=True)


@given(st.floats(0.01, 0.15), st.floats(1e-21, 5e-20), st.integers(1, 3), st.floats(1e-8, 1e-5))
def test_root_on_the_curve_agrees_with_the_closed_form(
    potential: float, hamaker: float, valence: int, diameter: float
) -> None:
    particles = Particles(diameter=diameter, density=1055.0, hamaker=hamaker, surface_potential=potential)
    closed = critical_coagulation_closed_form(particles, WATER, valence)
    assume(1e-6 < closed * valence**2 < 2e4)
    found = critical_ionic_strength(
        particles, WATER, double_layer=LinearSuperposition(valence=valence), van_der_waals=NEAR
    )
    assert found / valence**2 == pytest.approx(closed, rel=1e-9)


def test_the_concentration_is_the_ionic_strength_over_the_square_of_the_valence() -> None:
    model = LinearSuperposition(valence=2)
    ionic = critical_ionic_strength(LATEX, WATER, double_layer=model)
    assert critical_coagulation_concentration(LATEX, WATER, double_layer=model) == ionic / 4


def test_what_is_beyond_range_is_said_at_the_concentration_found() -> None:
    high = replace(LATEX, surface_potential=0.06)
    model = LinearSuperposition()
    assert critical_coagulation_concentration(high, WATER, double_layer=model) > 0.0  # inside its range
    tiny = replace(LATEX, diameter=1e-9)
    with pytest.warns(ValidityWarning, match="kappa a"):
        found = critical_coagulation_concentration(tiny, WATER, double_layer=model)
    assert found == critical_ionic_strength(tiny, WATER, double_layer=model)


@pytest.mark.parametrize("model", [LinearSuperposition(), ConstantPotential(), ConstantCharge()])
def test_the_maximum_touches_zero(model: object) -> None:
    found = critical_coagulation_concentration(LATEX, WATER, double_layer=model)  # type: ignore[arg-type]

    def barrier(salt: float) -> float:
        return pair_energy(LATEX, replace(WATER, ionic_strength=salt), double_layer=model).barrier  # type: ignore[arg-type]

    kt = WATER.thermal_energy
    assert barrier(found) == pytest.approx(0.0, abs=1e-6 * kt)
    assert barrier(0.99 * found) > 0.01 * kt
    assert barrier(1.01 * found) < -0.01 * kt


def test_models_rank_as_they_should() -> None:
    psi, superposition, charge = (
        critical_coagulation_concentration(LATEX, WATER, double_layer=model)
        for model in (ConstantPotential(), LinearSuperposition(), ConstantCharge())
    )
    assert psi < superposition < charge


def test_repulsion_of_other_origin_raises_it() -> None:
    bare = critical_coagulation_concentration(LATEX, WATER)
    soft = Hydration(energy_per_area=1e-3, decay_length=0.3e-9)
    assert critical_coagulation_concentration(LATEX, WATER, short_range=soft) > bare
    hard = Hydration(energy_per_area=30e-3, decay_length=1e-9)
    with pytest.raises(InputError, match="no amount of salt"):
        critical_coagulation_concentration(LATEX, WATER, short_range=hard)


def test_coagulation_is_nearly_rapid_there() -> None:
    """The barrier is gone at the concentration, and W rises steeply below it."""
    found = critical_coagulation_concentration(LATEX, WATER)
    at, half = (
        log_stability_ratio(pair_energy(LATEX, replace(WATER, ionic_strength=c)))
        for c in (found, 0.5 * found)
    )
    assert at < 1.5 < 5.0 < half


def test_the_ionic_strength_of_the_medium_does_not_matter() -> None:
    salty = replace(WATER, ionic_strength=500.0)
    assert critical_coagulation_concentration(LATEX, salty) == critical_coagulation_concentration(
        LATEX, WATER
    )


@pytest.mark.parametrize(
    ("particles", "options", "words"),
    [
        (replace(LATEX, surface_potential=0.0), {}, "at any ionic strength"),
        (replace(LATEX, surface_potential=None), {}, "surface_potential"),
        (replace(LATEX, hamaker=None), {}, "hamaker"),
        (LATEX, {"van_der_waals": None}, "van_der_waals"),
        (LATEX, {"double_layer": None}, "double_layer"),
        (replace(LATEX, hamaker=1e-22, surface_potential=0.1), {}, "no amount of salt"),
    ],
)
def test_refusals(particles: Particles, options: dict[str, object], words: str) -> None:
    with pytest.raises(InputError, match=words):
        critical_coagulation_concentration(particles, WATER, **options)  # type: ignore[arg-type]


@pytest.mark.parametrize("missing", ["hamaker", "surface_potential"])
def test_the_closed_form_asks_for_what_it_lacks(missing: str) -> None:
    with pytest.raises(InputError, match=missing):
        critical_coagulation_closed_form(replace(LATEX, **{missing: None}), WATER)  # type: ignore[arg-type]


def test_the_closed_form_needs_a_permittivity() -> None:
    oil = Medium(temperature=298.15, viscosity=1e-3, density=800.0)
    with pytest.raises(InputError, match="relative_permittivity"):
        critical_coagulation_closed_form(LATEX, oil)
