"""Aggregation in a well-mixed suspension."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.vessels.base import Collisions, Term


@dataclass(frozen=True)
class Aggregation:
    """Collisions that stick, at the rates of a kernel.

    Parameters
    ----------
    kernel : Kernel
        Anything with `part_matrices(volume)`, which yields (name, matrix [m3/s], strength or None) per part.

    Raises
    ------
    InputError
        If `kernel` is not a kernel.
    """

    kernel: Any

    def __post_init__(self) -> None:
        if not callable(getattr(self.kernel, "part_matrices", None)):
            raise InputError(
                f"kernel={self.kernel!r} is not a collision kernel. Allowed: a kernel of aggsim.kernels, or a sum "
                "of them. Try: aggsim.kernels.from_function(f, name='mine') for a function of two volumes."
            )

    def terms(self, prepared: Any) -> list[Term]:
        """One term for each different factor in time among the parts of the kernel."""
        matrices: list[FloatArray] = []  # parts that share a factor in time share an operator
        strengths: list[Any] = []
        for _, matrix, strength in self.kernel.part_matrices(prepared.grid.volume):
            if strength in strengths:
                matrices[strengths.index(strength)] += matrix
            else:
                matrices.append(matrix)
                strengths.append(strength)
        return [Term(prepared.aggregation(m), s) for m, s in zip(matrices, strengths, strict=True)]

    def collisions(self, volume: FloatArray, times: FloatArray, number: FloatArray) -> dict[str, Collisions]:
        """Collision events [1/(m3 s)] and volume flux [1/s] of each part, for numbers (n_times, n_sections).

        Negative numbers of round-off size count as zero here: times a steep kernel they would be collisions.
        """
        number = np.maximum(number, 0.0)
        out = {}
        for name, matrix, strength in self.kernel.part_matrices(volume):
            factor = np.ones(times.size) if strength is None else np.array([strength(t) for t in times])
            met = number @ matrix
            events = 0.5 * factor * np.einsum("tk,tk->t", met, number)
            flux = factor * np.einsum("tk,tk->t", met, number * volume)
            out[name] = Collisions(events, flux)
        return out
