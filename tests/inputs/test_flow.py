from __future__ import annotations

import math

import pytest

from aggsim.errors import InputError
from aggsim.inputs import Flow, Medium

WATER = Medium.water(293.15)


def test_turbulent_and_power_are_two_ways_to_one_gradient() -> None:
    flow = Flow(shear_rate=50.0)
    by_mass = Flow.turbulent(dissipation=flow.dissipation(WATER), medium=WATER)
    by_power = Flow.from_power(power=3.0 * flow.power_per_volume(WATER), volume=3.0, medium=WATER)
    assert by_mass.shear_rate == pytest.approx(50.0, rel=1e-14)
    assert by_power.shear_rate == pytest.approx(50.0, rel=1e-14)


def test_kolmogorov_length_is_its_formula() -> None:
    flow = Flow.turbulent(dissipation=0.02, medium=WATER)
    expected = (WATER.kinematic_viscosity**3 / 0.02) ** 0.25
    assert flow.kolmogorov_length(WATER) == pytest.approx(expected, rel=1e-14)


def test_a_medium_at_rest() -> None:
    flow = Flow(shear_rate=0.0)
    assert flow.dissipation(WATER) == 0.0
    assert flow.kolmogorov_length(WATER) == math.inf
    assert Flow.turbulent(dissipation=0.0, medium=WATER) == flow


def test_refusals() -> None:
    with pytest.raises(InputError, match="shear_rate"):
        Flow(shear_rate=-1.0)
    with pytest.raises(InputError, match="dissipation"):
        Flow.turbulent(dissipation=math.nan, medium=WATER)
    with pytest.raises(InputError, match="volume"):
        Flow.from_power(power=1.0, volume=0.0, medium=WATER)
    with pytest.raises(InputError, match=r"Medium\.water"):
        Flow.turbulent(dissipation=0.02, medium="water")  # type: ignore[arg-type]
    with pytest.raises(InputError, match="medium"):
        Flow(shear_rate=1.0).dissipation(1e-6)  # type: ignore[arg-type]
