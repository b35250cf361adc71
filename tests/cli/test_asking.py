import pytest

from diskwatch.cli.asking import done
from diskwatch.errors import HistoryError, UsageError
from diskwatch.history.lock import WatchLock
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.service import requests
from tests.history.examples import NOON, a_drive, a_place


@pytest.fixture
def folder(tmp_path):
    with History.open(tmp_path / "state") as history:
        history.admit(a_drive("INV-1", "/dev/sda"), a_place("/dev/sda"), NOON)
    return tmp_path / "state"


def test_where_nobody_writes_the_command_does_it_itself(folder):
    done(folder, "tell", {"drive": 1, "facts": {"label": "left"}})
    with Past.open(folder) as past:
        assert past.find("left").number == 1


def test_where_a_watch_writes_it_is_asked_and_its_refusal_is_told(folder, monkeypatch):
    lock = WatchLock.take(folder)
    asked = []

    def answered(request):
        asked.append(requests._read(request, frozenset({folder.stat().st_uid})))
        raise HistoryError("no")

    monkeypatch.setattr(requests, "wait", answered)
    try:
        with pytest.raises(HistoryError, match="no"):
            done(folder, "tell", {"drive": 1, "facts": {"label": "left"}})
    finally:
        lock.release()
    assert asked == [{"deed": "tell", "words": {"drive": 1, "facts": {"label": "left"}}}]


def test_what_cannot_be_right_is_refused_also_here(folder):
    with pytest.raises(UsageError):
        done(folder, "tell", {"drive": 1, "facts": {"label": "\x07"}})
