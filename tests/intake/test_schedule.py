"""Furnace schedules: taken as they stand, or refused by line and column."""

from pathlib import Path

import pytest
from numpy.testing import assert_allclose

from coldwork.errors import BatchRefused
from coldwork.intake.schedule import read_schedule


def written(folder: Path, *rows: str) -> Path:
    path = folder / "schedule.csv"
    path.write_text("\n".join(["time_s,temperature_c", *rows, ""]), encoding="utf-8")
    return path


def test_a_schedule_in_kelvin(tmp_path: Path) -> None:
    found, source = read_schedule(written(tmp_path, "0,20", "5400,320", "5400,350", "9000,350"))
    assert found.times.tolist() == [0.0, 5400.0, 5400.0, 9000.0]
    assert_allclose(found.temperatures, [293.15, 593.15, 623.15, 623.15])
    assert (source.path, source.rows_read) == ("schedule.csv", 4)


@pytest.mark.parametrize(
    ("rows", "told"),
    [
        (("0,20", "900,320", "600,320"), "schedule.csv, line 4, column time_s: 600 s comes after"),
        (("0,20", "900,3 20"), "line 3, column temperature_c"),
        (("0,20", "900,"), "line 3, column temperature_c: the cell is empty"),
        (("0,20", "900,-300"), "line 3, column temperature_c"),
        (("-5,20", "900,20"), "line 2, column time_s"),
        (("0,20",), "it has 1 rows"),
        ((), "it has 0 rows"),
        (("600,20", "600,300"), "lasts 0 s"),
    ],
)
def test_what_is_no_schedule_is_refused(tmp_path: Path, rows: tuple[str, ...], told: str) -> None:
    with pytest.raises(BatchRefused) as refused:
        read_schedule(written(tmp_path, *rows))
    assert told in str(refused.value)


def test_a_wrong_column_is_refused_with_the_nearest_name(tmp_path: Path) -> None:
    path = tmp_path / "s.csv"
    path.write_text("time_s,temperature_k\n0,300\n", encoding="utf-8")
    with pytest.raises(BatchRefused, match="temperature_c"):
        read_schedule(path)
