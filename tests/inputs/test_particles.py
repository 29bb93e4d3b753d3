from __future__ import annotations

import math

import pytest

from aggsim.errors import InputError, ValidityWarning
from aggsim.inputs import Particles


def test_volume() -> None:
    latex = Particles(diameter=400e-9, density=1055.0, hamaker=9e-21, surface_potential=-0.020)
    assert latex.volume == pytest.approx(math.pi / 6.0 * 6.4e-20, rel=1e-14)


@pytest.mark.parametrize(
    ("changes", "hint"),
    [
        ({"diameter": 400.0}, "400e-9"),
        ({"diameter": -1e-6}, "metres"),
        ({"density": 0.5}, "kg/m3"),
        ({"density": 1e5}, "kg/m3"),
        ({"hamaker": 9.0}, "joule"),
        ({"hamaker": 0.0}, "joule"),
        ({"hamaker": 1e-25}, "joule"),
        ({"surface_potential": -30.0}, "-0.030 V"),
        ({"surface_potential": math.inf}, "volts"),
    ],
)
def test_refusals_say_what_to_try(changes: dict[str, float], hint: str) -> None:
    values = {"diameter": 400e-9, "density": 1055.0} | changes
    with pytest.raises(InputError, match=hint) as caught:
        Particles(**values)
    assert next(iter(changes)) in str(caught.value)


def test_density_in_grams_per_cubic_centimetre_warns() -> None:
    with pytest.warns(ValidityWarning, match="Try: 2650"):
        Particles(diameter=1e-6, density=2.65)
