from __future__ import annotations

import math
from dataclasses import replace

import pytest

import aggsim as ag
from aggsim.errors import InputError
from aggsim.studies.shelf_life import duration

LATEX = ag.Particles(diameter=200e-9, density=1055.0, hamaker=9e-21, surface_potential=-0.028)
WATER = ag.Medium.water(temperature=298.15, ionic_strength=60.0)
START = ag.Monodisperse(diameter=200e-9, volume_fraction=1e-3)
ONE = (ag.interaction.LinearSuperposition(),)


def life(**options: object) -> ag.ShelfLife:
    return ag.shelf_life(LATEX, WATER, START, **options)  # type: ignore[arg-type]


def test_time_is_that_of_rapid_coagulation_times_the_stability_ratio() -> None:
    found = life(double_layers=ONE)
    ratio = ag.stability_ratio(ag.interaction.pair_energy(LATEX, WATER))
    assert found.time == pytest.approx(ratio * found.rapid_time, rel=1e-9)
    assert found.low == pytest.approx(found.high, rel=1e-12)
    # n1 / N0 = 1 / (1 + T)^2 = 0.9 with T = k t N0 / 2 under the kernel of equal spheres (Smoluchowski 1917)
    rate = float(ag.kernels.brownian(ag.Compact(LATEX), WATER)(LATEX.volume, LATEX.volume))
    law = 2.0 * (0.9**-0.5 - 1.0) / (rate * START.total_number)
    assert found.rapid_time == pytest.approx(law, rel=2e-3)  # the kernel of unequal pairs differs a little


def test_a_simulation_with_the_slow_kernel_agrees() -> None:
    found = life(double_layers=ONE, criterion=ag.MeanSizeGrowth(factor=1.1))
    structure = ag.Compact(LATEX)
    slow = ag.kernels.brownian(structure, WATER) / ag.pairwise_stability_ratio(structure, WATER)
    result = ag.simulate(ag.Batch(slow), START, [0.0, found.time])
    d = result.mean_diameter(4, 3)
    assert d[1] / d[0] == pytest.approx(1.1, rel=1e-4)


def test_band_and_ranking_follow_the_ranges() -> None:
    found = life(
        surface_potential=(-0.031, -0.025),
        ionic_strength=(55.0, 65.0),
        hamaker=(7e-21, 12e-21),
        wanted=86400.0,
    )
    assert found.low < found.time
    assert found.high > found.time
    assert [s.decades for s in found.sources] == sorted((s.decades for s in found.sources), reverse=True)
    assert {s.name for s in found.sources} == {
        "surface_potential",
        "ionic_strength",
        "hamaker",
        "double-layer model",
    }
    # constant charge, linear superposition and constant potential differ by orders of magnitude
    assert found.models["constant charge"] > 1e2 * found.models["linear superposition"]
    assert found.models["linear superposition"] > found.models["constant potential"]
    narrower = life(surface_potential=(-0.0285, -0.0275), double_layers=ONE)
    assert narrower.high / narrower.low < found.high / found.low


@pytest.mark.parametrize(
    ("wanted", "word"), [(1e-9, "keeps"), (1e300, "does not keep"), (None, "still single")]
)
def test_the_verdict_is_in_words(wanted: float | None, word: str) -> None:
    found = life(double_layers=ONE, surface_potential=(-0.029, -0.027), wanted=wanted)
    assert word in found.verdict
    assert "never replaces storage tests" in str(found)


def test_the_verdict_is_open_where_the_band_is_wide() -> None:
    found = life(surface_potential=(-0.04, -0.02))
    undecided = replace(found, wanted=math.sqrt(found.low * found.high))
    assert undecided.verdict.startswith("undecided")
    assert undecided.sources[0].name.replace("_", " ") in undecided.verdict


def test_draws_are_repeatable() -> None:
    first, second = (life(surface_potential=(-0.03, -0.025), seed=3) for _ in range(2))
    assert (first.low, first.high) == (second.low, second.high)


@pytest.mark.parametrize(
    ("seconds", "words"),
    [
        (30.0, "30 s"),
        (600.0, "10 minutes"),
        (1e5, "27.8 hours"),
        (1e6, "11.6 days"),
        (1e9, "31.7 years"),
        (1e14, "more than 10^6 years"),
    ],
)
def test_durations_read_as_people_say_them(seconds: float, words: str) -> None:
    assert duration(seconds) == words


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"surface_potential": (-0.02, -0.03)}, r"surface_potential\[1\]"),
        ({"hamaker": (1e-21,)}, "hamaker=an array of 1"),
        ({"double_layers": ()}, "at least one model"),
        ({"wanted": -1.0}, "wanted=-1"),
    ],
)
def test_bad_input_is_refused(options: dict[str, object], words: str) -> None:
    with pytest.raises(InputError, match=words):
        life(**options)
