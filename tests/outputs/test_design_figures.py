"""Figures of steady sizes and of settling, asked for what they draw."""

from __future__ import annotations

from dataclasses import replace

import matplotlib.pyplot as plt
import numpy as np
import pytest

from aggsim.errors import InputError
from aggsim.outputs import figures
from aggsim.result import SteadyCurve

RATES = np.geomspace(1e-5, 2e-3, 25)


class Power:
    """Outer diameter that grows with the diameter of equal volume to the power 1.4."""

    def collision_diameter(self, volume):
        return 1e-7 * (np.cbrt(6.0 * volume / np.pi) / 1e-7) ** 1.4


def labels(ax) -> list[str]:
    return [text.get_text() for text in ax.get_legend().get_texts()]


def test_axis_in_axis_out(curve):
    for draw in (
        lambda ax=None: figures.steady_size(curve, ax=ax),
        lambda ax=None: figures.settled_share(RATES, 1e-5 / RATES, ax=ax),
    ):
        plt.close("all")
        _, ax = plt.subplots()
        assert draw(ax) is ax
        assert draw().figure is not ax.figure
        assert plt.get_fignums() == [1, 2]
        ax.figure.canvas.draw()


@pytest.mark.parametrize("structure", [None, Power()])
def test_median_in_its_band(curve, structure):
    ax = figures.steady_size(curve, "breakage [1/s]", structure=structure, unit=1e-6)
    assert (ax.get_xscale(), ax.get_yscale()) == ("log", "log")
    assert ax.get_xlabel() == "breakage [1/s]"
    kind = "volume-equivalent" if structure is None else "outer"
    assert ax.get_ylabel() == f"{kind} diameter, by volume [µm]"
    assert labels(ax) == ["$d_{10}$ to $d_{90}$", "$d_{50}$"]
    d10, d50, d90 = (curve.quantile_diameter(p, 3, structure) * 1e6 for p in (0.1, 0.5, 0.9))
    np.testing.assert_allclose(ax.lines[0].get_xydata(), np.column_stack([curve.values, d50]))
    corners = ax.collections[0].get_paths()[0].vertices[:, 1]
    assert (corners.min(), corners.max()) == pytest.approx((d10.min(), d90.max()), rel=1e-12)
    low, high = ax.get_ylim()
    assert low < d10.min() < d90.max() < high


def test_values_may_come_in_any_order(curve):
    turned = SteadyCurve(curve.values[::-1], curve.states[::-1])
    for one, other in zip(figures.steady_size(curve).lines, figures.steady_size(turned).lines, strict=True):
        np.testing.assert_array_equal(one.get_xydata(), other.get_xydata())


def test_exponents_stand_beside_the_curve(curve):
    ax = figures.steady_size(curve, exponent=True)
    slopes = curve.exponent()
    assert (slopes < 0.0).all()
    written = [text.get_text() for text in ax.texts]
    assert written == [f"slope −{-slopes[k]:.2f}" for k in (0, 2, 3)]
    assert [(t.get_ha(), t.get_va()) for t in ax.texts] == [
        ("left", "bottom"),
        ("left", "bottom"),
        ("right", "top"),
    ]
    assert not figures.steady_size(curve).texts
    rising = SteadyCurve(1.0 / curve.values, curve.states)
    texts = figures.steady_size(rising, exponent=True).texts
    assert [(t.get_ha(), t.get_va()) for t in texts] == [
        ("left", "top"),
        ("right", "bottom"),
        ("right", "bottom"),
    ]
    with pytest.raises(InputError, match="at least 3 values"):
        figures.steady_size(SteadyCurve(curve.values[:2], curve.states[:2]), exponent=True)


def test_states_that_are_not_stable_are_marked(curve):
    states = [
        replace(state, jacobian=state.jacobian * (-1.0 if k == 1 else 1.0))
        for k, state in enumerate(curve.states)
    ]
    ax = figures.steady_size(SteadyCurve(curve.values, states))
    assert labels(ax)[-1] == "not stable"
    assert ax.lines[-1].get_xdata() == [curve.values[1]]
    assert ax.lines[-1].get_markerfacecolor() == "white"


def test_two_curves_on_one_axis(curve):
    ax = figures.steady_size(curve, label="a")
    figures.steady_size(SteadyCurve(10.0 * curve.values, curve.states), label="b", ax=ax)
    assert labels(ax) == [f"{name}, {what}" for name in "ab" for what in ("$d_{10}$ to $d_{90}$", "$d_{50}$")]
    assert ax.lines[0].get_color() != ax.lines[2].get_color()
    low, high = ax.get_xlim()
    assert low < curve.values[0] < 10.0 * curve.values[-1] < high


def test_a_parameter_of_zero_has_no_place_on_the_axis(curve):
    with pytest.raises(InputError, match=r"curve.values\[0\]=0"):
        figures.steady_size(SteadyCurve(curve.values * [0.0, 1.0, 1.0, 1.0], curve.states))


@pytest.mark.parametrize(
    ("per_day", "unit", "factor"),
    # 1 mm/s is 3.6 m/h and 86.4 m3 per m2 and day
    [(False, "[m/h]", 3.6), (True, "[m³/(m² d)]", 86.4)],
)
def test_overflow_rate_in_two_units(per_day, unit, factor):
    ax = figures.settled_share(RATES, 1e-5 / RATES, per_day=per_day)
    ax.figure.canvas.draw()
    assert ax.get_xlabel() == "overflow rate [mm/s]"
    (upper,) = ax.child_axes
    assert upper.get_xlabel() == f"overflow rate {unit}"
    np.testing.assert_allclose(ax.get_xlim(), [0.01, 2.0])
    np.testing.assert_allclose(upper.get_xlim(), [0.01 * factor, 2.0 * factor])
    np.testing.assert_allclose(ax.lines[0].get_xydata(), np.column_stack([1e3 * RATES, 1e-3 / RATES]))


def test_several_shares_are_named():
    ax = figures.settled_share(RATES, [1e-5 / RATES, 0.5e-5 / RATES], ["now", "later"])
    assert labels(ax) == ["now", "later"]
    figures.settled_share(RATES, 0.1e-5 / RATES, "last", ax=ax)
    assert labels(ax) == ["now", "later", "last"]
    assert len({line.get_color() for line in ax.lines}) == 3
    assert len(ax.child_axes) == 1
    assert figures.settled_share(RATES, 1e-5 / RATES).get_legend() is None


def test_one_overflow_rate_can_be_drawn():
    figures.settled_share([1e-4], [0.5]).figure.canvas.draw()


@pytest.mark.parametrize(
    ("rates", "shares", "given", "message"),
    [
        ([0.0, 1e-3], [0.5, 0.1], (), r"overflow_rates\[0\]"),
        ([1e-3, 1e-4], [0.5, 0.1], (), "strictly increase"),
        ([1e-4, 1e-3], [90.0, 10.0], (), r"shares\[0\]\[0\]=90 .* 0\.9 for 90 %"),
        ([1e-4, 1e-3], [[0.9, 0.1], [0.9, np.nan]], (), r"shares\[1\]\[1\]"),
        ([1e-4, 1e-3], [0.9, 0.5, 0.1], (), "2 values"),
        ([1e-4, 1e-3], [0.9, 0.5], ("a", "b"), "labels=2 names"),
    ],
)
def test_what_cannot_be_drawn_is_refused(rates, shares, given, message):
    with pytest.raises(InputError, match=message):
        figures.settled_share(rates, shares, given)
    assert plt.get_fignums() == []
