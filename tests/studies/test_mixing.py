from __future__ import annotations

import math

import numpy as np
import pytest

from aggsim.errors import InputError
from aggsim.inputs import Medium
from aggsim.studies.design_rules import FLOCCULATION, RAPID_MIX, DesignRule
from aggsim.studies.mixers import Impeller, MotorPower
from aggsim.studies.mixing import MixingPlan, MixingStage, mixing_plan

THIN = Medium(temperature=293.15, viscosity=1e-3, density=1000.0)
THICK = Medium(temperature=277.15, viscosity=1.6e-3, density=1000.0)
MEDIA = {"winter": THICK, "summer": THIN}


def stage(name: str, volume: float, power: float, rule: DesignRule | None = None) -> MixingStage:
    return MixingStage(name, volume, MotorPower(power_drawn=power, efficiency=1.0), rule=rule)


def plan(*stages: MixingStage) -> MixingPlan:
    return mixing_plan(stages, flow_rate=0.5, media=MEDIA)


def test_figures_by_hand() -> None:
    found = plan(stage("a", 100.0, 160.0), stage("b", 200.0, 20.0))
    # G = sqrt(P/(mu V)): sqrt(160/(1.6e-3*100)), sqrt(160/0.1), sqrt(20/0.32), sqrt(20/0.2)
    gradient = [[math.sqrt(1000.0), 40.0], [math.sqrt(62.5), 10.0]]
    np.testing.assert_allclose(found.shear_rate, gradient, rtol=1e-13)
    np.testing.assert_allclose(found.power, [[160.0, 160.0], [20.0, 20.0]], rtol=1e-13)
    np.testing.assert_allclose(found.power_per_volume, [[1.6, 1.6], [0.1, 0.1]], rtol=1e-13)
    np.testing.assert_allclose(found.detention_time, [200.0, 400.0], rtol=1e-13)
    np.testing.assert_allclose(found.camp_number[:, 1], [8000.0, 4000.0], rtol=1e-13)
    # sqrt(nu/G) = sqrt(1e-6/40), sqrt(1e-6/10)
    np.testing.assert_allclose(found.kolmogorov_length[:, 1], [158.11388e-6, 316.22777e-6], rtol=1e-7)
    assert not found.shear_rate.flags.writeable


def test_an_impeller_draws_more_from_a_denser_medium_and_shears_less_in_a_thicker_one() -> None:
    tank = MixingStage("tank", 10.0, Impeller(power_number=1.3, diameter=1.0, rpm=30.0))
    heavy = Medium(temperature=293.15, viscosity=1e-3, density=1100.0)
    found = mixing_plan([tank], flow_rate=0.1, media={"thin": THIN, "thick": THICK, "heavy": heavy})
    power = 1.3 * 1000.0 * 0.5**3
    np.testing.assert_allclose(found.power[0], [power, power, 1.1 * power], rtol=1e-13)
    ratio = found.shear_rate[0] / found.shear_rate[0, 0]
    np.testing.assert_allclose(ratio, [1.0, math.sqrt(1.0 / 1.6), math.sqrt(1.1)], rtol=1e-13)


def test_a_stage_gives_the_flow_for_kernels() -> None:
    assert stage("a", 100.0, 160.0).flow(THIN).shear_rate == pytest.approx(40.0, rel=1e-13)


def test_time_and_camp_number_are_judged_over_all_stages_of_a_rule() -> None:
    # each of three stages of 20 min has G t = 20 * 1200 = 24000 with THIN: too little alone, right together
    three = [stage(f"tank {k}", 600.0, 1e-3 * 20.0**2 * 600.0, FLOCCULATION) for k in (1, 2, 3)]
    assert plan(*three).departures == ()
    quantities = {(d.where, d.medium, d.quantity) for d in plan(three[0]).departures}
    assert quantities == {
        ("tank 1", None, "time"),
        ("tank 1", "winter", "G t"),
        ("tank 1", "summer", "G t"),
    }


def test_shear_rate_is_judged_in_each_stage_and_with_each_medium() -> None:
    # with THIN a trifle more than 750 1/s; with THICK sqrt(1.6) less
    quick = stage("rapid", 10.0, 1.0001e-3 * 750.0**2 * 10.0, RAPID_MIX)
    (found,) = plan(quick).departures
    assert (found.where, found.medium, found.quantity, found.rule) == ("rapid", "winter", "G", RAPID_MIX)
    assert found.value == pytest.approx(750.0 / math.sqrt(1.6), rel=1e-4)
    assert plan(stage("rapid", 10.0, 1.0, None)).departures == ()


def test_table_in_words() -> None:
    tanks = [
        stage("fast", 600.0, 1e-3 * 80.0**2 * 600.0, FLOCCULATION),
        stage("slow", 600.0, 240.0, FLOCCULATION),
    ]
    lines = str(plan(stage("rapid", 10.0, 16e3, RAPID_MIX), *tanks)).splitlines()
    assert lines[0].split("  ")[0] == "stage"
    assert lines[1].split() == ["[kW]", "[W/m3]", "[1/s]", "[min]", "[1]", "[um]"]
    assert lines[2].split() == ["rapid", "winter", "16.0", "1600", "1000", "0.333", "20000", "40.0"]
    # 80 1/s with THIN is above 75, 80/sqrt(1.6) = 63.2 with THICK is not
    assert lines[4].split() == ["fast", "winter", "3.84", "6.40", "63.2", "20.0", "75900", "159"]
    assert lines[5].split() == ["fast", "summer", "3.84", "6.40", "80.0", "*", "20.0", "96000", "112"]
    # together 96000 + 24000 with THIN, 75900 + 19000 with THICK
    assert lines[8].split() == ["flocculation,", "all", "2", "winter", "4.08", "40.0", "94900"]
    assert lines[9].split() == ["flocculation,", "all", "2", "summer", "4.08", "40.0", "120000", "*"]
    text = "\n".join(lines)
    assert "* fast, summer: G of 80.0 1/s is above 75 1/s (flocculation)" in lines
    assert "* flocculation, all 2, summer: G t of 120000 is above 100000 (flocculation)" in lines
    assert "Ten State Standards" in text
    assert "Utah" in text
    assert max(map(len, lines)) <= 100


def test_figures_of_a_column_stand_below_each_other() -> None:
    lines = str(plan(stage("a", 100.0, 160.0, RAPID_MIX), stage("b", 200.0, 20.0))).splitlines()[2:6]
    ends = {
        line.index(word) + len(word)
        for line, word in zip(lines, ("31.6", "40.0", "7.91", "10.0"), strict=True)
    }
    assert len(ends) == 1


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: MixingStage("", 1.0, MotorPower(power_drawn=1.0, efficiency=1.0)), "name=''"),
        (lambda: stage("a", -1.0, 1.0), "volume=-1"),
        (lambda: MixingStage("a", 1.0, 15e3), "power"),  # type: ignore[arg-type]
        (lambda: MixingStage("a", 1.0, MotorPower), "mixer="),  # type: ignore[arg-type]
        (lambda: stage("a", 1.0, 1.0, "flocculation"), "design_rules.FLOCCULATION"),  # type: ignore[arg-type]
        (lambda: plan(), "at least one stage"),
        (lambda: plan(stage("a", 1.0, 1.0), stage("a", 1.0, 1.0)), "a name of its own"),
        (lambda: mixing_plan(stage("a", 1.0, 1.0), flow_rate=1.0, media=MEDIA), "a list of"),  # type: ignore[arg-type]
        (lambda: mixing_plan([stage("a", 1.0, 1.0)], flow_rate=1000.0, media=MEDIA), "1000/3600"),
        (lambda: mixing_plan([stage("a", 1.0, 1.0)], flow_rate=1.0, media={}), "media"),
        (lambda: mixing_plan([stage("a", 1.0, 1.0)], flow_rate=1.0, media=THIN), "a Medium each"),  # type: ignore[arg-type]
        (lambda: mixing_plan([stage("a", 1.0, 1.0)], flow_rate=1.0, media={"x": 4.0}), "a Medium each"),  # type: ignore[dict-item]
    ],
)
def test_bad_input_is_refused(make: object, words: str) -> None:
    with pytest.raises(InputError, match=words):
        make()  # type: ignore[operator]
