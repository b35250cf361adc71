from diskwatch.history import packing
from diskwatch.history.stating import says_nothing_new
from diskwatch.records import Attribute, Failing, Outcome, Reading, SignalKind
from tests.history.examples import (
    DAY,
    NOON,
    a_part,
    a_pass,
    a_round,
    a_value,
    keep,
)


def test_a_value_is_stored_when_it_changes_and_every_pass_always(history, known, rows):
    for step, value in enumerate([0, 0, 0, 8, 8, 0]):
        keep(history, known, NOON + step, a_value(value=value))
    assert rows("SELECT at, value FROM fresh") == [(NOON, 0), (NOON + 3, 8), (NOON + 5, 0)]
    assert rows("SELECT at FROM pass") == [(NOON + step,) for step in range(6)]
    assert rows("SELECT since, value FROM latest") == [(NOON + 5, 0)]


def test_a_value_that_becomes_unknown_or_known_again_is_a_change(history, known, rows):
    keep(history, known, NOON, a_value(value=0))
    keep(history, known, NOON + 1, a_value(value=None, reason="The log could not be read."))
    keep(history, known, NOON + 2, a_value(value=None, reason="Another reason."))
    keep(history, known, NOON + 3, a_value(value=0))
    assert rows("SELECT value, reason FROM fresh ORDER BY at") == [
        (0, None),
        (None, "The log could not be read."),
        (None, "Another reason."),
        (0, None),
    ]


def test_the_word_5_is_not_the_number_5(history, known, rows):
    keep(history, known, NOON, a_value(value=5))
    keep(history, known, NOON + 1, a_value(value="5"))
    assert rows("SELECT value, typeof(value) FROM fresh ORDER BY at") == [(5, "integer"), ("5", "text")]


def test_a_signal_whose_unit_changes_starts_a_new_series(history, known, rows):
    keep(history, known, NOON, a_value(value=7, unit="opaque"))
    keep(history, known, NOON + 1, a_value(value=7, unit="sectors"))
    assert rows("SELECT unit, current FROM series ORDER BY number") == [("opaque", 0), ("sectors", 1)]
    assert rows("SELECT series, at, value FROM fresh ORDER BY at") == [(1, NOON, 7), (2, NOON + 1, 7)]


def test_a_signal_read_from_elsewhere_stays_the_same_series(history, known, rows):
    keep(history, known, NOON, a_value())
    keep(history, known, NOON + 1, a_value(kind=SignalKind.GAUGE))
    assert rows("SELECT number, kind FROM series") == [(1, "gauge")]
    assert rows("SELECT at FROM fresh") == [(NOON,)]


def test_values_of_past_days_are_filed_by_series_at_the_first_round_of_a_day(history, known, rows):
    keep(history, known, NOON, a_value(value=1))
    assert rows("SELECT count(*) FROM value") == [(0,)]
    keep(history, known, NOON + DAY, a_value(value=2))
    assert rows("SELECT series, at, value FROM value") == [(1, NOON, 1)]
    assert rows("SELECT series, at, value FROM fresh") == [(1, NOON + DAY, 2)]


def test_a_drive_that_was_not_read_leaves_its_values_alone(history, known, rows):
    keep(history, known, NOON, a_value(value=3))
    asleep = a_pass(NOON + 1, outcome=Outcome.ASLEEP, explanation="It sleeps and was left alone.")
    history.record(a_round(a_part(known, asleep), at=NOON + 1))
    assert rows("SELECT since, value FROM latest") == [(NOON, 3)]
    assert rows("SELECT passed_at, outcome FROM drive") == [(NOON + 1, "asleep")]


def test_a_signal_that_is_no_longer_read_is_no_longer_known(history, known, rows):
    keep(history, known, NOON, a_value(value=3), a_value("crc-errors", 1, "events"))
    keep(history, known, NOON + 1, a_value(value=3))
    keep(history, known, NOON + 2, a_value(value=3))
    keep(history, known, NOON + 3, a_value(value=3), a_value("crc-errors", 1, "events"))
    assert rows("SELECT at, value, reason FROM fresh WHERE series = 2 ORDER BY at") == [
        (NOON, 1, None),
        (NOON + 1, None, "it was not in this reading"),
        (NOON + 3, 1, None),
    ]


def test_what_a_judgement_rests_on_beside_the_values_is_kept_on_change(history, known, rows):
    def attribute(raw: str, failing: Failing | None) -> Attribute:
        return Attribute(
            number=5, name="Invented", value=1, worst=1, threshold=9, prefail=True, raw=raw, failing=failing
        )

    for step, (raw, failing) in enumerate(
        [("1", None), ("2", None), ("3", Failing.NOW), ("3", Failing.NOW), ("3", Failing.PAST)]
    ):
        pass_ = a_pass(NOON + step, attributes=(attribute(raw, failing),))
        history.record(a_round(a_part(known, pass_), at=NOON + step))
    kept = [(at, packing.beside(packed).attributes) for at, packed in rows("SELECT at, packed FROM beside")]
    assert kept == [(NOON, ()), (NOON + 2, (attribute("3", Failing.NOW),)), (NOON + 4, ())]


def test_a_reading_says_something_new_where_any_value_is_another_or_was_never_read(history, known):
    keep(history, known, NOON, a_value(value=3), a_value("crc-errors", None, reason="Why."))
    connection = history._db.conn
    for values, nothing in (
        ([a_value(value=3)], True),
        ([a_value(value=3), a_value("crc-errors", None, reason="Why.")], True),
        ([a_value(value=4)], False),
        ([a_value(value=3), a_value("crc-errors", None, reason="Because.")], False),
        ([], False),
        ([a_value(value=3), a_value("media-errors", 0)], False),
    ):
        assert says_nothing_new(connection, known.number, Reading(values=tuple(values))) is nothing


def test_two_names_that_are_kept_as_one_cost_no_round_and_the_later_counts(history, known, rows):
    for step in range(2):
        keep(history, known, NOON + step, a_value("odd-\ud800", 1), a_value("odd-\\ud800", 2))
    assert rows("SELECT signal FROM series") == [("odd-\\ud800",)]
    assert rows("SELECT at, value FROM fresh") == [(NOON, 2)]
