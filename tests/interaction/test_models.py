"""The records that carry the choice of a double layer and of an attraction."""

from __future__ import annotations

import pickle
from dataclasses import FrozenInstanceError
from typing import Any

import numpy as np
import pytest

from aggsim.errors import InputError
from aggsim.inputs import Medium
from aggsim.interaction import (
    ConstantCharge,
    ConstantPotential,
    DoubleLayer,
    Hamaker,
    LinearSuperposition,
    VanDerWaals,
    potentials,
)

WATER = Medium.water(ionic_strength=30.0)
H = np.geomspace(1e-10, 1e-7, 9)
DOUBLE_LAYERS = [LinearSuperposition, ConstantPotential, ConstantCharge]


@pytest.mark.parametrize(
    ("model", "function"),
    [
        (LinearSuperposition(), potentials.linear_superposition),
        (ConstantPotential(), potentials.constant_potential),
        (ConstantCharge(), potentials.constant_charge),
    ],
)
def test_double_layers_call_their_functions(model: DoubleLayer, function: Any) -> None:
    pair = (H, 1e-7, 3e-7, 0.02, 0.03, WATER)
    assert np.array_equal(model.energy(*pair), function(*pair))


def test_valence_reaches_superposition() -> None:
    pair = (H, 1e-7, 3e-7, 0.02, 0.03, WATER)
    direct = potentials.linear_superposition(*pair, 2)
    assert np.array_equal(LinearSuperposition(valence=2).energy(*pair), direct)


def test_attraction_follows_its_options() -> None:
    pair = (H, 1e-7, 3e-7, 1e-20)
    assert np.array_equal(Hamaker().energy(*pair), potentials.hamaker_spheres(*pair))
    assert np.array_equal(Hamaker(derjaguin=True).energy(*pair), potentials.hamaker_derjaguin(*pair))
    retarded = Hamaker(retardation_wavelength=80e-9).energy(*pair)
    factor = potentials.retardation_gregory(H, 80e-9)
    assert retarded == pytest.approx(factor * potentials.hamaker_spheres(*pair), rel=1e-15)


@pytest.mark.parametrize("model", DOUBLE_LAYERS)
def test_range_of_kappa_a_is_told(model: Any) -> None:
    debye = WATER.debye_length
    assert model().beyond_range(10.01 * debye, 20 * debye, 0.02, 0.02, WATER) == ()
    (sentence,) = model().beyond_range(9.9 * debye, 20 * debye, 0.02, 0.02, WATER)
    assert "kappa a=4.95" in sentence


@pytest.mark.parametrize("model", [ConstantPotential, ConstantCharge])
def test_range_of_potential_is_told(model: Any) -> None:
    assert model().beyond_range(1e-6, 1e-6, 0.050, -0.050, WATER) == ()
    assert "0.051 V" in model().beyond_range(1e-6, 1e-6, 0.02, -0.051, WATER)[0]
    assert "0.06 V" in model(valence=3).beyond_range(1e-6, 1e-6, 0.02, 0.02, WATER)[0]
    assert LinearSuperposition().beyond_range(1e-6, 1e-6, 0.2, 0.2, WATER) == ()


@pytest.mark.parametrize("model", [m() for m in DOUBLE_LAYERS] + [Hamaker(retardation_wavelength=1e-7)])
def test_records_are_frozen_comparable_and_picklable(model: Any) -> None:
    assert pickle.loads(pickle.dumps(model)) == model
    with pytest.raises(FrozenInstanceError):
        model.valence = 2


def test_records_fulfil_their_contracts() -> None:
    assert all(isinstance(m(), DoubleLayer) for m in DOUBLE_LAYERS)
    assert isinstance(Hamaker(), VanDerWaals)


@pytest.mark.parametrize("model", DOUBLE_LAYERS)
@pytest.mark.parametrize("valence", [0, 7, 1.5, True, "1"])
def test_valence_is_a_small_whole_number(model: Any, valence: Any) -> None:
    with pytest.raises(InputError, match=r"^valence="):
        model(valence=valence)


def test_bad_options_of_the_attraction_are_refused() -> None:
    with pytest.raises(InputError, match=r"^retardation_wavelength=100 m"):
        Hamaker(retardation_wavelength=100.0)
    with pytest.raises(InputError, match=r"^derjaguin="):
        Hamaker(derjaguin=1e-7)  # type: ignore[arg-type]
