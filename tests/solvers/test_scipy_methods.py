from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError
from aggsim.solvers.methods import BDF, LSODA, Method, Radau

METHODS = [LSODA(), BDF(), Radau()]
WATER = ag.Medium.water(temperature=293.15)
GRAINS = ag.Compact(ag.Particles(diameter=1e-6, density=2650.0))
THREE = ag.Batch(
    ag.kernels.brownian(GRAINS, WATER)
    + ag.kernels.shear(GRAINS, ag.Flow(shear_rate=30.0))
    + ag.kernels.settling(GRAINS, WATER)
)
START = ag.LogNormal(median_diameter=1e-6, gsd=1.4, volume_fraction=2e-5)


@pytest.fixture(scope="module")
def reference() -> ag.Result:
    return ag.simulate(THREE, START, [600.0, 3000.0], rtol=1e-10)


@pytest.mark.parametrize("method", METHODS, ids=lambda m: m.name)
def test_methods_agree(method: Method, reference: ag.Result) -> None:
    result = ag.simulate(THREE, START, [600.0, 3000.0], method=method, rtol=1e-7)
    # error over many steps: within 30 times the tolerance of one
    for quantity in (lambda r: r.total_number(), lambda r: r.moment(2), lambda r: r.quantile_diameter(0.5)):
        np.testing.assert_allclose(quantity(result), quantity(reference), rtol=3e-6)
    assert np.abs(result.balance.closure).max() < 1e-11


@pytest.mark.parametrize("method", METHODS, ids=lambda m: m.name)
def test_states_inside_a_step_are_as_good_as_those_at_its_end(method: Method) -> None:
    times = np.linspace(0.0, 20.0, 101)
    start = ag.Monodisperse(volume=1.0, number=1.0)
    result = ag.simulate(ag.Batch(ag.kernels.constant(1.0)), start, times, method=method, rtol=1e-8)
    np.testing.assert_allclose(result.total_number(), 1 / (1 + times / 2), rtol=2e-6)
    assert np.abs(result.balance.closure).max() < 1e-12


def test_implicit_methods_use_the_exact_jacobian() -> None:
    result = ag.simulate(THREE, START, [600.0], method=BDF())
    assert result.stats.jacobian_evaluations > 0
    # finite differences would need one rate evaluation for each section and Jacobian
    assert result.stats.rate_evaluations < 1000


def test_limits_are_checked() -> None:
    with pytest.raises(InputError, match="max_evaluations=0"):
        LSODA(max_evaluations=0)
