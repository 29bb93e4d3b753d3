"""Runs and grids of the kernels in reduced units that several tests share."""

from __future__ import annotations

import numpy as np

import aggsim as ag
from aggsim.verification import reduced
from aggsim.verification.published.unsolved import BROWNIAN

BROWNIAN_TIMES = tuple(BROWNIAN.times)
MONODISPERSE = ag.Monodisperse(volume=1.0, number=1.0)

brownian, shear, settling = reduced.brownian, reduced.shear, reduced.settling
every_size = BROWNIAN.resolved


def grid_of(sections: int, per_doubling: float) -> ag.SizeGrid:
    """Monomers, then a geometric part, with a given number of sections in all."""
    ratio = 2.0 ** (1.0 / per_doubling)
    singles = int(np.ceil(1.0 / (ratio - 1.0)))
    grid = ag.SizeGrid.monomers_then_geometric(1.0, singles * ratio ** (sections - singles), per_doubling)
    assert grid.sections == sections
    return grid
