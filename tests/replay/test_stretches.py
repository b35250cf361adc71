import pytest

from diskwatch.replay.cells import BadRow
from diskwatch.replay.stretches import Stretch, Stretches, traffic_layout_of

HEADER = [
    "time",
    "serial",
    "interval_s",
    "reads",
    "writes",
    "read_bytes",
    "write_bytes",
    "read_ms",
    "write_ms",
    "busy_ms",
]


def row(**other):
    cells = {
        "time": "1796126400",
        "serial": "INV1",
        "interval_s": "300",
        "reads": "10",
        "writes": "2",
        "read_bytes": "40960",
        "write_bytes": "8192",
        "read_ms": "55",
        "write_ms": "3",
        "busy_ms": "58",
    }
    layout = traffic_layout_of(HEADER)
    assert layout is not None
    return Stretches(layout).row([{**cells, **other}[name] for name in HEADER], "INV1")


@pytest.mark.parametrize(
    "time",
    ["1796126400", "1796126400.7", "2026-12-01T12:00:00Z", "2026-12-01T13:00:00+01:00", "2026-12-01 12:00"],
)
def test_a_time_is_rfc_3339_or_seconds_since_1970(time):
    assert row(time=time) == Stretch("INV1", 1_796_126_400, 300.0, (10, 2, 40960, 8192, 55, 3))


def test_a_number_may_be_written_as_a_decimal():
    assert row(reads="10.0").counts[0] == 10


@pytest.mark.parametrize(
    ("cell", "words"),
    [
        ({"time": "noon"}, "no time"),
        ({"time": "nan"}, "no time in seconds"),
        ({"time": "-5"}, "no time in seconds"),
        ({"time": "1796126400000"}, "no time in seconds"),
        ({"interval_s": "0"}, "interval_s"),
        ({"interval_s": "nan"}, "interval_s"),
        ({"interval_s": "90000"}, "interval_s"),
        ({"interval_s": "long\x1b"}, "interval_s"),
        ({"reads": "-1"}, "reads is -1, below 0"),
        ({"read_ms": ""}, "read_ms is empty"),
        ({"read_ms": "nan"}, "read_ms"),
        ({"write_ms": "1.5"}, "write_ms"),
        ({"writes": "x"}, "writes"),
    ],
)
def test_what_cannot_be_understood_says_which_field_it_is(cell, words):
    with pytest.raises(BadRow, match=words) as error:
        row(**cell)
    assert str(error.value).isprintable()


def test_a_header_without_all_counts_is_another_layout():
    assert traffic_layout_of(HEADER[:-2]) is None
    assert traffic_layout_of(["day", "serial"]) is None


def test_the_order_of_columns_and_further_ones_do_not_matter():
    layout = traffic_layout_of([*reversed(HEADER), "comment"])
    assert layout is not None
    assert layout.serial == 8
