from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError

START = ag.Monodisperse(diameter=400e-9, volume_fraction=1e-5)
LATEX = ag.Compact(ag.Particles(diameter=400e-9, density=1055.0))
KERNEL = ag.kernels.brownian(LATEX, ag.Medium.water(temperature=298.15))


@pytest.fixture(scope="module")
def result() -> ag.Result:
    return ag.simulate(ag.Batch(KERNEL), START, np.linspace(0.0, 3000.0, 301))


def test_single_particles_left(result: ag.Result) -> None:
    criterion = ag.SingleParticlesLeft(share=0.5)
    share = criterion.quantity(result)
    assert share[0] == 1.0
    assert (np.diff(share) < 0).all()
    assert criterion.limit(result) == 0.5
    assert str(criterion) == "50% of the particles still single"
    with pytest.raises(InputError, match="several sizes"):
        criterion.check(ag.LogNormal(median_diameter=400e-9, gsd=1.2, volume_fraction=1e-5))


def test_growth_and_limit_of_a_mean_size_agree(result: ag.Result) -> None:
    growth, limit = ag.MeanSizeGrowth(factor=1.25), ag.SizeLimit(diameter=500e-9)
    growth.check(START)
    limit.check(START)
    times = [result.first_time(c.quantity(result), c.limit(result)) for c in (growth, limit)]
    assert times[0] == pytest.approx(times[1], rel=1e-9)


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: ag.SingleParticlesLeft(share=1.5), "share=1.5"),
        (lambda: ag.MeanSizeGrowth(factor=0.9), "factor=0.9"),
        (lambda: ag.SizeLimit(diameter=500.0), "diameter=500 m is larger"),
        (lambda: ag.SizeLimit(diameter=300e-9).check(START), "not above"),
    ],
)
def test_bad_limits_are_refused(make, words: str) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(InputError, match=words):
        make()
