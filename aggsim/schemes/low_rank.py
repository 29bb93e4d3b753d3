"""A kernel as a sum of few products of functions of one size, found from its values on few pairs.

    K(v, w) = sum_r a_r(v) b_r(w)

Ideal, Brownian and shear kernels are such sums exactly, of 1 to 4 products; other smooth kernels are in effect,
with 10 to 30. A kink, such as that of settling at equal sizes, needs thousands.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, ClassVar

import numpy as np
from numpy.typing import NDArray
from scipy import linalg

from aggsim._checks import FloatArray
from aggsim.errors import KernelError

TOLERANCE = 1e-10  # of every single rate, relative
MOST_PRODUCTS = 40
_SAMPLE = 120  # sizes, evenly spaced in the logarithm, that the products are found from
_PAIRS = 4000  # pairs that the tolerance is tested on
_MARGIN = 0.2  # of the tolerance is used up on the sample

PairRate = Callable[[FloatArray, FloatArray], FloatArray]
"""function(v, w) of two arrays of particle volumes [m3] that broadcast -> rates [m3/s] of the broadcast shape."""


class RankError(KernelError):
    """A kernel is not a short sum of products of functions of one size."""


@dataclass(frozen=True, eq=False)
class FactoredKernel:
    """Collision rates of all pairs of `volume` (n,) [m3] as factors; stands where a matrix (n, n) would.

    The rate of i and j is sum_r share[r, i] row[r, j]: the rates row (rank, n) [m3/s] of a few pivot sizes with
    all, interpolated with share (rank, n) [1]. `number @ kernel` and `kernel + kernel` are those of the matrix.
    """

    pair: PairRate
    volume: FloatArray
    share: FloatArray
    row: FloatArray

    # numpy arrays leave the arithmetic to this class
    __array_ufunc__: ClassVar[None] = None

    def rates(self, i: Any, j: Any) -> FloatArray:
        """Rates [m3/s] of the sizes i with the sizes j, index arrays of one shape."""
        return np.asarray(np.einsum("r...,r...->...", self.share[:, i], self.row[:, j]))

    def matrix(self) -> FloatArray:
        """Rates of all pairs (n, n) [m3/s]."""
        return self.share.T @ self.row

    def __rmatmul__(self, number: FloatArray) -> FloatArray:
        return (number @ self.share.T) @ self.row

    def __add__(self, other: FactoredKernel) -> FactoredKernel:
        pair = _Sum(self.pair, other.pair)
        try:
            return factored(pair, self.volume)  # what the two have in common then counts once
        except RankError:
            share, row = (np.concatenate(two) for two in ((self.share, other.share), (self.row, other.row)))
            return FactoredKernel(pair, self.volume, share, row)

    def __radd__(self, start: int) -> FactoredKernel:
        return self if start == 0 else NotImplemented  # the start value of sum()


def factored(pair: PairRate, volume: FloatArray, name: str = "the kernel") -> FactoredKernel:
    """Factor a symmetric kernel on increasing volumes (n,) [m3]; errors call it `name`.

    In each size, rates are interpolated from pivot sizes p, K_ij = sum_pq X_pi K_pq X_qj, which keeps the symmetry.
    QR decomposition with column pivoting of K_ij / (K_ii K_jj)**(1/2) picks them from a sample of sizes [1]_, as
    many as it takes; K_ip = sum_q K_pq X_qi gives X for all sizes, at the cost of n rates per pivot. Rates of
    all equal sizes and of thousands of other pairs must then agree, each to TOLERANCE of its own value.

    Raises
    ------
    RankError
        If more than MOST_PRODUCTS products are needed, or particles of some size do not collide with each other.
    KernelError
        If the kernel is not symmetric.

    References
    ----------
    .. [1] H. Cheng, Z. Gimbutas, P. G. Martinsson, V. Rokhlin, SIAM J. Sci. Comput. 26 (2005) 1389,
       doi:10.1137/030602678.
    """
    n = volume.size
    sample = np.unique(np.round(np.geomspace(1.0, n, _SAMPLE)).astype(np.int64)) - 1
    some = volume[sample]
    rate = pair(some[:, None], some[None, :])
    tested = _test_pairs(n)
    expected = _symmetric(pair, volume, *tested, name)
    scale = np.sqrt(expected[-n:])
    if not (rate.any() or expected.any()):
        return FactoredKernel(pair, volume, np.zeros((0, n)), np.zeros((0, n)))
    if not scale.all():
        raise _refusal(
            name, f"is 0 for two particles of {volume[np.argmin(scale)]:.3g} m3, but not for all pairs"
        )
    scaled = 0.5 * (rate + rate.T) / (scale[sample, None] * scale[sample])
    pivots = _pivots(scaled, name)
    core, at = rate[np.ix_(pivots, pivots)], sample[pivots]
    columns = pair(volume[at][:, None], volume[None, :]) / (scale[at, None] * scale)
    share = np.linalg.solve(scaled[np.ix_(pivots, pivots)], columns) * (scale / scale[at, None])
    kernel = FactoredKernel(pair, volume, share, 0.5 * (core + core.T) @ share)
    if (np.abs(kernel.rates(*tested) - expected) > TOLERANCE * expected).any():
        raise _refusal(name, f"is no sum of {at.size} products between the sizes at which it looks like one")
    return kernel


def _pivots(scaled: FloatArray, name: str) -> NDArray[np.int64]:
    """Rows from which a symmetric matrix follows by interpolation to the tolerance, as few as possible."""
    triangle, order = linalg.qr(scaled, mode="r", pivoting=True)
    size = np.abs(np.diag(triangle))
    least, most = (int(np.sum(size > part * size[0])) for part in (TOLERANCE, np.finfo(float).eps))
    for rank in range(least, min(MOST_PRODUCTS, most) + 1):
        pivots = order[:rank].astype(np.int64)
        core = scaled[np.ix_(pivots, pivots)]
        share = np.linalg.solve(core, scaled[pivots])
        if (np.abs(share.T @ core @ share - scaled) <= _MARGIN * TOLERANCE * scaled).all():
            return pivots
    raise _refusal(name, f"is no sum of {MOST_PRODUCTS} products or fewer")


@dataclass(frozen=True)
class _Sum:
    first: PairRate
    second: PairRate

    def __call__(self, v: FloatArray, w: FloatArray) -> FloatArray:
        return self.first(v, w) + self.second(v, w)


def _test_pairs(n: int) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Pairs of sizes anywhere, evenly by index and by its logarithm, neighbours, where kinks are, and all equal."""
    random = np.random.default_rng(1916)
    even = random.integers(0, n, (2, _PAIRS // 4))
    wide = (n ** random.random((2, _PAIRS // 2))).astype(np.int64) - 1
    near = (n ** random.random(_PAIRS // 4)).astype(np.int64) - 1
    equal = np.arange(n)
    first = np.concatenate([even[0], wide[0], near, equal])
    second = np.concatenate([even[1], wide[1], np.minimum(near + 1, n - 1), equal])
    return first, second


def _symmetric(
    pair: PairRate, volume: FloatArray, i: NDArray[np.int64], j: NDArray[np.int64], name: str
) -> FloatArray:
    """Rates of the pairs i, j; refused where they differ from those of j, i."""
    there, back = pair(volume[i], volume[j]), pair(volume[j], volume[i])
    asymmetric = np.abs(there - back) > TOLERANCE * np.maximum(there, back)
    if asymmetric.any():
        k = int(np.argmax(asymmetric))
        raise KernelError(
            f"{name} is {there[k]:.12g} m3/s for volumes {volume[i[k]]:g} and {volume[j[k]]:g} m3, and "
            f"{back[k]:.12g} m3/s the other way round. Try: a formula that does not change when v and w are "
            "exchanged."
        )
    return there


def _refusal(name: str, finding: str) -> RankError:
    return RankError(
        f"{name} {finding}; allowed: kernels that at most {MOST_PRODUCTS} products a(v) b(w) add up to within "
        f"{TOLERANCE:g} (ideal, Brownian, shear and smooth ones; a kink, as in settling, needs thousands), for so "
        "many sections. Try: fewer multiples for the direct sum, or FixedPivot() on "
        "SizeGrid.monomers_then_geometric(...)."
    )
