"""Fragments of a few given sizes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from aggsim._checks import FloatArray


@dataclass(frozen=True)
class EqualPieces:
    """Fragments of one size; see `fragments.equal_binary` and `fragments.ternary`."""

    number: int

    def pieces(self, parent: ArrayLike) -> FloatArray:
        """Number of fragments [1] of a parent of volume `parent` [m3], of any shape."""
        return np.full(np.shape(parent), float(self.number))[()]

    def point_masses(
        self, volume: FloatArray, parents: NDArray[np.int64]
    ) -> tuple[NDArray[np.int64], FloatArray, FloatArray]:
        """Parent, volume [m3] and number of the fragments of the pivots `volume[parents]`."""
        return parents, volume[parents] / self.number, np.full(parents.size, float(self.number))

    def sample(self, parent: FloatArray, generator: np.random.Generator) -> FloatArray:
        """Volumes (m, number) [m3] of the fragments of one breakage of each `parent` (m,) [m3]."""
        return np.repeat((parent / self.number)[:, None], self.number, axis=1)


@dataclass(frozen=True)
class Erosion:
    """See `fragments.erosion`."""

    piece_volume: float

    def pieces(self, parent: ArrayLike) -> FloatArray:
        """Number of fragments [1] of a parent of volume `parent` [m3], of any shape."""
        return np.full(np.shape(parent), 2.0)[()]

    def point_masses(
        self, volume: FloatArray, parents: NDArray[np.int64]
    ) -> tuple[NDArray[np.int64], FloatArray, FloatArray]:
        """Parent, volume [m3] and number of the fragments of the pivots `volume[parents]`."""
        pair = self._pair(volume[parents])
        return np.repeat(parents, 2), pair.ravel(), np.ones(pair.size)

    def sample(self, parent: FloatArray, generator: np.random.Generator) -> FloatArray:
        """Volumes (m, 2) [m3] of the fragments of one breakage of each `parent` (m,) [m3]."""
        return self._pair(parent)

    def _pair(self, parent: FloatArray) -> FloatArray:
        small = np.minimum(self.piece_volume, 0.5 * parent)
        return np.stack([small, parent - small], axis=1)
