"""CSV files read back to the same floating-point numbers."""

from __future__ import annotations

import csv
import re
from pathlib import Path

import numpy as np
import pytest

from aggsim.errors import TimesError
from aggsim.outputs import tables
from aggsim.result import Contributions, Outcome, Status


class Double:
    """Outer diameter twice that of the sphere of equal volume."""

    def collision_diameter(self, volume):
        return 2.0 * np.cbrt(6.0 * volume / np.pi)


def read(path: Path) -> tuple[list[str], list[str], np.ndarray]:
    lines = path.read_text(encoding="utf-8").splitlines()
    comments = [line for line in lines if line.startswith("#")]
    rows = list(csv.reader(lines[len(comments) :]))
    return comments, rows[0], np.array(rows[1:], dtype=np.float64)


def test_distribution_reads_back_exactly(result, tmp_path):
    tables.to_csv(result, tmp_path / "run.csv")
    comments, header, values = read(tmp_path / "run.csv")
    assert header[:3] == ["volume [m3]", "diameter [m]", "width [m3]"]
    np.testing.assert_array_equal(values[:, 0], result.grid.volume)
    np.testing.assert_array_equal(values[:, 1], result.grid.diameter)
    np.testing.assert_array_equal(values[:, 2], result.grid.width)
    np.testing.assert_array_equal(values[:, 3:].T, result.number)
    times = [float(re.fullmatch(r"number at t=(\S+) s \[1/m3\]", name)[1]) for name in header[3:]]
    np.testing.assert_array_equal(times, result.times)
    assert comments[0].startswith("# aggsim ")
    assert comments[1] == f"# status: {result.status}"
    assert "FixedPivot(moments=6)" in comments[2]


def test_distribution_at_chosen_times(result, tmp_path):
    tables.to_csv(result, tmp_path / "run.csv", times=[0.0, 1000.0])
    _, header, values = read(tmp_path / "run.csv")
    assert header[3:] == ["number at t=0.0 s [1/m3]", "number at t=1200.0 s [1/m3]"]
    np.testing.assert_array_equal(values[:, 4], result.number[2])
    with pytest.raises(TimesError, match=r"times\[0\]=1e\+06 s"):
        tables.to_csv(result, tmp_path / "run.csv", times=1e6)


def test_every_output_time_is_written(make_result, tmp_path):
    tables.to_csv(make_result(np.linspace(0.0, 100.0, 101)), tmp_path / "run.csv")
    assert read(tmp_path / "run.csv")[2].shape[1] == 3 + 101


def test_time_series_reads_back_exactly(result, tmp_path):
    tables.summary_csv(result, tmp_path / "series.csv")
    _, header, values = read(tmp_path / "series.csv")
    column = dict(zip(header, values.T, strict=True))
    expected = {
        "time [s]": result.times,
        "number [1/m3]": result.total_number(),
        "volume fraction [-]": result.moment(1),
        "d10 [m]": result.quantile_diameter(0.1),
        "d50 [m]": result.quantile_diameter(0.5),
        "d90 [m]": result.quantile_diameter(0.9),
        "D43 [m]": result.mean_diameter(4, 3),
        "D32 [m]": result.mean_diameter(3, 2),
        "GSD by number [-]": result.geometric_standard_deviation(0),
        "volume fraction beyond grid [-]": result.balance.beyond_grid,
        "negative share [-]": result.balance.negative_share,
        "events of brownian [1/(m3 s)]": result.contributions["brownian"].events,
        "volume flux of brownian [1/s]": result.contributions["brownian"].volume_flux,
        "events of shear [1/(m3 s)]": result.contributions["shear"].events,
        "volume flux of shear [1/s]": result.contributions["shear"].volume_flux,
    }
    assert header == list(expected)
    for name, want in expected.items():
        np.testing.assert_array_equal(column[name], want, err_msg=name)


def test_streams_have_columns(tank_run, tmp_path):
    tables.summary_csv(tank_run, tmp_path / "series.csv")
    _, header, values = read(tmp_path / "series.csv")
    column = dict(zip(header, values.T, strict=True))
    streams = [name for name in header if name.startswith(("inward", "outward"))]
    assert streams == [
        "inward fed [-]",
        "outward settled [-]",
        "outward beyond grid [-]",
        "outward withdrawn [-]",
    ]
    np.testing.assert_array_equal(column["inward fed [-]"], tank_run.balance.inward["fed"])
    for name, volume in tank_run.balance.outward.items():
        np.testing.assert_array_equal(column[f"outward {name} [-]"], volume)


def test_empty_outputs_have_sizes_that_are_nan(train_run, tmp_path):
    tables.summary_csv(train_run, tmp_path / "series.csv")
    _, header, values = read(tmp_path / "series.csv")
    d50 = values[:, header.index("d50 [m]")]
    assert np.isnan(d50[0])
    np.testing.assert_array_equal(d50, train_run.quantile_diameter(0.5))


def test_outer_diameters_are_named_so(result, tmp_path):
    tables.summary_csv(result, tmp_path / "series.csv", structure=Double())
    _, header, values = read(tmp_path / "series.csv")
    outer = values[:, header.index("d50 outer [m]")]
    np.testing.assert_array_equal(outer, result.quantile_diameter(0.5, structure=Double()))
    np.testing.assert_allclose(outer, 2.0 * result.quantile_diameter(0.5), rtol=1e-12)
    assert "d50 [m]" not in header


def test_names_and_details_cannot_break_the_format(make_result, tmp_path):
    parts = Contributions({'shear, "slow"': (np.ones(5), np.ones(5))})
    status = Status(Outcome.STALLED, 1.0, "first line\nsecond, line")
    tables.summary_csv(make_result(contributions=parts, status=status), tmp_path / "series.csv")
    comments, header, values = read(tmp_path / "series.csv")
    assert len(comments) == 3
    assert "first line second, line" in comments[1]
    assert header[-2:] == [
        'events of shear, "slow" [1/(m3 s)]',
        'volume flux of shear, "slow" [1/s]',
    ]
    assert values.shape == (5, len(header))


@pytest.mark.parametrize("write", [tables.to_csv, tables.summary_csv])
def test_file_is_replaced_at_exactly_the_path(result, tmp_path, write):
    path = tmp_path / "no suffix"
    path.write_text("old")
    write(result, path)
    assert [entry.name for entry in tmp_path.iterdir()] == ["no suffix"]
    assert path.read_text().startswith("# aggsim")
    with pytest.raises(FileNotFoundError, match="folder"):
        write(result, tmp_path / "missing" / "x.csv")
