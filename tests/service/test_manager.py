import socket

import pytest

from diskwatch.records import CallWord
from diskwatch.service.manager import Manager, status
from tests.samples import NOON


@pytest.fixture(params=["path", "abstract"])
def line(request, tmp_path):
    """A socket as systemd's, and its address as the environment has it."""
    name = str(tmp_path / "notify") if request.param == "path" else f"@diskwatch-test-{tmp_path.name}"
    with socket.socket(socket.AF_UNIX, socket.SOCK_DGRAM) as end:
        end.bind(name.replace("@", "\0", 1))
        end.settimeout(5)
        yield end, name


def test_each_word_is_one_datagram_as_the_protocol_has_it(line):
    end, name = line
    manager = Manager(name)
    for tell, said in (
        (manager.ready, b"READY=1"),
        (manager.alive, b"WATCHDOG=1"),
        (manager.reloading, b"RELOADING=1"),
        (manager.stopping, b"STOPPING=1"),
        (lambda: manager.doing("two\nlines"), b"STATUS=two lines"),
    ):
        tell()
        assert end.recv(400) == said


@pytest.mark.parametrize("address", ["", "/no/such/socket", "@nobody-listens-here"])
def test_where_nobody_listens_nothing_happens(address):
    Manager(address).ready()


def test_the_environment_names_the_socket(line, monkeypatch):
    end, name = line
    monkeypatch.setenv("NOTIFY_SOCKET", name)
    Manager().ready()
    assert end.recv(400) == b"READY=1"


@pytest.mark.parametrize(
    ("calls", "told"),
    [
        ({}, "Watching; no drive has been found (round of 2024-10-04T12:00:00Z)"),
        ({1: None}, "Watching 1 drive; last round 2024-10-04T12:00:00Z"),
        (
            {1: CallWord.KEEP, 2: CallWord.COPY, 3: CallWord.LOOK},
            "Watching 3 drives, worst call copy; last round 2024-10-04T12:00:00Z",
        ),
    ],
)
def test_the_status_says_how_many_drives_and_the_worst_call(calls, told):
    assert status(calls, NOON) == told
