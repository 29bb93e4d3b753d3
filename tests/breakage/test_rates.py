from __future__ import annotations

import math
import pickle
from typing import Any

import numpy as np
import pytest

from aggsim.breakage import rates
from aggsim.errors import InputError
from aggsim.inputs import Compact, Flow, Fractal, Medium, Particles

LIQUID = Medium(temperature=298.15, viscosity=1e-3, density=1000.0)  # nu = 1e-6 m2/s
GRAINS = Particles(diameter=1e-6, density=1055.0)
DROPS = Compact(GRAINS)
FLOCS = Fractal(GRAINS, dimension=2.0)
MIXING = Flow(shear_rate=100.0)
REST = Flow(shear_rate=0.0)


def sphere(diameter: float) -> float:
    return math.pi / 6.0 * diameter**3


LAWS = {
    "power": rates.power_law(coefficient=0.02, exponent=1.0),
    "shear": rates.shear(MIXING, coefficient=0.47, flow_exponent=1.6),
    "turbulent": rates.turbulent(FLOCS, LIQUID, MIXING, resistance=1e-6),
    "strength": rates.floc_strength(FLOCS, LIQUID, MIXING, strength=0.1, at_diameter=1e-4, efficiency=1e-3),
    "largest": rates.largest_stable_size(FLOCS, MIXING, coefficient=1e-3, exponent=0.5, rate=0.1),
    "own": rates.from_function(np.sqrt, name="root"),
}


@pytest.mark.parametrize("law", LAWS.values(), ids=LAWS.keys())
def test_laws_grow_with_volume_pickle_and_keep_shape(law: Any) -> None:
    volume = GRAINS.volume * np.geomspace(2.0, 1e9, 40)
    rate = law(volume)
    assert rate.shape == volume.shape
    assert (rate >= 0.0).all()
    assert (np.diff(rate) >= 0.0).all()
    assert rate[-1] > rate[0]
    assert np.ndim(law(volume[3])) == 0
    assert law(volume[3]) == pytest.approx(rate[3], rel=1e-14)
    again = pickle.loads(pickle.dumps(law))
    assert again == law
    np.testing.assert_array_equal(again(volume), rate)


def test_power_law() -> None:
    assert rates.power_law(coefficient=0.02, exponent=1.0)(3.0) == pytest.approx(0.06, rel=1e-15)
    np.testing.assert_array_equal(rates.power_law(coefficient=0.02, exponent=0.0)([1.0, 2.0]), 0.02)


def test_shear() -> None:
    """32**1.6 = 2**8 and (8e-18 m3)**(1/3) = 2e-6 m."""
    law = rates.shear(Flow(shear_rate=32.0), coefficient=0.47, flow_exponent=1.6)
    assert law(8e-18) == pytest.approx(0.47 * 256.0 * 2e-6, rel=1e-13)
    area = rates.shear(Flow(shear_rate=4.0), coefficient=3.0, flow_exponent=0.5, volume_exponent=2.0 / 3.0)
    assert area(8e-18) == pytest.approx(3.0 * 2.0 * 4e-12, rel=1e-13)


def test_turbulent_bursts() -> None:
    """eps = 1e-6 * 100**2 = 0.01, eps_b = 2e-6/1e-4 = 0.02 W/kg, (4/(15 pi))**0.5 = 0.29134625, exp(-2)."""
    law = rates.turbulent(DROPS, LIQUID, MIXING, resistance=2e-6)
    assert law(sphere(1e-4)) == pytest.approx(0.29134625 * 100.0 * 0.1353352832, rel=1e-8)
    # a floc of dimension 2 is as large with 10,000 primary particles, 100 times across
    loose = rates.turbulent(FLOCS, LIQUID, MIXING, resistance=2e-6)
    assert loose(1e4 * GRAINS.volume) == pytest.approx(law(sphere(1e-4)), rel=1e-12)
    unresisting = rates.turbulent(DROPS, LIQUID, MIXING, resistance=0.0)
    assert unresisting(1e-18) == pytest.approx(29.134625, rel=1e-7)


def test_floc_strength() -> None:
    """d = 3 d_p; mu G = 0.1 Pa against 0.1 Pa at 6e-6 m, that is 0.4 Pa at 3e-6 m: (1/4)**0.5 = 1/2."""
    law = rates.floc_strength(DROPS, LIQUID, MIXING, strength=0.1, at_diameter=6e-6, efficiency=1e-3)
    assert law(sphere(3e-6)) == pytest.approx(1e-3 * 100.0 * 2.0 * 0.5, rel=1e-12)
    steep = rates.floc_strength(
        DROPS,
        LIQUID,
        MIXING,
        strength=0.1,
        at_diameter=6e-6,
        efficiency=1e-3,
        size_exponent=0.0,
        stress_exponent=2.0,
    )
    assert steep(sphere(3e-6)) == pytest.approx(1e-3 * 100.0 / 16.0, rel=1e-12)
    # without any exponent too, primary particles and what is smaller stay whole
    flat = rates.floc_strength(
        DROPS,
        LIQUID,
        MIXING,
        strength=0.1,
        at_diameter=6e-6,
        efficiency=1.0,
        size_exponent=0.0,
        stress_exponent=0.0,
    )
    primary = GRAINS.volume
    np.testing.assert_array_equal(
        flat(primary * np.array([0.5, 1.0, 1.0 + 1e-10, 2.0])), [0.0, 0.0, 0.0, 100.0]
    )


def test_largest_stable_size() -> None:
    """d_max = 1e-3 * 100**-0.5 = 1e-4 m; at twice that 2**4 times the rate there."""
    law = rates.largest_stable_size(DROPS, MIXING, coefficient=1e-3, exponent=0.5, rate=0.1)
    assert law.largest_diameter == pytest.approx(1e-4, rel=1e-14)
    assert law(sphere(1e-4)) == pytest.approx(0.1, rel=1e-12)
    assert law(sphere(2e-4)) == pytest.approx(1.6, rel=1e-12)
    assert law(sphere(0.5e-4)) == pytest.approx(0.1 / 16.0, rel=1e-12)
    gentle = rates.largest_stable_size(DROPS, MIXING, coefficient=1e-3, exponent=0.5, rate=0.1, steepness=2.0)
    assert gentle(sphere(2e-4)) == pytest.approx(0.4, rel=1e-12)


@pytest.mark.parametrize(
    "law",
    [
        rates.shear(REST, coefficient=0.47, flow_exponent=1.6),
        rates.turbulent(FLOCS, LIQUID, REST, resistance=1e-6),
        rates.floc_strength(FLOCS, LIQUID, REST, strength=0.1, at_diameter=1e-4, efficiency=1e-3),
        rates.largest_stable_size(FLOCS, REST, coefficient=1e-3, exponent=0.5, rate=0.1),
    ],
    ids=["shear", "turbulent", "strength", "largest"],
)
def test_nothing_breaks_at_rest(law: Any) -> None:
    np.testing.assert_array_equal(law(GRAINS.volume * np.geomspace(1.0, 1e6, 5)), 0.0)


def test_an_own_rate_keeps_its_name() -> None:
    assert LAWS["own"].name == "root"
    assert rates.from_function(np.sqrt).name == "custom"


@pytest.mark.parametrize(
    ("build", "words"),
    [
        (lambda: rates.power_law(coefficient=-1.0, exponent=1.0), "coefficient=-1"),
        (lambda: rates.power_law(coefficient=1.0, exponent=math.nan), "exponent"),
        (lambda: rates.shear(50.0, coefficient=1.0, flow_exponent=1.0), r"Flow\(shear_rate"),  # type: ignore[arg-type]
        (lambda: rates.shear(MIXING, coefficient=-1.0, flow_exponent=1.0), "coefficient"),
        (lambda: rates.shear(MIXING, coefficient=1.0, flow_exponent=0.0), "flow_exponent"),
        (lambda: rates.turbulent(LIQUID, FLOCS, MIXING, resistance=1.0), "structure"),  # type: ignore[arg-type]
        (lambda: rates.turbulent(FLOCS, MIXING, MIXING, resistance=1.0), "medium"),  # type: ignore[arg-type]
        (lambda: rates.turbulent(FLOCS, LIQUID, MIXING, resistance=-1.0), "resistance"),
        (
            lambda: rates.floc_strength(
                FLOCS, LIQUID, MIXING, strength=0.0, at_diameter=1e-4, efficiency=1.0
            ),
            "strength=0.*mu G",
        ),
        (
            lambda: rates.floc_strength(
                FLOCS, LIQUID, MIXING, strength=1.0, at_diameter=100.0, efficiency=1.0
            ),
            "at_diameter=100.*metres",
        ),
        (
            lambda: rates.largest_stable_size(FLOCS, MIXING, coefficient=500.0, exponent=0.5, rate=1.0),
            "coefficient=500 m.*in metres",
        ),
        (
            lambda: rates.largest_stable_size(
                FLOCS, MIXING, coefficient=1e-3, exponent=0.5, rate=1.0, steepness=0.0
            ),
            "steepness",
        ),
        (lambda: rates.from_function(3.0), "function=3.0"),  # type: ignore[arg-type]
        (lambda: rates.from_function(np.sqrt, name=""), "name"),
    ],
)
def test_wrong_arguments_are_named(build: Any, words: str) -> None:
    with pytest.raises(InputError, match=words):
        build()
