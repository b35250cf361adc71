import pytest

from diskwatch.replay.columns import layout_of, value

OURS = [
    "day",
    "serial",
    "model",
    "bytes",
    "a5_raw",
    "a5_norm",
    "a197_raw",
    "a188_raw",
    "failed",
    "percentage_used",
]
PUBLISHED = [
    "date",
    "serial_number",
    "model",
    "capacity_bytes",
    "failure",
    "smart_5_raw",
    "smart_194_raw",
    "smart_9_raw",
]


def read(header, name, number):
    layout = layout_of(header)
    assert layout is not None
    meaning = next(meaning for _, meaning in layout.values if meaning.signal == name)
    return value(meaning, number).value


def test_both_layouts_are_known_by_their_first_line():
    ours, published = layout_of(OURS), layout_of(PUBLISHED)
    assert ours is not None
    assert published is not None
    assert (ours.failed, published.failed) == (8, 4)
    assert {meaning.signal for _, meaning in ours.values} == {
        "reallocated-sectors", "pending-sectors", "command-timeouts", "percentage-used",
    }  # fmt: skip


def test_another_table_is_of_no_layout():
    assert layout_of(["a", "b"]) is None
    assert layout_of([]) is None


@pytest.mark.parametrize(
    ("header", "signal", "number", "usable"),
    [
        (OURS, "reallocated-sectors", 64_288, 64_288),
        (OURS, "reallocated-sectors", 65_528, None),
        (OURS, "pending-sectors", 4_294_967_295, None),
        (OURS, "command-timeouts", 4_295_032_833, 1),
        (PUBLISHED, "temperature", 0x002D_0014_0029, 41),
        (PUBLISHED, "power-on-hours", 0x1234_00_8164, 33_124),
    ],
)
def test_full_fields_are_no_counts_and_packed_ones_are_taken_apart(header, signal, number, usable):
    """4295032833 is "1 1 1" in three words (public reports); 65528 stands in the open drive data."""
    assert read(header, signal, number) == usable
