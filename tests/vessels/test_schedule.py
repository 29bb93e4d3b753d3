from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import aggsim as ag
from aggsim.errors import InputError, TimesError
from aggsim.vessels import Vessel

MONO = ag.Monodisperse(volume=1.0, number=1.0)
EXPONENTIAL = ag.Exponential(mean_volume=1.0, number=1.0)
FAST, SLOW = ag.Batch(ag.kernels.constant(1.0)), ag.Batch(ag.kernels.constant(0.2))
GRID = ag.SizeGrid.monomers_then_geometric(1.0, 4096.0, per_doubling=3)


def stage(start: float, stop: float, vessel: Vessel = FAST, **options: object) -> ag.Stage:
    return ag.Stage(vessel, start=start, stop=stop, **options)  # type: ignore[arg-type]


def run(schedule: ag.Schedule, times: object, **options: object) -> ag.Result:
    return ag.simulate(schedule, MONO, times, grid=GRID, **{"rtol": 1e-9, **options})  # type: ignore[arg-type]


def test_stages_follow_each_other() -> None:
    """N = 1 / (1 + integral of K / 2) for a constant kernel."""
    schedule = ag.Schedule([stage(0.0, 2.0), stage(2.0, 12.0, SLOW), stage(12.0, 13.0)])
    result = run(schedule, [1.0, 2.0, 7.0, 12.0, 13.0])
    np.testing.assert_allclose(
        result.total_number(), 1 / (1 + np.array([1.0, 2.0, 3.0, 4.0, 5.0]) / 2), rtol=1e-7
    )
    assert result.stats.restarts - result.stats.grid_extensions == 2
    assert np.abs(result.balance.closure).max() <= 1e-12


def test_in_turn_takes_durations() -> None:
    schedule = ag.Schedule.in_turn((FAST, 2.0), (SLOW, 10.0))
    assert [(s.start, s.stop) for s in schedule.stages] == [(0.0, 2.0), (2.0, 12.0)]
    assert [s.vessel for s in schedule.stages] == [FAST, SLOW]
    assert [(span.start, span.stop) for span in schedule.spans] == [(0.0, 2.0), (2.0, 12.0)]


def test_contributions_are_those_of_each_stage() -> None:
    first = ag.kernels.constant(1.0).named("rapid mix")
    second = ag.kernels.constant(0.25).named("slow mix") + ag.kernels.additive(0.1)
    schedule = ag.Schedule.in_turn((ag.Batch(first), 2.0), (ag.Batch(second), 3.0))
    result = run(schedule, [0.0, 1.0, 2.0, 2.5, 4.0])
    number = result.total_number()
    assert list(result.contributions) == ["rapid mix", "slow mix", "additive"]
    # an output at a limit belongs to the stage before it
    rapid = np.where(result.times <= 2.0, 0.5 * number**2, 0.0)
    np.testing.assert_allclose(result.contributions["rapid mix"].events, rapid, rtol=1e-12)
    slow = np.where(result.times > 2.0, 0.125 * number**2, 0.0)
    np.testing.assert_allclose(result.contributions["slow mix"].events, slow, rtol=1e-12)
    np.testing.assert_allclose(result.contributions["rapid mix"].event_share, result.times <= 2.0)


def test_an_output_at_a_limit_shows_the_state_before_the_dose() -> None:
    still = ag.Batch(None)
    dose = ag.Monodisperse(volume=2.0, number=3.0)
    schedule = ag.Schedule([stage(0.0, 1.0, still), stage(1.0, 2.0, still, dose=dose, dilution=0.25)])
    result = run(schedule, [0.0, 1.0, 1.5, 2.0])
    np.testing.assert_allclose(result.number[:, 0], [1.0, 1.0, 0.8, 0.8], rtol=1e-14)
    np.testing.assert_allclose(result.number[:, 1], [0.0, 0.0, 3.0, 3.0], rtol=1e-13)
    np.testing.assert_allclose(result.balance.inward["dosed"], [0.0, 0.0, 6.0, 6.0], rtol=1e-14)
    np.testing.assert_allclose(result.balance.outward["diluted"], [0.0, 0.0, 0.2, 0.2], rtol=1e-13)
    assert np.abs(result.balance.closure).max() <= 1e-15


def test_a_dose_and_a_dilution_act_on_what_follows() -> None:
    """1 / N grows by K t / 2 in each stage; at the limit N becomes N / (1 + dilution) + dose."""
    schedule = ag.Schedule([stage(0.0, 2.0), stage(2.0, 6.0, dose=MONO, dilution=1.0), stage(6.0, 8.0, SLOW)])
    result = run(schedule, [2.0, 4.0, 6.0, 8.0])
    after = 0.5 / 2 + 1.0
    expected = [0.5, after / (1 + after), after / (1 + 2 * after), after / (1 + 2.2 * after)]
    np.testing.assert_allclose(result.total_number(), expected, rtol=1e-7)
    np.testing.assert_allclose(result.moment(1), [1.0, 1.5, 1.5, 1.5], rtol=1e-13)
    assert np.abs(result.balance.closure).max() <= 1e-12


def test_losses_feeds_and_doses_of_all_stages_stay_in_the_account() -> None:
    settling = ag.SettlingOut(lambda v: 0.1 * np.cbrt(v), depth=1.0)
    tank = ag.StirredTank(ag.kernels.constant(1.0), residence_time=2.0, feed=MONO)
    schedule = ag.Schedule(
        [
            stage(0.0, 1.0, tank),
            stage(1.0, 3.0, ag.Batch(ag.kernels.constant(0.5), losses=settling), dose=EXPONENTIAL),
            stage(3.0, 4.0, tank, dilution=0.1),
        ]
    )
    grid = ag.SizeGrid.geometric(smallest=1e-6, largest=4096.0, per_doubling=3)
    result = ag.simulate(
        schedule, EXPONENTIAL, np.linspace(0.0, 4.0, 9), grid=grid, scheme=ag.FixedPivot(moments=2)
    )
    balance = result.balance
    assert set(balance.inward) == {"fed", "dosed"}
    assert set(balance.outward) == {"withdrawn", "settled", "diluted"}
    assert np.abs(balance.closure).max() <= 1e-12
    np.testing.assert_allclose(
        balance.inward["fed"], 0.5 * np.interp(result.times, [0, 1, 3, 4], [0, 1, 1, 2])
    )
    assert np.ptp(balance.settled[-2:]) == 0.0  # nothing settles in the last stage
    assert np.ptp(balance.outward["withdrawn"][2:7]) == 0.0


def test_a_dose_of_new_sizes_finds_its_place_on_the_default_grid() -> None:
    large = ag.Monodisperse(volume=50.0, number=0.1)
    schedule = ag.Schedule([stage(0.0, 1.0), stage(1.0, 2.0, dose=large)])
    result = ag.simulate(schedule, MONO, [1.0, 2.0], scheme=ag.FixedPivot(moments=2))
    assert result.moment(1)[-1] == pytest.approx(6.0, rel=1e-12)
    assert np.abs(result.balance.closure).max() <= 1e-12


@pytest.mark.parametrize(
    "scheme", [ag.FixedPivot(moments=2), ag.FixedPivot(moments=6), ag.Monomer()], ids=repr
)
@given(share=st.floats(0.05, 0.95), rate=st.floats(0.1, 2.0))
def test_two_equal_stages_are_one(scheme: ag.schemes.Scheme, share: float, rate: float) -> None:
    """The method begins anew at the limit: a few times rtol."""
    vessel = ag.Batch(ag.kernels.constant(rate) + ag.kernels.additive(0.1))
    grid = ag.SizeGrid.monomers(1.0, 128) if scheme == ag.Monomer() else GRID
    one = ag.simulate(vessel, MONO, 1.0, grid=grid, scheme=scheme, rtol=1e-8)
    split = ag.Schedule.in_turn((vessel, share), (vessel, 1.0 - share))
    two = ag.simulate(split, MONO, 1.0, grid=grid, scheme=scheme, rtol=1e-8)
    for k in (0.0, 1.0, 2.0):
        np.testing.assert_allclose(two.moment(k), one.moment(k), rtol=5e-8)
    np.testing.assert_allclose(two.number, one.number, rtol=1e-6, atol=1e-12)


def test_strengths_count_from_the_start_of_the_schedule() -> None:
    pulse = ag.kernels.Strength.steps([3.0, 4.0], [0.0, 2.0, 0.0])
    vessel = ag.Batch(ag.kernels.constant(1.0) * pulse)
    result = run(ag.Schedule.in_turn((vessel, 2.0), (vessel, 8.0)), [2.0, 3.5, 10.0])
    np.testing.assert_allclose(result.total_number(), [1.0, 1 / 1.5, 0.5], rtol=1e-7)


def test_following_is_second_order_in_the_length_of_the_stages() -> None:
    """K = exp(-t): the integral of the midpoint rule, whose error falls by 4 for twice the stages."""

    def vessel(time: float) -> ag.Batch:
        return ag.Batch(ag.kernels.constant(np.exp(-time)))

    exact = 1 / (1 - np.expm1(-2.0) / 2)
    errors = []
    for count in (2, 4, 8):
        schedule = ag.Schedule.following(vessel, np.linspace(0.0, 2.0, count + 1))
        assert len(schedule.stages) == count
        errors.append(run(schedule, 2.0).total_number()[0] / exact - 1.0)
    ratios = np.array(errors[:-1]) / np.array(errors[1:])
    np.testing.assert_allclose(ratios, 4.0, rtol=0.1)


def test_times_past_the_last_stage_are_refused() -> None:
    schedule = ag.Schedule.in_turn((FAST, 2.0), (SLOW, 3.0))
    assert run(schedule, 5.0).times.tolist() == [5.0]
    assert run(schedule, 5.0 * (1 + 1e-12)).times.tolist() == [5.0]  # round-off of a sum of durations
    with pytest.raises(TimesError, match=r"times\[1\]=5\.1 s.*at most 5 s, where the last stage"):
        run(schedule, [1.0, 5.1])


def test_a_run_may_end_before_the_last_stage() -> None:
    never = ag.Batch(ag.kernels.constant(1e6))
    result = run(ag.Schedule.in_turn((FAST, 2.0), (never, 3.0)), [1.0, 2.0])
    assert result.total_number()[-1] == pytest.approx(0.5, rel=1e-7)


@pytest.mark.parametrize(
    ("make", "error", "words"),
    [
        (lambda: ag.Schedule([]), InputError, "a sequence of Stage"),
        (lambda: ag.Schedule(FAST), InputError, "a sequence of Stage"),
        (lambda: ag.Schedule([FAST]), InputError, "a sequence of Stage"),
        (lambda: ag.Schedule([stage(1.0, 2.0)]), TimesError, r"stages\[0\]\.start=1 s"),
        (lambda: ag.Schedule([stage(0.0, 2.0), stage(3.0, 4.0)]), TimesError, r"stages\[1\]\.start=3 s.*gap"),
        (
            lambda: ag.Schedule([stage(0.0, 2.0), stage(1.9, 4.0)]),
            TimesError,
            r"stages\[1\]\.start=1\.9 s.*overlap",
        ),
        (lambda: ag.Schedule([stage(0.0, 2.0), stage(0.0, 2.0)]), TimesError, "overlap"),
        (lambda: ag.Schedule([stage(0.0, 2.0, dose=MONO)]), InputError, r"stages\[0\]=a dose"),
        (lambda: ag.Schedule([stage(0.0, 2.0, dilution=0.5)]), InputError, r"stages\[0\]=a dose"),
        (lambda: ag.Schedule.in_turn(), InputError, "a sequence of Stage"),
        (lambda: ag.Schedule.in_turn(FAST), InputError, "not a pair"),
        (lambda: ag.Schedule.in_turn((FAST, 0.0)), InputError, r"duration of stages\[0\]=0"),
        (lambda: ag.Schedule.in_turn((FAST, 1.0), (FAST, np.nan)), InputError, r"stages\[1\]=nan"),
        (lambda: ag.Schedule.in_turn((FAST, 1.0), (1.0, 1.0)), InputError, "not allowed in a stage"),
        (lambda: ag.Schedule.following(lambda t: FAST, [0.0, 0.0]), TimesError, "increase"),
        (lambda: ag.Schedule.following(lambda t: FAST, [1.0, 2.0]), TimesError, r"stages\[0\]\.start=1"),
        (lambda: stage(2.0, 2.0), InputError, r"stop=2 s.*above 2"),
        (lambda: stage(-1.0, 2.0), InputError, "start=-1"),
        (lambda: stage(0.0, np.inf), InputError, "stop=inf"),
        (lambda: stage(0.0, 1.0, ag.kernels.constant(1.0)), InputError, "not allowed in a stage"),  # type: ignore[arg-type]
        (lambda: stage(0.0, 1.0, ag.Schedule([stage(0.0, 1.0)])), InputError, "not allowed in a stage"),
        (lambda: stage(0.0, 1.0, dose=1.0), InputError, "not a starting distribution"),
        (lambda: stage(0.0, 1.0, dilution=-0.1), InputError, "dilution=-0.1"),
    ],
)
def test_schedules_that_are_none_are_refused(make, error: type[Exception], words: str) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(error, match=words):
        make()


def test_stages_share_their_tanks_and_several_tanks_take_no_dose() -> None:
    train = ag.Train([ag.Tank(None, volume=1.0), ag.Tank(None, volume=2.0)], flow=1.0, feed=MONO)
    other = ag.Train([ag.Tank(None, volume=2.0), ag.Tank(None, volume=2.0)], flow=1.0, feed=MONO)
    with pytest.raises(InputError, match=r"stages\[1\]\.vessel=.*tanks as in the first"):
        ag.Schedule([stage(0.0, 1.0, train), stage(1.0, 2.0, FAST)])
    with pytest.raises(InputError, match=r"stages\[1\]\.vessel=.*tanks as in the first"):
        ag.Schedule([stage(0.0, 1.0, train), stage(1.0, 2.0, other)])
    with pytest.raises(InputError, match=r"stages\[1\]=a dose.*single tank"):
        ag.Schedule([stage(0.0, 1.0, train), stage(1.0, 2.0, train, dose=MONO)])
    result = ag.simulate(ag.Schedule([stage(0.0, 1.0, train), stage(1.0, 2.0, train)]), None, [1.0, 2.0])
    whole = ag.simulate(train, None, [1.0, 2.0])
    np.testing.assert_allclose(result.number, whole.number, rtol=1e-5, atol=1e-12)
    assert np.abs(result.balance.closure).max() <= 1e-12
