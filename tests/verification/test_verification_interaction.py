"""Published figures of interaction energies, stability ratios and critical concentrations."""

from __future__ import annotations

import pytest

from aggsim.verification.published import interaction


def test_figures() -> None:
    checks = [*interaction.energies(), *interaction.stability()]
    assert [check for check in checks if not check.passed] == []


def test_falsified_figures_fail(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(interaction.DEBYE, 40.0, (73.2006, 0.952028))
    monkeypatch.setattr(interaction, "UNEQUAL", (25.80911999, -12.88576870))
    monkeypatch.setitem(interaction.RAPID, 1.0, (1.92901132, 0.94411797))
    row = list(interaction.BARRIERS[0])
    row[7] = 14.435704
    monkeypatch.setattr(interaction, "BARRIERS", (tuple(row), *interaction.BARRIERS[1:]))
    checks = [*interaction.energies(), *interaction.stability()]
    failed = [check.quantity for check in checks if not check.passed]
    assert failed == [
        "0.1 mol/L [nm]",
        "double layer [kT]",
        "stability ratio without the film",
        "barrier [kT]",
    ]
