"""A grid that suits a starting distribution, for users who give none."""

from __future__ import annotations

import numpy as np

from aggsim.sizes.grid import SizeGrid
from aggsim.sizes.starting import StartingDistribution

NUMBER_SHARE_BELOW = 1e-4  # a default grid starts where so little of the number is smaller
VOLUME_SHARE_ABOVE = 1e-8  # and reaches at least to where so little of the volume is larger
ROOM = 4.0  # doublings of volume above the largest starting particle; a run extends the top as it needs
FINEST = 12  # sections per doubling that a narrow start can ask for


def starting_grid(
    start: StartingDistribution,
    per_doubling: int = 3,
    geometric: bool = False,
    finer: float = 1.0,
    whole: bool = False,
) -> SizeGrid:
    """Grid that covers a starting distribution with modest room to grow.

    One discrete size gets multiples of itself, then a geometric part (with `geometric`, a geometric grid that
    starts at it); anything else gets a geometric grid, fine enough for the narrowest feature of the start, on
    which each discrete size takes the place of the nearest pivot.

    Parameters
    ----------
    start : StartingDistribution
        Law of sizes.
    per_doubling : int
        Sections per doubling of the volume for a start that is not narrow.
    geometric : bool
        Keep one ratio throughout.
    finer : float
        Factor on the sections per doubling, whatever asked for them.
    whole : bool
        Round them up to a whole number.
    """
    smallest, _ = start.limits(NUMBER_SHARE_BELOW)
    _, largest = start.limits(VOLUME_SHARE_ABOVE)
    room = 2.0**ROOM
    if start.log_width > 0.0:  # about 1.4 sections per standard deviation of ln v resolve a peak
        per_doubling = max(per_doubling, min(FINEST, int(np.ceil(np.log(2.0) / (0.7 * start.log_width)))))
    density = float(np.ceil(finer * per_doubling)) if whole else finer * per_doubling
    discrete = sorted({volume for volume, _ in start.atoms})
    starts_discrete = bool(discrete) and discrete[0] <= smallest * (1 + 1e-9)
    if geometric or not starts_discrete:
        grid = SizeGrid.geometric(smallest=smallest, largest=largest * room, per_doubling=density)
        return grid if geometric else _with_pivots(grid, discrete)
    grid = SizeGrid.monomers_then_geometric(discrete[0], largest * room, density)
    return _with_pivots(grid, discrete[1:])


def _with_pivots(grid: SizeGrid, wanted: list[float]) -> SizeGrid:
    volume = np.array(grid.volume)
    for v in wanted:
        k = int(np.argmin(np.abs(np.log(volume / v))))
        if abs(volume[k] / v - 1.0) > 1e-9:
            volume[k] = v
    return SizeGrid(volume, ratio=grid.ratio, monomer=grid.monomer) if wanted else grid
