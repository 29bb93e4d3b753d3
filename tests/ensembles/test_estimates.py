from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

import aggsim as ag
from aggsim.ensembles import EnsembleResult, Estimate
from aggsim.errors import InputError
from aggsim.sizes import means


def result_of(*replicates: list[float]) -> EnsembleResult:
    particles = tuple(np.sort(np.array(volumes)) for volumes in replicates)
    suspension = np.full((1, len(particles)), 10.0)
    events = np.zeros(len(particles))
    return EnsembleResult(np.array([2.0]), (particles,), suspension, events, events, 0.95)


def test_bands_are_those_of_student() -> None:
    values = np.random.default_rng(1).normal(5.0, 2.0, (3, 8))
    estimate = Estimate(values, 0.9)
    np.testing.assert_allclose(estimate.mean, values.mean(axis=1))
    np.testing.assert_allclose(estimate.standard_error, stats.sem(values, axis=1))
    low, high = stats.t.interval(0.9, 7, loc=values.mean(axis=1), scale=stats.sem(values, axis=1))
    np.testing.assert_allclose(estimate.lower, low)
    np.testing.assert_allclose(estimate.upper, high)
    np.testing.assert_allclose(estimate.standard_deviation, values.std(axis=1, ddof=1))


def test_moments_are_per_volume_of_suspension() -> None:
    result = result_of([1.0, 2.0, 3.0], [2.0, 2.0])
    np.testing.assert_allclose(result.total_number().values, [[0.3, 0.2]])
    np.testing.assert_allclose(result.moment(2).values, [[1.4, 0.8]])
    np.testing.assert_allclose(result.moment(-1).values, [[(1 + 1 / 2 + 1 / 3) / 10, 0.1]])


def test_mean_diameters_are_those_of_the_house() -> None:
    result = result_of([1.0, 2.0, 2.0], [3.0])
    expected = [
        means.mean_diameter([1.0, 2.0], [1.0, 2.0], 4, 3),
        means.mean_diameter([3.0], [1.0], 4, 3),
    ]
    np.testing.assert_allclose(result.mean_diameter(4, 3).values[0], expected, rtol=1e-14)


@pytest.mark.parametrize("r", [0, 3])
def test_quantiles_of_many_draws_are_those_of_the_law(r: float) -> None:
    law = ag.LogNormal(median_diameter=1e-6, gsd=1.4, number=1e12)
    draws = np.random.default_rng(1).lognormal(np.log(1e-6), np.log(1.4), (4, 40_000))
    result = result_of(*(np.pi / 6 * draws**3).tolist())
    # Hatch and Choate (1929), J. Franklin Inst. 207, 369, doi:10.1016/S0016-0032(29)91451-4
    shift = np.exp(r * np.log(law.gsd) ** 2)
    for p in (0.1, 0.5, 0.9):
        found = result.quantile_diameter(p, r=r)
        exact = 1e-6 * shift * np.exp(stats.norm.ppf(p) * np.log(1.4))
        assert abs(found.mean[0] - exact) < 4.0 * found.standard_error[0]
        assert found.standard_error[0] < 0.005 * exact


def test_quantiles_of_multiples_of_a_monomer_fill_their_cells() -> None:
    # 40 % in 1/2 to 3/2, 60 % in 3/2 to 5/2
    result = result_of([1.0] * 4 + [2.0] * 6)
    for p, volume in ((0.2, 1.0), (0.4, 1.5), (0.7, 2.0), (0.1, 0.75)):
        assert result.quantile_diameter(p, 0).mean[0] == pytest.approx(float(means.diameter_of(volume)))
    alone = result_of([2.0, 2.0])
    assert alone.quantile_diameter(0.1).mean[0] == pytest.approx(float(means.diameter_of(2.0)))
    apart = result_of([1.0, 9.0])  # the lowest cell stays above zero
    assert apart.quantile_diameter(1e-6, 0).mean[0] == pytest.approx(float(means.diameter_of(0.2)), rel=1e-4)


@pytest.mark.parametrize("p", [0.0, 1.0, -0.1])
def test_shares_that_are_none_are_refused(p: float) -> None:
    with pytest.raises(InputError, match="p="):
        result_of([1.0]).quantile_diameter(p)


def test_the_summary_names_what_matters() -> None:
    text = repr(result_of([1.0, 2.0], [2.0, 2.0, 2.0]))
    assert "2 replicates" in text
    assert "2 to 3 particles" in text
