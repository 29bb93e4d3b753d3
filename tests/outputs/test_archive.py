"""Saving and loading: every bit comes back, and what is no result is refused in clear words."""

from __future__ import annotations

import io
import json
import os
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from aggsim.errors import ArchiveError
from aggsim.outputs import archive, load, save
from aggsim.result import Balance, Contributions, Outcome, Result, RunStatistics, Status
from aggsim.sizes import SizeGrid

SPECIAL = np.array([0.0, -0.0, 5e-324, -1e308, np.nan, np.inf, 1 / 3])


def same_bits(a: np.ndarray, b: np.ndarray) -> bool:
    return a.dtype == b.dtype and a.shape == b.shape and a.tobytes() == b.tobytes()


def assert_same(a: Result, b: Result) -> None:
    assert same_bits(a.times, b.times)
    assert same_bits(a.number, b.number)
    assert same_bits(a.grid.volume, b.grid.volume)
    assert (a.grid.ratio, a.grid.monomer) == (b.grid.ratio, b.grid.monomer)
    assert a.balance.initial == b.balance.initial
    for name in ("present", "beyond_grid", "beyond_grid_number", "negative_share"):
        assert same_bits(getattr(a.balance, name), getattr(b.balance, name))
    for way in ("inward", "outward"):
        ours, theirs = getattr(a.balance, way), getattr(b.balance, way)
        assert list(ours) == list(theirs)
        assert all(same_bits(volume, theirs[name]) for name, volume in ours.items())
    assert list(a.contributions) == list(b.contributions)
    for name, part in a.contributions.items():
        for field in ("events", "volume_flux", "event_share", "volume_share"):
            assert same_bits(getattr(part, field), getattr(b.contributions[name], field))
    assert a.status == b.status
    assert a.stats == b.stats
    assert dict(a.settings) == dict(b.settings)
    assert len(a.tanks) == len(b.tanks)
    for ours, theirs in zip(a.tanks, b.tanks, strict=True):
        assert_same(ours, theirs)


def test_round_trip(result, tmp_path):
    save(result, tmp_path / "run.npz")
    assert_same(load(tmp_path / "run.npz"), result)


@pytest.mark.parametrize(
    "grid",
    [
        SizeGrid.geometric(smallest=1e-20, largest=1e-18, per_doubling=7),
        SizeGrid.monomers(1 / 3, 5),
        SizeGrid.monomers_then_geometric(1e-20, 1e-18),
        SizeGrid.from_pivots([0.1, 0.3, 7.0]),
    ],
)
def test_round_trip_of_grids(make_result, tmp_path, grid):
    run = make_result(grid=grid, number=np.ones((5, len(grid))))
    save(run, tmp_path / "run.npz")
    back = load(tmp_path / "run.npz")
    assert_same(back, run)
    assert back.grid.extended(10 * grid.volume[-1]) == grid.extended(10 * grid.volume[-1])


def test_round_trip_of_special_floats_and_texts(make_result, tmp_path):
    t = np.linspace(0.0, 1.0, SPECIAL.size) / 3
    run = make_result(
        t,
        number=np.outer(SPECIAL, [1.0, 1.0]),
        grid=SizeGrid.from_pivots([1e-300, 1.0]),
        balance=Balance(
            1e-5,
            SPECIAL,
            SPECIAL[::-1].copy(),
            SPECIAL,
            SPECIAL,
            inward={"fed": SPECIAL, "": -SPECIAL, "inward_0": SPECIAL / 3},
            outward={"fed": SPECIAL[::-1].copy(), "Σ \ud800\n/..\x00": SPECIAL},
        ),
        contributions=Contributions({'"ä, µ"\n': (np.arange(7.0), np.arange(7.0) / 3)}),
        status=Status(Outcome.GELATION, 0.1 + 0.2, "Δt → 0", gelation_time=1 / 3),
        stats=RunStatistics(2**40, 1, 2, 3, 4, 0.1),
        settings={},
    )
    save(run, tmp_path / "run")
    assert_same(load(tmp_path / "run"), run)


def test_runs_with_streams_and_tanks_come_back(train_run, tank_run, tmp_path):
    assert len(train_run.tanks) == 3
    for run in (train_run, tank_run, train_run.tanks[1]):
        save(run, tmp_path / "run")
        assert_same(load(tmp_path / "run"), run)


def test_tanks_may_have_tanks(make_result, tmp_path):
    inner = make_result(tanks=(make_result(first=1e-7), make_result(parts=False)))
    run = make_result(tanks=(inner, make_result(first=2e-7)))
    save(run, tmp_path / "run")
    assert_same(load(tmp_path / "run"), run)


def test_file_of_version_1_is_read(make_result, tmp_path):
    # as release 0.1.0 wrote it, before there were streams and tanks
    t = np.array([0.0, 60.0])
    header = {
        "format": "aggsim result",
        "format_version": 1,
        "aggsim_version": "0.1.0",
        "grid": {"ratio": 2.0, "monomer": None},
        "balance": {"initial": 1e-5},
        "contributions": ["shear"],
        "status": {"outcome": "COMPLETED", "time": 60.0, "detail": "", "gelation_time": None},
        "stats": {
            "rate_evaluations": 10,
            "jacobian_evaluations": 1,
            "steps": 5,
            "restarts": 0,
            "grid_extensions": 0,
            "seconds": 0.25,
        },
        "settings": {"method": "LSODA"},
    }
    stored = {
        "times": t,
        "grid_volume": np.array([1e-20, 2e-20, 4e-20]),
        "number": np.array([[1e15, 0.0, 0.0], [5e14, 1e14, 7.5e13]]),
        "balance_present": np.full(2, 1e-5),
        "balance_beyond_grid": np.zeros(2),
        "balance_beyond_grid_number": np.zeros(2),
        "balance_negative_share": np.zeros(2),
        "events_0": np.array([2e12, 1e12]),
        "volume_flux_0": np.array([4e-8, 2e-8]),
    }
    path = tmp_path / "old.npz"
    np.savez(path, header=np.frombuffer(json.dumps(header).encode(), np.uint8), **stored)
    expected = Result(
        times=t,
        grid=SizeGrid(stored["grid_volume"], ratio=2.0),
        number=stored["number"],
        balance=Balance(1e-5, np.full(2, 1e-5), np.zeros(2), np.zeros(2), np.zeros(2)),
        contributions=Contributions({"shear": (stored["events_0"], stored["volume_flux_0"])}),
        status=Status(Outcome.COMPLETED, 60.0),
        stats=RunStatistics(10, 1, 5, 0, 0, 0.25),
        settings={"method": "LSODA"},
    )
    assert_same(load(path), expected)


@pytest.mark.parametrize("outcome", list(Outcome))
def test_every_outcome_comes_back(make_result, tmp_path, outcome):
    save(make_result(status=Status(outcome, np.float64(3.0))), tmp_path / "run")
    assert load(tmp_path / "run").status == Status(outcome, 3.0)


@given(
    number=arrays(np.float64, st.tuples(st.integers(1, 4), st.integers(2, 5)), elements=st.floats(width=64)),
    seconds=st.floats(allow_nan=False),
)
def test_any_numbers_come_back(tmp_path_factory, number, seconds):
    n, k = number.shape
    zeros = np.zeros(n)
    run = Result(
        times=np.arange(float(n)),
        grid=SizeGrid.monomers(1e-20, k),
        number=number,
        balance=Balance(seconds, number[:, 0].copy(), zeros, zeros, zeros),
        contributions=Contributions({}),
        status=Status(Outcome.STALLED, seconds),
        stats=RunStatistics(1, 2, 3, 4, 5, seconds),
    )
    path = tmp_path_factory.mktemp("any") / "run"
    save(run, path)
    assert_same(load(path), run)


def test_result_without_contributions(make_result, tmp_path):
    save(make_result(parts=False), tmp_path / "run")
    assert len(load(tmp_path / "run").contributions) == 0


def test_loaded_arrays_are_read_only_and_quantities_work(result, tmp_path):
    save(result, tmp_path / "run")
    back = load(tmp_path / "run")
    np.testing.assert_array_equal(back.quantile_diameter(0.5), result.quantile_diameter(0.5))
    with pytest.raises(ValueError, match="read-only"):
        back.number[0, 0] = 1.0


@pytest.mark.parametrize("name", ["run", "run.npz", "run.v2", "no suffix at all"])
def test_file_is_written_exactly_at_the_path(result, tmp_path, name):
    save(result, str(tmp_path / name))
    assert os.listdir(tmp_path) == [name]


def test_failed_write_leaves_the_old_file_and_nothing_else(result, tmp_path, monkeypatch):
    path = tmp_path / "run.npz"
    path.write_bytes(b"precious")

    def broken(*_):
        raise OSError("disk full")

    monkeypatch.setattr(os, "replace", broken)
    with pytest.raises(OSError, match="disk full"):
        save(result, path)
    assert path.read_bytes() == b"precious"
    assert os.listdir(tmp_path) == ["run.npz"]


def test_link_is_followed(result, tmp_path):
    target = tmp_path / "target"
    target.write_bytes(b"")
    (tmp_path / "link").symlink_to(target)
    save(result, tmp_path / "link")
    assert (tmp_path / "link").is_symlink()
    assert_same(load(target), result)


def test_paths_that_cannot_be_written(result, tmp_path):
    with pytest.raises(FileNotFoundError, match=r"folder .* does not exist"):
        save(result, tmp_path / "missing" / "run.npz")
    with pytest.raises(IsADirectoryError, match="a file name is needed"):
        save(result, tmp_path)


def test_what_is_no_result_is_not_saved(tmp_path):
    with pytest.raises(ArchiveError, match="is not a Result"):
        save({"times": [0.0]}, tmp_path / "run.npz")
    assert os.listdir(tmp_path) == []


def test_missing_file_is_the_usual_error(tmp_path):
    with pytest.raises(FileNotFoundError):
        load(tmp_path / "none.npz")


def foreign_files() -> dict[str, bytes]:
    out = {"empty": b"", "text": b"time,number\n0,1\n"}
    for name, arrays_ in {"npz": {"a": np.ones(3)}, "header": {"header": np.ones(3)}}.items():
        buffer = io.BytesIO()
        np.savez(buffer, **arrays_)
        out[name] = buffer.getvalue()
    buffer = io.BytesIO()
    np.save(buffer, np.ones(3))
    out["npy"] = buffer.getvalue()
    buffer = io.BytesIO()
    np.savez(buffer, header=np.array([{"format": "aggsim result"}], dtype=object))
    out["pickle"] = buffer.getvalue()
    return out


@pytest.mark.parametrize("kind", foreign_files())
def test_foreign_files_are_refused(tmp_path, kind):
    path = tmp_path / "file.npz"
    path.write_bytes(foreign_files()[kind])
    with pytest.raises(ArchiveError, match=r"file\.npz is not a saved aggsim result"):
        load(path)


def rewrite(path: Path, change) -> None:
    """Change the header (a dict) and the arrays of a saved file in place."""
    with np.load(path) as old:
        content = {name: old[name] for name in old.files}
    header = json.loads(content.pop("header").tobytes().decode())
    change(header, content)
    np.savez(path, header=np.frombuffer(json.dumps(header).encode(), np.uint8), **content)


def test_later_format_version_names_both_versions(result, tmp_path):
    path = tmp_path / "run.npz"
    save(result, path)
    later = archive.FORMAT_VERSION + 1
    rewrite(path, lambda header, _: header.update(format_version=later, aggsim_version="9.9"))
    with pytest.raises(
        ArchiveError, match=rf"format version {later}, written by aggsim 9\.9; .* newer aggsim"
    ):
        load(path)


def drop(name):
    return lambda header, content: content.pop(name)


CHANGES = {
    "array missing": drop("number"),
    "account missing": drop("balance_present"),
    "part missing": drop("events_1"),
    "times cut": lambda header, content: content.update(times=content["times"][:-1]),
    "numbers of another grid": lambda header, content: content.update(number=content["number"][:, 1:]),
    "grid not increasing": lambda header, content: content.update(grid_volume=content["grid_volume"][::-1]),
    "account cut": lambda header, content: content.update(balance_present=np.ones(2)),
    "version a text": lambda header, content: header.update(format_version="1"),
    "status missing": lambda header, content: header.pop("status"),
    "outcome unknown": lambda header, content: header["status"].update(outcome="LOST"),
    "account not in the header": lambda header, content: header.pop("balance"),
    "old version without an account": lambda header, content: (
        header.update(format_version=1),
        header.pop("balance"),
    ),
    "streams missing": lambda header, content: header["balance"].pop("inward"),
    "tanks missing": lambda header, content: header.pop("tanks"),
    "count unknown": lambda header, content: header["stats"].update(more=1),
}


@pytest.mark.parametrize("change", CHANGES.values(), ids=CHANGES.keys())
def test_inconsistent_content_is_called_damaged(result, tmp_path, change):
    path = tmp_path / "run.npz"
    save(result, path)
    rewrite(path, change)
    with pytest.raises(ArchiveError, match="damaged"):
        load(path)


TANK_CHANGES = {
    "array of a tank missing": drop("tank_1_number"),
    "stream missing": drop("inward_0"),
    "stream of a tank missing": drop("tank_2_outward_0"),
    "stream cut": lambda header, content: content.update(outward_0=content["outward_0"][1:]),
    "tank of fewer times": lambda header, content: content.update(
        {
            name: array[1:]
            for name, array in content.items()
            if name.startswith("tank_0_") and name != "tank_0_grid_volume"
        }
    ),
}


@pytest.mark.parametrize("change", TANK_CHANGES.values(), ids=TANK_CHANGES.keys())
def test_inconsistent_tanks_are_called_damaged(train_run, tmp_path, change):
    path = tmp_path / "run.npz"
    save(train_run, path)
    rewrite(path, change)
    with pytest.raises(ArchiveError, match="damaged"):
        load(path)


@pytest.mark.parametrize("share", [0.1, 0.5, 0.99])
def test_file_that_ends_early_is_called_damaged(result, tmp_path, share):
    path = tmp_path / "run.npz"
    save(result, path)
    content = path.read_bytes()
    path.write_bytes(content[: int(share * len(content))])
    with pytest.raises(ArchiveError, match="damaged"):
        load(path)


def test_no_flipped_byte_goes_unnoticed(result, tmp_path):
    path = tmp_path / "run.npz"
    save(result, path)
    content = path.read_bytes()
    refused = 0
    for at in range(0, len(content), max(1, len(content) // 400)):
        path.write_bytes(content[:at] + bytes([content[at] ^ 0x55]) + content[at + 1 :])
        try:
            back = load(path)
        except ArchiveError:
            refused += 1
        else:  # bytes that carry no content, such as the date of an entry
            assert_same(back, result)
    assert refused > 300
