"""Exact figures: known for every problem, and right where there is a formula."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import gamma, gammaincinv

from aggsim.result import FIGURES
from aggsim.sizes import means
from aggsim.verification import closed, truth
from aggsim.verification.published.unsolved import BROWNIAN, BROWNIAN_MOMENTS

SHARES = np.array(list(truth.QUANTILES.values()))


@pytest.mark.parametrize("problem", truth.problems(), ids=lambda p: p.name)
def test_every_figure_is_known(problem: truth.Problem) -> None:
    """The moments on the fine grid agree with the closed ones to 1e-9."""
    exact = problem.exact()
    assert set(exact) == set(FIGURES)
    assert all(np.isfinite(values).all() and values.shape == (3,) for values in exact.values())


def formulas(mean: np.ndarray) -> dict[str, np.ndarray]:
    """Of exponential distributions with unit volume; v n(v) is a gamma distribution of shape 2."""
    third = {k: gamma(1.0 + k / 3.0) * mean ** (k / 3.0) * (6.0 / np.pi) ** (k / 3.0) for k in range(5)}
    sizes = means.diameter_of(gammaincinv(2.0, SHARES) * mean[:, None])
    return {
        "number": 1.0 / mean,
        "M2": 2.0 * mean,
        "M3": 6.0 * mean**2,
        "D[1,0]": third[1] / third[0],
        "D[3,2]": third[3] / third[2],
        "D[4,3]": third[4] / third[3],
        **dict(zip(truth.QUANTILES, sizes.T, strict=True)),
    }


@pytest.mark.parametrize(
    ("problem", "mean"),
    [
        (truth.aggregation(closed.CONSTANT_EXP, (5.0, 10.0, 20.0)), lambda t: 1.0 + t / 2.0),
        (truth.breaking(closed.B1), lambda t: 1.0 / (1.0 + t)),
        (truth.reversible(closed.Reversible(2.0)), lambda t: 1.0 / closed.Reversible(2.0).number(t)),
    ],
    ids=["aggregation", "breakage", "both"],
)
def test_exponential_distributions(problem: truth.Problem, mean) -> None:
    exact = problem.exact()
    for name, values in formulas(mean(np.array(problem.times))).items():
        # D[1,0] misses 1e-10 of the number, the cube root of which stands for little
        np.testing.assert_allclose(exact[name], values, rtol=2e-9, err_msg=name)


def test_a_single_size_that_is_left_is_a_quantile() -> None:
    """At t = 1 a share exp(-1) of the volume has not broken."""
    exact = truth.breaking(closed.B3).exact()
    assert exact["d90"][0] == pytest.approx(float(means.diameter_of(1.0)), rel=1e-15)
    assert exact["d50"][0] < exact["d90"][0]


def test_without_a_closed_solution_every_size_is_resolved() -> None:
    problem = truth.unsolved(BROWNIAN)
    last = {name: values[-1] for name, values in problem.exact().items()}
    assert [last["number"], last["M2"], last["M3"]] == pytest.approx(BROWNIAN_MOMENTS[-1, 1:4], rel=1e-7)


def test_figures_that_the_fine_grid_misses_are_not_known() -> None:
    number = closed.CONSTANT_EXP.number(truth._FINE.volume, 20.0)
    moments = closed.CONSTANT_EXP.moments(20.0)
    wrong = (*moments[:3], moments[3] * (1.0 + 1e-8))
    exact = truth._read(truth._FINE, [number, number], [moments, wrong])
    assert np.isfinite(exact["d50"]).tolist() == [True, False]
