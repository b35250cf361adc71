import errno
import itertools
import os
import threading
import time

import pytest

from diskwatch.machine import blink as room
from diskwatch.machine.blink import Lamp, blink

SIZE = 100 * 65_536 + 512


@pytest.fixture
def lamp(tmp_path):
    node = tmp_path / "disk"
    node.write_bytes(b"\0" * SIZE)
    try:
        os.close(os.open(node, os.O_RDONLY | os.O_DIRECT))
    except OSError:
        pytest.skip("this file system knows no reading past the cache")
    return Lamp(node=node, size=SIZE)


@pytest.fixture
def reads(monkeypatch):
    """Where each read began and when."""
    seen = []
    real = os.preadv

    def preadv(descriptor, buffers, place):
        seen.append((time.monotonic(), place))
        return real(descriptor, buffers, place)

    monkeypatch.setattr(os, "preadv", preadv)
    return seen


def test_it_reads_and_rests_in_turn_and_ends_in_time(lamp, reads, monkeypatch):
    monkeypatch.setattr(room, "ON", 0.05)
    monkeypatch.setattr(room, "OFF", 0.1)
    before = time.monotonic()
    assert blink([lamp], 0.4, threading.Event()) == {}
    assert 0.3 < time.monotonic() - before < 5
    gaps = [later - earlier for (earlier, _), (later, _) in itertools.pairwise(reads)]
    assert sum(gap >= 0.1 for gap in gaps) >= 2, "the light went dark in between"
    assert lamp.node.read_bytes() == b"\0" * SIZE


def test_reads_are_scattered_aligned_and_never_beyond_the_end(lamp, reads, monkeypatch):
    monkeypatch.setattr(room, "ON", 0.05)
    blink([lamp], 0.05, threading.Event())
    places = {place for _, place in reads}
    assert len(places) > 10
    assert all(place % 65_536 == 0 and place + 65_536 <= SIZE for place in places)


def test_somebody_who_says_stop_is_heard_at_once(lamp):
    stop = threading.Event()
    threading.Timer(0.1, stop.set).start()
    before = time.monotonic()
    blink([lamp], 60, stop)
    assert time.monotonic() - before < 5


def test_ctrl_c_ends_it_and_lets_nothing_read_on(lamp, monkeypatch):
    def interrupt(*_: object) -> None:
        raise KeyboardInterrupt

    stop = threading.Event()
    monkeypatch.setattr(threading.Thread, "join", interrupt)
    with pytest.raises(KeyboardInterrupt):
        blink([lamp], 60, stop)
    assert stop.is_set()


def test_a_device_that_cannot_be_read_is_named_and_left_alone(lamp, monkeypatch, tmp_path):
    def fail(*_: object) -> int:
        raise OSError(errno.EIO, "Input/output error")

    gone = Lamp(node=tmp_path / "gone", size=SIZE)
    monkeypatch.setattr(os, "preadv", fail)
    wrong = blink([lamp, gone], 60, threading.Event())
    assert {node: error.errno for node, error in wrong.items()} == {
        lamp.node: errno.EIO,
        gone.node: errno.ENOENT,
    }


def test_a_device_that_never_answers_does_not_hold_the_command_up(lamp, monkeypatch):
    hung = threading.Event()
    monkeypatch.setattr(room, "ON", 0.05)
    monkeypatch.setattr(os, "preadv", lambda *_: hung.wait(20))
    before = time.monotonic()
    blink([lamp], 0.1, threading.Event())
    assert time.monotonic() - before < 5
    hung.set()
