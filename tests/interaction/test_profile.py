"""The energy of a pair: its parts, its barrier and minima, and what it asks for."""

from __future__ import annotations

import pickle
import warnings
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from aggsim.errors import InputError, ValidityWarning
from aggsim.inputs import Medium, Particles
from aggsim.interaction import (
    Born,
    Brush,
    ConstantCharge,
    ConstantPotential,
    Hamaker,
    Hydration,
    LinearSuperposition,
    PairEnergy,
    pair_energy,
)

LATEX = Particles(diameter=200e-9, density=1055.0, hamaker=1e-20, surface_potential=-0.025)
CLAY = Particles(diameter=500e-9, density=2600.0, hamaker=2.5e-20, surface_potential=-0.04)
WATER = Medium.water(ionic_strength=50.0)
MODELS = [LinearSuperposition(), ConstantPotential(), ConstantCharge()]
EVERYTHING = {
    "steric": Brush(thickness=2e-9, volume_fraction=0.1, flory_parameter=0.4),
    "short_range": Hydration(energy_per_area=0.01),
}
H = np.geomspace(1e-11, 1e-6, 40)


def slope_changes(energy: PairEnergy, separation: float) -> tuple[float, float]:
    """Energy a little inside and a little outside of a separation, less that at it."""
    middle = float(energy(separation))
    return float(energy(0.99 * separation)) - middle, float(energy(1.01 * separation)) - middle


@given(h=st.floats(1e-12, 1e-5))
def test_energy_is_the_sum_of_its_parts(h: float) -> None:
    energy = pair_energy(LATEX, WATER, CLAY, **EVERYTHING)
    assert list(energy.parts) == ["van der Waals", "double layer", "steric", "short range"]
    parts = [part(h) for part in energy.parts.values()]
    # attraction and repulsion may cancel, so the scale is that of the parts
    assert abs(energy(h) - sum(parts)) <= 1e-15 * sum(map(abs, parts))


def test_parts_are_what_their_models_say() -> None:
    energy = pair_energy(LATEX, WATER, CLAY, **EVERYTHING)
    d, psi = (LATEX.diameter, CLAY.diameter), (-0.025, -0.04)
    expected = {
        "van der Waals": Hamaker().energy(H, *d, np.sqrt(1e-20 * 2.5e-20)),
        "double layer": LinearSuperposition().energy(H, *d, *psi, WATER),
        "steric": EVERYTHING["steric"].energy(H, *d, WATER),  # type: ignore[attr-defined]
        "short range": EVERYTHING["short_range"].energy(H, *d, WATER),  # type: ignore[attr-defined]
    }
    for name, part in energy.parts.items():
        assert part(H) == pytest.approx(expected[name], rel=1e-14), name


@pytest.mark.parametrize("model", MODELS)
def test_the_order_of_the_pair_does_not_matter(model: Any) -> None:
    one = pair_energy(LATEX, WATER, CLAY, double_layer=model)
    two = pair_energy(CLAY, WATER, LATEX, double_layer=model)
    assert (one.first, one.second) == (two.second, two.first) == (LATEX, CLAY)
    # the parts cancel to a few digits near a zero
    assert one(H) == pytest.approx(two(H), rel=1e-9)
    assert one.barrier == pytest.approx(two.barrier, rel=1e-9)


def test_a_pair_of_equals_needs_no_second() -> None:
    assert pair_energy(LATEX, WATER) == pair_energy(LATEX, WATER, LATEX)
    assert np.array_equal(pair_energy(LATEX, WATER)(H), pair_energy(LATEX, WATER, replace(LATEX))(H))


def test_other_diameters_keep_the_surfaces() -> None:
    energy = pair_energy(LATEX, WATER)
    larger = pair_energy(replace(LATEX, diameter=3e-7), WATER, replace(LATEX, diameter=5e-7))
    assert np.array_equal(energy.between(H, 3e-7, 5e-7), larger(H))
    assert energy.between(H, np.full((4, 1), 3e-7), 5e-7).shape == (4, 40)
    assert np.array_equal(energy.between(H, 2e-7, 2e-7), energy(H))


@pytest.mark.parametrize("model", MODELS)
def test_barrier_and_secondary_minimum_are_extremes(model: Any) -> None:
    energy = pair_energy(LATEX, WATER, double_layer=model)
    assert energy.barrier_separation is not None
    assert energy.secondary_minimum_separation is not None
    assert energy.secondary_minimum is not None
    assert energy.barrier == pytest.approx(float(energy(energy.barrier_separation)), rel=1e-12)
    assert max(slope_changes(energy, energy.barrier_separation)) < 0.0
    assert min(slope_changes(energy, energy.secondary_minimum_separation)) > 0.0
    assert energy.secondary_minimum < 0.0 < energy.barrier
    assert energy.barrier_separation < energy.secondary_minimum_separation
    # no point of a fine scan is higher than the barrier
    assert energy.barrier >= energy(np.geomspace(1e-11, 1e-6, 20001)).max()
    # the attraction falls without end towards contact
    assert energy.primary_minimum is None
    assert energy.primary_minimum_separation is None


@pytest.mark.parametrize("model", MODELS)
@given(millivolt=st.floats(15.0, 45.0), strength=st.floats(5.0, 100.0))
def test_barrier_rises_with_potential_and_falls_with_salt(
    model: Any, millivolt: float, strength: float
) -> None:
    def barrier(volt: float, salt: float) -> float:
        particles = replace(LATEX, surface_potential=volt)
        return pair_energy(particles, Medium.water(ionic_strength=salt), double_layer=model).barrier

    base = barrier(1e-3 * millivolt, strength)
    if base > 0.0:
        assert barrier(1.02e-3 * millivolt, strength) > base
        assert barrier(1e-3 * millivolt, 1.05 * strength) < base


def test_attraction_alone_has_no_extremes() -> None:
    energy = pair_energy(LATEX, WATER, double_layer=None)
    assert list(energy.parts) == ["van der Waals"]
    assert energy.barrier == 0.0
    assert energy.barrier_separation is None
    assert energy.secondary_minimum is None
    assert energy.primary_minimum is None


def test_repulsion_alone_rises_to_contact() -> None:
    energy = pair_energy(LATEX, WATER, van_der_waals=None)
    # kappa h = 1e-4 at the closest point of the search
    assert energy.barrier == pytest.approx(float(energy(1e-18)), rel=2e-4)
    assert energy.barrier_separation is None
    assert energy.secondary_minimum is None
    assert np.isnan(energy.hamaker)


def test_nothing_at_all_is_zero() -> None:
    energy = pair_energy(LATEX, WATER, double_layer=None, van_der_waals=None)
    assert np.all(energy(H) == 0.0)
    assert energy(H).shape == H.shape
    assert (energy.barrier, dict(energy.parts)) == (0.0, {})
    neutral = replace(LATEX, surface_potential=0.0)
    assert np.array_equal(pair_energy(neutral, WATER)(H), pair_energy(LATEX, WATER, double_layer=None)(H))


def test_born_repulsion_gives_the_primary_minimum_a_bottom() -> None:
    energy = pair_energy(LATEX, WATER, short_range=Born(hamaker=1e-20))
    assert energy.primary_minimum is not None
    assert energy.primary_minimum_separation is not None
    assert energy.barrier_separation is not None
    assert energy.primary_minimum_separation < energy.barrier_separation
    assert min(slope_changes(energy, energy.primary_minimum_separation)) > 0.0
    assert energy.barrier > 0.0 > energy.primary_minimum
    bare = pair_energy(LATEX, WATER, double_layer=None, short_range=Born(hamaker=1e-20))
    # -A a/(6 h) + A a s**6/(1260 h**7) has its minimum at h = s/30**(1/6); the exact attraction moves it by h/a
    assert bare.primary_minimum_separation == pytest.approx(0.5e-9 / 30 ** (1 / 6), rel=0.01)
    assert (bare.barrier, bare.secondary_minimum) == (0.0, None)


def test_a_brush_hides_the_attraction() -> None:
    brush = Brush(thickness=8e-9, volume_fraction=0.2, flory_parameter=0.3)
    energy = pair_energy(LATEX, WATER, double_layer=None, steric=brush)
    assert energy.barrier > 100.0 * WATER.thermal_energy
    assert energy.secondary_minimum_separation is not None
    # the layers begin to touch at twice their thickness
    assert 10e-9 < energy.secondary_minimum_separation <= 16e-9


def test_a_maximum_below_zero_is_a_negative_barrier() -> None:
    energy = pair_energy(LATEX, Medium.water(ionic_strength=160.0))
    assert energy.barrier_separation is not None
    assert energy.barrier < 0.0
    assert pair_energy(LATEX, Medium.water(ionic_strength=1000.0)).barrier_separation is None


def test_energies_travel_between_processes() -> None:
    energy = pair_energy(LATEX, WATER, CLAY, **EVERYTHING)
    before = energy.barrier
    again = pickle.loads(pickle.dumps(energy))
    assert again == energy
    assert again.barrier == before
    assert np.array_equal(
        pickle.loads(pickle.dumps(energy.parts["double layer"]))(H), energy.parts["double layer"](H)
    )


@pytest.mark.parametrize("h", [0.0, -1e-9, np.nan, np.inf])
def test_separations_must_be_positive(h: float) -> None:
    energy = pair_energy(LATEX, WATER)
    with pytest.raises(InputError, match=r"^h="):
        energy(h)
    with pytest.raises(InputError, match=r"^h="):
        energy.parts["double layer"]([1e-9, h])


BARE = Particles(diameter=200e-9, density=1055.0)


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: pair_energy(replace(LATEX, hamaker=None), WATER), r"particles\.hamaker=None.*joule|hamaker=9e-21"),
        (lambda: pair_energy(LATEX, WATER, replace(CLAY, hamaker=None)), r"^other\.hamaker=None"),
        (lambda: pair_energy(replace(LATEX, surface_potential=None), WATER), r"particles\.surface_potential=None"),
        (lambda: pair_energy(LATEX, WATER, BARE, van_der_waals=None), r"^other\.surface_potential=None"),
        (lambda: pair_energy(LATEX, Medium.water()), "ionic_strength=0 mol/m3"),
        (
            lambda: pair_energy(
                LATEX, Medium(temperature=298.15, viscosity=1e-3, density=1e3, ionic_strength=1.0)
            ),
            "relative_permittivity=None",
        ),
        (lambda: pair_energy(WATER, LATEX), "^particles=Medium"),
        (lambda: pair_energy(LATEX, LATEX), "^medium=Particles"),
        (lambda: pair_energy(LATEX, WATER, 200e-9), "^other=2e-07"),
        (lambda: pair_energy(LATEX, WATER, double_layer="constant charge"), "^double_layer='constant charge'"),
        (lambda: pair_energy(LATEX, WATER, double_layer=ConstantCharge), "^double_layer=<class"),
        (lambda: pair_energy(LATEX, WATER, double_layer=Hamaker()), "^double_layer=Hamaker"),
        (lambda: pair_energy(LATEX, WATER, van_der_waals=LinearSuperposition()), "^van_der_waals=LinearSuper"),
        (lambda: pair_energy(LATEX, WATER, steric=ConstantPotential()), "^steric=ConstantPotential"),
        (lambda: pair_energy(LATEX, WATER, short_range=0.01), "^short_range=0.01"),
    ],
)  # fmt: skip
def test_what_is_missing_or_wrong_is_named(call: Any, message: str) -> None:
    with pytest.raises(InputError, match=message):
        call()


def test_what_is_left_out_needs_no_values() -> None:
    plain = Medium(temperature=298.15, viscosity=1e-3, density=1e3)
    assert pair_energy(replace(BARE, hamaker=1e-20), plain, double_layer=None)(1e-9) < 0.0
    assert pair_energy(replace(BARE, surface_potential=0.03), WATER, van_der_waals=None)(1e-9) > 0.0


def test_models_outside_their_range_warn_once() -> None:
    with pytest.warns(ValidityWarning, match="kappa a=") as caught:
        energy = pair_energy(replace(LATEX, diameter=10e-9), WATER)
    assert len(caught) == 1
    assert caught[0].filename == __file__
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        energy(H)
        assert energy.barrier is not None
    with pytest.warns(ValidityWarning, match=r"0\.06 V is above 0\.05 V"):
        pair_energy(replace(LATEX, surface_potential=0.06), WATER, double_layer=ConstantPotential())


def test_an_own_model_needs_one_method() -> None:
    class Square:
        def energy(self, h: Any, d1: Any, d2: Any, medium: Medium) -> Any:
            return np.where(np.asarray(h) < 1e-9, 1e-18, 0.0)

    energy = pair_energy(LATEX, WATER, double_layer=None, van_der_waals=None, short_range=Square())
    assert energy([0.5e-9, 2e-9]) == pytest.approx([1e-18, 0.0])
