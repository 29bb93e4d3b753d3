from __future__ import annotations

import matplotlib.pyplot as plt
import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError
from aggsim.interaction import pair_energy, salt_scan, stability_map
from aggsim.studies import ShelfLife
from aggsim.studies.shelf_life import Source

LATEX = ag.Particles(diameter=200e-9, density=1055.0, hamaker=9e-21, surface_potential=-0.025)
WATER = ag.Medium.water(temperature=298.15, ionic_strength=60.0)


def labels(ax) -> list[str]:  # type: ignore[no-untyped-def]
    return [text.get_text() for text in ax.get_legend().get_texts()]


def test_pair_energy_shows_parts_sum_and_barrier() -> None:
    energy = pair_energy(LATEX, WATER)
    ax = ag.figures.pair_energy(energy)
    found = labels(ax)
    assert found[:3] == ["van der Waals", "double layer", "sum"]
    assert any(word.startswith("barrier") for word in found)
    lines = {line.get_label(): line for line in ax.get_lines()}
    h = lines["sum"].get_xdata() * 1e-9
    np.testing.assert_allclose(
        lines["sum"].get_ydata(),
        lines["van der Waals"].get_ydata() + lines["double layer"].get_ydata(),
        rtol=1e-9,
        atol=1e-9,
    )
    np.testing.assert_allclose(
        lines["sum"].get_ydata(), energy(h) / WATER.thermal_energy, rtol=1e-6, atol=1e-9
    )
    assert ax.get_ylim()[1] > energy.barrier / WATER.thermal_energy
    assert "[nm]" in ax.get_xlabel()
    with pytest.raises(InputError, match="farthest"):
        ag.figures.pair_energy(energy, closest=1e-9, farthest=1e-10)


def test_stability_over_salt_names_models_and_critical_concentrations() -> None:
    scan = salt_scan(LATEX, WATER, np.geomspace(5.0, 1000.0, 9))
    ax = ag.figures.stability_over_salt(scan)
    assert ax.get_xscale() == "log"
    assert [word.split(",")[0] for word in labels(ax)] == list(scan.log10_ratio)
    assert "mol/m³" in ax.get_xlabel()


def test_stability_map_fills_the_model_asked_for() -> None:
    found = stability_map(LATEX, WATER, np.linspace(-0.05, -0.005, 6), np.geomspace(5.0, 1000.0, 7))
    _, mine = plt.subplots()
    ax = ag.figures.stability_map(found, model="constant charge", ax=mine)
    assert ax is mine
    assert "constant charge" in ax.figure.axes[1].get_ylabel()
    assert "[mV]" in ax.get_ylabel()
    with pytest.raises(InputError, match="model='square well'"):
        ag.figures.stability_map(found, model="square well")


def test_shelf_life_shows_band_models_and_ranking() -> None:
    life = ShelfLife(
        criterion="90% of the particles still single",
        time=1e6,
        low=1e3,
        high=1e9,
        rapid_time=1.0,
        models={"linear superposition": 1e6, "constant charge": 1e12},
        sources=(
            Source("double-layer model", "a", "b", (1e6, 1e12), 6.0),
            Source("hamaker", 1e-21, 2e-21, (1e5, 1e7), 2.0),
        ),
        wanted=1e8,
    )
    ax = ag.figures.shelf_life(life)
    words = [text.get_text() for text in ax.get_yticklabels()]
    assert words[0].startswith("all ranges")
    assert words[-2:] == ["range of double-layer model alone", "range of Hamaker constant alone"]
    band = ax.get_lines()[0].get_xdata()
    np.testing.assert_allclose(band, [3.0, 9.0])
    assert "wanted" in ax.get_xlabel()
