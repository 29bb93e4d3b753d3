"""Aggregation in a well-mixed suspension."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.vessels.base import Process, Site, Term


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
