"""The fixed pivot scheme of aggsim in vectorised NumPy: what a good NumPy user would write by hand.

The same births (but for the uppermost cells, where aggsim lowers the order), the same account of what passes
the top, the same tolerances; integrated by scipy.integrate.solve_ivp. The right-hand side exists in several
forms: `bincount` is what vectorised NumPy offers, the others lean on sparse or dense matrix products.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import sparse
from scipy.integrate import solve_ivp

Array = NDArray[np.float64]
Rates = Callable[[float, Array], Array]


def births(x: Array, moments: int) -> tuple[Any, Any, Array, Array]:
    """Pairs (i, j <= i), first target (pairs,), weights (pairs, moments), pivots continued past 2 x[-1]."""
    ratio = x[-1] / x[-2]
    steps = int(np.ceil(np.log(2.0) / np.log(ratio) + 1e-9)) + 1 + moments // 2
    x = np.concatenate([x, x[-1] * ratio ** np.arange(1.0, steps + 1.0)])
    i, j = np.tril_indices(x.size - steps)
    born = x[i] + x[j]
    cell = np.searchsorted(x, born * (1.0 + 4e-16), side="right") - 1
    first = np.maximum(cell - moments // 2 + 1, 0)
    power = 0.5 if moments == 6 else 1.0  # sixth order interpolates in the square root of the volume
    node = x[first + np.arange(moments)[:, None]] ** power  # (moments, pairs)
    born = born**power
    weight = np.ones((moments, born.size))
    for p in range(moments):
        for q in range(moments):
            if q != p:
                weight[p] *= (born - node[q]) / (node[p] - node[q])
    return (i, j), first, weight.T, x


class _Pairs:
    """What all forms share: events of each pair, targets (pairs, moments) with the top folded together."""

    def __init__(self, x: Array, kernel: Callable[[Array, Array], Array], moments: int) -> None:
        self.n = x.size
        (self.i, self.j), first, self.weight, pivots = births(x, moments)
        matrix = kernel(x[:, None], x[None, :])
        self.loss = matrix
        self.rate = np.where(self.i == self.j, 0.5, 1.0) * matrix[self.i, self.j]
        self.target = first[:, None] + np.arange(moments)
        # births past the top: number in entry n, volume in entry n + 1
        self.volume_beyond = np.where(self.target >= self.n, self.weight * pivots[self.target], 0.0).sum(1)
        self.target = np.minimum(self.target, self.n)


def with_bincount(x: Array, kernel: Callable[[Array, Array], Array], moments: int) -> Rates:
    """Births by numpy.bincount over the list of pairs."""
    pairs = _Pairs(x, kernel, moments)
    n, i, j = pairs.n, pairs.i, pairs.j
    target = pairs.target.ravel()
    weight = pairs.rate[:, None] * pairs.weight
    beyond = pairs.rate * pairs.volume_beyond

    def rates(_: float, y: Array) -> Array:
        number = y[:n]
        product = number.take(i) * number.take(j)
        out = np.empty(n + 2)
        out[: n + 1] = np.bincount(target, (product[:, None] * weight).ravel(), n + 1)
        out[:n] -= number * (pairs.loss @ number)
        out[n + 1] = beyond @ product
        return out

    return rates


def _change(pairs: _Pairs) -> Any:
    """Sparse (n + 2, pairs): change of every entry by the product of numbers of every pair, losses included."""
    n, count = pairs.n, pairs.rate.size
    column = np.arange(count)
    row = [*pairs.target.T, pairs.i, pairs.j, np.full(count, n + 1)]
    change = [*pairs.weight.T, -np.ones(count), -np.ones(count), pairs.volume_beyond]
    value = np.concatenate(change) * np.tile(pairs.rate, len(row))
    where = (np.concatenate(row), np.tile(column, len(row)))
    return sparse.csr_array((value, where), shape=(n + 2, count))


def with_sparse_matrix(x: Array, kernel: Callable[[Array, Array], Array], moments: int) -> Rates:
    """Births and losses by one sparse matrix on the products of all pairs."""
    pairs = _Pairs(x, kernel, moments)
    change, i, j = _change(pairs), pairs.i, pairs.j

    def rates(_: float, y: Array) -> Array:
        return np.asarray(change @ (y.take(i) * y.take(j)))

    return rates


def with_dense_matrix(x: Array, kernel: Callable[[Array, Array], Array], moments: int) -> Rates:
    """The same with a dense matrix."""
    pairs = _Pairs(x, kernel, moments)
    change, i, j = _change(pairs).toarray(), pairs.i, pairs.j

    def rates(_: float, y: Array) -> Array:
        return np.asarray(change @ (y.take(i) * y.take(j)))

    return rates


def with_stacked_matrices(x: Array, kernel: Callable[[Array, Array], Array], moments: int) -> Rates:
    """Births sorted by the distance of the target from the larger partner: one matrix-vector product.

    rate[i + d] += n[i] * (C_d n)[i] for every distance d that occurs; the matrices C_d lie under each other.
    """
    pairs = _Pairs(x, kernel, moments)
    n, i, j = pairs.n, pairs.i, pairs.j
    inside = pairs.target < n
    distance = np.where(inside, pairs.target - i[:, None], 0)
    lowest, span = int(distance.min()), int(distance.max() - distance.min()) + 1
    stack = np.zeros((span + 2, n, n))
    for p in range(moments):
        k, share = inside[:, p], pairs.rate * pairs.weight[:, p]
        stack[distance[k, p] - lowest, i[k], j[k]] += share[k]
        stack[span, i[~k], j[~k]] += share[~k]
    stack[-lowest] -= pairs.loss
    stack[span + 1, i, j] = pairs.rate * pairs.volume_beyond
    stack = stack.reshape(-1, n)
    # row d of the skew view is shifted by d, so that a sum over rows adds up what lands in one section
    buffer = np.zeros((span, n + span))
    stride = buffer.strides
    skew = np.lib.stride_tricks.as_strided(buffer, (span, n), (stride[0] + stride[1], stride[1]))

    def rates(_: float, y: Array) -> Array:
        number = y[:n]
        product = (stack @ number).reshape(span + 2, n)
        np.multiply(product[:span], number, out=skew)
        out = np.empty(n + 2)
        out[:n] = buffer.sum(0)[-lowest : n - lowest]
        out[n:] = product[span:] @ number
        return out

    return rates


FORMS = {
    "bincount": with_bincount,
    "sparse matrix": with_sparse_matrix,
    "dense matrix": with_dense_matrix,
    "stacked matrices": with_stacked_matrices,
}


def run(
    x: Array,
    kernel: Callable[[Array, Array], Array],
    moments: int,
    time: float,
    form: str = "bincount",
    rtol: float = 1e-6,
    start: Array | None = None,
) -> tuple[Array, int]:
    """Numbers (n_sections,) at `time`, and evaluations; without `start`, from one particle per volume at x[0]."""
    rates = FORMS[form](x, kernel, moments)
    state = np.zeros(x.size + 2)
    state[0] = 1.0
    if start is not None:
        state[: x.size] = start
    number, volume = state.sum(), state[: x.size] @ x
    atol = 1e-6 * rtol * np.concatenate([np.minimum(number, volume / x), [number, volume]])
    solution = solve_ivp(rates, (0.0, time), state, method="LSODA", rtol=rtol, atol=atol)
    return solution.y[: x.size, -1], int(solution.nfev)
