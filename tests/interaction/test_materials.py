"""The table of Hamaker constants."""

from __future__ import annotations

import pytest

from aggsim.errors import InputError
from aggsim.inputs import Particles
from aggsim.interaction import hamaker_across_water, materials_across_water


@pytest.mark.parametrize("name", materials_across_water())
def test_entries_are_usable(name: str) -> None:
    entry = hamaker_across_water(name)
    assert 1e-22 < entry.low < entry.value < entry.high < 1e-18
    # nothing in the table is worse than a factor of two either way, save for rounding
    assert entry.high / entry.value < 2.01
    assert entry.value / entry.low < 2.01
    assert entry.status in {"read", "from memory"}
    assert any(year in entry.source for year in ("1997", "2003", "2011"))
    assert Particles(diameter=1e-7, density=1000.0, hamaker=entry.value).hamaker == entry.value


def test_names_are_forgiving_in_case_and_space() -> None:
    assert hamaker_across_water("  Amorphous   SILICA ") is hamaker_across_water("amorphous silica")


@pytest.mark.parametrize(
    ("wrong", "meant"),
    [
        ("polystyrol", "polystyrene"),
        ("silica", "fused silica"),
        ("hematit", "hematite"),
        ("cells", "biological"),
    ],
)
def test_unknown_names_get_the_close_ones(wrong: str, meant: str) -> None:
    with pytest.raises(InputError) as caught:
        hamaker_across_water(wrong)
    assert meant in str(caught.value).split("Try:")[1]


@pytest.mark.parametrize("wrong", ["", "xyz", None, 3])
def test_nonsense_gets_the_whole_list(wrong: object) -> None:
    with pytest.raises(InputError, match=r"'polystyrene'.*Try: a value of your own"):
        hamaker_across_water(wrong)  # type: ignore[arg-type]
