import errno
import os
from pathlib import Path

import pytest

from diskwatch.machine.timed_reads import TimedReads


def open_files():
    return len(list(Path("/proc/self/fd").iterdir()))


@pytest.fixture
def node(tmp_path):
    node = tmp_path / "disk"
    node.write_bytes(b"\1" * 65_536)
    try:
        os.close(os.open(node, os.O_RDONLY | os.O_DIRECT))
    except OSError:
        pytest.skip("this file system knows no reading past the cache")
    return node


def test_each_read_is_timed_and_adds_to_what_the_disk_was_kept_busy(node):
    with TimedReads(node, 16_384) as disk:
        took = [disk.read(0, 4096), disk.read(16_384, 16_384)]
        assert all(one is not None and one >= 0 for one in took)
        assert disk.busy_us == sum(one for one in took if one is not None)
    assert node.read_bytes() == b"\1" * 65_536


def test_what_fails_or_comes_short_has_no_time(node, monkeypatch):
    with TimedReads(node, 16_384) as disk:
        assert disk.read(65_536, 4096) is None, "behind the end"

        def fails(*_):
            raise OSError(errno.EIO, "invented")

        with monkeypatch.context() as patch:
            patch.setattr(os, "preadv", fails)
            assert disk.read(0, 4096) is None


def test_it_opens_for_reading_past_the_cache_and_lets_go(node, monkeypatch):
    flags, real = [], os.open

    def opens(path, how):
        flags.append(how)
        return real(path, how)

    monkeypatch.setattr(os, "open", opens)
    before = open_files()
    with TimedReads(node, 4096):
        assert open_files() == before + 1
    assert open_files() == before
    assert flags[0] & os.O_DIRECT
    assert flags[0] & os.O_ACCMODE == os.O_RDONLY


def test_what_cannot_be_opened_is_told(tmp_path):
    with pytest.raises(FileNotFoundError):
        TimedReads(tmp_path / "gone", 4096)
