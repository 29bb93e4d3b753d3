from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import AccuracyWarning, GridError, InputError, KernelError, SimulationError, TimesError

CONSTANT = ag.Batch(ag.kernels.constant(1.0))
MONO = ag.Monodisperse(volume=1.0, number=1.0)
EXPONENTIAL = ag.Exponential(mean_volume=1.0, number=1.0)


def test_output_times_are_met_exactly() -> None:
    times = [0.0, 1e-3, 0.7, 2.0, 1e3]
    result = ag.simulate(CONSTANT, MONO, times)
    np.testing.assert_array_equal(result.times, times)
    # a few times rtol = 1e-6
    np.testing.assert_allclose(result.total_number(), 1 / (1 + result.times / 2), rtol=1e-5)


def test_one_time_may_be_a_number_and_zero_is_the_start() -> None:
    assert ag.simulate(CONSTANT, MONO, 2.0).times.tolist() == [2.0]
    start = ag.simulate(CONSTANT, EXPONENTIAL, 0.0)
    assert start.total_number() == pytest.approx([1.0], rel=1e-13)
    assert start.status.completed


def test_rtol_is_kept() -> None:
    for rtol in (1e-4, 1e-6, 1e-9):
        result = ag.simulate(CONSTANT, MONO, [50.0], rtol=rtol)
        error = abs(result.total_number()[0] * 26.0 - 1.0)
        assert error < 5 * rtol


def test_a_given_grid_is_kept_and_what_passes_its_top_is_counted() -> None:
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 20.0)
    with pytest.warns(AccuracyWarning, match="grew past the top"):
        result = ag.simulate(CONSTANT, MONO, [0.0, 30.0], grid=grid)
    assert result.grid == grid
    assert result.balance.beyond_grid[-1] > 0.1
    assert result.balance.beyond_grid_number[-1] > 0.0
    assert np.abs(result.balance.closure).max() < 1e-12


def test_a_grid_of_our_own_grows_with_the_particles() -> None:
    result = ag.simulate(CONSTANT, MONO, [0.0, 1.0, 3000.0])
    assert result.stats.grid_extensions >= 2
    assert result.number.shape == (3, result.grid.sections)
    assert result.balance.beyond_grid[-1] < 1e-6
    assert result.moment(2)[-1] == pytest.approx(3001.0, rel=1e-5)


def test_default_choices_are_named_in_the_result() -> None:
    result = ag.simulate(CONSTANT, MONO, [1.0])
    assert result.settings == {"scheme": "FixedPivot(moments=6)", "method": "LSODA", "rtol": "1e-06"}


@pytest.mark.parametrize(
    ("arguments", "error", "words"),
    [
        ({"vessel": ag.kernels.constant(1.0)}, InputError, "not a Vessel"),
        ({"start": 1.0}, InputError, "not a StartingDistribution"),
        ({"times": []}, TimesError, "empty"),
        ({"times": [0.0, 2.0, 1.0]}, TimesError, r"times\[2\]=1 after 2"),
        ({"times": [-1.0, 2.0]}, TimesError, r"times\[0\]=-1"),
        ({"times": [0.0, np.nan]}, TimesError, r"times\[1\]=nan"),
        ({"times": [0.0, np.inf]}, TimesError, r"times\[1\]=inf"),
        ({"times": [[0.0, 1.0]]}, TimesError, r"shape \(1, 2\)"),
        ({"times": "an hour"}, TimesError, "an hour"),
        ({"rtol": 0.5}, InputError, "rtol=0.5"),
        ({"rtol": -1e-6}, InputError, "rtol=-1e-06"),
        ({"rtol": None}, InputError, "rtol=None"),
        ({"scheme": "fixed pivot"}, InputError, "not a Scheme"),
        ({"method": "LSODA"}, InputError, "not a Method"),
        ({"grid": [1.0, 2.0]}, InputError, "not a SizeGrid"),
        ({"grid": ag.SizeGrid.geometric(smallest=10.0, largest=100.0)}, GridError, "misses"),
        ({"grid": ag.SizeGrid.monomers(1.0, 3)}, GridError, "needs at least 6"),
        ({"progress": "yes"}, InputError, "progress='yes'"),
    ],
)
def test_bad_input_is_refused(arguments: dict[str, object], error: type[Exception], words: str) -> None:
    call: dict[str, object] = {"vessel": CONSTANT, "start": MONO, "times": [0.0, 1.0], **arguments}
    with pytest.raises(error, match=words):
        ag.simulate(**call)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("function", "words"),
    [
        (lambda v, w: v - w, "at least 0"),
        (lambda v, w: v * np.ones_like(w), "one way"),
        (lambda v, w: np.nan * v * w, "nan"),
        (lambda v, w: np.ones(3), "shape"),
    ],
    ids=["negative", "asymmetric", "nan", "shape"],
)
def test_kernels_that_are_no_collision_rates_are_refused(function, words: str) -> None:  # type: ignore[no-untyped-def]
    vessel = ag.Batch(ag.kernels.from_function(function, name="mine"))
    with pytest.raises(KernelError, match=rf"(?s)mine.*({words})"):
        ag.simulate(vessel, MONO, [1.0])


def test_unfinished_runs_raise_with_the_result_or_return_it() -> None:
    vessel = ag.Batch(ag.kernels.multiplicative(1.0))
    with pytest.raises(SimulationError, match="stopped at gelation") as caught:
        ag.simulate(vessel, MONO, [0.0, 0.5, 2.0])
    kept = caught.value.result
    assert kept.status.outcome is ag.Outcome.GELATION
    returned = ag.simulate(vessel, MONO, [0.0, 0.5, 2.0], raise_unfinished=False)
    np.testing.assert_array_equal(returned.number, kept.number)


def test_coarse_grids_warn_of_negative_numbers() -> None:
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 1e5, per_doubling=1)
    with pytest.warns(AccuracyWarning, match="negative number"):
        result = ag.simulate(CONSTANT, MONO, [0.0, 10.0], grid=grid, scheme=ag.FixedPivot(4))
    assert result.balance.negative_share.max() > 1e-5


def test_a_grid_that_is_far_too_coarse_stops_the_run() -> None:
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=1e6, per_doubling=0.4)
    result = ag.simulate(
        CONSTANT, MONO, [0.0, 10.0], grid=grid, scheme=ag.FixedPivot(6), raise_unfinished=False
    )
    assert result.status.outcome is ag.Outcome.UNRESOLVED
    assert "more sections per doubling" in str(result.status)


def test_fragments_that_pile_up_in_the_first_section_are_warned_about() -> None:
    halves = ag.Breakage(
        rate=ag.rates.power_law(coefficient=1.0, exponent=0.0), fragments=ag.fragments.uniform_binary()
    )
    start = ag.Exponential(mean_volume=1.0, number=1.0)
    grid = ag.SizeGrid.geometric(smallest=1e-3, largest=64.0)
    with pytest.warns(AccuracyWarning, match="stand in the first section"):
        ag.simulate(ag.Batch(None, breakage=halves), start, 3.0, grid=grid)


def test_single_sizes_on_a_geometric_part_get_second_order() -> None:
    two = ag.Monodisperse(volume=1.0, number=1.0) + ag.Monodisperse(volume=50.0, number=0.01)
    mixed = ag.simulate(ag.Batch(ag.kernels.constant(1.0)), two, [0.5, 2.0])
    assert mixed.settings["scheme"] == "FixedPivot(moments=2)"
    assert mixed.balance.negative_share.max() < 1e-12
    np.testing.assert_allclose(mixed.total_number(), 1.01 / (1.0 + 1.01 * np.array([0.25, 1.0])), rtol=1e-5)
    fed = ag.StirredTank(
        ag.kernels.constant(1.0), residence_time=1.0, feed=ag.Monodisperse(volume=5.0, number=1.0)
    )
    tank = ag.simulate(fed, ag.Exponential(mean_volume=1.0, number=1.0), 3.0)
    assert tank.settings["scheme"] == "FixedPivot(moments=2)"
    alone = ag.simulate(ag.Batch(ag.kernels.constant(1.0)), ag.Monodisperse(volume=1.0, number=1.0), 1.0)
    assert alone.settings["scheme"] == "FixedPivot(moments=6)"
