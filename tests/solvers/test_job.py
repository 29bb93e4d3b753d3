from __future__ import annotations

import math

import numpy as np
import pytest

import aggsim as ag
from aggsim.solvers.job import Job

EXPONENTIAL = ag.Exponential(mean_volume=1.0, number=1.0)
WATER = ag.Medium.water(temperature=293.15)
GRAINS = ag.Compact(ag.Particles(diameter=1e-6, density=2650.0))


def job(
    vessel: ag.vessels.Vessel, start: ag.StartingDistribution = EXPONENTIAL, scheme: object = None
) -> Job:
    scheme = ag.FixedPivot() if scheme is None else scheme
    return Job(vessel, [start], np.array([0.0, 1.0]), scheme, ag.methods.LSODA())  # type: ignore[arg-type]


CONSTANT = ag.Batch(ag.kernels.constant(1.0))


def test_a_job_runs_on_any_grid_at_any_tolerance() -> None:
    work = job(CONSTANT)
    default = work.run(work.grid(), True, 1e-6)
    finer = work.run(work.grid(2.0), True, 1e-9)
    assert len(finer.grid) == pytest.approx(2 * len(default.grid), abs=2)
    np.testing.assert_allclose(finer.total_number(), [1.0, 2.0 / 3.0], rtol=1e-7)
    np.testing.assert_allclose(default.total_number(), finer.total_number(), rtol=1e-5)


@pytest.mark.parametrize("moments", [2, 4, 6])
def test_smooth_kernels_have_the_order_of_the_scheme(moments: int) -> None:
    brownian = ag.kernels.brownian(GRAINS, WATER) + ag.kernels.shear(GRAINS, ag.Flow(shear_rate=10.0))
    start = ag.LogNormal(median_diameter=1e-6, gsd=1.5, volume_fraction=1e-5)
    work = job(ag.Batch(brownian), start, ag.FixedPivot(moments=moments))
    assert work.order(work.grid()) == moments


def test_kinks_lower_the_order() -> None:
    start = ag.LogNormal(median_diameter=1e-6, gsd=1.5, volume_fraction=1e-5)
    settling = job(ag.Batch(ag.kernels.settling(GRAINS, WATER)), start)
    assert settling.order(settling.grid()) == 2.0
    sharp = job(CONSTANT, ag.Box(smallest_diameter=1e-6, largest_diameter=2e-6, number=1e9))
    assert sharp.order(sharp.grid()) == 2.0
    later = ag.Schedule.in_turn((CONSTANT, 1.0), (ag.Batch(ag.kernels.settling(GRAINS, WATER)), 1.0))
    assert job(later).order(ag.SizeGrid.geometric(smallest=1e-20, largest=1e-15)) == 2.0


def test_every_size_on_its_own_has_no_error_of_size() -> None:
    work = job(CONSTANT, ag.Monodisperse(volume=1.0, number=1.0), ag.Monomer())
    assert math.isinf(work.order(work.grid()))
