"""Every scheme with a grid that suits it, and the aggregation equation written out plainly as a yardstick."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

import aggsim as ag
from aggsim.schemes import BEYOND

Array = np.ndarray

SCHEMES = [
    ag.FixedPivot(moments=2),
    ag.FixedPivot(moments=4),
    ag.FixedPivot(moments=6),
    ag.Sectional(),
    ag.CellAverage(),
    ag.FiniteVolume(),
    ag.Monomer(),
]
ON_GEOMETRIC_GRIDS = [scheme for scheme in SCHEMES if not isinstance(scheme, ag.Monomer)]
NUMBER_KEEPING = [scheme for scheme in SCHEMES if not isinstance(scheme, ag.FiniteVolume)]
# the cell average technique decides by the mean of all births
LINEAR_IN_THE_KERNEL = [scheme for scheme in SCHEMES if not isinstance(scheme, ag.CellAverage)]


def grid_for(scheme: ag.schemes.Scheme, doublings: int = 6, per_doubling: int = 3) -> ag.SizeGrid:
    """Grid from 1 up by some doublings; every whole number for the scheme that needs it."""
    if isinstance(scheme, ag.Monomer):
        return ag.SizeGrid.monomers(1.0, 2**doublings)
    return ag.SizeGrid.geometric(smallest=1.0, largest=2.0**doublings, per_doubling=per_doubling)


def operator_for(scheme: ag.schemes.Scheme, kernel: ag.kernels.Kernel, grid: ag.SizeGrid) -> object:
    """Operator of a kernel of one part without a strength."""
    ((_, matrix, _),) = kernel.part_matrices(grid.volume)
    return scheme.prepare(grid).aggregation(matrix)


def rates_of(operator: object, number: Array) -> Array:
    """Rates (n_sections + 2,) of an operator."""
    state = np.concatenate([number, np.zeros(BEYOND)])
    out = np.zeros(state.size)
    operator.add_rates(state, 1.0, out)
    return out


def jacobian_of(operator: object, number: Array) -> Array:
    """Jacobian (n_sections + 2, n_sections + 2) of an operator."""
    state = np.concatenate([number, np.zeros(BEYOND)])
    out = np.zeros((state.size, state.size))
    operator.add_jacobian(state, 1.0, out)
    return out


def continued_geometrically(x: Array, more: int = 8) -> Array:
    """Pivots, continued past twice the last one by their last ratio."""
    ratio = x[-1] / x[-2]
    steps = int(np.ceil(np.log(2.0) / np.log(ratio))) + more
    return np.concatenate([x, x[-1] * ratio ** np.arange(1.0, steps + 1)])


@dataclass
class Plain:
    """Rates (n_sections + 2,) and the sum of all events that touch each section, the scale of its round-off."""

    rates: Array
    gross: Array

    def add(self, section: int, events: float, weight: float, volume: float = 1.0) -> None:
        self.rates[section] += events * weight * volume
        self.gross[section] += abs(events) * max(1.0, abs(weight)) * volume


def weak_form(x: Array, matrix: Array, number: Array, nodes: int) -> Plain:
    """Rates from the weak form of the aggregation equation, one ordered pair (i, j) at a time:

    d/dt sum_k n_k f(x_k) = 1/2 sum_ij K_ij n_i n_j [(I f)(x_i + x_j) - f(x_i) - f(x_j)],

    I f the Lagrange interpolant of f over the `nodes` pivots nearest to x_i + x_j, in v or for 6 nodes in its
    square root, and f = 1 at one pivot, 0 at the others. `x` must end in a geometric stretch, along which the
    pivots are continued.
    """
    n = x.size
    pivots = continued_geometrically(x)
    power = 0.5 if nodes == 6 else 1.0
    plain = Plain(np.zeros(n + BEYOND), np.zeros(n + BEYOND))
    for i in range(n):
        for j in range(n):
            events = 0.5 * matrix[i, j] * number[i] * number[j]
            born = x[i] + x[j]
            below = int(np.sum(pivots <= born)) - 1
            first = max(0, below - nodes // 2 + 1)
            stencil = pivots[first : first + nodes]
            at = stencil**power
            for p, pivot in enumerate(stencil):
                others = np.delete(at, p)
                weight = float(np.prod((born**power - others) / (at[p] - others)))
                if first + p < n:
                    plain.add(first + p, events, weight)
                else:
                    plain.add(n, events, weight)
                    plain.add(n + 1, events, weight, pivot)
            plain.add(i, events, -1.0)
            plain.add(j, events, -1.0)
    return plain


def discrete_equation(matrix: Array, number: Array) -> Plain:
    """Rates of the discrete aggregation equation for k-mers of volume k = 1, 2, ..., n."""
    n = number.size
    plain = Plain(np.zeros(n + BEYOND), np.zeros(n + BEYOND))
    for k in range(1, n + 1):
        for i in range(1, k):
            met = matrix[i - 1, k - i - 1] * number[i - 1] * number[k - i - 1]
            plain.add(k - 1, met, 0.5)
        for j in range(1, n + 1):
            met = matrix[k - 1, j - 1] * number[k - 1] * number[j - 1]
            plain.add(k - 1, met, -1.0)
            if k + j > n:
                plain.add(n, met, 0.5)
                plain.add(n + 1, met, 0.5, k + j)
    return plain


def fragment_sharing(
    x: Array, rate: Array, parent: Array, volume: Array, count: Array, order: int
) -> tuple[Array, Array]:
    """Matrix (n, n) of breakage, one fragment at a time, and the sum of all events behind each entry.

    A fragment is interpolated between the `order` pivots nearest to it, all of them up to its parent, in v or for 6
    in its square root; fewer where the parent has fewer below. What is smaller than the first pivot counts there
    by volume.
    """
    n = x.size
    matrix, gross = np.zeros((n, n)), np.zeros((n, n))
    for i, v, events in zip(parent, volume, rate[parent] * count, strict=True):
        if v <= x[0]:
            targets, weights = np.array([0]), np.array([v / x[0]])
        else:
            below = min(int(np.sum(x <= v)) - 1, i - 1)
            nodes = min(order, i + 1)
            first = below - nodes // 2 + 1
            first = max(0, min(first, i + 1 - nodes))
            targets = np.arange(first, first + nodes)
            power = 0.5 if order == 6 and nodes > 2 else 1.0
            at = x[targets] ** power
            weights = np.array(
                [np.prod((v**power - np.delete(at, p)) / (a - np.delete(at, p))) for p, a in enumerate(at)]
            )
        matrix[targets, i] += events * weights
        gross[targets, i] += events * np.maximum(np.abs(weights), 1.0)
    at = np.arange(n)
    matrix[at, at] -= rate
    gross[at, at] += rate
    # the loss of a section is what makes up its fragments: what is not resolved to the last digit elsewhere
    # is made up there
    gross[at, at] += (gross * x[:, None]).sum(axis=0) / x
    return matrix, gross
