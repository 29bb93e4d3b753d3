"""Kernels in reduced units, K(1, 1) = 1, and one run that resolves every size, shared by several tests."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

import aggsim as ag

Array = np.ndarray

BROWNIAN_TIMES = (0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0)
MONODISPERSE = ag.Monodisperse(volume=1.0, number=1.0)


def brownian(exponent: float = 1.0 / 3.0) -> ag.kernels.Kernel:
    """K = (v^a + w^a)(v^-a + w^-a) / 4; a = 1/3 for coalescing spheres, 1/D_f for fractal aggregates."""
    a = exponent
    return ag.kernels.from_function(lambda v, w: (v**a + w**a) * (v**-a + w**-a) / 4.0, name="brownian")


def shear() -> ag.kernels.Kernel:
    """K = (v^(1/3) + w^(1/3))^3 / 8."""
    return ag.kernels.from_function(lambda v, w: (np.cbrt(v) + np.cbrt(w)) ** 3 / 8.0, name="shear")


def settling() -> ag.kernels.Kernel:
    """K = (v^(1/3) + w^(1/3))^2 |v^(2/3) - w^(2/3)|: zero, with a kink, at equal sizes."""
    return ag.kernels.from_function(
        lambda v, w: (np.cbrt(v) + np.cbrt(w)) ** 2 * np.abs(np.cbrt(v) ** 2 - np.cbrt(w) ** 2),
        name="settling",
    )


@lru_cache(maxsize=1)
def every_size() -> ag.Result:
    """Brownian kernel, monodisperse start: every k-mer up to 1600, of which the last hold 1e-11 of the volume."""
    return ag.simulate(
        ag.Batch(brownian()),
        MONODISPERSE,
        BROWNIAN_TIMES,
        grid=ag.SizeGrid.monomers(1.0, 1600),
        scheme=ag.Monomer(),
        rtol=1e-11,
    )


def grid_of(sections: int, per_doubling: float) -> ag.SizeGrid:
    """Monomers, then a geometric part, with a given number of sections in all."""
    ratio = 2.0 ** (1.0 / per_doubling)
    singles = int(np.ceil(1.0 / (ratio - 1.0)))
    grid = ag.SizeGrid.monomers_then_geometric(1.0, singles * ratio ** (sections - singles), per_doubling)
    assert grid.sections == sections
    return grid
