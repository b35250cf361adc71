import os
import shutil
import signal
import sqlite3
import subprocess
import sys
import tempfile
import threading
from contextlib import closing
from pathlib import Path

import pytest

from diskwatch.errors import DriveUnknown, HistoryError, HistoryGarbled, NothingToWorkOn
from diskwatch.history import rows
from diskwatch.history.live import LiveWriter
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.places import HISTORY, WATCH_LOCK, WRITE_LOCK
from diskwatch.records import KnownDrive
from tests.history.examples import DAY, NOON, a_drive, a_place, a_span, full_round


def _watch_once(folder: Path, at: int = NOON, number: int = 1) -> KnownDrive:
    with History.open(folder) as history:
        known = (history.known() or (history.admit(a_drive(), a_place(), NOON),))[0]
        history.record(full_round(known, at, number))
    return known


def _about(folder: Path) -> dict[str, tuple[bytes, int]]:
    return {file.name: (file.read_bytes(), file.stat().st_mtime_ns) for file in folder.iterdir()}


def test_all_questions_are_answered_and_nothing_is_changed(folder):
    known = _watch_once(folder)
    before = _about(folder)
    with Past.open(folder) as past:
        bays = past.bays(NOON + 5)
        assert (bays.at, bays.watcher, bays.trouble) == (NOON + 5, None, ())
        assert [line.drive for line in bays.drives] == [known.drive]
        assert past.find("INVENTED") == bays.drives[0]
        assert [entry.text for entry in past.day_book()] == ["entry 1"]
        assert past.series(1, "pending-sectors") == ((NOON, 1),)
        assert [one.at for one in past.passes(1)] == [NOON]
        assert past.evidence(1, "pending-sectors") == ((NOON // DAY, 1.0),)
        assert [row.number for row in past.attributes(1)] == [197]
        assert past.traffic(1, NOON, NOON + 60) == ()
        assert past.state(1) == "state 1"
    assert _about(folder) == before


def test_a_drive_of_another_kind_has_no_attributes(folder):
    _watch_once(folder)
    with Past.open(folder) as past:
        assert past.attributes(99) == ()
        assert past.last_reading(99) is None
        assert past.state(99) is None


def test_a_name_that_fits_no_drive_is_told(folder):
    _watch_once(folder)
    with Past.open(folder) as past, pytest.raises(DriveUnknown, match="INVENTED-1"):
        past.find("elm")


def test_traffic_of_now_is_shown_while_its_watch_lives(folder):
    with History.open(folder) as history:
        history.admit(a_drive(), a_place(), NOON)
        live = LiveWriter(folder)
        live.write([a_span(1), a_span(2)], NOON, left_out={1: "It is asked less often."})
        with Past.open(folder) as past:
            bays = past.bays(NOON + 5)
            assert bays.watcher == os.getpid()
            assert (bays.drives[0].traffic, bays.drives[0].left_out) == (a_span(1), "It is asked less often.")
            assert past.bays(NOON + 3600).drives[0].traffic is None
    with Past.open(folder) as past:
        later = past.bays(NOON + 5).drives[0]
        assert (later.traffic, later.left_out) == (None, None)
    live.close()


def test_a_question_sees_what_was_written_since_the_last_one(folder):
    with History.open(folder) as history:
        history.admit(a_drive(), a_place(), NOON)
        with Past.open(folder) as past:
            assert past.passes(1) == ()
            history.record(full_round(history.known()[0]))
            assert len(past.passes(1)) == 1


def test_a_history_open_while_nobody_wrote_follows_a_watch_that_starts_and_ends(folder):
    _watch_once(folder)
    with Past.open(folder) as past:
        assert len(past.passes(1)) == 1
        _watch_once(folder, NOON + DAY, 2)
        assert len(past.passes(1)) == 2
        with History.open(folder) as history:
            history.record(full_round(history.known()[0], NOON + 2 * DAY, 3))
            assert len(past.passes(1)) == 3
        assert len(past.passes(1)) == 3


def test_an_answer_is_asked_again_where_a_watch_began_meanwhile(folder, monkeypatch):
    _watch_once(folder)
    looks: list[int] = []

    def passes(connection, *_):
        found = connection.execute("SELECT at, outcome, 0, 0, NULL FROM pass").fetchall()
        if not looks:
            _watch_once(folder, NOON + DAY, 2)
        looks.append(len(found))
        return tuple(rows.past_pass(row) for row in found)

    monkeypatch.setattr("diskwatch.history.questions.passes", passes)
    with Past.open(folder) as past:
        assert len(past.passes(1)) == 2
    assert looks == [1, 2]


def test_a_history_that_never_stays_the_same_is_told_in_the_end(folder, monkeypatch):
    _watch_once(folder)
    monkeypatch.setattr("diskwatch.history.opening.Opened.holds", lambda _: False)
    with Past.open(folder) as past, pytest.raises(HistoryError, match="faster than it can be read"):
        past.passes(1)


def test_a_history_that_is_taken_away_or_brought_back_is_noticed(folder):
    _watch_once(folder)
    with Past.open(folder) as past:
        (folder / HISTORY).rename(folder / "aside")
        with pytest.raises(NothingToWorkOn):
            past.bays(NOON)
        (folder / "aside").rename(folder / HISTORY)
        assert len(past.bays(NOON).drives) == 1


def test_a_closed_one_cannot_be_asked(folder):
    _watch_once(folder)
    past = Past.open(folder)
    past.close()
    past.close()
    with pytest.raises(RuntimeError, match="closed"):
        past.bays(NOON)


def test_damage_is_told_with_the_file(folder):
    _watch_once(folder)
    path = folder / HISTORY
    content = bytearray(path.read_bytes())
    # Every page but the first four, which hold the list of tables.
    content[4 * 4096 :] = b"\x5a" * (len(content) - 4 * 4096)
    path.write_bytes(content)
    with pytest.raises(HistoryError, match=r"history\.db is damaged"), Past.open(folder) as past:
        past.bays(NOON)


def test_a_value_that_nobody_wrote_is_told_as_damage(folder):
    _watch_once(folder)
    with History.open(folder) as history:
        with history._writing() as connection:
            connection.execute("UPDATE drive SET kind = 'no such kind'")
            connection.execute("UPDATE pass SET outcome = 'no such outcome'")
        with pytest.raises(HistoryError, match="cannot be right"):
            history.known()
    with Past.open(folder) as past:
        with pytest.raises(HistoryGarbled, match=r"history\.db is damaged.*'no such outcome' is not a valid"):
            past.passes(1)
        # What can be read is shown, with a word of what cannot.
        bays = past.bays(NOON)
        assert len(bays.drives) == 1
        assert any("the sort of device cannot be read" in trouble for trouble in bays.trouble)
        assert past.find(bays.drives[0].place.device).number == 1


def test_any_thread_may_ask(folder):
    _watch_once(folder)
    answers = []
    with Past.open(folder) as past:
        threads = [threading.Thread(target=lambda: answers.append(past.bays(NOON))) for _ in range(4)]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
    assert len(answers) == 4
    assert all(answer == answers[0] for answer in answers)


def test_reading_loads_nothing_that_only_the_writer_needs(folder):
    _watch_once(folder)
    program = (
        "import sys; from pathlib import Path; from diskwatch.history.reader import Past\n"
        "with Past.open(Path(sys.argv[1])) as past: past.bays(0); past.day_book()\n"
        "print(sorted({'sqlite_utils', 'click', 'pluggy', 'msgspec', 'diskwatch.settings'} & set(sys.modules)))"
    )
    ended = subprocess.run(
        [sys.executable, "-c", program, str(folder)], capture_output=True, text=True, check=True
    )
    assert ended.stdout == "[]\n"


# Other users. What these show cannot be shown by root to itself: root may write anywhere.

NOBODY = 65534


def _ask(folder: Path) -> str:
    with Past.open(folder) as past:
        bays = past.bays(NOON)
        return f"{len(past.passes(1))} {bays.watcher}"


def _write(folder: Path) -> str:
    History.open(folder).close()
    return "opened"


class _Nobody:
    """A child that runs as another user.

    It is forked before any history is open: SQLite remembers the locks of its process and must not be carried
    over a fork.
    """

    def __init__(self) -> None:
        self._answers, answers = os.pipe()
        questions, self._questions = os.pipe()
        self._pid = os.fork()
        if self._pid == 0:
            try:
                os.close(self._questions)
                self._serve(questions, answers)
            finally:
                os._exit(1)
        os.close(questions)
        os.close(answers)

    def _serve(self, questions: int, answers: int) -> None:
        os.setgroups([])
        os.setgid(NOBODY)
        os.setuid(NOBODY)
        while asked := os.read(questions, 1000).decode():
            deed, folder = asked.split(" ", 1)
            try:
                answer = {"ask": _ask, "write": _write}[deed](Path(folder))
            except Exception as error:  # noqa: BLE001  # whatever it is, the test must see it
                answer = f"{type(error).__name__} {error}"
            os.write(answers, answer.encode())

    def _do(self, deed: str, folder: Path) -> str:
        os.write(self._questions, f"{deed} {folder}".encode())
        return os.read(self._answers, 10_000).decode()

    def ask(self, folder: Path) -> str:
        return self._do("ask", folder)

    def write(self, folder: Path) -> str:
        return self._do("write", folder)

    def end(self) -> None:
        os.close(self._questions)
        os.close(self._answers)
        os.waitpid(self._pid, 0)


@pytest.fixture
def nobody():
    if os.geteuid() != 0:
        pytest.skip("only root can become another user")
    child = _Nobody()
    yield child
    child.end()


@pytest.fixture
def roots(nobody):  # noqa: ARG001  # the child is forked first, and only root gets this far
    """A state folder of root's where everybody may look; pytest's own folders are closed to others."""
    above = Path(tempfile.mkdtemp(prefix="diskwatch-test-"))
    above.chmod(0o755)
    yield above / "state"
    shutil.rmtree(above)


OLD = sorted((Path(__file__).parents[2] / "fixtures" / "history").glob("*.db"))


def _all_answers(past):
    return (
        past.bays(NOON),
        past.day_book(),
        past.passes(1),
        past.pass_days(1),
        past.rollups(1, 0, 2**40),
        past.class_days(1, 0, 2**40),
        past.traffic(1, 0, 2**40),
        past.series(1, "pending-sectors"),
        past.evidence(1, "pending-sectors"),
        past.last_reading(1),
        past.state(1),
        past.lines(1),
    )


@pytest.mark.parametrize("old", OLD, ids=lambda path: path.stem)
@pytest.mark.parametrize("log", [False, True], ids=["alone", "with a log"])
def test_a_history_of_an_older_version_answers_as_it_will_once_the_watch_has_brought_it_up_to_date(
    folder, old, log
):
    folder.mkdir()
    shutil.copyfile(old, folder / HISTORY)
    if log:
        # As a watch of that version left it that was killed: all that it wrote last stands in the log.
        with closing(sqlite3.connect(folder / HISTORY, isolation_level=None)) as writing:
            writing.execute("PRAGMA journal_mode = WAL")
            writing.execute("UPDATE owner_fact SET value = 'cellar'")
            for name in (HISTORY, f"{HISTORY}-wal"):
                shutil.copyfile(folder / name, folder / f"kept-{name}")
        for name in (HISTORY, f"{HISTORY}-wal"):
            (folder / f"kept-{name}").replace(folder / name)
    with Past.open(folder) as past:
        before = _all_answers(past)
        (line,) = past.bays(NOON).drives
        assert line.label == ("cellar" if log else "attic")
        assert all(before[which] for which in (2, 4, 6, 11))
        with History.open(folder) as history:
            # The very connection that read it as it was reads on.
            assert _all_answers(past)[1:] == before[1:]
            history.record(full_round(history.known()[0], NOON + 9 * DAY, 9))
            assert len(past.passes(1)) == len(before[2]) + 1
    with Past.open(folder) as past:
        assert past.passes(1)[-1].at == NOON + 9 * DAY


def test_reading_an_older_history_changes_no_byte_of_it_and_lays_nothing_beside_it(folder):
    folder.mkdir()
    shutil.copyfile(OLD[0], folder / HISTORY)
    with Past.open(folder) as past:
        _all_answers(past)
        assert [path.name for path in folder.iterdir()] == [HISTORY]
    assert (folder / HISTORY).read_bytes() == OLD[0].read_bytes()


def test_another_user_reads_while_the_watch_runs_and_after_it_ended(roots, nobody):
    with History.open(roots) as history:
        history.record(full_round(history.admit(a_drive(), a_place(), NOON)))
        assert nobody.ask(roots) == f"1 {os.getpid()}"
    assert nobody.ask(roots) == "1 None"
    assert {file.name for file in roots.iterdir()} == {HISTORY, WATCH_LOCK, WRITE_LOCK}


def test_another_user_reads_what_a_killed_watch_left_in_its_log(roots, nobody):
    _watch_once(roots)
    child = os.fork()
    if child == 0:
        try:
            history = History.open(roots)
            history.record(full_round(history.known()[0], NOON + DAY, 2))
            os.kill(os.getpid(), signal.SIGKILL)
        finally:
            os._exit(1)
    assert os.waitpid(child, 0)[1] == signal.SIGKILL
    assert (roots / (HISTORY + "-wal")).stat().st_size > 0
    assert nobody.ask(roots) == "2 None"


def test_another_user_is_told_where_a_log_cannot_be_read_without_the_right_to_write(roots, nobody):
    _watch_once(roots)
    with History.open(roots) as history:
        history.record(full_round(history.known()[0], NOON + DAY, 2))
        for name in (HISTORY, HISTORY + "-wal"):
            shutil.copy(roots / name, roots.parent / name)
    assert nobody.ask(roots.parent).startswith("HistoryError")


def test_another_user_cannot_write_and_is_told_why(roots, nobody):
    with History.open(roots):
        assert nobody.write(roots).startswith("HistoryHeld")
    told = nobody.write(roots)
    assert told.startswith("HistoryError")
    assert str(roots) in told


def test_a_history_that_may_not_be_read_is_told_to_another_user(roots, nobody):
    _watch_once(roots)
    (roots / HISTORY).chmod(0o600)
    assert nobody.ask(roots).startswith(f"HistoryError {roots / HISTORY} cannot be opened")


def test_a_read_only_folder_can_be_read_but_not_written(roots, nobody):
    _watch_once(roots)
    for path in (roots, roots / HISTORY, roots / WATCH_LOCK, roots / WRITE_LOCK):
        os.chown(path, NOBODY, NOBODY)
    roots.chmod(0o555)
    (roots / HISTORY).chmod(0o444)
    assert nobody.ask(roots) == "1 None"
    told = nobody.write(roots)
    assert told.startswith("HistoryError")
    assert "read-only" in told
