"""Bad days: a writer that is killed, a disk that is full, a clock that is wrong.

The ordinary tests kill a hundred times. A thousand times, as before a release:

    pytest -m bench tests/history/test_faults.py -s
"""

import os
import random
import shutil
import signal
import sqlite3
import subprocess
import threading
import time
from contextlib import closing, suppress
from dataclasses import replace

import pytest

from diskwatch import analyser
from diskwatch.errors import HistoryError, HistoryHeld
from diskwatch.history import folding
from diskwatch.history.keeping import DETAIL_COPIES
from diskwatch.history.live import LiveWriter
from diskwatch.history.lock import WatchLock, watcher
from diskwatch.history.reader import Past
from diskwatch.history.stating import file_past_days
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from diskwatch.records import ClassDay, Direction, DriveRound, Round
from tests.history.examples import NOON, a_drive, a_place, a_span, full_round
from tests.samples import DAY, HDD, HERE, read

KILLS = 100
WEEK = 7 * DAY


def _write_for_ever(folder, pipe):
    """What the child does until it is killed: report each round's number once it is stored."""
    history = History.open(folder)
    known = (history.known() or (history.admit(a_drive(), a_place(), NOON),))[0]
    number = history._db.conn.execute("SELECT coalesce(sum(passes), 0) FROM pass_day").fetchone()[0]
    number += history._db.conn.execute(
        "SELECT count(*) FROM pass WHERE at >= coalesce((SELECT before FROM thinned WHERE what = 'pass'), 0)"
    ).fetchone()[0]
    folding.KEPT_BYTES = 64 << 10  # so that the log is folded in, and begun anew, all the time
    threading.Thread(target=_fold_for_ever, args=(history,), daemon=True).start()
    while True:
        at = NOON + number * DAY // 2
        history.record(full_round(known, at, number))
        number += 1
        os.write(pipe, number.to_bytes(4, "big"))
        history.add_traffic([a_span(1, at + second, reads=number) for second in (10, 400)])
        if (found := history.uncondensed(at)) is not None:
            one = ClassDay(load_class=1, direction=Direction.READ, rollups=2, operations=9, histogram={3: 2})
            history.condense(found[0], {1: [one]})
        history.thin(at)


def _fold_for_ever(history):
    while True:
        history.fold_log()
        time.sleep(0.001)  # or whoever writes would get no turn


def _killed(folder, times):
    """Kill the writer at random moments; after each, all that it reported is there, whole and once."""
    when = random.Random(7)  # noqa: S311  # moments, not secrets
    for _ in range(times):
        reader, pipe = os.pipe()
        child = os.fork()
        if child == 0:
            try:
                _write_for_ever(folder, pipe)
            finally:
                os._exit(1)
        os.close(pipe)
        reported = os.read(reader, 4)
        time.sleep(when.uniform(0, 0.03))  # the moment must be any, so it cannot be waited for
        os.kill(child, signal.SIGKILL)
        assert os.waitpid(child, 0)[1] == signal.SIGKILL
        while more := os.read(reader, 4):
            reported = more
        os.close(reader)
        _whole(folder, int.from_bytes(reported, "big"))


def _whole(folder, stored):
    with Past.open(folder) as past:
        passes = sum(day.passes for day in past.pass_days(1))
        assert passes in {stored, stored + 1}
        assert past.day_book(limit=1)[0].data["n"] == passes - 1
        assert past.state(1) == f"state {passes - 1}"
        assert [value for _, value in past.series(1, "pending-sectors")] == list(range(passes))
        assert past.evidence(1, "pending-sectors")[-1][1] == passes - 1
        (line,) = past.bays(NOON).drives
        assert line.call is not None
        assert line.call.reason == f"reason {passes - 1}"
        assert past.bays(NOON).watcher is None
    with closing(sqlite3.connect(folder / HISTORY)) as connection:
        assert connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)]


def test_a_writer_that_is_killed_leaves_whole_rounds_and_all_that_it_reported(folder):
    """SIGKILL: process death, not power loss.

    Rounds, traffic, condensing and thinning go on by turns, and beside them the log is folded in.
    """
    _killed(folder, KILLS)


@pytest.mark.bench
def test_a_writer_that_is_killed_a_thousand_times_leaves_whole_rounds_each_time(folder, request):
    if "bench" not in request.config.getoption("-m"):
        pytest.skip("takes minutes: run with -m bench")
    _killed(folder, 1_000)


def _tmpfs(place, _):
    return [["mount", "-t", "tmpfs", "-o", "size=1m", "none", str(place)]]


def _ext4(place, image):
    """Blocks are given out late here: a write may succeed and the flush behind it find no room."""
    image.write_bytes(bytes(2 << 20))
    made = ["mkfs.ext4", "-q", "-F", "-O", "^has_journal", "-m", "0", str(image)]
    return [made, ["mount", "-o", "loop", str(image), str(place)]]


@pytest.fixture(params=[_tmpfs, _ext4], ids=["tmpfs", "ext4 on a loop device"])
def small_disk(tmp_path, request):
    """A real file system of one or two mebibytes."""
    place = tmp_path / "small"
    place.mkdir()
    if os.geteuid() != 0:
        pytest.skip("only root may mount anything")
    for command in request.param(place, tmp_path / "image"):
        if (
            shutil.which(command[0]) is None
            or subprocess.run(command, capture_output=True, check=False).returncode
        ):
            pytest.skip("this machine lets nobody mount such a thing")
    yield place
    subprocess.run(["umount", "-l", str(place)], check=False)


def _until_full(history, known):
    """How many rounds could be stored before the disk was full."""
    for number in range(10_000):
        try:
            history.record(full_round(known, NOON + number * DAY, number))
        except HistoryError as error:
            if "full" not in str(error) and "no space left" not in str(error):
                raise
            return number
    raise AssertionError("this disk is never full")


def test_on_a_full_disk_nothing_stored_is_lost_and_writing_goes_on_when_there_is_room(small_disk):
    ballast = small_disk / "ballast"
    ballast.write_bytes(bytes(300 << 10))
    with History.open(small_disk / "state") as history:
        known = history.admit(a_drive(), a_place(), NOON)
        stored = _until_full(history, known)
        assert stored > 3
        with pytest.raises(HistoryError):
            history.add_traffic([a_span(1, NOON + minute * 60) for minute in range(5_000)])
        assert history.states() == {1: f"state {stored - 1}"}
        with Past.open(small_disk / "state") as past:
            assert len(past.passes(1)) == stored
        ballast.unlink()
        history.record(full_round(known, NOON + stored * DAY, stored))
    _whole(small_disk / "state", stored + 1)


def _full(disk):
    """Leave no byte free."""
    with (disk / "ballast").open("ab", buffering=0) as file, suppress(OSError):
        while True:
            file.write(bytes(4096))


def test_on_a_full_disk_a_watch_keeps_others_out_and_whoever_looks_knows_that_it_watches(small_disk):
    state = small_disk / "state"
    with History.open(state) as history:
        history.admit(a_drive(), a_place(), NOON)
    _full(small_disk)
    child = os.fork()
    if child == 0:
        try:
            lock = WatchLock.take(state)
            LiveWriter(state).write((), int(time.time()), ["the disk is full"])
            os.kill(os.getpid(), signal.SIGSTOP)
            lock.release()
        finally:
            os._exit(1)
    assert os.WIFSTOPPED(os.waitpid(child, os.WUNTRACED)[1])
    try:
        assert watcher(state) == child
        with Past.open(state) as past:
            assert past.bays(int(time.time())).trouble == ("the disk is full",)
        with pytest.raises(HistoryHeld, match=f"process {child}"):
            WatchLock.take(state)
    finally:
        os.kill(child, signal.SIGKILL)
        os.waitpid(child, 0)
    assert watcher(state) is None


def _round(known, state, at, pending=0):
    step = analyser.advance(
        state, read(at, pending_sectors=pending, power_on_hours=(at - NOON) // 3600 % 10**6)
    )
    part = DriveRound(
        known=known,
        pass_=replace(read(at, pending_sectors=pending), drive=HDD),
        state=analyser.dump(step.state),
        findings=step.findings,
        evidence=step.evidence,
        call=step.call,
    )
    return step.state, Round(at=at, drives=(part,))


@pytest.mark.parametrize(
    "jump", [-DAY, 365 * DAY, 7 * DAY], ids=["set back a day", "a year ahead for an hour", "a week asleep"]
)
def test_whatever_the_clock_does_no_pass_is_counted_twice_and_no_detail_goes_early(history, jump):
    known = history.admit(HDD, HERE, NOON)
    state = analyser.start()
    times = [NOON + number * DAY // 4 for number in range(DETAIL_COPIES * 7 * 4 + 60)]
    turn = len(times) // 2
    back = 0 if jump == 365 * DAY else jump
    lived = [
        *times[:turn],
        *(at + jump for at in times[turn : turn + 2]),
        *(at + back for at in times[turn + 2 :]),
    ]
    for at in lived:
        state, round_ = _round(known, state, at)
        history.record(round_)
        history.add_traffic([a_span(1, at, reads=1)])
        while history.thin(at):
            pass
    with history._writing() as connection:
        file_past_days(connection, max(lived) // DAY + 1)
    while history.thin(max(lived)):
        pass
    connection = history._db.conn
    (counted,) = connection.execute(
        "SELECT (SELECT coalesce(sum(passes), 0) FROM pass_day) + (SELECT count(*) FROM pass WHERE at >="
        " coalesce((SELECT before FROM thinned WHERE what = 'pass'), 0))"
    ).fetchone()
    # Also two passes of one second, as a clock that was set back makes them, are two.
    assert counted == len(lived)
    reads = connection.execute("SELECT sum(reads) FROM io_five").fetchone()[0]
    assert reads == len(lived)
    # The last thirteen weeks but those that the jump itself used up stand in full.
    fresh = [at for at in set(lived) if max(lived[-1] - (DETAIL_COPIES - 3) * WEEK, 0) <= at <= lived[-1]]
    kept = {at for (at,) in connection.execute("SELECT at FROM pass")}
    assert set(fresh) <= kept
    stream = state.streams["media"]
    days = len({at // DAY for at in lived})
    assert stream.powered + stream.exposure <= days + abs(jump) / DAY + 1
