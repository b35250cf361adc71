import json
import os
import time

import pytest

from diskwatch import places
from diskwatch.history.live import DISK_EVERY_S, FRESH_S, Live, LiveWriter, live_name, read_live
from tests.history.examples import NOON, a_span

SPANS = (a_span(1, reads=5), a_span(2, seconds=9.5))


@pytest.fixture
def state(tmp_path):
    folder = tmp_path / "state"
    folder.mkdir()
    (folder / places.HISTORY).touch()
    return folder


@pytest.fixture
def memory():
    return places.SYSTEM_RUN


@pytest.fixture
def _only_disk(monkeypatch):
    monkeypatch.setattr(places, "live_folders", lambda state: (state,))


def test_what_is_shared_can_be_read_and_is_taken_away_on_close(state, memory):
    writer = LiveWriter(state)
    assert writer.write(SPANS, NOON)
    assert [path.name for path in memory.iterdir()] == [live_name(state)]
    assert read_live(state, NOON).spans == SPANS
    writer.close()
    assert list(memory.iterdir()) == []
    assert read_live(state, NOON) == Live()
    writer.close()


def test_nothing_shared_reads_as_nothing(state):
    assert read_live(state, NOON) == Live()
    assert read_live(state / "nowhere", NOON) == Live()


def test_each_look_replaces_the_last(state):
    writer = LiveWriter(state)
    writer.write(SPANS, NOON)
    writer.write(SPANS[:1], NOON + 10)
    assert read_live(state, NOON + 10).spans == SPANS[:1]


def test_old_figures_and_those_of_a_clock_far_ahead_are_not_believed(state):
    LiveWriter(state).write(SPANS, NOON)
    assert read_live(state, NOON + FRESH_S).spans == SPANS
    assert read_live(state, NOON + FRESH_S + 1) == Live()
    assert read_live(state, NOON - FRESH_S - 1) == Live()


def test_two_state_folders_do_not_mix(state, tmp_path):
    other = tmp_path / "other"
    other.mkdir()
    (other / places.HISTORY).touch()
    LiveWriter(state).write(SPANS, NOON)
    assert read_live(other, NOON) == Live()


def test_a_folder_has_one_name_however_it_is_written(state, tmp_path):
    (tmp_path / "link").symlink_to(state)
    assert live_name(tmp_path / "link") == live_name(state) == live_name(state / ".." / "state")


def test_everybody_may_read_it_whatever_the_umask(state, memory):
    before = os.umask(0o077)
    try:
        LiveWriter(state).write(SPANS, NOON)
    finally:
        os.umask(before)
    assert memory.stat().st_mode & 0o777 == 0o755
    assert (memory / live_name(state)).stat().st_mode & 0o777 == 0o644


@pytest.mark.usefixtures("_only_disk")
def test_a_real_disk_is_written_at_most_once_a_minute(state):
    writer = LiveWriter(state)
    assert writer.write(SPANS, NOON)
    assert not writer.write(SPANS[:1], NOON + DISK_EVERY_S - 1)
    assert read_live(state, NOON + DISK_EVERY_S + FRESH_S).spans == SPANS
    assert writer.write(SPANS[:1], NOON + DISK_EVERY_S)
    assert read_live(state, NOON + DISK_EVERY_S).spans == SPANS[:1]


@pytest.mark.usefixtures("_only_disk")
def test_a_clock_set_back_does_not_silence_a_real_disk(state):
    writer = LiveWriter(state)
    writer.write(SPANS, NOON)
    assert writer.write(SPANS, NOON - 3600)


def test_where_memory_cannot_be_used_the_next_place_is(state, monkeypatch):
    monkeypatch.setattr(places, "SYSTEM_RUN", state / places.HISTORY / "no folder")
    assert LiveWriter(state).write(SPANS, NOON)
    assert (state / live_name(state)).is_file()
    assert read_live(state, NOON).spans == SPANS


def test_figures_that_cannot_be_shared_anywhere_are_no_error(state, monkeypatch):
    monkeypatch.setattr(places, "live_folders", lambda _: (state / places.HISTORY / "no folder",))
    writer = LiveWriter(state)
    assert not writer.write(SPANS, NOON)
    writer.close()


@pytest.mark.parametrize(
    "content",
    [
        "",
        "{",
        "[]",
        '{"at": 1796126400}',
        '{"at": 1796126400, "spans": [[1, 2]]}',
        '{"at": 1796126400, "spans": 7}',
        '{"at": "noon", "spans": []}',
        '{"at": 1e999, "spans": []}',
        "\udcff",
    ],
)
def test_a_file_that_makes_no_sense_reads_as_nothing(state, memory, content):
    memory.mkdir()
    (memory / live_name(state)).write_text(content, errors="surrogateescape")
    assert read_live(state, NOON) == Live()


def test_a_link_or_a_pipe_in_its_place_is_not_followed(state, memory, tmp_path):
    memory.mkdir()
    path = memory / live_name(state)
    elsewhere = tmp_path / "elsewhere"
    elsewhere.write_text(json.dumps({"at": NOON, "spans": []}))
    path.symlink_to(elsewhere)
    assert read_live(state, NOON) == Live()
    path.unlink()
    os.mkfifo(path)
    assert read_live(state, NOON) == Live()


def test_a_file_that_others_may_write_is_not_believed(state, memory):
    LiveWriter(state).write(SPANS, NOON)
    (memory / live_name(state)).chmod(0o666)
    assert read_live(state, NOON) == Live()


@pytest.mark.skipif(os.geteuid() != 0, reason="only root can give files to other users")
def test_a_file_of_another_user_is_not_believed_but_roots_is(state, memory):
    LiveWriter(state).write(SPANS, NOON)
    os.chown(memory / live_name(state), 65534, 65534)
    assert read_live(state, NOON) == Live()
    os.chown(memory / live_name(state), 0, 0)
    os.chown(state / places.HISTORY, 65534, 65534)
    assert read_live(state, NOON).spans == SPANS


def test_troubles_are_shared_too_since_a_history_that_cannot_be_written_cannot_hold_them(state):
    LiveWriter(state).write((), NOON, ["the disk is full"])
    assert read_live(state, NOON) == Live(troubles=("the disk is full",))


def _left(path, age=FRESH_S + DISK_EVERY_S + 1):
    path.write_text("{}")
    os.utime(path, (time.time() - age,) * 2)


def test_figures_of_watches_that_were_killed_go_when_a_watch_begins_and_nothing_else_does(
    state, memory, tmp_path
):
    memory.mkdir()
    gone = ["live-0123456789abcdef.json", ".live-0123456789abcdef.json.4711"]
    kept = ["live-0123456789abcdeX.json", "live-0123456789abcdef.json.bak", "other.json", "live.json"]
    for folder in (memory, state):
        for name in (*gone, *kept):
            _left(folder / name)
        _left(folder / "live-aaaaaaaaaaaaaaaa.json", age=5)
        (folder / "live-bbbbbbbbbbbbbbbb.json").symlink_to(tmp_path / "elsewhere")
        os.mkfifo(folder / "live-cccccccccccccccc.json")
        (folder / "live-dddddddddddddddd.json").mkdir()
    LiveWriter(state)
    names = {*kept, *(f"live-{one * 16}.json" for one in "abcd")}
    assert {path.name for path in memory.iterdir()} == names
    assert {path.name for path in state.iterdir()} == names | {places.HISTORY}


@pytest.mark.skipif(os.geteuid() != 0, reason="only root can give files to other users")
def test_figures_in_a_strangers_folder_or_of_a_stranger_are_left_alone_and_none_are_laid_there(state, memory):
    memory.mkdir()
    _left(memory / "live-0123456789abcdef.json")
    os.chown(memory / "live-0123456789abcdef.json", 65534, 65534)
    LiveWriter(state)
    assert (memory / "live-0123456789abcdef.json").exists()
    os.chown(memory / "live-0123456789abcdef.json", 0, 0)
    os.chown(memory, 65534, 65534)
    assert LiveWriter(state).write(SPANS, NOON)
    assert [path.name for path in memory.iterdir()] == ["live-0123456789abcdef.json"]
    assert (state / live_name(state)).exists()


def test_what_a_round_left_out_is_shared_and_a_watch_that_tells_nothing_of_it_is_understood_too(state, memory):
    writer = LiveWriter(state)
    writer.write(SPANS, NOON, left_out={7: "It is asked less often."})
    assert read_live(state, NOON).left_out == {7: "It is asked less often."}
    path = memory / live_name(state)
    told = json.loads(path.read_text())
    for value, spans in (({}, SPANS), ([], ()), (None, ())):
        path.write_text(json.dumps({**told, "left_out": value}))
        assert read_live(state, NOON) == Live(spans=spans)
    del told["left_out"]
    path.write_text(json.dumps(told))
    assert read_live(state, NOON) == Live(spans=SPANS)
