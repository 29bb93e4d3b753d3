"""Random fragments of single breakage events."""

from __future__ import annotations

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray

from aggsim._checks import FloatArray
from aggsim.breakage import _quadrature
from aggsim.breakage._quadrature import Panels

_HALVINGS = 45  # of a panel, in which a share is found


def pair(parent: FloatArray, share: FloatArray) -> FloatArray:
    """Volumes (m, 2) of a piece that is a `share` (m,), at most 1, of its `parent` (m,) [m3], and of the rest."""
    piece = share * parent
    return np.stack([piece, parent - piece], axis=1)


def dirichlet(parent: FloatArray, pieces: int, shape: float, generator: np.random.Generator) -> FloatArray:
    """Volumes (m, pieces) whose shares follow Beta(shape, (pieces - 1) shape): a symmetric Dirichlet law.

    Shares are gamma variates over their sum. These are drawn as G(a) = G(a + 1) U**(1/a) in logarithms, since
    those of a small parameter leave the range of floats.
    """
    size = (parent.size, pieces)
    log = np.log(generator.standard_gamma(shape + 1.0, size))
    log -= generator.standard_exponential(size) / shape
    share = np.exp(log - log.max(axis=1, keepdims=True))
    out: FloatArray = share * (parent / share.sum(axis=1))[:, None]
    return out


def shares(
    panels: Panels, count: FloatArray, place: NDArray[np.int64], generator: np.random.Generator
) -> FloatArray:
    """One share (m,), counted from the nearer end, for each of the parents `place` (m,) of the panels.

    `count` (p, nodes) holds what the nodes of a plain rule stand for; the panels (p,) are in the order of their
    parents, and all parents have some. A panel is drawn by its sum, and a place in it by the inverse of the
    integral of the polynomial through its nodes.
    """
    chance = count.sum(axis=1)
    ends = np.cumsum(chance)
    first, last = (np.searchsorted(panels.parent, place, side) for side in ("left", "right"))
    start = ends[first] - chance[first]
    target = start + generator.random(place.size) * (ends[last - 1] - start)
    panel = np.clip(np.searchsorted(ends, target, "right"), first, last - 1)

    integral = legendre.legint((count @ _quadrature.to_legendre()).T, lbnd=-1.0)[:, panel]
    target = generator.random(place.size) * chance[panel]
    low, high = np.full(place.size, -1.0), np.ones(place.size)
    for _ in range(_HALVINGS):
        middle = 0.5 * (low + high)
        beyond = legendre.legval(middle, integral, tensor=False) > target
        low, high = np.where(beyond, low, middle), np.where(beyond, middle, high)
    return _quadrature.nearer(panels.only(panel), 0.5 * (1.0 + low)[:, None])[:, 0]
