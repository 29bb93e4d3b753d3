"""Breakage of particles in a well-mixed suspension."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from aggsim.errors import InputError
from aggsim.vessels.base import Process, Site, Term


@dataclass(frozen=True)
class Breaking(Process):
    """Particles that fall apart by themselves, at the rates of a breakage law.

        dn(v)/dt = int_v^inf b(v, u) S(u) n(u) du - S(v) n(v)

    Parameters
    ----------
    breakage : Breakage
        Anything with `table(volume)`, which yields rates and fragments on pivots, and a `strength` in time.

    Raises
    ------
    InputError
        If `breakage` is not a breakage law.
    """

    breakage: Any

    def __post_init__(self) -> None:
        if not callable(getattr(self.breakage, "table", None)):
            raise InputError(
                f"breakage={self.breakage!r} is not a breakage law. Allowed: None, a Breakage, or a sequence of "
                "them. Try: Breakage(rate=rates.power_law(coefficient=..., exponent=...), "
                "fragments=fragments.uniform_binary())."
            )

    def terms(self, site: Site) -> list[Term]:
        rate, parent, volume, count = self.breakage.table(site.grid.volume)
        return [Term(site.prepared.breakage(rate, parent, volume, count), self.breakage.strength)]

    @property
    def smallest(self) -> float:
        limit = self.breakage.smallest
        return 0.0 if limit is None else float(limit)


def breaking(breakage: Any) -> tuple[Breaking, ...]:
    """Processes of None, one breakage law or a sequence of them."""
    if breakage is None:
        return ()
    laws = breakage if isinstance(breakage, (tuple, list)) else (breakage,)
    return tuple(Breaking(law) for law in laws)
