from __future__ import annotations

import math

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError
from aggsim.interaction import LinearSuperposition, log_stability_ratio, pair_energy, salt_scan, stability_map

LATEX = ag.Particles(diameter=200e-9, density=1055.0, hamaker=9e-21, surface_potential=-0.025)
WATER = ag.Medium.water(temperature=298.15, ionic_strength=60.0)
SALTS = np.geomspace(10.0, 500.0, 7)


def test_a_scan_is_the_stability_ratio_at_each_salt() -> None:
    scan = salt_scan(LATEX, WATER, SALTS, double_layers=(LinearSuperposition(),))
    decades = scan.log10_ratio["linear superposition"]
    medium = ag.Medium.water(temperature=298.15, ionic_strength=float(SALTS[2]))
    one = log_stability_ratio(pair_energy(LATEX, medium)) / math.log(10.0)
    assert decades[2] == pytest.approx(one, rel=1e-9)
    assert (np.diff(decades) < 0).all()  # salt destabilises
    critical = scan.critical["linear superposition"]
    assert critical is not None
    # above the critical concentration hardly more than the drag is left, below it a barrier
    assert np.interp(critical, SALTS, decades) < 1.5


def test_the_models_differ_by_orders_of_magnitude() -> None:
    scan = salt_scan(LATEX, WATER, [50.0])
    linear, potential, charge = (float(v[0]) for v in scan.log10_ratio.values())
    assert list(scan.log10_ratio) == ["linear superposition", "constant potential", "constant charge"]
    assert charge > linear > potential
    assert charge - potential > 2.0


def test_the_critical_salt_is_an_ionic_strength_whatever_the_valence() -> None:
    model = LinearSuperposition(valence=2)
    scan = salt_scan(LATEX, WATER, [10.0, 20.0], double_layers=(model,))
    concentration = ag.critical_coagulation_concentration(LATEX, WATER, double_layer=model)
    assert scan.critical["linear superposition"] == pytest.approx(4.0 * concentration, rel=1e-12)


def test_a_map_holds_the_scan_as_a_row() -> None:
    found = stability_map(LATEX, WATER, [-0.03, -0.025], SALTS, double_layers=(LinearSuperposition(),))
    scan = salt_scan(LATEX, WATER, SALTS, double_layers=(LinearSuperposition(),))
    np.testing.assert_allclose(
        found.log10_ratio["linear superposition"][1], scan.log10_ratio["linear superposition"], rtol=1e-9
    )
    assert found.log10_ratio["linear superposition"].shape == (2, 7)


def test_values_must_increase() -> None:
    with pytest.raises(InputError, match=r"ionic_strength\[1\]"):
        salt_scan(LATEX, WATER, [20.0, 10.0])
    with pytest.raises(InputError, match=r"surface_potential\[1\]"):
        stability_map(LATEX, WATER, [0.02, 0.01], SALTS)
