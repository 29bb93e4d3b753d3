"""Kernels in reduced units, K(1, 1) = 1, without a closed solution, and a run that resolves every size."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from aggsim.kernels import Kernel, from_function
from aggsim.result import Result
from aggsim.schemes import Monomer
from aggsim.sizes import SizeGrid
from aggsim.solvers import simulate
from aggsim.verification.closed import MONO
from aggsim.vessels import Batch


def brownian(exponent: float = 1.0 / 3.0) -> Kernel:
    """K = (v^a + w^a)(v^-a + w^-a) / 4; a = 1/3 for coalescing spheres, 1/D_f for fractal aggregates."""
    a = exponent
    return from_function(lambda v, w: (v**a + w**a) * (v**-a + w**-a) / 4.0, name="brownian")


def shear() -> Kernel:
    """K = (v^(1/3) + w^(1/3))^3 / 8."""
    return from_function(lambda v, w: (np.cbrt(v) + np.cbrt(w)) ** 3 / 8.0, name="shear")


def settling() -> Kernel:
    """K = (v^(1/3) + w^(1/3))^2 |v^(2/3) - w^(2/3)|: zero, with a kink, at equal sizes."""
    return from_function(
        lambda v, w: (np.cbrt(v) + np.cbrt(w)) ** 2 * np.abs(np.cbrt(v) ** 2 - np.cbrt(w) ** 2),
        name="settling",
    )


def every_size(kernel: Kernel, times: Sequence[float], sizes: int) -> Result:
    """Monodisperse start, every k-mer up to `sizes`, which must be more than are ever reached."""
    grid = SizeGrid.monomers(1.0, sizes)
    return simulate(Batch(kernel), MONO, times, grid=grid, scheme=Monomer(), rtol=1e-11)
