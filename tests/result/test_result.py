from __future__ import annotations

import dataclasses

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError

TIMES = np.linspace(0.0, 20.0, 41)


@pytest.fixture(scope="module")
def result() -> ag.Result:
    start = ag.Monodisperse(volume=1.0, number=1.0)
    return ag.simulate(ag.Batch(ag.kernels.constant(1.0)), start, TIMES, rtol=1e-9)


def test_moments_and_means(result: ag.Result) -> None:
    np.testing.assert_allclose(result.total_number(), 1 / (1 + TIMES / 2), rtol=1e-7)
    np.testing.assert_allclose(result.moment(1), 1.0, rtol=1e-12)
    np.testing.assert_allclose(result.moment(2), 1 + TIMES, rtol=1e-7)
    # D[3,0]^3 is proportional to the mean volume
    mean = np.pi / 6 * result.mean_diameter(3, 0) ** 3
    np.testing.assert_allclose(mean, 1 + TIMES / 2, rtol=1e-7)


def test_quantiles_span_and_cumulative_agree(result: ag.Result) -> None:
    d = result.quantile_diameter([0.1, 0.5, 0.9])
    assert d.shape == (41, 3)
    assert (np.diff(d, axis=1)[1:] > 0).all()
    np.testing.assert_allclose(result.span()[1:], ((d[:, 2] - d[:, 0]) / d[:, 1])[1:], rtol=1e-12)
    share = result.cumulative(d[-1], r=3)[-1]
    np.testing.assert_allclose(share, [0.1, 0.5, 0.9], atol=1e-9)


def test_density_integrates_to_one(result: ag.Result) -> None:
    step = np.log(result.grid.volume[-1] / result.grid.volume[-2]) / 3
    q = result.density(r=3)[-1]
    # on the geometric part of the grid the trapezoidal rule in ln d is spectrally accurate
    width = result.grid.width / result.grid.volume / 3
    assert (q * width).sum() == pytest.approx(1.0, rel=1e-10)
    assert width[-1] == pytest.approx(step, rel=1e-6)


def test_outer_diameter_of_flocs(result: ag.Result) -> None:
    flocs = ag.Fractal(ag.Particles(diameter=(6 / np.pi) ** (1 / 3) * 1e-3, density=1000.0), dimension=2.0)
    scaled = dataclasses.replace(result, grid=ag.SizeGrid.from_pivots(result.grid.volume * 1e-9))
    compact = scaled.quantile_diameter(0.5)[-1]
    outer = scaled.quantile_diameter(0.5, structure=flocs)[-1]
    primary = flocs.particles.diameter
    assert outer == pytest.approx(primary * (compact / primary) ** 1.5, rel=1e-9)


def test_first_time_and_half_life(result: ag.Result) -> None:
    assert result.number_half_life() == pytest.approx(2.0, rel=1e-3)  # outputs every 0.5
    # M2 = 1 + t is a straight line, which a cubic meets exactly
    assert result.first_time(result.moment(2), 7.3) == pytest.approx(6.3, rel=1e-7)
    assert np.isnan(result.first_time(result.moment(2), 1000.0))
    assert result.first_time(result.moment(2), 1.0) == pytest.approx(0.0, abs=1e-12)
    assert result.first_time(TIMES, 5.0) == 5.0
    with pytest.raises(InputError, match=r"quantity=an array of 3 values"):
        result.first_time([1.0, 2.0, 3.0], 2.0)


def test_the_record_cannot_be_changed(result: ag.Result) -> None:
    with pytest.raises(dataclasses.FrozenInstanceError):
        result.times = TIMES  # type: ignore[misc]
    with pytest.raises(ValueError, match="read-only"):
        result.number[0, 0] = 0.0


def test_repr_says_what_matters(result: ag.Result) -> None:
    text = repr(result)
    assert len(text.splitlines()) <= 8
    for word in ("completed", "sections", "closure", "FixedPivot", "LSODA", "rate"):
        assert word in text
