"""The answer does not depend on the units in which the question is put."""

from __future__ import annotations

from dataclasses import dataclass

import pytest
from hypothesis import given
from hypothesis import strategies as st

import aggsim as ag
from aggsim.interaction import ConstantCharge, ConstantPotential, log_stability_ratio
from aggsim.interaction.profile import assembled_pair

FACTORS = {"nm": 1e-9, "m": 1.0, "mV": 1e-3, "V": 1.0, "zJ": 1e-21, "J": 1.0, "mol/m3": 1.0, "umol/m3": 1e-6}


@dataclass(frozen=True)
class Quantity:
    """A number with a unit, as the common units libraries offer it."""

    magnitude: float
    unit: str

    def to(self, unit: str) -> Quantity:
        return Quantity(self.magnitude * FACTORS[self.unit] / FACTORS[unit], unit)


def log_ratio(particles: ag.Particles, medium: ag.Medium, model: object) -> float:
    return log_stability_ratio(assembled_pair(particles, medium, double_layer=model))


@given(st.floats(50.0, 500.0), st.floats(10.0, 40.0), st.floats(3.0, 15.0), st.floats(5.0, 200.0))
def test_quantities_in_other_units_give_the_same_ratio(
    d: float, psi: float, hamaker: float, salt: float
) -> None:
    plain = ag.Particles(
        diameter=d * 1e-9, density=1055.0, hamaker=hamaker * 1e-21, surface_potential=psi * 1e-3
    )
    named = ag.Particles(
        diameter=Quantity(d, "nm"),
        density=1055.0,
        hamaker=Quantity(hamaker, "zJ"),
        surface_potential=Quantity(psi, "mV"),
    )
    media = [
        ag.Medium.water(temperature=298.15, ionic_strength=i) for i in (salt, Quantity(salt * 1e6, "umol/m3"))
    ]
    first = log_ratio(plain, media[0], ConstantPotential())
    assert log_ratio(named, media[1], ConstantPotential()) == pytest.approx(first, rel=1e-10, abs=1e-10)


@pytest.mark.parametrize("model", [ConstantPotential(), ConstantCharge()], ids=lambda m: type(m).__name__)
@given(scale=st.floats(0.4, 3.0), salt=st.floats(10.0, 100.0))
def test_the_ratio_depends_on_dimensionless_groups_alone(model: object, scale: float, salt: float) -> None:
    """kappa d, A/kT and eps d psi**2 / kT: all lengths times s, salt over s**2, potential over s**0.5."""
    ratios = []
    for s in (1.0, scale):
        particles = ag.Particles(
            diameter=200e-9 * s, density=1055.0, hamaker=9e-21, surface_potential=0.025 / s**0.5
        )
        medium = ag.Medium.water(temperature=298.15, ionic_strength=salt / s**2)
        ratios.append(log_ratio(particles, medium, model))
    # the accuracy of the quadrature, 1e-8, in the logarithm
    assert ratios[1] == pytest.approx(ratios[0], rel=1e-8, abs=1e-8)
