from __future__ import annotations

import math
from dataclasses import replace

import pytest

from aggsim import kernels
from aggsim.errors import InputError
from aggsim.inputs import Compact, Medium, Particles
from aggsim.interaction.fuchs import stability_ratio
from aggsim.interaction.models import LinearSuperposition
from aggsim.interaction.profile import pair_energy
from aggsim.interaction.required import required_barrier

LATEX = Particles(diameter=200e-9, density=1055.0, hamaker=9e-21, surface_potential=-0.025)
WATER = Medium.water(temperature=298.15, ionic_strength=30.0)
YEAR = 365.25 * 86400.0


@pytest.mark.parametrize("share", [0.1, 0.5, 0.9, 0.999])
def test_the_ratio_keeps_the_share(share: float) -> None:
    found = required_barrier(LATEX, WATER, number=1e18, time=YEAR, share_single=share)
    rate = kernels.brownian(Compact(LATEX), WATER)(LATEX.volume, LATEX.volume)
    scaled = rate * 1e18 * YEAR / (2.0 * found.stability_ratio)
    assert (1.0 + scaled) ** -2 == pytest.approx(share, rel=1e-12)


def test_potential_and_salt_give_the_ratio() -> None:
    found = required_barrier(LATEX, WATER, number=1e18, time=YEAR)
    assert found.surface_potential is not None
    energy = pair_energy(replace(LATEX, surface_potential=found.surface_potential), WATER)
    assert stability_ratio(energy) == pytest.approx(found.stability_ratio, rel=1e-6)
    assert found.barrier == energy.barrier
    assert found.ionic_strength is not None
    diluted = pair_energy(LATEX, replace(WATER, ionic_strength=found.ionic_strength))
    assert stability_ratio(diluted) == pytest.approx(found.stability_ratio, rel=1e-6)


def test_the_two_answers_agree_at_the_potential_found() -> None:
    first = required_barrier(LATEX, WATER, number=1e18, time=YEAR)
    second = required_barrier(
        replace(LATEX, surface_potential=first.surface_potential), WATER, number=1e18, time=YEAR
    )
    assert second.ionic_strength == pytest.approx(WATER.ionic_strength, rel=1e-8)


def test_nothing_is_needed_where_encounters_are_rare() -> None:
    found = required_barrier(LATEX, WATER, number=1e6, time=1.0)
    assert found.surface_potential == 0.0
    assert found.barrier == 0.0
    assert found.ionic_strength == math.inf


def test_what_cannot_be_had_is_none() -> None:
    brine = replace(WATER, ionic_strength=19e3)
    metal = replace(LATEX, surface_potential=1e-4, hamaker=4e-19)
    found = required_barrier(metal, brine, number=1e20, time=100.0 * YEAR)
    assert found.surface_potential is None
    assert found.barrier is None
    assert found.ionic_strength is None
    assert found.stability_ratio > 1e10


def test_a_potential_is_not_needed_for_the_potential() -> None:
    bare = replace(LATEX, surface_potential=None)
    found = required_barrier(bare, WATER, number=1e18, time=YEAR, double_layer=LinearSuperposition())
    assert found.ionic_strength is None
    assert found.surface_potential == required_barrier(LATEX, WATER, number=1e18, time=YEAR).surface_potential


@pytest.mark.parametrize("changed", [{"number": 0.0}, {"time": -1.0}, {"share_single": 1.0}])
def test_refusals(changed: dict[str, float]) -> None:
    with pytest.raises(InputError, match=next(iter(changed))):
        required_barrier(LATEX, WATER, **({"number": 1e18, "time": YEAR} | changed))
