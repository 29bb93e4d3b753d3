"""Laws of particle size against their closed forms, each other, and what is refused."""

from __future__ import annotations

import dataclasses
import math
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import integrate, special

from aggsim.errors import AggsimError, DistributionError, InputError
from aggsim.sizes import (
    Box,
    Exponential,
    Gamma,
    LogNormal,
    Measured,
    Mixture,
    Monodisperse,
    StartingDistribution,
    means,
)

V0 = means.volume_of(400e-9)
TABLE = Measured.from_classes(
    np.geomspace(1e-7, 3e-6, 9),
    [0.01, 0.05, 0.2, 0.3, 0.0, 0.24, 0.15, 0.05],
    kind="volume",
    volume_fraction=1e-4,
)
LAWS: dict[str, StartingDistribution] = {
    "one size": Monodisperse(diameter=400e-9, volume_fraction=1e-5),
    "narrow lognormal": LogNormal(median_diameter=400e-9, gsd=1.02, volume_fraction=1e-5),
    "lognormal": LogNormal(median_diameter=400e-9, gsd=1.3, number=1e14),
    "broad lognormal": LogNormal(median_diameter=2e-6, gsd=2.2, volume_fraction=1e-3, median_of=3),
    "exponential": Exponential(mean_volume=1.0, number=1.0),
    "gamma": Gamma(mean_volume=3.0, shape=2.0, number=5.0),
    "narrow gamma": Gamma(mean_diameter=1e-6, shape=400.0, volume_fraction=0.01),
    "spread gamma": Gamma(mean_volume=1.0, shape=0.4, number=1.0),
    "box": Box(smallest_diameter=1e-7, largest_diameter=8e-7, volume_fraction=1e-5),
    "measured": TABLE,
    "sum": LogNormal(median_diameter=100e-9, gsd=1.2, volume_fraction=1e-6)
    + TABLE
    + Monodisperse(diameter=2e-6, volume_fraction=1e-5),
}
CONTINUOUS = {name: law for name, law in LAWS.items() if name != "one size"}


def every(laws):
    return pytest.mark.parametrize("law", list(laws.values()), ids=list(laws))


def wide_edges(law, cells=80):
    """Cells that reach beyond all that matters for moments up to 5."""
    low, high = law.limits(1e-16)
    return np.geomspace(low * 1e-4, high * 1e12, cells + 1)


# ---- closed forms


@pytest.mark.parametrize("k", [-0.5, 0.0, 1 / 3, 1.0, 2.0, 2.5])
def test_moments_are_the_closed_forms(k):
    assert Monodisperse(volume=2.0, number=3.0).moment(k) == pytest.approx(3.0 * 2.0**k, rel=1e-14)
    s = 3 * math.log(1.3)
    assert LAWS["lognormal"].moment(k) == pytest.approx(1e14 * V0**k * math.exp(k**2 * s**2 / 2), rel=1e-12)
    assert LAWS["exponential"].moment(k) == pytest.approx(special.gamma(1 + k), rel=1e-12)
    assert LAWS["gamma"].moment(k) == pytest.approx(5 * 1.5**k * special.gamma(2 + k), rel=1e-12)
    a, b = means.volume_of([1e-7, 8e-7])
    mean = math.log(b / a) if k == 0 else (b**k - a**k) / k
    box = LAWS["box"]
    assert box.moment(k) == pytest.approx(box.number * mean / math.log(b / a), rel=1e-12)


def test_gamma_of_shape_one_is_the_exponential_law():
    a, b = Gamma(mean_volume=2.0, shape=1.0, number=3.0), Exponential(mean_volume=2.0, number=3.0)
    v = np.geomspace(1e-6, 50.0, 40)
    np.testing.assert_allclose(a.density(v), 1.5 * np.exp(-v / 2), rtol=1e-13)
    for ask in ("density", "number_below", "volume_below"):
        np.testing.assert_array_equal(getattr(a, ask)(v), getattr(b, ask)(v))
    assert a.limits() == b.limits()
    assert b.density(0.0) == 1.5


def test_median_of_lognormal_is_the_median_of_what_it_says():
    for r, below, whole in ((0, "number_below", "total_number"), (3, "volume_below", "total_volume")):
        law = LogNormal(median_diameter=400e-9, gsd=1.7, volume_fraction=1e-5, median_of=r)
        assert getattr(law, below)(V0) / getattr(law, whole) == pytest.approx(0.5, rel=1e-12)


def test_box_holds_equal_numbers_per_ratio_of_sizes():
    law = Box(smallest_diameter=1e-7, largest_diameter=8e-7, number=3e12)
    limits = means.volume_of([1e-7, 2e-7, 4e-7, 8e-7])
    np.testing.assert_allclose(np.diff(law.number_below(limits)), 1e12, rtol=1e-12)
    assert law.breaks == pytest.approx(limits[[0, -1]], rel=1e-14)
    outside = limits[[0, -1]] * [0.999, 1.001]
    np.testing.assert_array_equal(law.density(outside), 0.0)


def test_one_size_is_an_atom_that_counts_as_below_itself():
    law = Monodisperse(volume=2.0, number=3.0)
    assert law.atoms == ((2.0, 3.0),)
    assert law.log_width == 0.0
    assert law.limits() == (2.0, 2.0)
    np.testing.assert_array_equal(law.number_below([1.999, 2.0, 3.0]), [0.0, 3.0, 3.0])
    np.testing.assert_array_equal(law.volume_below([1.999, 2.0, 3.0]), [0.0, 6.0, 6.0])
    np.testing.assert_array_equal(law.density([1.0, 2.0]), 0.0)
    assert law.quadrature([1.0, 3.0])[0].size == 0


# ---- the contract, for every law


@every(LAWS)
def test_quadrature_and_atoms_give_the_moments(law):
    v, n = law.quadrature(wide_edges(law))
    assert (n >= 0).all()
    for k in (0, 1, 2, 3, 4, 5):
        found = np.sum(n * v**k) + sum(number * volume**k for volume, number in law.atoms)
        assert found == pytest.approx(law.moment(k), rel=2e-13)


@every(CONTINUOUS)
def test_quadrature_of_a_part_is_the_difference_of_cumulatives(law):
    low, high = law.limits(0.05)
    edges = np.linspace(low * 1.1, 0.9 * high + 0.2 * low, 4)
    v, n = law.quadrature(edges)
    assert v.min() >= edges[0]
    assert v.max() <= edges[-1]
    cell = np.searchsorted(edges, v) - 1
    for below, power in ((law.number_below, 0), (law.volume_below, 1)):
        expected = np.diff(below(edges))
        for volume, number in law.atoms:
            if edges[0] < volume <= edges[-1]:
                expected[np.searchsorted(edges, volume) - 1] -= number * volume**power
        got = np.bincount(cell, n * v**power, minlength=3)
        # differences of cumulatives lose digits to the totals
        np.testing.assert_allclose(got, expected, atol=1e-12 * float(below(edges[-1])), rtol=1e-11)


@every(CONTINUOUS)
def test_density_is_the_slope_of_the_cumulative(law):
    low, high = law.limits(0.1)
    edges = np.geomspace(low, high, 6)
    for a, b in pairwise(edges):
        inner = [v for v in law.breaks if a < v < b]
        cuts = [a, *inner, b]
        whole = sum(
            integrate.quad(
                lambda u: float(law.density(np.exp(u)) * np.exp(u)), math.log(p), math.log(q), epsrel=1e-11
            )[0]
            for p, q in pairwise(cuts)
        )
        atoms = sum(number for volume, number in law.atoms if a < volume <= b)
        rise = float(law.number_below(b) - law.number_below(a)) - atoms
        assert whole == pytest.approx(rise, rel=1e-9, abs=1e-11 * law.total_number)


@every(LAWS)
@pytest.mark.parametrize("share", [1e-2, 1e-6, 1e-9])
def test_limits_leave_no_more_than_the_share_outside(law, share):
    low, high = law.limits(share)
    # strictly below: an atom at the limit is not left out
    assert law.number_below(low * (1 - 1e-9)) <= share * law.total_number * (1 + 1e-6)
    # one minus a figure close to one: round-off 2e-16
    assert 1 - law.volume_below(high) / law.total_volume <= share * (1 + 1e-6) + 1e-14
    assert 0 < low <= high


@every(LAWS)
def test_cumulatives_start_at_nothing_and_end_at_everything(law):
    low, high = law.limits(1e-16)
    for below, whole in ((law.number_below, law.total_number), (law.volume_below, law.total_volume)):
        assert float(below(high * 1e6)) == pytest.approx(whole, rel=1e-13)
        assert float(below(low * 1e-45)) <= 1e-15 * whole
        assert float(below(0.0)) == 0.0
        reached = below(np.geomspace(low * 0.1, high * 10, 500))
        assert (np.diff(reached) >= -1e-14 * whole).all()
    assert law.total_number == law.moment(0)
    assert law.total_volume == law.moment(1)


@every(LAWS)
def test_answers_have_the_shape_of_the_question(law):
    low, high = law.limits()
    grid = np.geomspace(low, high * 1.1, 6).reshape(2, 3)
    for ask in (law.density, law.number_below, law.volume_below):
        assert ask(grid).shape == (2, 3)
        assert ask(low).shape == ()


@every(LAWS)
@given(factor=st.floats(1e-6, 1e6))
def test_scaling_scales_numbers_only(law, factor):
    low, high = law.limits()
    v = np.geomspace(low, high * 1.001, 7)
    for scaled in (factor * law, law * factor):
        assert type(scaled) is type(law)
        np.testing.assert_allclose(scaled.density(v), factor * law.density(v), rtol=1e-13)
        np.testing.assert_allclose(scaled.number_below(v), factor * law.number_below(v), rtol=1e-13)
        assert scaled.moment(2) == pytest.approx(factor * law.moment(2), rel=1e-13)
        assert scaled.limits() == pytest.approx(law.limits(), rel=1e-9)
        assert sum(n for _, n in scaled.atoms) == pytest.approx(
            factor * sum(n for _, n in law.atoms), rel=1e-13
        )


@given(st.lists(st.sampled_from(list(LAWS)), min_size=2, max_size=4), st.floats(0, 3))
def test_sums_add(names, k):
    parts = [LAWS[name] for name in names]
    total = parts[0]
    for part in parts[1:]:
        total = total + part
    assert isinstance(total, Mixture)
    assert all(not isinstance(part, Mixture) for part in total.parts)
    v = np.geomspace(1e-21, 1e-17, 5)
    assert total.moment(k) == pytest.approx(sum(part.moment(k) for part in parts), rel=1e-13)
    for ask in ("density", "number_below", "volume_below"):
        np.testing.assert_allclose(
            getattr(total, ask)(v), sum(getattr(part, ask)(v) for part in parts), rtol=1e-12, atol=0
        )
    at, _ = total.quadrature(np.geomspace(1e-22, 100.0, 60))
    assert at.size == sum(part.quadrature(np.geomspace(1e-22, 100.0, 60))[0].size for part in parts)
    widths = [part.log_width for part in parts if part.log_width > 0]
    assert total.log_width == (min(widths) if widths else 0.0)


def test_laws_are_frozen_compare_by_value_and_tell_what_they_are():
    a = LogNormal(median_diameter=400e-9, gsd=1.3, volume_fraction=1e-5)
    b = LogNormal(median_diameter=400e-9, gsd=1.3, mass_concentration=0.01055, density=1055.0)
    assert a.number == pytest.approx(b.number, rel=1e-14)
    assert a == LogNormal(median_diameter=400e-9, gsd=1.3, number=a.number)
    assert repr(a).startswith("LogNormal(median_diameter=4e-07, gsd=1.3, number=")
    with pytest.raises(dataclasses.FrozenInstanceError):
        a.gsd = 2.0
    assert dataclasses.replace(a, number=1e12).number == 1e12


# ---- refusals


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: Monodisperse(diameter=400, volume_fraction=0.1), "diameters are in metres"),
        (lambda: Monodisperse(diameter=3e-20, volume_fraction=0.1), "smaller than an atom"),
        (lambda: Monodisperse(number=1.0), "exactly one of the two"),
        (lambda: Monodisperse(diameter=1e-6, volume=1e-18, number=1.0), "exactly one of the two"),
        (lambda: Monodisperse(volume=-1.0, number=1.0), "above 0"),
        (lambda: LogNormal(median_diameter=1e-6, gsd=0.3, number=1.0), "not a coefficient of variation"),
        (lambda: LogNormal(median_diameter=1e-6, gsd=1.0, number=1.0), "use Monodisperse"),
        (lambda: LogNormal(median_diameter=1e-6, gsd=12.0, number=1.0), "at most 10"),
        (lambda: LogNormal(median_diameter=1e-6, gsd=1.3, number=1.0, median_of=4), "3 for volume"),
        (
            lambda: LogNormal(median_diameter=1e-6, gsd=9.0, number=1.0, median_of=3),
            "below the size of an atom",
        ),
        (lambda: Exponential(number=1.0), "mean_diameter or mean_volume"),
        (lambda: Gamma(mean_volume=1.0, shape=0.0, number=1.0), "shape"),
        (
            lambda: Box(smallest_diameter=1e-6, largest_diameter=1e-6, number=1.0),
            "use Monodisperse|Monodisperse",
        ),
        (lambda: Exponential(mean_volume=1.0, number=1.0).moment(-1.0), "lower moments are infinite"),
        (lambda: Exponential(mean_volume=1.0, number=1.0) * 0.0, "factor"),
        (lambda: -1.0 * Monodisperse(volume=1.0, number=1.0), "factor"),
        (lambda: Exponential(mean_volume=1.0, number=1.0).limits(0.7), "share"),
        (lambda: Monodisperse(volume=1.0, number=1.0).limits(0.0), "share"),
        (lambda: Exponential(mean_volume=1.0, number=1.0).quadrature([1.0, 0.5]), "increase"),
        (lambda: Mixture(()), "at least one"),
        (lambda: Mixture((1.0,)), "starting distributions"),
    ],
)
def test_what_cannot_be_is_refused(make, message):
    with pytest.raises(InputError, match=message):
        make()


def test_adding_something_else_is_a_type_error():
    with pytest.raises(TypeError):
        Monodisperse(volume=1.0, number=1.0) + 1.0


def test_refusals_belong_to_the_family():
    assert issubclass(DistributionError, AggsimError)
    with pytest.raises(DistributionError):
        LogNormal(median_diameter=1e-6, gsd=9.0, number=1.0, median_of=3)
