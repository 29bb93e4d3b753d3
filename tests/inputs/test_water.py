from __future__ import annotations

import itertools
import math

import pytest

from aggsim.inputs import water


def test_density_is_largest_at_four_degrees() -> None:
    # 3.98 C (R. Tanaka et al. 2001, Metrologia 38, 301: 3.983 C); scanned in steps of 0.01 K
    temperatures = [273.15 + 0.01 * k for k in range(1000)]
    warmest = max(temperatures, key=water.density)
    assert warmest - 273.15 == pytest.approx(3.98, abs=0.02)


@pytest.mark.parametrize("law", [water.density, water.relative_permittivity])
def test_smooth_and_falling_from_ten_degrees_up(law: object) -> None:
    values = [law(283.15 + k) for k in range(91)]  # type: ignore[operator]
    steps = [b - a for a, b in itertools.pairwise(values)]
    assert max(steps) < 0.0
    # a slip in one coefficient shows as a kink: neighbouring steps differ by a few per cent only
    assert all(abs(b / a - 1.0) < 0.15 for a, b in itertools.pairwise(steps))


def test_dilute_steam_follows_the_ideal_part_alone() -> None:
    # at vanishing density only 100 sqrt(t)/sum(H/t**i) is left
    t = 500.0 / 647.096
    dilute = 100.0 * math.sqrt(t) / (1.67752 + 2.20462 / t + 0.6366564 / t**2 - 0.241605 / t**3)
    assert water.viscosity(500.0, 1e-12) == pytest.approx(1e-6 * dilute, rel=1e-12)
