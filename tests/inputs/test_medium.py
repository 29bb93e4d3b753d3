from __future__ import annotations

import dataclasses
import math
import pickle

import pytest
from scipy import constants

from aggsim.errors import InputError, ValidityWarning
from aggsim.inputs import Medium


def liquid(**changes: object) -> Medium:
    values: dict[str, object] = {"temperature": 298.15, "viscosity": 0.89e-3, "density": 997.0}
    return Medium(**(values | changes))  # type: ignore[arg-type]


def test_derived_properties() -> None:
    medium = liquid()
    assert medium.thermal_energy == constants.k * 298.15
    assert medium.kinematic_viscosity == pytest.approx(0.89e-3 / 997.0, rel=1e-15)
    assert medium.name == "medium"


def test_debye_length_is_its_formula() -> None:
    medium = liquid(relative_permittivity=78.5, ionic_strength=60.0)
    squared_inverse = (
        2.0 * constants.e**2 * constants.N_A * 60.0 / (constants.epsilon_0 * 78.5 * constants.k * 298.15)
    )
    assert medium.debye_length == pytest.approx(squared_inverse**-0.5, rel=1e-14)


def test_debye_length_without_ions_is_infinite() -> None:
    assert liquid().debye_length == math.inf
    assert Medium.water().debye_length == math.inf


def test_debye_length_falls_with_the_root_of_the_ionic_strength() -> None:
    one, hundred = (Medium.water(ionic_strength=value).debye_length for value in (1.0, 100.0))
    assert one / hundred == pytest.approx(10.0, rel=1e-14)


def test_debye_length_asks_for_the_permittivity() -> None:
    with pytest.raises(InputError, match="relative_permittivity"):
        _ = liquid(ionic_strength=1.0).debye_length


@pytest.mark.parametrize(
    ("changes", "hint"),
    [
        ({"temperature": 25.0}, "298.15; this looks like degrees Celsius"),
        ({"temperature": -5.0}, "268.15; this looks like degrees Celsius"),
        ({"temperature": math.nan}, "kelvin"),
        ({"temperature": 5000.0}, "200 to 3000 K"),
        ({"temperature": "warm"}, "kelvin"),
        ({"viscosity": 0.0}, "Pa s"),
        ({"viscosity": 2e4}, "mPa s"),
        ({"density": -1.0}, "kg/m3"),
        ({"density": 0.997}, "g/cm3"),
        ({"density": 1e6}, "kg/m3"),
        ({"relative_permittivity": 0.5}, "at least 1"),
        ({"ionic_strength": -1.0}, "at least 0"),
        ({"ionic_strength": 60e3}, "mol/L"),
        ({"mean_free_path": 0.0}, "mean_free_path"),
        ({"mean_free_path": 66.0}, "metres"),
    ],
)
def test_refusals_say_what_to_try(changes: dict[str, object], hint: str) -> None:
    with pytest.raises(InputError, match=hint.replace("(", "\\(")) as caught:
        liquid(**changes)
    assert next(iter(changes)) in str(caught.value)


@pytest.mark.parametrize("temperature", [273.14, 373.16, 400.0, 25.0])
def test_water_only_as_a_liquid(temperature: float) -> None:
    with pytest.raises(InputError, match=r"273\.15 to 373\.15 K"):
        Medium.water(temperature)


def test_water_in_degrees_celsius_gets_the_right_number() -> None:
    with pytest.raises(InputError, match=r"Try: 293\.15"):
        Medium.water(temperature=20.0)


def test_strong_brine_warns() -> None:
    with pytest.warns(ValidityWarning, match="pure water"):
        Medium.water(ionic_strength=3000.0)


def test_another_ionic_strength_by_replace() -> None:
    medium = dataclasses.replace(Medium.water(), ionic_strength=100.0)
    assert medium == Medium.water(ionic_strength=100.0)


def test_air_is_an_ideal_gas_with_a_kinetic_mean_free_path() -> None:
    one, half = Medium.air(300.0), Medium.air(300.0, pressure=50662.5)
    assert one.viscosity == half.viscosity
    assert half.density == pytest.approx(0.5 * one.density, rel=1e-14)
    assert one.mean_free_path is not None
    assert half.mean_free_path == pytest.approx(2.0 * one.mean_free_path, rel=1e-14)
    # lambda = 2 mu/(rho c) with the mean molecular speed c = sqrt(8 p/(pi rho))
    speed = math.sqrt(8.0 * 101325.0 / (math.pi * one.density))
    assert one.mean_free_path == pytest.approx(2.0 * one.viscosity / (one.density * speed), rel=1e-13)


def test_air_refuses_other_units_and_degrees() -> None:
    with pytest.raises(InputError, match="pascal"):
        Medium.air(300.0, pressure=-1.0)
    with pytest.raises(InputError, match="Celsius"):
        Medium.air(20.0)


def test_frozen_and_pickled() -> None:
    medium = Medium.water(ionic_strength=1.0)
    assert pickle.loads(pickle.dumps(medium)) == medium
    with pytest.raises(dataclasses.FrozenInstanceError):
        medium.density = 1.0  # type: ignore[misc]
