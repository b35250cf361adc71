import pytest

from diskwatch.errors import HistoryError, HistoryGarbled
from diskwatch.history.mending import garbled, to_mend
from diskwatch.history.moving import Case, Judged
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from diskwatch.records import Kind
from tests.history.examples import DAY, NOON, a_drive, a_part, a_pass, a_place, full_round
from tests.history.test_checks import SPOILT, readable


def no_judge(_case):
    return None


@pytest.fixture
def filled(history, known):
    for number in range(4):
        history.record(full_round(known, NOON + number * 4 * DAY, number))
    return history


def judging(cases):
    """A judge that remembers what it was asked."""

    def judge(case):
        cases.append(case)
        part = a_part(case.known, a_pass(NOON), state="state anew")
        return Judged(part=part, since=None, copies=())

    return judge


def test_where_nothing_is_wrong_nothing_is_said_or_changed(filled, rows):
    before = rows("SELECT * FROM day_book")
    assert filled.mend(judging([]), readable, NOON, thorough=True) == ()
    assert rows("SELECT * FROM day_book") == before


@pytest.mark.parametrize(("table", "column", "spoilt"), SPOILT)
def test_what_cannot_be_right_is_taken_out_once_and_stands_in_the_day_book(filled, table, column, spoilt):
    connection = filled._db.conn
    connection.execute(f"UPDATE {table} SET {column} = {spoilt}")  # noqa: S608
    connection.commit()
    said = filled.mend(judging([]), readable, NOON, thorough=True)
    assert garbled(connection, readable, thorough=True) == ()
    assert column in said[0].data["held"]
    assert said[0].data["table"] == table
    assert said[0].kind == "trouble"
    # All that a watch and its readers ask of it can be answered again.
    assert [one.number for one in filled.known()] == [1]
    filled.states()
    filled.calls()
    assert filled.mend(judging([]), readable, NOON, thorough=True) == ()


def test_a_drive_whose_state_was_lost_is_judged_anew_from_its_dated_copies(filled):
    filled._db.conn.execute("UPDATE analyser_state SET packed = x'00'")
    filled._db.conn.commit()
    cases: list[Case] = []
    filled.mend(judging(cases), readable, NOON, thorough=False)
    (case,) = cases
    assert [one.state for one in case.copies] == ["state 0", "state 2"]
    assert filled.states() == {1: "state anew"}


def test_a_call_that_cannot_be_read_is_worked_out_again_at_once(filled):
    filled._db.conn.execute("UPDATE call SET word = 'loog'")
    filled._db.conn.commit()
    cases: list[Case] = []
    said = filled.mend(judging(cases), readable, NOON, thorough=False)
    assert len(cases) == 1
    assert "'loog' is not a valid CallWord" in said[0].text


def test_a_sort_of_device_that_cannot_be_read_is_no_reason_to_lose_the_drive(filled):
    filled._db.conn.execute("UPDATE drive SET kind = 'htd', capacity_bytes = 'large'")
    filled._db.conn.commit()
    filled.mend(no_judge, readable, NOON, thorough=False)
    (known,) = filled.known()
    assert known.drive.identity == a_drive().identity
    assert known.drive.kind in Kind
    assert known.drive.capacity_bytes is None


def test_a_value_that_cannot_be_read_counts_as_not_known_with_the_reason(filled, rows):
    filled._db.conn.execute("UPDATE latest SET value = x'ff' WHERE series = 1")
    filled._db.conn.commit()
    filled.mend(no_judge, readable, NOON, thorough=True)
    ((value, reason),) = rows("SELECT value, reason FROM latest WHERE series = 1")
    assert value is None
    assert "damaged" in reason


def test_one_who_looks_changes_nothing_and_waits_for_nobody(folder):
    with History.open(folder) as history:
        known = history.admit(a_drive(), a_place(), NOON)
        history.record(full_round(known))
        path = folder / HISTORY
        assert to_mend(path, readable) is False
        with history._writing() as connection:
            connection.execute("UPDATE day_book SET data = '['")
        assert to_mend(path, readable) is True
    with pytest.raises(HistoryError):
        to_mend(folder / "nowhere", readable)


def test_what_stays_unreadable_is_told_as_such(filled):
    def fails(_case):
        raise ValueError("invented")

    filled._db.conn.execute("DELETE FROM analyser_state")
    filled._db.conn.commit()
    with pytest.raises(HistoryGarbled, match="invented"):
        filled.mend(fails, readable, NOON, thorough=False)
