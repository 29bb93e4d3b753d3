"""Where cells end: limits that have the pivots midway between them."""

from __future__ import annotations

import numpy as np

from aggsim._checks import FloatArray
from aggsim.schemes.base import continued
from aggsim.sizes import SizeGrid, means


def cell_limits(pivots: FloatArray) -> FloatArray:
    """Limits (n + 1,) [m3] of cells around increasing pivots x (n,) [m3], n at least 2.

        limit between x_k and x_(k+1) = (x_k w_(k+1) + x_(k+1) w_k) / (w_k + w_(k+1))

    with the widths w = dx/dk of a smooth curve through the pivots. On geometric pivots these are the harmonic means
    of neighbours, on multiples of a monomer their arithmetic means: the limits that have x_k as their arithmetic
    mean. Elsewhere they have so to the order of the curvature of the spacing.
    """
    width = means.section_width(pivots)
    lower, upper = pivots[:-1], pivots[1:]
    between = (lower * width[1:] + upper * width[:-1]) / (width[:-1] + width[1:])
    first = 2.0 * pivots[0] - between[0]
    if first <= 0.0:  # the first two pivots lie far apart
        first = pivots[0] ** 2 / between[0]
    return np.concatenate([[first], between, [2.0 * pivots[-1] - between[-1]]])


def continued_cells(grid: SizeGrid, more: int) -> tuple[FloatArray, FloatArray]:
    """Pivots (m,) and limits (m + 1,) [m3] of the cells of a grid, continued past its top as by `continued`."""
    pivots = continued(grid, more)
    limits = cell_limits(pivots)
    limits[: grid.sections + 1] = cell_limits(np.array(grid.volume))  # whatever the rule that continues it
    return pivots, limits
