import random

import pytest
from hypothesis import given, settings, strategies as st

from diskwatch.history import thinning
from diskwatch.history.keeping import DETAIL_COPIES
from diskwatch.history.questions import pass_days, passes, series
from diskwatch.history.stating import file_past_days
from diskwatch.history.writer import History
from diskwatch.records import KnownDrive, Outcome, SignalKind
from tests.history.examples import DAY, NOON, a_drive, a_part, a_pass, a_place, a_round, a_span, a_value

WEEK = 7 * DAY
BEGIN = NOON // WEEK * WEEK
WEEKS = DETAIL_COPIES + 6
END = BEGIN + WEEKS * WEEK


@pytest.fixture
def connection(history):
    return history._db.conn


@pytest.fixture
def known(history):
    return history.admit(a_drive(), a_place(), BEGIN)


def _read(history: History, known: KnownDrive, at: int, number: int, outcome: Outcome = Outcome.READ) -> None:
    values = (
        a_value(value=number // 40),
        a_value("power-on-hours", number, "hours", SignalKind.TIME),
        a_value("temperature", 30 + number % 7, "celsius", SignalKind.GAUGE),
        a_value("data-written", 2**70 + number, "bytes"),
    )
    pass_ = a_pass(at, *(values if outcome is Outcome.READ else ()), outcome=outcome)
    history.record(a_round(a_part(known, pass_, state=f"state {number}"), at=at))


def _file(history: History, at: int) -> None:
    with history._writing() as connection:
        file_past_days(connection, at // DAY)


def _all_of_it(history: History, now: int) -> int:
    bites = 0
    while history.thin(now):
        bites += 1
        assert bites < 10_000
    return bites


def _half_a_year(history: History, known: KnownDrive) -> None:
    """Six passes a day; the drive sleeps on every fifth day's last pass."""
    for number in range(WEEKS * 7 * 6):
        at = BEGIN + number * DAY // 6
        asleep = number % 30 == 29
        _read(history, known, at, number, Outcome.ASLEEP if asleep else Outcome.READ)
    _file(history, END)


def _held(points: tuple[tuple[int, int | str | None], ...], at: int) -> int | str | None:
    return next((value for when, value in reversed(points) if when <= at), None)


def test_counts_stay_for_ever_and_what_moves_becomes_one_value_a_day(history, known, connection):
    _half_a_year(history, known)
    names = ("pending-sectors", "power-on-hours", "temperature", "data-written")
    before = {name: series(connection, 1, name, None) for name in names}
    horizon = thinning.detail_horizon(connection, 1, END)
    assert horizon is not None
    assert _all_of_it(history, END) > 0
    after = {name: series(connection, 1, name, None) for name in names}
    assert after["pending-sectors"] == before["pending-sectors"]
    thin_before = horizon // DAY * DAY
    for name, points in after.items():
        assert set(points) <= set(before[name])
        assert [one for one in points if one[0] >= thin_before] == [
            one for one in before[name] if one[0] >= thin_before
        ]
        # At the end of every day, and so at the horizon, each value is what it was.
        for midnight in range(BEGIN + DAY, END, DAY):
            assert _held(points, midnight - 1) == _held(before[name], midnight - 1)
    days = (thin_before - BEGIN) // DAY
    assert sum(at < thin_before for at, _ in after["power-on-hours"]) == days
    assert sum(at < thin_before for at, _ in after["data-written"]) == days
    assert days < sum(at < thin_before for at, _ in after["temperature"]) <= 2 * days


def test_the_highest_temperature_of_every_day_is_kept(history, known, connection):
    _half_a_year(history, known)

    def highest():
        return connection.execute(
            "SELECT at / 86400, max(value) FROM value JOIN series ON number = series"
            " WHERE signal = 'temperature' GROUP BY 1"
        ).fetchall()

    before = highest()
    _all_of_it(history, END)
    assert highest() == before


def test_passes_become_changes_of_outcome_and_the_counts_of_every_day_stay_exact(history, known, connection):
    _half_a_year(history, known)
    counted, all_passes = pass_days(connection, 1, None), passes(connection, 1, None, None)
    assert sum(one.passes for one in counted) == len(all_passes)
    horizon = thinning.detail_horizon(connection, 1, END)
    assert horizon is not None
    _all_of_it(history, END)
    assert pass_days(connection, 1, None) == counted
    assert pass_days(connection, 1, END - 9 * DAY) == tuple(one for one in counted if one.day >= END // DAY - 9)
    left = passes(connection, 1, None, None)
    thin = [one for one in left if one.at < horizon]
    assert [one for one in left if one.at >= horizon] == [one for one in all_passes if one.at >= horizon]
    changes = [
        one
        for earlier, one in zip((None, *all_passes), all_passes, strict=False)
        if one.at < horizon and (earlier is None or earlier.outcome is not one.outcome)
    ]
    assert thin == changes


@pytest.mark.parametrize("bite", [1, 2, 3, 7, 200])
def test_passes_of_one_second_are_all_counted_wherever_a_bite_ends(
    history, known, connection, monkeypatch, bite
):
    monkeypatch.setattr(thinning, "BITE", bite)
    outcomes = [Outcome.READ, Outcome.ASLEEP, Outcome.READ, Outcome.TIMED_OUT, Outcome.READ]
    for number in range(WEEKS * 7):
        for nth, outcome in enumerate(outcomes):
            _read(history, known, BEGIN + number * DAY, 10 * number + nth, outcome)
    _all_of_it(history, END)
    (mark,) = connection.execute("SELECT before FROM thinned WHERE what = 'pass'").fetchone()
    counts = {(one.outcome, one.passes) for one in pass_days(connection, 1, None)}
    assert counts == {(Outcome.READ, 3), (Outcome.ASLEEP, 1), (Outcome.TIMED_OUT, 1)}
    kept = connection.execute("SELECT count(*) FROM pass WHERE at < ?", (mark,)).fetchone()[0]
    # Of each second four changes, and the very first pass.
    assert kept == ((mark - 1 - BEGIN) // DAY + 1) * 4 + 1


def test_behind_the_horizon_stands_an_exact_copy_of_the_state(history, known, connection):
    _half_a_year(history, known)
    _all_of_it(history, END)
    horizon = thinning.detail_horizon(connection, 1, END)
    assert horizon is not None
    copies = history.copies(1)
    assert horizon - 1 in [at for at, _ in copies]
    # The copy of a week is the state after the last pass of that week, to the letter.
    assert copies == tuple(
        (BEGIN + (week + 1) * WEEK - DAY // 6, f"state {(week + 1) * 42 - 1}") for week in range(WEEKS - 1)
    )
    assert END - horizon >= 90 * DAY


def test_thinning_again_changes_nothing(history, known, connection):
    _half_a_year(history, known)
    _all_of_it(history, END)
    before = list(connection.iterdump())
    assert not history.thin(END)
    assert list(connection.iterdump()) == before


def test_nothing_is_thinned_before_there_are_thirteen_copies_whatever_the_clock_says(
    history, known, connection
):
    for number in range(6 * 30):
        _read(history, known, BEGIN + number * DAY // 6, number)
    _file(history, BEGIN + 40 * DAY)
    before = list(connection.iterdump())
    assert not history.thin(BEGIN + 3650 * DAY)
    assert list(connection.iterdump()) == before


def test_a_clock_that_was_a_year_ahead_for_a_day_thins_nothing_fresh(history, known, connection):
    _half_a_year(history, known)
    _read(history, known, END + 365 * DAY, 1)
    horizon = thinning.detail_horizon(connection, 1, END + 365 * DAY)
    assert horizon is not None
    # The false day counts as one week's copy, no more.
    assert END - horizon >= (DETAIL_COPIES - 2) * WEEK


@settings(max_examples=25)
@given(st.integers(2, 60), st.lists(st.integers(0, 3), min_size=30, max_size=120))
def test_whatever_the_bite_the_result_is_the_same(bite, steps):
    """A bite may end anywhere, also in the middle of a day."""

    def told(size: int) -> list[str]:
        with History.in_memory() as history, pytest.MonkeyPatch.context() as patch:
            patch.setattr(thinning, "BITE", size)
            patch.setattr(thinning, "DETAIL_COPIES", 1)
            known = history.admit(a_drive(), a_place(), BEGIN)
            at = BEGIN
            for number, step in enumerate(steps):
                at += step * 20_000 + 1
                _read(history, known, at, number, Outcome.ASLEEP if step == 3 else Outcome.READ)
            _file(history, at + DAY)
            _all_of_it(history, at + 200 * DAY)
            return [line for line in history._db.conn.iterdump() if "_sqlite_migrations" not in line]

    assert told(bite) == told(10_000)


@pytest.mark.usefixtures("known")
def test_minutes_stay_seven_days_and_five_minutes_ninety_once_they_are_condensed(history, connection):
    days = 100
    for day in range(days):
        history.add_traffic([a_span(1, BEGIN + day * DAY + minute * 60) for minute in (10, 500, 900)])
    now = BEGIN + days * DAY
    _all_of_it(history, now)

    def kept(table: str) -> set[int]:
        return {day for (day,) in connection.execute(f"SELECT at / 86400 FROM {table}")}  # noqa: S608  # our own names

    first = BEGIN // DAY
    assert kept("io_minute") == set(range(first + days - 7, first + days))
    assert kept("io_five") == set(range(first, first + days))
    while (found := history.uncondensed(now + DAY)) is not None:
        history.condense(found[0], {})
    _all_of_it(history, now)
    assert kept("io_five") == set(range(first + days - 90, first + days))


@pytest.mark.usefixtures("known")
def test_with_a_clock_far_ahead_the_newest_days_of_traffic_stay(history):
    history.add_traffic([a_span(1, BEGIN + day * DAY) for day in range(1, 4)])
    history.add_traffic([a_span(1, BEGIN + 400 * DAY)])
    assert not history.thin(BEGIN + 400 * DAY)


def test_a_bite_is_small(history, known, connection):
    noise = random.Random(3)  # noqa: S311  # figures, not secrets
    _half_a_year(history, known)
    history.add_traffic([a_span(1, BEGIN + noise.randrange(30 * DAY)) for _ in range(3000)])
    while True:
        before = connection.total_changes
        if not history.thin(END):
            break
        # Each row that it looks at is at most deleted once and counted once.
        assert connection.total_changes - before <= 2 * thinning.BITE + 2


@pytest.mark.parametrize("clock", ["steady", "thrice a second", "set back"])
def test_however_small_a_bite_is_thinning_ends_with_the_same_rows(monkeypatch, clock):
    def thinned(bite):
        monkeypatch.setattr(thinning, "BITE", bite)
        noise = random.Random(5)  # noqa: S311  # a life, not a secret
        with History.in_memory() as history:
            known = history.admit(a_drive(), a_place(), BEGIN)
            for number in range(WEEKS * 7 * 4):
                at = BEGIN + number * DAY // 4
                if clock == "thrice a second":
                    at -= at % DAY % (DAY // 2)
                elif clock == "set back" and number >= 200:
                    at -= 9 * DAY
                _read(history, known, at, noise.randrange(1_000), noise.choice([*Outcome]))
            with history._writing() as connection:
                file_past_days(connection, END // DAY + 1)
            for _ in range(20_000):
                if not history.thin(END):
                    break
            else:
                raise AssertionError("thinning does not end")
            tables = ("value", "beside", "pass", "pass_day", "thinned")
            return {name: history._db.conn.execute(f"SELECT * FROM {name}").fetchall() for name in tables}  # noqa: S608  # our own names

    whole = thinned(10**6)
    assert [thinned(bite) == whole for bite in (1, 2, 3, 200)] == [True] * 4
