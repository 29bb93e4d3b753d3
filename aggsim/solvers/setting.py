"""What a run or a steady state begins from: the starts of the tanks, and a grid that covers all particles."""

from __future__ import annotations

from typing import Any

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.schemes import FixedPivot, Scheme
from aggsim.sizes import Mixture, SizeGrid, StartingDistribution
from aggsim.vessels import Vessel

FRAGMENT_ROOM = 24.0  # doublings below the start where breakage has no smallest piece


def starts_of(vessel: Vessel, start: Any) -> list[StartingDistribution | None]:
    """One start, or None for clear liquid, for each tank of a vessel."""
    count = len(vessel.volumes)
    each = list(start) if isinstance(start, (tuple, list)) else [start] * count
    for one in each:
        if one is not None and not isinstance(one, StartingDistribution):
            raise InputError(
                f"start={one!r} is not a StartingDistribution. "
                "Try: start=Monodisperse(diameter=400e-9, volume_fraction=1e-5)."
            )
    if len(each) != count:
        raise InputError(
            f"start has {len(each)} distributions for {count} tanks. Try: one for each, or a single one for all."
        )
    if all(one is None for one in each) and not vessel.feeds:
        raise InputError(
            "start=None leaves a vessel without particles: it has no feed that brings any. Allowed: None for a "
            "vessel that is fed. Try: start=Monodisperse(diameter=400e-9, volume_fraction=1e-5)."
        )
    return each


def default_scheme(vessel: Vessel, starts: list[StartingDistribution | None]) -> Scheme:
    """Sixth order; second order for discrete sizes above the smallest particles, around which it would swing."""
    laws = [law for law in (*starts, *vessel.feeds) if law is not None]
    smallest = min(law.limits(1e-4)[0] for law in laws)
    alone = any(volume > smallest * (1.0 + 1e-9) for law in laws for volume, _ in law.atoms)
    return FixedPivot(moments=2) if alone else FixedPivot()


def default_grid(
    scheme: Scheme, vessel: Vessel, starts: list[StartingDistribution | None], finer: float = 1.0
) -> SizeGrid:
    """Grid of the scheme for everything that a vessel holds or is fed, down to the smallest fragments."""
    laws = {id(one): one for one in (*starts, *vessel.feeds) if one is not None}
    everything = Mixture(tuple(laws.values())) if len(laws) > 1 else next(iter(laws.values()))
    grid = scheme.default_grid(everything, finer)
    if vessel.smallest is None:
        return grid
    first = float(grid.volume[0])
    smallest = vessel.smallest if vessel.smallest > 0.0 else first / 2.0**FRAGMENT_ROOM
    return grid.without_gaps().extended_down(smallest) if smallest < first * (1.0 - 1e-9) else grid


def project_or_none(scheme: Scheme, start: StartingDistribution | None, grid: SizeGrid) -> FloatArray:
    """Numbers (n_sections,) [1/m3] of a start, none for clear liquid."""
    return np.zeros(grid.sections) if start is None else scheme.project(start, grid)


def expect(value: Any, kind: type, name: str, example: str) -> None:
    """Refuse an argument of another kind."""
    if not isinstance(value, kind):
        raise InputError(f"{name}={value!r} is not a {kind.__name__}. Try: {name}={example}.")
