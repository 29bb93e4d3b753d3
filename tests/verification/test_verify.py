"""The command: files, exit codes, refusals."""

from __future__ import annotations

import csv
from datetime import date
from pathlib import Path

import pytest

from aggsim import verify
from aggsim.verification import record
from aggsim.verification.published import physics


@pytest.fixture(autouse=True)
def few_checks(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(record, "QUICK", (physics.collision_rates,))


def test_a_record_is_printed_and_written(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    target = tmp_path / "record.txt"
    assert verify.main(["--quick", "--output", str(target)]) == 0
    text = target.read_text()
    out, err = capsys.readouterr()
    assert text in out
    assert "record.csv" in out
    assert err == "checking collision rates ...\n"
    assert "VERDICT: all 30 checks passed." in text
    with open(tmp_path / "record.csv", newline="") as table:
        assert len(list(csv.reader(table))) == 31


def test_the_file_is_dated(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    assert verify.main(["--quick"]) == 0
    name = f"aggsim-verification-{date.today().isoformat()}"
    assert {path.name for path in tmp_path.iterdir()} == {f"{name}.txt", f"{name}.csv"}


def test_a_falsified_figure_fails_the_record(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(physics.PERIKINETIC, 20.0, 1.0779e-17)  # in place of 1.07758e-17
    target = tmp_path / "record.txt"
    assert verify.main(["--quick", "--output", str(target)]) == 1
    text = target.read_text()
    assert "VERDICT: 1 of 30 checks FAILED" in text
    assert "FAILED: Brownian motion, equal spheres: 8 kT/(3 mu) in water [m3/s], 20 C" in text
    with open(tmp_path / "record.csv", newline="") as table:
        failed = [row for row in csv.DictReader(table) if row["passed"] == "no"]
    assert [row["at"] for row in failed] == ["20 C"]


@pytest.mark.parametrize(
    ("name", "words"),
    [("record.csv", "another ending"), ("none/record.txt", "does not exist"), ("", "is a folder")],
)
def test_refusals(tmp_path: Path, capsys: pytest.CaptureFixture[str], name: str, words: str) -> None:
    with pytest.raises(SystemExit) as stop:
        verify.main(["--quick", "--output", str(tmp_path / name)])
    assert stop.value.code == 2
    assert words in capsys.readouterr().err
    assert list(tmp_path.iterdir()) == []
