import gzip

import pytest

from diskwatch.errors import DiskwatchError, UsageError
from diskwatch.replay.table import Table
from diskwatch.units import DAY

HEADER = "day,serial,model,a5_raw,a197_raw,failed\n"


def rows(tmp_path, text, *, wanted=lambda _serial: True, name="table.csv"):
    path = tmp_path / name
    path.write_bytes(gzip.compress(text.encode()) if name.endswith(".gz") else text.encode())
    bad: list[str] = []
    table = Table(path)
    try:
        return list(table.rows(wanted, bad.append)), bad
    finally:
        table.close()


@pytest.mark.parametrize("name", ["table.csv", "table.csv.gz"])
def test_rows_become_passes_at_the_first_second_of_their_day(tmp_path, name):
    ((row,), bad) = rows(tmp_path, HEADER + "1970-01-03,INV1,Invented 1,8,0,1\n", name=name)
    assert (row.serial, row.pass_.at, row.failed, bad) == ("INV1", 2 * DAY, True, [])
    assert row.pass_.reading is not None
    assert row.pass_.reading.get("reallocated-sectors") == 8


def test_an_empty_field_is_a_signal_that_is_not_there(tmp_path):
    ((row,), _) = rows(tmp_path, HEADER + "3,INV1,,,5.0,\n")
    assert row.pass_.reading is not None
    assert row.pass_.reading.get("reallocated-sectors") is None
    assert row.pass_.reading.get("pending-sectors") == 5


WRONG = [
    "soon,INV1,m,0,0,0",
    "2013-02-30,INV1,m,0,0,0",
    "3,,m,0,0,0",
    "3,INV1,m,0,0",
    "3,INV1,m,0,0,0,0",
    "3,INV1,m,-1,0,0",
    "3,INV1,m,nan,0,0",
    "3,INV1,m,inf,0,0",
    "3,INV1,m,1.5,0,0",
    "3,INV1,m,x,0,0",
    "3,INV1,m,0,0,maybe",
]


@pytest.mark.parametrize("line", WRONG)
def test_a_row_that_cannot_be_understood_is_named_by_file_and_line_and_skipped(tmp_path, line):
    found, bad = rows(tmp_path, f"{HEADER}1,INV1,m,0,0,0\n{line}\n4,INV1,m,0,0,0\n")
    assert [row.pass_.at for row in found] == [DAY, 4 * DAY]
    assert len(bad) == 1
    assert "table.csv:3: " in bad[0]


def test_drives_that_are_not_wanted_are_passed_over(tmp_path):
    found, bad = rows(
        tmp_path, HEADER + "1,INV1,m,x,0,0\n1,INV2,m,0,0,0\n", wanted=lambda serial: serial == "INV2"
    )
    assert [row.serial for row in found] == ["INV2"]
    assert bad == []


def test_a_table_of_another_kind_is_wrong_usage_and_a_missing_or_broken_one_an_error(tmp_path):
    with pytest.raises(UsageError, match="first line"):
        rows(tmp_path, "a,b\n1,2\n")
    with pytest.raises(UsageError, match="first line"):
        rows(tmp_path, "")
    with pytest.raises(DiskwatchError, match="cannot be read"):
        Table(tmp_path / "none.csv")
    whole = gzip.compress((HEADER + "1,INV1,m,0,0,0\n" * 9000).encode())
    (tmp_path / "cut.csv.gz").write_bytes(whole[: len(whole) // 2])
    table = Table(tmp_path / "cut.csv.gz")
    with pytest.raises(DiskwatchError, match="cannot be read on"):
        list(table.rows(lambda _serial: True, lambda _sentence: None))
    table.close()
