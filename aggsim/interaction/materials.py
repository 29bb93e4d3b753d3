"""Hamaker constants from the literature, with how far they can be trusted."""

from __future__ import annotations

import difflib
from dataclasses import dataclass

from aggsim._checks import refuse

_WALSTRA = "P. Walstra (2003), Physical Chemistry of Foods, Marcel Dekker, table 12.2"
_BERGSTROM = "L. Bergström (1997), Adv. Colloid Interface Sci. 70, 125, DOI 10.1016/S0001-8686(97)00003-1"
_ISRAELACHVILI = "J. N. Israelachvili (2011), Intermolecular and Surface Forces, 3rd ed., Academic Press"
_READ, _MEMORY = "read", "from memory"


@dataclass(frozen=True)
class HamakerConstant:
    """A Hamaker constant with its spread.

    Parameters
    ----------
    value : float
        [J]; the geometric mean of `low` and `high` where the source gives a range only.
    low, high : float
        What published values and their stated accuracy span [J].
    source : str
        Author, year, publication.
    status : str
        "read" where the figure was taken from the printed source, "from memory" where it was not compared with it:
        check it before it decides anything.
    """

    value: float
    low: float
    high: float
    source: str
    status: str


def _entry(value: float, low: float, high: float, source: str, status: str) -> HamakerConstant:
    return HamakerConstant(value * 1e-21, low * 1e-21, high * 1e-21, source, status)


_ACROSS_WATER = {
    "pentane": _entry(3.4, 3.2, 3.6, _WALSTRA, _READ),
    "decane": _entry(4.6, 4.4, 4.8, _WALSTRA, _READ),
    "hexadecane": _entry(5.4, 5.1, 5.7, _WALSTRA, _READ),
    # other calculations reach 14, and that limit is from memory
    "polystyrene": _entry(9.0, 6.3, 14.0, _WALSTRA, _READ),
    # printed as approximate
    "glass": _entry(13.0, 6.5, 19.5, _WALSTRA, _READ),
    "stearic acid": _entry(3.0, 1.5, 4.5, _WALSTRA, _READ),
    "bovine serum albumin": _entry(5.0, 2.5, 7.5, _WALSTRA, _READ),
    "biological cells": _entry(1.0, 0.5, 1.5, _WALSTRA, _READ),
    "alumina": _entry(36.7, 29.0, 44.0, _BERGSTROM, _MEMORY),
    "amorphous silica": _entry(4.6, 3.7, 5.5, _BERGSTROM, _MEMORY),
    "quartz": _entry(10.2, 8.2, 12.2, _BERGSTROM, _MEMORY),
    "rutile": _entry(53.5, 43.0, 64.0, _BERGSTROM, _MEMORY),
    "muscovite": _entry(13.4, 10.7, 16.1, _BERGSTROM, _MEMORY),
    "calcite": _entry(14.4, 11.5, 17.3, _BERGSTROM, _MEMORY),
    "magnesia": _entry(22.1, 17.7, 26.5, _BERGSTROM, _MEMORY),
    "fused silica": _entry(8.3, 4.2, 16.6, _ISRAELACHVILI, _MEMORY),
    "gold": _entry(316.0, 250.0, 400.0, _ISRAELACHVILI, _MEMORY),
    "hematite": _entry(46.0, 30.0, 70.0, _ISRAELACHVILI, _MEMORY),
    "kaolinite": _entry(25.0, 20.0, 31.0, _ISRAELACHVILI, _MEMORY),
    "polytetrafluoroethylene": _entry(3.0, 1.5, 6.0, _ISRAELACHVILI, _MEMORY),
}


def hamaker_across_water(name: str) -> HamakerConstant:
    """Hamaker constant of a material across water, unretarded, with its spread and its source.

    Methods of calculation differ by 10 % for some materials and by a factor of 7 for others [1]_, and a stability
    ratio depends on it exponentially: run `low` and `high` too.

    Parameters
    ----------
    name : str
        In plain words, such as "polystyrene"; `materials_across_water()` lists them.

    Raises
    ------
    InputError
        If the material is not in the table.

    References
    ----------
    .. [1] H. D. Ackler, R. H. French, Y.-M. Chiang (1996), J. Colloid Interface Sci. 179, 460,
       DOI 10.1006/jcis.1996.0238.
    """
    key = " ".join(name.lower().split()) if isinstance(name, str) else ""
    if key in _ACROSS_WATER:
        return _ACROSS_WATER[key]
    close = [known for known in _ACROSS_WATER if key and (key in known or known in key)]
    close += [known for known in difflib.get_close_matches(key, _ACROSS_WATER) if known not in close]
    hint = "a value of your own, Particles(..., hamaker=...) in joule"
    if close:
        hint = " or ".join(map(repr, close)) + ", or " + hint
    return refuse("name", repr(name), "one of " + ", ".join(map(repr, _ACROSS_WATER)), hint)


def materials_across_water() -> tuple[str, ...]:
    """Names that `hamaker_across_water` knows."""
    return tuple(_ACROSS_WATER)
