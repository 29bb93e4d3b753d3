from __future__ import annotations

import io
import sys

import pytest

import aggsim as ag
from aggsim.solvers.progress import NoProgress, TerminalProgress, progress_for

MONO = ag.Monodisperse(volume=1.0, number=1.0)


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


def test_a_function_hears_how_far_the_run_is() -> None:
    heard: list[tuple[float, float]] = []
    ag.simulate(ag.Batch(ag.kernels.constant(1.0)), MONO, [4.0], progress=lambda f, t: heard.append((f, t)))
    fractions = [f for f, _ in heard]
    assert fractions == sorted(fractions)
    assert heard[-1] == (1.0, 4.0)


@pytest.mark.parametrize("choice", [None, True])
def test_nothing_is_written_where_nobody_looks(choice: object, capsys: pytest.CaptureFixture[str]) -> None:
    ag.simulate(ag.Batch(ag.kernels.constant(1.0)), MONO, [4.0], progress=choice)
    captured = capsys.readouterr()
    assert captured.out + captured.err == ""


def test_a_terminal_gets_a_line_when_asked(monkeypatch: pytest.MonkeyPatch) -> None:
    screen = Terminal()
    monkeypatch.setattr(sys, "stderr", screen)
    ag.simulate(ag.Batch(ag.kernels.constant(1.0)), MONO, [4.0], progress=True)
    text = screen.getvalue()
    assert "%" in text
    assert text.endswith("\n")


def test_a_short_run_stays_silent_and_false_is_off(monkeypatch: pytest.MonkeyPatch) -> None:
    screen = Terminal()
    monkeypatch.setattr(sys, "stderr", screen)
    assert isinstance(progress_for(None), TerminalProgress)
    assert isinstance(progress_for(False), NoProgress)
    ag.simulate(ag.Batch(ag.kernels.constant(1.0)), MONO, [4.0], progress=None)
    assert screen.getvalue() == ""
