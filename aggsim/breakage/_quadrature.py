"""Gauss rules on the cells between neighbouring pivots, for all parents at once.

Every fragment size is a share z of its parent. The range of shares is halved: below 1/2 a panel is measured by z
and integrated over z**(1/2), so that powers of v**(1/2) are polynomials; above 1/2 it is measured by 1 - z, which
keeps its digits close to the parent. Panels are cut further where a law asks for it.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache
from typing import NamedTuple

import numpy as np
from numpy.polynomial import legendre
from numpy.typing import NDArray
from scipy import special

from aggsim._checks import FloatArray

_NODES = 12
_SLIVER = 1e-13  # relative; a panel that is narrower holds nothing but the round-off of its ends
_INSIDE = (1e-6, 1.0 - 1e-6)  # where in a panel its ends are probed
_CUTS = 100  # halvings of a panel
_PANELS_PER_PARENT = 200  # cutting ends when this many were added on average

Mask = NDArray[np.bool_]


class Panels(NamedTuple):
    """Ranges of shares, (m,) each, inside one cell and one half.

    `low` and `high` [1] are shares counted from the nearer end of the range: of the fragment where `upper` is
    false, of what the fragment leaves over where it is true. `parent` is a position in a list of parents.
    """

    parent: NDArray[np.int64]
    upper: Mask
    low: FloatArray
    high: FloatArray

    def only(self, chosen: Mask | NDArray[np.int64]) -> Panels:
        """The panels where a mask (m,) is true, or those of some indices."""
        return Panels(self.parent[chosen], self.upper[chosen], self.low[chosen], self.high[chosen])


class Points(NamedTuple):
    """Nodes of a quadrature over the shares of m panels, (m, nodes) each: z, 1 - z, and the weight dz."""

    share: FloatArray
    rest: FloatArray
    weight: FloatArray


def cells(parent: FloatArray, volume: FloatArray) -> Panels:
    """Panels of the parents (k,) [m3], cut at the pivots `volume` (n,) [m3] and at shares of 1/4, 1/2 and 3/4."""
    size = parent[:, None]
    halves = []
    for upper, shares in ((False, volume / size), (True, (size - volume) / size)):
        cuts = np.broadcast_to([0.0, 0.25, 0.5], (parent.size, 3))
        edges = np.sort(np.concatenate([np.clip(shares, 0.0, 0.5), cuts], axis=1), axis=1)
        low, high = edges[:, :-1], edges[:, 1:]
        row, column = np.nonzero(high - low > _SLIVER * high)
        halves.append(Panels(row, np.full(row.size, upper), low[row, column], high[row, column]))
    return _joined(halves)


def refined(panels: Panels, too_wide: Callable[[Panels], Mask]) -> Panels:
    """Panels that are halved until none is `too_wide`, in the order of their parents."""
    most = panels.low.size + _PANELS_PER_PARENT * (int(panels.parent[-1]) + 1)
    done: list[Panels] = []
    for _ in range(_CUTS):
        wide = too_wide(panels)
        done.append(panels.only(~wide))
        panels = panels.only(wide)
        if not wide.any() or sum(part.low.size for part in done) + 2 * panels.low.size > most:
            break
        panels = halved(panels)
    return _joined([*done, panels])


def halved(panels: Panels) -> Panels:
    """All first halves, then all second halves."""
    low, high = _to_variable(panels, panels.low), _to_variable(panels, panels.high)
    middle = 0.5 * (low + high)
    middle = np.where(panels.upper, middle, middle * middle)
    first, second = panels._replace(high=middle), panels._replace(low=middle)
    return Panels(*(np.concatenate(columns) for columns in zip(first, second, strict=True)))


def finer(panels: Panels) -> Panels:
    """Both halves of all panels, in the order of their parents."""
    return _joined([halved(panels)])


def points(panels: Panels, exponents: tuple[float, float] = (0.0, 0.0)) -> Points:
    """Nodes and weights for a density that goes as z**exponents[0] near 0 and (1 - z)**exponents[1] near 1.

    Both exponents are above -1. In panels that end there, the rule is exact for such a power times a polynomial.
    """
    # dz = 2 s ds with s = z**(1/2) below 1/2
    rules = [
        _rule(0.0),
        _rule(_not_polynomial(2.0 * exponents[0] + 1.0)),
        _rule(_not_polynomial(exponents[1])),
    ]
    which = np.where(panels.low > 0.0, 0, np.where(panels.upper, 2, 1))
    node, weight = (np.stack(column)[which] for column in zip(*rules, strict=True))
    low = _to_variable(panels, panels.low)[:, None]
    width = _to_variable(panels, panels.high)[:, None] - low
    at = low + width * node
    upper = panels.upper[:, None]
    near = np.where(upper, at, at * at)
    far = 1.0 - near
    weight = width * weight * np.where(upper, 1.0, 2.0 * at)
    return Points(np.where(upper, far, near), np.where(upper, near, far), weight)


def nearer(panels: Panels, position: FloatArray) -> FloatArray:
    """Shares, counted as `low` and `high`, at positions (m, k) or (k,) from 0 to 1 in the variable of the panels."""
    low, high = _to_variable(panels, panels.low), _to_variable(panels, panels.high)
    at = low[:, None] + (high - low)[:, None] * position
    out: FloatArray = np.where(panels.upper[:, None], at, at * at)
    return out


def ends(panels: Panels) -> tuple[FloatArray, FloatArray]:
    """Shares z and 1 - z (m, 2) just inside the two ends of each panel."""
    near = nearer(panels, np.array(_INSIDE))
    upper = panels.upper[:, None]
    return np.where(upper, 1.0 - near, near), np.where(upper, near, 1.0 - near)


@lru_cache(maxsize=1)
def to_ends() -> FloatArray:
    """Matrix (nodes, 2) that takes values at the nodes of a plain rule to the interpolant at the `ends`."""
    node, _ = _rule(0.0)
    basis = np.ones((_NODES, 2))
    for j in range(_NODES):
        for k in range(_NODES):
            if k != j:
                basis[j] *= (np.array(_INSIDE) - node[k]) / (node[j] - node[k])
    return basis


@lru_cache(maxsize=1)
def to_legendre() -> FloatArray:
    """Matrix (nodes, nodes) from weighted values at the nodes of a plain rule to their Legendre series on (-1, 1)."""
    node, _ = _rule(0.0)
    return legendre.legvander(2.0 * node - 1.0, _NODES - 1) * (np.arange(_NODES) + 0.5)


def _to_variable(panels: Panels, share: FloatArray) -> FloatArray:
    return np.where(panels.upper, share, np.sqrt(share))


def _not_polynomial(exponent: float) -> float:
    return exponent if exponent < 0.0 else exponent - float(np.floor(exponent))


@lru_cache(maxsize=64)
def _rule(exponent: float) -> tuple[FloatArray, FloatArray]:
    """Nodes and weights on (0, 1) for functions t**exponent times a polynomial of degree 23."""
    x, w = special.roots_jacobi(_NODES, 0.0, exponent)
    t = 0.5 * (1.0 + x)
    return t, 0.5 ** (exponent + 1.0) * w * t**-exponent


def _joined(parts: list[Panels]) -> Panels:
    columns = [np.concatenate(column) for column in zip(*parts, strict=True)]
    order = np.argsort(columns[0], kind="stable")
    return Panels(*(column[order] for column in columns))
