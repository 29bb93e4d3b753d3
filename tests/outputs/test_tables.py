"""Text tables: the right figures in the right units, aligned, with the state of the run below."""

from __future__ import annotations

import numpy as np
import pytest

from aggsim.errors import TimesError
from aggsim.outputs import tables
from aggsim.result import Balance, Contributions, Outcome, Status


class Double:
    """Outer diameter twice that of the sphere of equal volume."""

    def collision_diameter(self, volume):
        return 2.0 * np.cbrt(6.0 * volume / np.pi)


def split(text: str) -> tuple[list[str], list[list[str]], list[str]]:
    """Header lines, cells of the rows, and lines below."""
    lines = text.splitlines()
    end = lines.index("")
    assert set(lines[2]) == {"-"}
    return lines[:2], [line.split() for line in lines[3:end]], lines[end + 1 :]


def column(rows: list[list[str]], k: int) -> np.ndarray:
    return np.array([float(row[k]) for row in rows])


def test_columns_hold_the_quantities_of_the_result(result):
    header, rows, _ = split(tables.summary(result))
    assert header[0].split()[:9] == [
        "time",
        "number",
        "d10",
        "d50",
        "d90",
        "D[4,3]",
        "D[3,2]",
        "GSD",
        "beyond",
    ]
    assert header[1].split()[:8] == ["[min]", "[1/m3]", "[um]", "[um]", "[um]", "[um]", "[um]", "[-]"]
    np.testing.assert_allclose(column(rows, 0), result.times / 60.0)
    np.testing.assert_allclose(column(rows, 1), result.total_number(), rtol=5e-4)  # four figures shown
    for k, want in enumerate(
        [
            result.quantile_diameter(0.1),
            result.quantile_diameter(0.5),
            result.quantile_diameter(0.9),
            result.mean_diameter(4, 3),
            result.mean_diameter(3, 2),
        ]
    ):
        np.testing.assert_allclose(column(rows, 2 + k), want * 1e6, rtol=5e-3)  # three figures shown
    np.testing.assert_allclose(column(rows, 7), 1.5, atol=6e-4)  # number GSD of the fixture, three decimals


def test_volume_median_is_the_one_of_hatch_and_choate(result):
    # Hatch and Choate (1929), J. Franklin Inst. 207, 369: d_3 = d_0 exp(3 ln(gsd)^2)
    _, rows, _ = split(tables.summary(result))
    assert column(rows, 3)[0] == pytest.approx(
        0.4 * np.exp(3.0 * np.log(1.5) ** 2), rel=5e-3
    )  # three figures


def test_leading_mechanism_with_its_share(result):
    _, rows, _ = split(tables.summary(result))
    assert rows[0][-3:] == ["brownian", "75", "%"]
    assert rows[-1][-3:] == ["shear", "75", "%"]


def test_nothing_leads_where_nothing_collides(make_result):
    idle = Contributions({"brownian": (np.zeros(5), np.zeros(5))})
    for run in (make_result(parts=False), make_result(contributions=idle)):
        _, rows, _ = split(tables.summary(run))
        assert {row[-1] for row in rows} == {"-"}


def test_volume_beyond_the_grid_in_percent_of_the_start(make_result):
    beyond = np.array([0.0, 1e-12, 1e-7, 1e-6, 2.5e-6])
    zeros = np.zeros(5)
    run = make_result(balance=Balance(1e-5, 1e-5 - beyond, beyond, zeros, zeros))
    _, rows, _ = split(tables.summary(run))
    assert [row[8] for row in rows] == ["0", "0", "1", "10", "25"]


def test_notes_hold_status_balance_and_caution(make_result):
    detail = "The second moment becomes infinite at about t = 61 min. " * 3
    run = make_result(status=Status(Outcome.GELATION, 3600.0, detail.strip()))
    _, _, notes = split(tables.summary(run))
    text = " ".join(notes)
    assert f"Run {run.status}" in text
    assert "Volume balance closes to" in text
    assert notes[-1] == tables.CAUTION
    assert all(len(line) <= 110 for line in notes[:-1])


@pytest.mark.parametrize("table", [tables.summary, tables.contributions])
def test_lines_are_aligned(make_result, table):
    text = table(make_result(np.geomspace(1.0, 1e5, 30)))
    lines = text.splitlines()[: text.splitlines().index("")]
    ends = [[i for i, c in enumerate(line) if c == " " and line[i - 1] != " "] for line in lines[3:]]
    assert len({len(line) for line in lines[2:]}) == 1
    # the number column of every row ends at the same place
    assert (
        len({cells[1] if line[0] != " " else cells[2] for line, cells in zip(lines[3:], ends, strict=True)})
        == 1
    )


@pytest.mark.parametrize(
    ("times", "first", "last", "unit"),
    [
        (np.linspace(0, 30, 61), "0", "30", "[s]"),
        (np.linspace(0, 3600, 61), "0", "60", "[min]"),
        (np.linspace(0, 86400, 25), "0", "24", "[h]"),
        (np.linspace(0, 365 * 86400, 366), "0", "365", "[d]"),
    ],
)
def test_units_of_time_follow_the_run(make_result, times, first, last, unit):
    header, rows, _ = split(tables.summary(make_result(times)))
    assert header[1].split()[0] == unit
    assert (rows[0][0], rows[-1][0]) == (first, last)


@pytest.mark.parametrize("count", [1, 2, 3, 10, 11, 12, 61, 100, 101, 366])
def test_about_ten_rows_with_first_and_last(make_result, count):
    run = make_result(np.linspace(0.0, 3600.0, count) if count > 1 else [3600.0])
    _, rows, _ = split(tables.summary(run))
    assert min(count, 6) <= len(rows) <= 11
    assert (rows[0][1], rows[-1][1]) == (f"{run.total_number()[0]:.3e}", f"{run.total_number()[-1]:.3e}")


def test_small_sizes_are_shown_in_nanometres(make_result):
    header, rows, _ = split(tables.summary(make_result(first=100e-9)))
    assert header[1].split()[2] == "[nm]"
    assert column(rows, 3)[0] == pytest.approx(100.0 * np.exp(3.0 * np.log(1.5) ** 2), rel=5e-3)


def test_chosen_times(result):
    _, rows, _ = split(tables.summary(result, times=[0.0, 1100.0, 3600.0]))
    assert [row[0] for row in rows] == ["0", "20", "60"]
    with pytest.raises(TimesError, match=r"times\[1\]=7200 s .* 0 to 3600 s"):
        tables.summary(result, times=[0.0, 7200.0])


def test_outer_diameters_are_named_so(result):
    plain, outer = split(tables.summary(result)), split(tables.summary(result, structure=Double()))
    np.testing.assert_allclose(
        column(outer[1], 3), 2.0 * column(plain[1], 3), rtol=1e-2
    )  # three figures each
    np.testing.assert_array_equal(column(outer[1], 5), column(plain[1], 5))
    assert any("outer diameter" in note for note in outer[2])
    assert any("volume-equivalent diameter" in note for note in plain[2])


def test_outputs_without_particles_have_no_sizes(train_run):
    header, rows, _ = split(tables.summary(train_run))
    assert rows[0] == ["0", "0.000e+00", *6 * ["-"], "0", "-"]
    d50 = train_run.quantile_diameter(0.5)[2::2] * 1e6  # every other output is shown
    np.testing.assert_allclose(column(rows[1:], 3), d50, rtol=5e-3)
    assert header[1].split()[2] == "[um]"
    nothing = tables.summary(train_run, times=0.0)
    assert split(nothing)[1] == [["0", "0.000e+00", *6 * ["-"], "0", "-"]]


def test_tanks_of_a_train(train_run):
    header, rows, notes = split(tables.train(train_run, 310.0))
    names = "tank number volume fraction d10 d50 d90 D[4,3] D[3,2] GSD leading mechanism"
    assert header[0].split() == names.split()
    assert header[1].split()[:6] == ["[1/m3]", "[-]", "[um]", "[um]", "[um]", "[um]"]
    assert [row[0] for row in rows] == ["1", "2", "3"]
    for row, tank in zip(rows, train_run.tanks, strict=True):
        cells = [float(cell) for cell in row[1:9]]
        want = [
            tank.total_number()[3],
            tank.moment(1)[3],
            *(tank.quantile_diameter([0.1, 0.5, 0.9])[3] * 1e6),
            tank.mean_diameter(4, 3)[3] * 1e6,
            tank.mean_diameter(3, 2)[3] * 1e6,
            tank.geometric_standard_deviation(0)[3],
        ]
        np.testing.assert_allclose(cells, want, rtol=5e-3)  # three figures shown
        assert row[9:] == ["constant", "100", "%"]
    assert notes[0] == "At t = 5 min."
    assert notes[-1] == tables.CAUTION


def test_tanks_that_are_empty_yet(train_run):
    _, rows, _ = split(tables.train(train_run, 0.0))
    assert rows == [[str(k), "0.000e+00", "0.000e+00", *7 * ["-"]] for k in (1, 2, 3)]


def test_one_vessel_is_one_tank(result):
    _, rows, _ = split(tables.train(result, structure=Double()))
    _, last, _ = split(tables.summary(result, times=3600.0, structure=Double()))
    assert rows[0][0] == "1"
    assert rows[0][3:9] == last[0][2:8]


def test_tanks_at_a_steady_state(curve):
    header, rows, notes = split(tables.train(curve.states[1]))
    assert len(rows) == 1
    assert "leading" not in header[0]
    assert float(rows[0][4]) == pytest.approx(curve.quantile_diameter(0.5)[1] * 1e6, rel=5e-3)
    assert notes[0] == "At the steady state."
    assert any(note.startswith("Steady state: stable") for note in notes)


def test_contributions_by_part(result):
    header, rows, notes = split(tables.contributions(result))
    assert header[0].split() == ["time", "events", "brownian", "shear"]
    np.testing.assert_allclose(column(rows, 1), 4e10, rtol=5e-4)
    np.testing.assert_allclose(column(rows, 2), [75.0, 62.5, 50.0, 37.5, 25.0])
    np.testing.assert_allclose(column(rows, 2) + column(rows, 4), 100.0)
    np.testing.assert_allclose(column(rows, 3) + column(rows, 5), 100.0)
    assert notes[-1] == tables.CAUTION


def test_contributions_without_parts(make_result):
    _, rows, _ = split(tables.contributions(make_result(parts=False)))
    assert all(len(row) == 2 for row in rows)
