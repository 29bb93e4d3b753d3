"""Aggregation in a well-mixed suspension."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.vessels.base import Process, Site, Term

_LOOKED_AT = 40  # pivots at which a kernel is looked at for a kink
_STEP = 1e-3  # in the logarithm of volume
_SEEN = 1e-7  # bend that is more than round-off


@dataclass(frozen=True)
class Aggregation(Process):
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

    def terms(self, site: Site) -> list[Term]:
        """One term for each different factor in time among the parts of the kernel."""
        groups: list[tuple[Any, dict[str, FloatArray]]] = []
        for name, matrix, strength in site.prepared.parts(self.kernel):
            for known, parts in groups:
                if known == strength:
                    parts[name] = matrix
                    break
            else:
                groups.append((strength, {name: matrix}))
        return [
            Term(site.prepared.aggregation(sum(parts.values())), strength, parts)
            for strength, parts in groups
        ]

    def smooth(self, volume: FloatArray) -> bool:
        """False where the kernel has a kink at equal sizes, as differential settling has.

        Over a step d in ln w the sum K(v, w e**d) + K(v, w e**-d) - 2 K(v, v) grows with d**2 where the kernel is
        smooth and with d where it has a kink.
        """
        v = volume[:: max(1, volume.size // _LOOKED_AT)][:, None]
        steps = _STEP * np.array([-2.0, -1.0, 0.0, 1.0, 2.0])
        far_down, down, middle, up, far_up = np.asarray(self.kernel(v, v * np.exp(steps))).T

        def bend(below: FloatArray, above: FloatArray) -> FloatArray:
            return np.asarray(np.abs(below + above - 2.0 * middle) / (below + above + middle))

        narrow, wide = bend(down, up), bend(far_down, far_up)
        return not bool(((wide > _SEEN) & (wide < 3.0 * narrow)).any())
