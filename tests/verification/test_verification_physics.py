"""Published figures of water, collision rates, settling and mixing."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from aggsim.verification.published import physics

GROUPS = [
    physics.water_properties,
    physics.collision_rates,
    physics.settling_speeds,
    physics.mixing_power,
]


@pytest.mark.parametrize("group", GROUPS, ids=lambda group: group.__name__)
def test_figures(group: Callable[[], physics.Checks]) -> None:
    checks = list(group())
    assert [check for check in checks if not check.passed] == []
    assert len({(check.case, check.quantity, check.at) for check in checks}) == len(checks)


def test_falsified_figures_fail(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(physics.LIQUID, 25.0, (997.0476, 0.89003, 78.4085, 0.892658))
    monkeypatch.setitem(physics.CROSSOVER, 50.0, 0.544738)
    monkeypatch.setitem(physics.QUARTZ_SPEEDS, 500.0, (2.246205e-1, 7.848343e-2, 39.109))
    monkeypatch.setattr(physics, "PLANTS", ((61.0, 30.0, 0.109, 111000.0), *physics.PLANTS[1:]))
    failed = [check for group in GROUPS for check in group() if not check.passed]
    assert len(failed) == 4
