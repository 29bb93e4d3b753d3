from __future__ import annotations

import pickle

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import SimulationError
from aggsim.result import FIGURES, Comparison, ErrorEstimate, Later, Snapshot
from aggsim.result.error import figures_of

GEOMETRIC = ag.SizeGrid.geometric(smallest=1.0, largest=1e4, per_doubling=4)
TIMES = np.array([1.0, 10.0, 100.0])


def lognormal(scale: float) -> np.ndarray:
    """Numbers (3, n) of a smooth distribution, as many times as `scale` says."""
    x = np.log(GEOMETRIC.volume)
    return scale * np.exp(-((x - np.array([[3.0], [4.0], [5.0]])) ** 2))


def estimate(over: float = 2.0, **options: object) -> ErrorEstimate:
    one, other = Snapshot(GEOMETRIC, lognormal(1.0)), Snapshot(GEOMETRIC, lognormal(1.02))
    return ErrorEstimate(TIMES, (Comparison("size and time", one, other, over),), **options)  # type: ignore[arg-type]


def test_the_difference_of_two_runs_over_what_it_stands_for() -> None:
    error = estimate()
    # numbers differ by 2 %, sizes not at all
    np.testing.assert_allclose(error["number"], 0.01, rtol=1e-12)
    np.testing.assert_allclose(error["M2"], 0.01, rtol=1e-12)
    assert error["d50"].max() < 1e-12
    assert error.largest == pytest.approx(0.01)
    assert error.worst in {"number", "M2", "M3"}
    np.testing.assert_allclose(error.of(lambda r: r.moment(1.5)), 0.01, rtol=1e-12)


def test_causes_add_up_and_are_told_apart() -> None:
    one, other = Snapshot(GEOMETRIC, lognormal(1.0)), Snapshot(GEOMETRIC, lognormal(1.02))
    made = []

    def apart() -> tuple[Comparison, ...]:
        made.append(1)
        return Comparison("size", one, other, 4.0), Comparison("time", one, other, 10.0)

    error = ErrorEstimate(TIMES, (Comparison("size and time", one, other, 2.0),), apart)
    assert error.largest == pytest.approx(0.01)
    assert not made
    assert error.by_cause() == pytest.approx({"size": 0.005, "time": 0.002})
    np.testing.assert_allclose(error.parts(lambda r: r.total_number())["time"], 0.002, rtol=1e-12)
    assert len(made) == 1


def test_no_estimate_goes_below_the_floor() -> None:
    assert estimate(floor=1e-6)["d50"].min() >= 1e-6


def test_met_or_not() -> None:
    assert estimate().met
    assert estimate(asked=0.02).met
    short = estimate(asked=0.005, runs=2)
    assert not short.met
    assert "NOT met" in repr(short)


def test_an_error_that_passes_zero_counts_as_its_neighbour_in_time() -> None:
    times = np.array([1.0, 1.1, 2.0])
    number = lognormal(1.0)
    other = number * np.array([[1.01], [1.0], [1.04]])
    pair = Comparison("size", Snapshot(GEOMETRIC, number), Snapshot(GEOMETRIC, other), 1.0)
    np.testing.assert_allclose(ErrorEstimate(times, (pair,))["number"], [0.01, 0.01, 0.04], rtol=1e-10)


def test_what_passed_the_top_is_put_back_by_volume() -> None:
    vessel, start = ag.Batch(ag.kernels.additive(1.0)), ag.Monodisperse(volume=1.0, number=1.0)
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 30.0)
    with pytest.warns(ag.errors.AccuracyWarning, match="grew past the top"):
        result = ag.simulate(vessel, start, [1.0, 3.0], grid=grid)
    plain, whole = Snapshot.without_and_with_top(result)
    np.testing.assert_allclose(whole.moment(1), 1.0, rtol=1e-12)
    for one, other in ((plain, Snapshot.of(result)), (whole, Snapshot(grid, whole.number))):
        for figure in FIGURES:  # read together or alone
            np.testing.assert_allclose(one.figures[figure], figures_of(other)[figure], rtol=1e-13)
    assert result.error["M2"][-1] > 0.1


def test_an_unknown_figure_is_named() -> None:
    with pytest.raises(KeyError, match="d42"):
        estimate()["d42"]


def test_later_is_made_once_and_travels_only_when_ready() -> None:
    made = []

    def make() -> ErrorEstimate:
        made.append(1)
        return estimate()

    later = Later(make)
    assert not later.ready
    with pytest.raises(SimulationError, match="before it was saved"):
        pickle.loads(pickle.dumps(later)).get()
    assert later.get() is later.get()
    assert later.ready
    assert len(made) == 1
    travelled = pickle.loads(pickle.dumps(later)).get()
    np.testing.assert_array_equal(travelled["number"], later.get()["number"])
