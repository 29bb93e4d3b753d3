from __future__ import annotations

import math
import warnings

import pytest

from aggsim.errors import InputError, ValidityWarning
from aggsim.inputs import Flow, Medium
from aggsim.studies.mixers import HeadLoss, Impeller, Mixer, MotorPower, Paddles

LIQUID = Medium(temperature=293.15, viscosity=1e-3, density=1000.0)
TURBINE = Impeller(power_number=5.0, diameter=0.5, rpm=60.0)
REEL = Paddles(area=[2.0, 3.0], radius=[1.0, 2.0], drag_coefficient=1.8, rpm=6.0, slip=0.25)
MOTOR = MotorPower(power_drawn=15e3, efficiency=0.8)


def test_power_of_an_impeller() -> None:
    # Np rho N^3 D^5 = 5 * 1000 * 1 * (1/2)^5
    assert TURBINE.power(LIQUID) == pytest.approx(156.25, rel=1e-14)
    # N D^2/nu = 1 * 0.25/1e-6
    assert TURBINE.reynolds_number(LIQUID) == pytest.approx(2.5e5, rel=1e-14)


def test_power_of_paddles() -> None:
    # blades at 0.75 * 2 pi r/10 = 0.15 pi and 0.30 pi m/s
    by_hand = 0.5 * 1.8 * 1000.0 * (2.0 * (0.15 * math.pi) ** 3 + 3.0 * (0.30 * math.pi) ** 3)
    assert REEL.power(LIQUID) == pytest.approx(by_hand, rel=1e-14)
    one = Paddles(area=3.0, radius=2.0, drag_coefficient=1.8, rpm=6.0, slip=0.25)
    assert one.power(LIQUID) == pytest.approx(900.0 * 3.0 * (0.30 * math.pi) ** 3, rel=1e-14)


def test_power_of_a_motor() -> None:
    assert MOTOR.power(LIQUID) == pytest.approx(12e3, rel=1e-14)


@pytest.mark.parametrize("mixer", [TURBINE, REEL], ids=["impeller", "paddles"])
def test_the_speed_found_gives_the_shear_rate_wanted(mixer: Impeller | Paddles) -> None:
    rpm = mixer.rpm_for(shear_rate=40.0, volume=20.0, medium=LIQUID)
    options = {name: getattr(mixer, name) for name in mixer.__dataclass_fields__}
    again = type(mixer)(**{**options, "rpm": rpm})
    flow = Flow.from_power(power=again.power(LIQUID), volume=20.0, medium=LIQUID)
    assert flow.shear_rate == pytest.approx(40.0, rel=1e-13)
    # whatever speed it was asked at
    assert again.rpm_for(shear_rate=40.0, volume=20.0, medium=LIQUID) == pytest.approx(rpm, rel=1e-13)


def test_the_speed_of_an_impeller_by_hand() -> None:
    # mu G^2 V = 1e-3 * 1e4 * 15.625 = 156.25 W, the power at 60 rpm
    assert TURBINE.rpm_for(shear_rate=100.0, volume=15.625, medium=LIQUID) == pytest.approx(60.0, rel=1e-13)


def test_the_motor_found_gives_the_shear_rate_wanted() -> None:
    # mu G^2 V/efficiency = 1e-3 * 1e6 * 4/0.8
    drawn = MOTOR.power_drawn_for(shear_rate=1000.0, volume=4.0, medium=LIQUID)
    assert drawn == pytest.approx(5e3, rel=1e-14)


def test_an_impeller_that_turns_slowly_warns() -> None:
    def turning(reynolds: float) -> Impeller:
        return Impeller(power_number=5.0, diameter=0.1, rpm=60.0 * reynolds * 1e-6 / 0.01)

    with warnings.catch_warnings():
        warnings.simplefilter("error")
        turning(1.001e4).power(LIQUID)
    with pytest.warns(ValidityWarning, match=r"Reynolds number of 9\.99e\+03"):
        turning(0.999e4).power(LIQUID)
    with pytest.warns(ValidityWarning, match="Reynolds number"):
        turning(1e5).rpm_for(shear_rate=1.0, volume=1e-3, medium=LIQUID)


def test_mixers_answer_the_contract() -> None:
    assert all(isinstance(mixer, Mixer) for mixer in (TURBINE, REEL, MOTOR))
    assert len({TURBINE, REEL, MOTOR}) == 3  # hashable, so the blades are tuples


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: Impeller(power_number=0.0, diameter=0.5, rpm=60.0), "power_number=0"),
        (lambda: Impeller(power_number=5.0, diameter=500.0, rpm=60.0), "0.5 for 500 mm"),
        (lambda: Impeller(power_number=5.0, diameter=0.5, rpm=math.nan), "rpm=nan"),
        (
            lambda: Paddles(area=[1.0, 2.0], radius=1.0, drag_coefficient=1.8, rpm=6.0, slip=0.2),
            "one radius for",
        ),
        (lambda: Paddles(area=-1.0, radius=1.0, drag_coefficient=1.8, rpm=6.0, slip=0.2), r"area\[0\]=-1"),
        (lambda: Paddles(area=1.0, radius=1.0, drag_coefficient=1.8, rpm=6.0, slip=25.0), "0.25 for 25 %"),
        (lambda: MotorPower(power_drawn=-1.0, efficiency=0.8), "15e3 for 15 kW"),
        (lambda: MotorPower(power_drawn=1e3, efficiency=80.0), "0.8 for 80 %"),
        (lambda: TURBINE.rpm_for(shear_rate=0.0, volume=1.0, medium=LIQUID), "shear_rate=0"),
        (lambda: REEL.rpm_for(shear_rate=50.0, volume=-1.0, medium=LIQUID), "volume=-1"),
        (lambda: TURBINE.power(293.15), "medium=293.15"),
        (lambda: MOTOR.power(None), "medium=None"),
        (lambda: REEL.power(1.0), "medium=1.0"),
    ],
)
def test_bad_input_is_refused(make: object, words: str) -> None:
    with pytest.raises(InputError, match=words):
        make()  # type: ignore[operator]


def test_head_loss_turns_to_heat() -> None:
    # 0.3 m lost by 0.05 m3/s: rho g Q h = 999.70 * 9.80665 * 0.05 * 0.3
    water = Medium.water(temperature=283.15)
    assert HeadLoss(head=0.3, flow_rate=0.05).power(water) == pytest.approx(147.0565, rel=1e-4)


@pytest.mark.parametrize("wrong", [{"head": 0.0}, {"flow_rate": -1.0}, {"head": float("nan")}])
def test_a_head_loss_is_positive(wrong: dict[str, float]) -> None:
    with pytest.raises(InputError, match=next(iter(wrong))):
        HeadLoss(**({"head": 0.3, "flow_rate": 0.05} | wrong))
