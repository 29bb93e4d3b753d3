"""Figures of trains and accounts, asked for what they draw."""

from __future__ import annotations

import matplotlib.pyplot as plt
import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import DistributionError, GridError, InputError, TimesError
from aggsim.outputs import figures
from aggsim.result import Balance


class Power:
    """Outer diameter that grows with the diameter of equal volume to the power 1.4."""

    def collision_diameter(self, volume):
        return 1e-7 * (np.cbrt(6.0 * volume / np.pi) / 1e-7) ** 1.4


def labels(ax) -> list[str]:
    return [text.get_text() for text in ax.get_legend().get_texts()]


def area(line) -> float:
    x, q = line.get_data()
    return float(np.trapezoid(q, np.log(x)))


@pytest.mark.parametrize("draw", [figures.train, figures.along_train, figures.account])
def test_axis_in_axis_out(train_run, draw):
    _, ax = plt.subplots()
    assert draw(train_run, ax=ax) is ax
    alone = draw(train_run)
    assert plt.get_fignums() == [1, 2]
    for shown in (ax, alone):
        shown.figure.canvas.draw()


# the tanks at one time


@pytest.mark.parametrize("structure", [None, Power()])
def test_one_density_per_tank(train_run, feed, structure):
    ax = figures.train(train_run, feed=feed, structure=structure)
    assert labels(ax) == ["feed", "tank 1", "tank 2", "tank 3"]
    assert ax.get_legend().get_title().get_text() == "at t = 20 min"
    assert (ax.get_xscale(), ax.get_ylim()[0]) == ("log", 0.0)
    assert ax.get_xlabel().startswith("volume-equivalent" if structure is None else "outer")
    assert len({str(line.get_color()) for line in ax.lines}) == 4
    for line in ax.lines:
        assert area(line) == pytest.approx(1.0, abs=3e-3)  # trapezia, at 9 points per decade of volume
    low, high = ax.get_xlim()
    last = train_run.tanks[-1].quantile_diameter([0.01, 0.99], structure=structure)[-1] * 1e6
    assert low < last[0] < last[1] < high


def test_densities_are_those_of_the_tanks(train_run):
    ax = figures.train(train_run, 310.0, r=0, unit=1e-6)
    for line, tank in zip(ax.lines, train_run.tanks, strict=True):
        x, q = line.get_data()
        at = [np.abs(x - d).argmin() for d in tank.grid.diameter * 1e6]
        np.testing.assert_allclose(q[at[1:]], tank.density(0)[3, 1:], rtol=1e-9, atol=1e-12)
    assert ax.get_legend().get_title().get_text() == "at t = 5 min"


def test_feed_is_the_law_that_flows_in(train_run, feed):
    x, q = figures.train(train_run, feed=feed, unit=1e-6).lines[0].get_data()
    # Hatch and Choate (1929), J. Franklin Inst. 207, 369: d_3 = d_0 exp(3 ln(gsd)^2)
    spread = (np.log(x[1:]) - 3.0 * np.log(1.5) ** 2) / np.log(1.5)
    expected = np.exp(-0.5 * spread**2) / (np.sqrt(2.0 * np.pi) * np.log(1.5))
    # shares between two pivots, which stand 0.14 ln(gsd) apart, widen the peak a little
    np.testing.assert_allclose(q[1:], expected, rtol=0.0, atol=0.02 * expected.max())


def test_two_times_on_one_axis(train_run):
    ax = figures.train(train_run, label="late")
    figures.train(train_run, 100.0, label="early", ax=ax)
    assert labels(ax) == [f"{when}, tank {k}" for when in ("late", "early") for k in (1, 2, 3)]
    assert [line.get_linestyle() for line in ax.lines] == 3 * ["-"] + 3 * ["--"]
    assert ax.get_legend().get_title().get_text() == ""  # it would be the time of one of them


def test_empty_tanks_are_left_out(train_run):
    for draw in (figures.train, figures.along_train):
        with pytest.raises(DistributionError, match="no particles are there yet"):
            draw(train_run, 0.0)
        with pytest.raises(TimesError, match="time="):
            draw(train_run, 1e4)
    assert plt.get_fignums() == []


@pytest.fixture(scope="module")
def half_filled(feed_law):
    """Two tanks of which nothing reaches the second."""
    still = ag.Tank(None, volume=1.0, losses=ag.Withdrawal(rate=1.0))
    train = ag.Train([still, still], flow=1e-3, feed=feed_law)
    return ag.simulate(train, [feed_law, None], [0.0, 1.0])


@pytest.fixture(scope="module")
def feed_law():
    return ag.LogNormal(median_diameter=1e-6, gsd=1.5, volume_fraction=1e-4)


def test_a_tank_without_particles_has_no_curve(half_filled):
    assert labels(figures.train(half_filled, 0.0)) == ["tank 1"]
    line = figures.along_train(half_filled, 0.0, shares=[0.5]).lines[0]
    assert list(np.isnan(line.get_ydata())) == [False, True]


@pytest.mark.parametrize("draw", [figures.train, figures.along_train])
def test_feeds_that_cannot_be_drawn(train_run, draw):
    with pytest.raises(InputError, match="feed="):
        draw(train_run, feed=1e-6)
    with pytest.raises(GridError, match="covers"):
        draw(train_run, feed=ag.Monodisperse(diameter=1e-3, number=1.0))
    assert plt.get_fignums() == []


def test_steady_state_and_one_vessel_are_drawn_as_tanks(curve, result):
    ax = figures.train(curve.states[0])
    assert labels(ax) == ["tank 1"]
    assert ax.get_legend().get_title().get_text() == "at the steady state"
    assert labels(figures.train(result, 600.0)) == ["tank 1"]


# along the train


def test_quantiles_along_the_train(train_run, feed):
    ax = figures.along_train(train_run, 500.0, feed=feed, unit=1e-6)
    assert labels(ax) == ["$d_{90}$", "$d_{50}$", "$d_{10}$"]
    assert [tick.get_text() for tick in ax.get_xticklabels()] == ["feed", "1", "2", "3"]
    assert ax.get_yscale() == "log"
    assert ax.get_ylabel() == "volume-equivalent diameter [µm]"
    for line, p in zip(ax.lines, (0.9, 0.5, 0.1), strict=True):
        x, d = line.get_data()
        np.testing.assert_array_equal(x, [0, 1, 2, 3])
        want = [tank.quantile_diameter(p)[5] * 1e6 for tank in train_run.tanks]
        np.testing.assert_allclose(d[1:], want, rtol=1e-12)
    # the volume median of the feed in closed form; pivots stand 0.14 ln(gsd) apart
    assert ax.lines[1].get_ydata()[0] == pytest.approx(np.exp(3.0 * np.log(1.5) ** 2), rel=2e-3)


def test_outer_quantiles_of_choice(train_run):
    ax = figures.along_train(train_run, shares=[0.5], r=0, structure=Power(), label="run 7")
    assert labels(ax) == [r"run 7, $d_{50,\,0}$"]
    assert ax.get_ylabel().startswith("outer diameter")
    want = [tank.quantile_diameter(0.5, 0, Power())[-1] for tank in train_run.tanks]
    np.testing.assert_allclose(ax.lines[0].get_ydata() / ax.lines[0].get_ydata()[0], want / want[0])


def test_axis_holds_all_trains_drawn_on_it(train_run, result, feed):
    ax = figures.along_train(result, label="batch")
    figures.along_train(train_run, feed=feed, label="train", ax=ax)
    assert [tick.get_text() for tick in ax.get_xticklabels()] == ["feed", "1", "2", "3"]
    low, high = ax.get_xlim()
    assert low < 0.0 < 3.0 < high


# account


def test_layers_are_the_account_in_percent(tank_run):
    ax = figures.account(tank_run)
    balance = tank_run.balance
    volumes = [balance.present, *balance.outward.values(), balance.beyond_grid]
    names = ["present", "settled", "beyond grid", "withdrawn", "beyond grid"]
    assert [label.split(",")[0] for label in labels(ax)] == [*names, "at the start"]
    assert f"settled, {100.0 * balance.settled[-1] / balance.scale:.3f} % at last" in labels(ax)
    below = np.zeros(13)
    for layer, volume in zip(ax.collections, volumes, strict=True):
        below = below + 100.0 * volume / balance.scale
        vertices = layer.get_paths()[0].vertices
        assert vertices[:, 1].max() == pytest.approx(below.max(), rel=1e-9)
    known = ax.lines[0].get_ydata()
    np.testing.assert_allclose(known, below, rtol=1e-11)  # the account closes
    assert known[-1] == pytest.approx(100.0)
    assert (ax.get_ylim(), ax.get_xlabel()) == ((0.0, 100.0), "time [min]")


def test_account_of_a_batch_has_no_line(result):
    ax = figures.account(result)
    assert not ax.lines
    assert labels(ax)[0].startswith("present, 100.000 %")


def test_account_of_one_tank(train_run):
    names = [label.split(",")[0] for label in labels(figures.account(train_run.tanks[0]))]
    assert names == ["present", "to other tanks", "beyond grid", "at the start"]


def test_account_of_nothing_and_of_one_time(make_result):
    zeros = np.zeros(5)
    figures.account(make_result(balance=Balance(0.0, zeros, zeros, zeros, zeros))).figure.canvas.draw()
    with pytest.raises(InputError, match="1 output time"):
        figures.account(make_result([60.0]))
