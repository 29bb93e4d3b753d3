"""`steady_state`: what it finds, that it agrees with long runs, and what it refuses."""

from __future__ import annotations

import warnings
from typing import Any

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import AccuracyWarning, InputError, SimulationError
from aggsim.result import SteadyState
from aggsim.verification import closed

Array = np.ndarray

MONO, EXPONENTIAL = closed.MONO, closed.EXPONENTIAL
KERNEL = ag.kernels.constant(1.0)
SHEAR = ag.kernels.from_function(lambda v, w: (np.cbrt(v) + np.cbrt(w)) ** 3 / 8.0, name="shear")
STEPS = ag.kernels.Strength.steps


def law(coefficient: float = 1.0, smallest: float | None = None, fragments: Any = None) -> ag.Breakage:
    """Breakage at the rate coefficient * v^(1/3)."""
    return ag.Breakage(
        rate=ag.rates.power_law(coefficient=coefficient, exponent=1.0 / 3.0),
        fragments=ag.fragments.equal_binary() if fragments is None else fragments,
        smallest=smallest,
    )


def flocs(shear_rate: float, smallest: float | None = None) -> ag.Batch:
    """Shear at G and breakage at a rate that grows as G^1.6."""
    return ag.Batch(shear_rate * SHEAR, breakage=law(shear_rate**1.6, smallest))


WIDE = ag.SizeGrid.geometric(smallest=1e-6, largest=1e5, per_doubling=3)
FINE = ag.SizeGrid.monomers_then_geometric(1.0, 1e6, per_doubling=3)


def tank(**options: Any) -> ag.StirredTank:
    return ag.StirredTank(**{"kernel": KERNEL, "residence_time": 5.0, "feed": MONO, **options})


# name -> vessel, start (None where it is fed), grid
CASES: dict[str, tuple[ag.vessels.Vessel, ag.StartingDistribution | None, ag.SizeGrid]] = {
    "batch, halves": (ag.Batch(SHEAR, breakage=law()), EXPONENTIAL, WIDE),
    "batch, uniform": (
        ag.Batch(SHEAR, breakage=law(fragments=ag.fragments.uniform_binary())),
        EXPONENTIAL,
        WIDE,
    ),
    "batch, two laws": (ag.Batch(KERNEL, breakage=[law(), closed.uniform(0.3, 1.0)]), EXPONENTIAL, WIDE),
    "batch, down to primary particles": (ag.Batch(SHEAR, breakage=law(0.2, smallest=1.0)), MONO, FINE),
    "batch, erosion": (
        ag.Batch(KERNEL, breakage=law(0.5, smallest=1.0, fragments=ag.fragments.erosion(1.0))),
        MONO,
        FINE,
    ),
    "tank": (tank(), None, FINE),
    "tank with breakage": (tank(kernel=SHEAR, breakage=law(0.5, smallest=1.0)), None, FINE),
    "tank with settling": (
        tank(losses=ag.SettlingOut(lambda v: 0.1 * np.cbrt(v) ** 2, depth=1.0)),
        None,
        FINE,
    ),
    "tank with two feeds": (
        tank(
            feed=[
                ag.Feed(distribution=EXPONENTIAL, share=0.5),
                ag.Feed(distribution=ag.Exponential(mean_volume=10.0, number=0.1), share=0.3),
            ]
        ),
        None,
        WIDE,
    ),
    "tank with uniform breakage": (tank(feed=EXPONENTIAL, breakage=closed.uniform(0.5, 1.0)), None, WIDE),
    "train": (
        ag.Train(
            [
                ag.Tank(SHEAR, volume=v, breakage=law(b, smallest=1.0))
                for v, b in ((1.0, 2.0), (3.0, 0.5), (6.0, 0.1))
            ],
            flow=1.0,
            feed=MONO,
        ),
        None,
        FINE,
    ),
    "train with a recycle": (
        ag.Train(
            [
                ag.Tank(KERNEL, volume=1.0),
                ag.Tank(
                    0.2 * KERNEL, volume=5.0, losses=ag.SettlingOut(lambda v: 0.05 * np.cbrt(v), depth=1.0)
                ),
            ],
            flow=1.0,
            feed=MONO,
            recycles=ag.Recycle(source=1, target=0, flow=0.3),
        ),
        None,
        FINE,
    ),
}
each_case = pytest.mark.parametrize("name", CASES)


def solve(name: str, **options: Any) -> SteadyState:
    vessel, start, grid = CASES[name]
    return ag.steady_state(vessel, **{"start": start, "grid": grid, **options})


@each_case
@pytest.mark.parametrize("moments", [2, 6])
def test_newton_ends_where_a_long_run_ends(name: str, moments: int) -> None:
    """Transients of the run have died out to round-off; found 1e-12."""
    vessel, start, grid = CASES[name]
    scheme = ag.FixedPivot(moments=moments)
    state = solve(name, scheme=scheme)
    assert state.iterations <= 30
    assert not state.integrated
    assert state.stable
    result = ag.simulate(vessel, start, 60.0 * state.relaxation_time, grid=grid, scheme=scheme, rtol=1e-8)
    assert result.total_number()[-1] == pytest.approx(float(state.total_number()), rel=1e-8)
    assert result.moment(2)[-1] == pytest.approx(float(state.moment(2)), rel=1e-8)
    assert result.quantile_diameter(0.5)[-1] == pytest.approx(float(state.quantile_diameter(0.5)), rel=1e-8)
    for k, one in enumerate(result.tanks):
        np.testing.assert_allclose(one.number[-1], state.tanks[k], rtol=1e-6, atol=1e-12)


@each_case
def test_volume_in_is_volume_out(name: str) -> None:
    vessel, start, _ = CASES[name]
    state = solve(name)
    shares = np.array(vessel.volumes)
    assert state.balance.present == pytest.approx(
        float(shares @ (state.tanks @ state.grid.volume)), rel=1e-13
    )
    assert state.balance.negative_share <= 1e-5
    assert abs(state.balance.beyond_grid) <= 1e-8
    if start is not None:
        assert state.balance.present == pytest.approx(start.total_volume, rel=1e-12)
        assert state.balance.inward == {}
    else:
        fed, gone = sum(state.balance.inward.values()), sum(state.balance.outward.values())
        assert gone == pytest.approx(fed, rel=1e-8)
        assert abs(state.balance.closure) <= 1e-12


@each_case
def test_the_way_there_does_not_matter(name: str) -> None:
    """Another state to begin from: the same state, in fewer steps."""
    state = solve(name)
    again = solve(name, near=state)
    assert again.iterations <= 3
    for k in (0, 1, 2):
        assert again.moment(k) == pytest.approx(float(state.moment(k)), rel=1e-9)
    np.testing.assert_allclose(again.tanks, state.tanks, rtol=1e-7, atol=1e-13)


def test_the_state_depends_on_the_volume_of_the_start_alone() -> None:
    vessel, _, grid = CASES["batch, halves"]
    starts = [
        EXPONENTIAL,
        ag.Gamma(mean_volume=0.2, shape=2.0, number=5.0),
        ag.Exponential(mean_volume=5.0, number=0.2),
    ]
    states = [ag.steady_state(vessel, start=start, grid=grid) for start in starts]
    for state in states[1:]:
        for k in (0, 1, 2):
            assert state.moment(k) == pytest.approx(float(states[0].moment(k)), rel=1e-9)


def test_relaxation_is_that_of_a_disturbed_run() -> None:
    """After each relaxation time exp(-1) of a disturbance is left; found 1e-7 off, from the one that is not slowest."""
    problem = closed.Reversible(0.5)
    grid = ag.SizeGrid.geometric(smallest=1e-6, largest=200.0, per_doubling=3)
    state = ag.steady_state(problem.vessel, start=EXPONENTIAL, grid=grid)
    times = np.array([8.0, 9.0, 10.0]) * state.relaxation_time
    start = ag.Gamma(mean_volume=2.0, shape=2.0, number=0.5)
    result = ag.simulate(problem.vessel, start, times, grid=grid, rtol=1e-11)
    away = result.total_number() - float(state.total_number())
    np.testing.assert_allclose(away[1:] / away[:-1], np.exp(-1.0), rtol=1e-3)


def test_the_default_grid_grows_until_it_holds_the_state() -> None:
    vessel = ag.Batch(SHEAR, breakage=law(0.05, smallest=1.0))
    state = ag.steady_state(vessel, start=MONO)
    assert state.grid.volume[-1] > 1e3 * float(state.mean_diameter(4, 3) ** 3 * np.pi / 6)
    assert state.balance.beyond_grid <= 1e-12
    assert state.number.shape == state.grid.volume.shape
    on_its_grid = ag.steady_state(vessel, start=MONO, grid=state.grid)
    assert on_its_grid.total_number() == pytest.approx(float(state.total_number()), rel=1e-9)


def test_a_tank_needs_no_start_and_does_not_ask_for_it() -> None:
    plain = ag.steady_state(tank(), grid=FINE)
    started = ag.steady_state(tank(), start=MONO, grid=FINE)
    assert started.total_number() == pytest.approx(float(plain.total_number()), rel=1e-12)


@pytest.mark.parametrize("options", [{"grid": None}, {"grid": WIDE}], ids=["default grid", "given grid"])
def test_one_size_in_a_closed_vessel_needs_no_smallest_piece(options: dict[str, Any]) -> None:
    """The state is the one that a smooth start of the same volume leads to, if the grid reaches down to both."""
    vessel = ag.Batch(SHEAR, breakage=law(fragments=ag.fragments.uniform_binary()))
    state = ag.steady_state(vessel, start=MONO, **options)
    smooth = ag.steady_state(vessel, start=EXPONENTIAL, **options)
    assert state.total_number() == pytest.approx(float(smooth.total_number()), rel=1e-3)
    assert state.moment(2) == pytest.approx(float(smooth.moment(2)), rel=1e-3)


# ---- one parameter varied


def test_a_curve_is_its_points() -> None:
    """Continuation from each state to the next finds what each finds alone."""
    rates = [1.0, 2.0, 5.0, 10.0]
    grid = ag.SizeGrid.geometric(smallest=1e-6, largest=1e4, per_doubling=3)
    curve = ag.steady_states(flocs, rates, start=EXPONENTIAL, grid=grid)
    np.testing.assert_array_equal(curve.values, rates)
    for rate, state in zip(rates, curve.states, strict=True):
        alone = ag.steady_state(flocs(rate), start=EXPONENTIAL, grid=grid)
        for k in (0, 1, 2):
            assert state.moment(k) == pytest.approx(float(alone.moment(k)), rel=1e-9)
        assert state.iterations <= 30
    np.testing.assert_array_equal(curve.total_number(), [float(s.total_number()) for s in curve.states])
    # aggregation goes with G M1 and breakage with G^1.6 v^(1/3): v ~ G^-1.8, d ~ G^-0.6
    np.testing.assert_allclose(curve.exponent(), -0.6, rtol=1e-6)
    d43 = curve.mean_diameter(4, 3)
    np.testing.assert_allclose(np.diff(np.log(d43)) / np.diff(np.log(rates)), -0.6, rtol=1e-6)


def test_a_curve_on_the_default_grid() -> None:
    rates = [1.0, 0.5, 0.2]
    curve = ag.steady_states(lambda g: flocs(g, smallest=1.0), rates, start=MONO)
    for rate, state in zip(rates, curve.states, strict=True):
        alone = ag.steady_state(flocs(rate, smallest=1.0), start=MONO)
        assert state.total_number() == pytest.approx(float(alone.total_number()), rel=1e-8)
        assert state.moment(2) == pytest.approx(float(alone.moment(2)), rel=1e-6)


def test_a_curve_of_tanks() -> None:
    """N / N_feed = (sqrt(1 + 2 tau) - 1) / tau with tau = beta N_feed residence time."""
    times = [1.0, 3.0, 10.0]
    curve = ag.steady_states(lambda t: tank(residence_time=t), times, grid=FINE)
    np.testing.assert_allclose(curve.total_number(), [closed.tank_number(t) for t in times], rtol=1e-10)


# ---- what has no steady state


NEVER = {
    "aggregation alone": (ag.Batch(KERNEL), EXPONENTIAL),
    "breakage of the large too slow": (
        # collisions go with the volume, erosion with less
        ag.Batch(SHEAR, breakage=law(0.01, smallest=1.0, fragments=ag.fragments.erosion(1.0))),
        MONO,
    ),
}


@pytest.mark.parametrize("name", NEVER)
def test_what_never_comes_to_rest_raises(name: str) -> None:
    vessel, start = NEVER[name]
    smallest = 1.0 if start is MONO else 1e-4
    grid = ag.SizeGrid.geometric(smallest=smallest, largest=500.0, per_doubling=2)
    with pytest.raises(SimulationError, match=r"no steady state (was found in|exists)"):
        ag.steady_state(vessel, start=start, grid=grid, scheme=ag.FixedPivot(moments=2))


def test_a_vessel_in_which_nothing_happens_has_no_steady_state_of_its_own() -> None:
    with pytest.raises((SimulationError, InputError), match="steady state"):
        ag.steady_state(ag.Batch(None), start=EXPONENTIAL)


TIMED = STEPS([1.0], [1.0, 2.0])


@pytest.mark.parametrize(
    ("vessel", "words"),
    [
        (tank(kernel=KERNEL * TIMED), "changes in time"),
        (tank(feed=ag.Feed(distribution=MONO, strength=TIMED)), "changes in time"),
        (tank(flow=TIMED), "changes in time"),
        (tank(losses=ag.Withdrawal(0.1, strength=TIMED)), "changes in time"),
        (tank(breakage=law() * ag.kernels.Strength(lambda t: 1.0)), "changes in time"),
        (ag.Schedule.in_turn((tank(), 1.0), (tank(), 1.0)), "several stages"),
        (ag.Schedule.in_turn((tank(), 1.0)), "stage"),
        (tank(feed=None), "loses particles and is fed none"),
        (ag.Batch(KERNEL, breakage=law(), losses=ag.Withdrawal(0.1)), "loses particles and is fed none"),
        (ag.Batch(KERNEL, breakage=law()), "start=None leaves a vessel without particles"),
        (KERNEL, "not a Vessel"),
    ],
)
def test_vessels_without_a_steady_state_are_refused(vessel: Any, words: str) -> None:
    with pytest.raises(InputError, match=words):
        ag.steady_state(vessel)


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"start": 1.0}, "start=1.0 is not a StartingDistribution"),
        ({"grid": [1.0, 2.0]}, "not a SizeGrid"),
        ({"scheme": "fixed pivot"}, "not a Scheme"),
        ({"near": 1.0}, "not a SteadyState"),
        ({"grid": ag.SizeGrid.geometric(smallest=10.0, largest=100.0)}, "misses"),
        ({"grid": ag.SizeGrid.monomers(1.0, 3)}, "needs at least 6"),
    ],
)
def test_arguments_of_another_kind_are_refused(options: dict[str, Any], words: str) -> None:
    with pytest.raises(InputError, match=words):
        ag.steady_state(tank(), **options)


def test_a_state_on_another_grid_is_no_place_to_begin() -> None:
    state = ag.steady_state(tank(), grid=FINE)
    finer = ag.SizeGrid.monomers_then_geometric(1.0, 1e4, per_doubling=4)
    with pytest.raises(InputError, match="near has another grid"):
        ag.steady_state(tank(), grid=finer, near=state)
    # a continuation of it is one
    longer = ag.steady_state(tank(), grid=FINE.extended(1e6), near=state)
    assert longer.total_number() == pytest.approx(float(state.total_number()), rel=1e-10)


def test_a_state_of_another_number_of_tanks_is_no_place_to_begin() -> None:
    train = ag.Train([ag.Tank(KERNEL, volume=1.0)] * 2, flow=1.0, feed=MONO)
    with pytest.raises(InputError, match="near"):
        ag.steady_state(train, grid=FINE, near=ag.steady_state(tank(), grid=FINE))


def test_a_tank_in_which_particles_gel_says_so() -> None:
    """Product kernel, tau = 10: most of the feed would leave through the top of any grid."""
    gelling = ag.StirredTank(ag.kernels.multiplicative(1.0), residence_time=10.0, feed=MONO)
    with warnings.catch_warnings():
        warnings.simplefilter("error", AccuracyWarning)
        with pytest.raises((AccuracyWarning, SimulationError)):
            ag.steady_state(gelling)


def test_a_closed_vessel_of_one_size_is_solved_from_a_smooth_guess() -> None:
    for coefficient in (2.0, 2e-2, 2e-4):
        halves = ag.Breakage(
            rate=ag.rates.power_law(coefficient=coefficient, exponent=1.0),
            fragments=ag.fragments.uniform_binary(),
        )
        vessel = ag.Batch(ag.kernels.constant(1.0), breakage=halves)
        state = ag.steady_state(vessel, start=ag.Monodisperse(volume=1.0, number=1.0))
        assert state.iterations <= 30
        assert float(state.moment(1)) == pytest.approx(1.0, rel=1e-12)
        assert float(state.total_number()) == pytest.approx(np.sqrt(2.0 * coefficient), rel=1e-3)
