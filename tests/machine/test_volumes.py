from hypothesis import given, strategies as st

from diskwatch.machine.text import Sheet
from diskwatch.machine.volumes import sector_of, volumes
from diskwatch.records import Attribute, SignalKind, Value


def row(number: int, name: str, raw: str) -> Attribute:
    return Attribute(number=number, name=name, value=100, worst=100, threshold=0, prefail=False, raw=raw)


def read(
    *rows: Attribute, sector: int | None = 512, flash: bool = True, hours: int | None = 1_000
) -> dict[str, Value]:
    found = tuple(volumes(rows, sector=sector, flash=flash, hours=hours))
    assert all((value.value is None) is (value.reason is not None) for value in found)
    return {value.signal: value for value in found}


def lbas(written: int, more: int = 0) -> tuple[Attribute, Attribute]:
    return row(241, "Total_LBAs_Written", str(written)), row(242, "Total_LBAs_Read", str(more))


def test_blocks_of_unknown_size_give_no_bytes_and_are_kept_as_they_stand():
    found = read(*lbas(5_000_000), sector=None, flash=False)
    assert found["data-written"].value is None
    kept = found["raw-data-written"]
    assert (kept.value, kept.unit, kept.kind) == (5_000_000, "opaque", SignalKind.GAUGE)


def test_a_turning_drive_counts_blocks():
    assert read(*lbas(176_271), flash=False)["data-written"].value == 176_271 * 512


@given(st.integers(0, 2**40), st.integers(0, 200_000))
def test_no_drive_that_counts_in_a_larger_unit_ever_gets_a_number(written: int, hours: int):
    """Whatever a SATA link can have moved in the hours, its count of 32 MiB is never taken for blocks."""
    most = hours * 3_600 * 600_000_000 // 2**25
    found = read(*lbas(min(written, most), most), hours=hours)
    assert (found["data-written"].value, found["data-read"].value) == (None, None)
    assert found["raw-data-read"].value == most


def test_a_count_that_only_blocks_can_reach_is_one_of_blocks_in_both_directions():
    found = read(*lbas(58_612_004_112, 1_000), hours=9_120)
    assert (found["data-written"].value, found["data-read"].value) == (58_612_004_112 * 512, 512_000)
    assert "raw-data-read" not in found


def test_without_powered_hours_nothing_is_proved_on_flash():
    assert read(*lbas(58_612_004_112), hours=None)["data-written"].value is None


def test_a_unit_in_the_name_needs_no_proof():
    found = read(row(241, "Host_Writes_32MiB", "7"), hours=None)
    assert found["data-written"].value == 7 * 2**25
    assert read(row(241, "Host_Writes_32MiB", "4294967295"))["data-written"].value is None


def test_only_sizes_that_blocks_have_are_believed():
    assert sector_of({"logical_block_size": 4096}, Sheet.of([])) == 4096
    assert sector_of({"logical_block_size": 513}, Sheet.of([])) is None
    assert sector_of(None, Sheet.of(["Sector Sizes:     512 bytes logical, 4096 bytes physical"])) == 512
    assert sector_of(None, Sheet.of([])) is None
