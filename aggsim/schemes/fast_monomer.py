"""Births of the discrete equation as convolutions, for kernels that are short sums of products.

A Fourier transform errs by 1e-16 of its largest value everywhere, and in a far tail, times v**3, that would
drown the third moment. So sizes are cut into blocks that end at four times their beginning. The pairs whose
larger partner is in one block are one convolution, of the block with itself and all that is below. It errs by
1e-16 of what the block gives birth to, at sizes within a factor of 8, whatever the distribution: moments up to
the third keep 12 digits and more.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from scipy import fft

from aggsim._checks import FloatArray
from aggsim.errors import GridError
from aggsim.schemes import _loops
from aggsim.schemes.low_rank import FactoredKernel

MATRIX_LIMIT = 8000  # sections; a dense matrix then takes half a gigabyte

_STEP = 4  # sizes from one block to the next
_DIRECT = 128  # sizes, about, whose pairs are summed directly
_NOTHING = 1e-120  # of the largest number; what is less does not collide, so that no product underflows


@dataclass(frozen=True, eq=False)
class FactoredOperator:
    """Rates of the discrete equation by fast Fourier transforms; what passes the top is summed directly."""

    kernel: FactoredKernel

    def add_rates(self, number: FloatArray, factor: float, out: FloatArray) -> float:
        x = self.kernel.volume
        n = x.size
        peak = float(np.max(np.abs(number[:n])))
        if not 0.0 < peak < np.inf:
            return peak
        held = np.where(np.abs(number[:n]) < _NOTHING * peak, 0.0, number[:n]) / peak
        top = int(np.flatnonzero(held)[-1]) + 1
        held = held[:top]
        one, other = self.kernel.share[:, :top] * held, self.kernel.row[:, :top] * held
        lost = np.einsum("r,rk->k", other.sum(axis=1), one)
        born = _births(one, other, n)
        beyond_number, beyond_volume = 0.0, 0.0
        if 2 * top > n:
            # partners n - k and up take size k past the top
            above = np.cumsum(other[:, ::-1], axis=1)[:, : 2 * top - n]
            met = np.einsum("rk,rk->k", one[:, n - top :], above)
            beyond_number, beyond_volume = 0.5 * float(met.sum()), float(np.sum(met * x[n - top : top]))
        # volume to the last digit: what round-off left goes to the larger account
        inside = float(np.sum(born * x))
        missing = float(np.sum(lost * x[:top])) - inside - beyond_volume
        if abs(inside) > abs(beyond_volume):
            born *= 1.0 + missing / inside
        else:
            beyond_volume += missing
        scale = factor * peak * peak
        out[:n] += scale * born
        out[:top] -= scale * lost
        out[n] += scale * beyond_number
        out[n + 1] += scale * beyond_volume
        return float(out.sum())

    def add_jacobian(self, number: FloatArray, factor: float, out: FloatArray) -> None:
        n = self.kernel.volume.size
        if n > MATRIX_LIMIT:
            raise GridError(
                f"the Jacobian of {n} sections is a matrix that does not fit in memory; allowed: {MATRIX_LIMIT} "
                "sections. Try: an explicit method of integration, which needs none, or FixedPivot() on "
                "SizeGrid.monomers_then_geometric(...)."
            )
        _loops.monomer_jacobian(self.kernel.matrix(), self.kernel.volume, number, factor, out)


def _births(one: FloatArray, other: FloatArray, n: int) -> FloatArray:
    """1/2 sum_{i+j=k} sum_r one[r, i] other[r, j] for k = 1 to n, both (rank, top) and symmetric in i and j."""
    out = np.zeros(n)
    top = one.shape[1]
    for first, stop in _blocks(n, top):
        if first == 0:
            for u, w in zip(one[:, :stop], other[:, :stop], strict=True):
                out[1 : 2 * stop] += 0.5 * np.convolve(u, w)[: n - 1]
            continue
        below = other[:, : min(stop, n - 1 - first)].copy()
        below[:, first:] *= 0.5  # pairs inside the block are met twice
        length = stop - first + below.shape[1] - 1
        padded = fft.next_fast_len(length, real=True)
        product = np.einsum("rk,rk->k", fft.rfft(one[:, first:stop], padded), fft.rfft(below, padded))
        born = fft.irfft(product, padded)[: min(length, n - 1 - first)]
        out[first + 1 : first + 1 + born.size] += born
    return out


def _blocks(n: int, top: int) -> Iterator[tuple[int, int]]:
    """Blocks of sizes, from the uppermost one down, that together hold sizes 0 to `top` of n."""
    stop = n
    while stop > _DIRECT:
        first = stop // _STEP
        if first < top:
            yield first, min(stop, top)
        stop = first
    yield 0, min(stop, top)
