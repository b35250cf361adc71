from dataclasses import replace
from types import SimpleNamespace

import pytest

from diskwatch.cli import files
from diskwatch.cli.files import Failing
from diskwatch.machine.file_blocks import FileBlock
from diskwatch.records import Entry, Mount, Place, SelfTest
from tests.samples import NOON

HERE = SimpleNamespace(
    place=Place(device="/dev/sda", bay=None, lives_here=(Mount(point="/srv"),)),
)
TEST = SelfTest(name="Extended offline", result="read failure", extended=True, passed=False, lba=5_000)


def heard(sector, event="unreadable-sector", device="sda"):
    data = {"event": event, "device": device, "sector": sector}
    return Entry(at=NOON, drive=1, kind="kernel", text="It could not be read.", data=data)


@pytest.fixture(autouse=True)
def _blocks(monkeypatch):
    """Every sector of sda is a block of what is mounted at /srv; from 9,000 on, at another place."""

    def found(name, sector, **_):
        point = "/srv" if sector < 9_000 else "/elsewhere"
        return FileBlock(node=f"/dev/{name}1", point=point, block=sector // 8, size=4_096)

    monkeypatch.setattr(files, "file_block", found)


def sectors(*entries, tests=()):
    return [one.sector for one in files.failing(HERE, entries, tests)]  # type: ignore[arg-type]  # only its place is asked for


def test_the_latest_failing_sectors_are_told_each_once():
    assert sectors(*map(heard, (8, 16, 16, 24, 32))) == [32, 24, 16]
    assert sectors(heard(8), tests=[TEST, replace(TEST, lba=None)]) == [5_000, 8]


def test_what_is_no_unreadable_sector_of_this_disk_or_lies_elsewhere_is_left_out():
    assert sectors(heard(8, event="write-error"), heard(8, device="sdb"), heard(None), heard(9_500)) == []


def test_each_has_the_command_and_the_numbers_behind_it():
    found = (Failing(sector=16, place=FileBlock(node="/dev/sda1", point="/srv", block=2, size=4_096)),)
    assert "debugfs -R 'icheck 2' /dev/sda1" in list(files.told(found))
    assert files.answer(found) == [
        {"sector": 16, "device": "/dev/sda1", "mounted_at": "/srv", "block": 2, "block_bytes": 4_096}
    ]
