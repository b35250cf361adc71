from dataclasses import replace

import pytest
from hypothesis import given, strategies as st
from rich.text import Text

from diskwatch.dashboard.ages import clock
from diskwatch.dashboard.feed import Snapshot
from diskwatch.dashboard.head import (
    instead_of_bands,
    is_stale,
    last_pass_at,
    notes,
    tells_trouble,
    top_line,
    troubles,
)
from diskwatch.dashboard.weight import Face
from diskwatch.records import DriveLine, LastPass, Outcome
from tests.dashboard.drives import COPY, KEEP, NOW, RETIRE, TWELVE_MINUTES_AGO, bays
from tests.dashboard.strategies import unhurried

HALF_AN_HOUR = 1_800


def known(
    *drives: DriveLine, error: str | None = None, watcher: int | None = 1234, trouble: tuple[str, ...] = ()
) -> Snapshot:
    return Snapshot(bays=bays(*drives, watcher=watcher, trouble=trouble), error=error)


def top(
    snapshot: Snapshot | None, width: int = 80, now: int = NOW, watching: str = "watching from here"
) -> Text:
    return top_line(snapshot, watching, now, width, HALF_AN_HOUR)


def loud(line: Text) -> str:
    """What stands reversed in a line."""
    return "".join(line.plain[span.start : span.end] for span in line.spans if "reverse" in str(span.style))


def test_the_top_line_tells_product_hour_pass_and_watcher():
    line = top(known(KEEP)).plain
    assert line.startswith(f"diskwatch  {clock(NOW)}")
    assert line.endswith("last pass 12 minutes ago  watched by process 1234")
    assert len(line) == 80


def test_that_nobody_is_watching_stands_reversed():
    assert loud(top(known(KEEP, watcher=None))) == " NOBODY IS WATCHING "


def test_before_the_first_answer_the_way_of_opening_stands_there():
    assert top(None).plain.endswith("no pass known yet  watching from here")


@pytest.mark.parametrize("watcher", [1234, None])
def test_on_a_narrow_screen_the_watcher_and_the_pass_stay(watcher):
    line = top(known(KEEP, watcher=watcher), 40).plain
    assert "12 min ago" in line
    assert ("watched by 1234" if watcher else "NOBODY IS WATCHING") in line
    assert len(line) == 40


def test_without_any_pass_the_top_line_says_so():
    assert "no pass yet" in top(known(replace(KEEP, last_pass=None))).plain


def test_the_newest_pass_over_any_drive_counts():
    old = replace(COPY, last_pass=LastPass(at=NOW - 9_000, outcome=Outcome.READ, explanation=None))
    assert last_pass_at(bays(old, KEEP)) == TWELVE_MINUTES_AGO
    assert last_pass_at(bays()) is None


@pytest.mark.parametrize(("age", "stale"), [(3_600, False), (3_601, True)])
def test_a_pass_older_than_two_intervals_is_old(age, stale):
    at = TWELVE_MINUTES_AGO + age
    assert is_stale(bays(KEEP), at, HALF_AN_HOUR) is stale
    assert ("last pass" in loud(top(known(KEEP), now=at))) is stale
    assert any("Old figures" in told for told in troubles(known(KEEP), at, HALF_AN_HOUR)) is stale


def test_all_is_well_needs_no_notes():
    assert troubles(known(KEEP), NOW, HALF_AN_HOUR) == ()
    assert notes((), 80, Face(), most=3) == ()


def test_troubles_are_told_gravest_first():
    snapshot = known(KEEP, watcher=None, trouble=("The folder is full.",), error="the history is gone")
    told = troubles(snapshot, NOW + 86_400, HALF_AN_HOUR, waited=9)
    assert [text.split(":")[0] for text in told] == [
        "Not up to date",
        "Not up to date",
        "Old figures",
        "Nobody is watching",
        "The folder is full.",
    ]
    assert "not answered for 9 seconds" in told[0]
    assert told[1] == "Not up to date: the history is gone"


def test_a_history_never_read_is_a_trouble_too():
    assert troubles(Snapshot(bays=None, error="gone"), NOW, HALF_AN_HOUR) == ("Not up to date: gone",)


def test_a_short_wait_is_no_trouble():
    assert troubles(None, NOW, HALF_AN_HOUR, waited=5) == ()
    assert len(troubles(None, NOW, HALF_AN_HOUR, waited=6)) == 1


def test_troubles_beyond_the_room_are_counted():
    lines = [line.plain for line in notes(("one", "two", "three", "four"), 80, Face(), most=3)]
    assert lines == ["! one", "! two", "! 2 more troubles: press ? to read them."]
    assert [line.plain for line in notes(("one", "two"), 80, Face(), most=1)] == [
        "! 2 troubles: press ? to read them."
    ]


def test_an_empty_history_says_why_and_what_to_do():
    told = instead_of_bands(known(watcher=None), "nobody is watching")
    assert told is not None
    assert told.startswith(
        "No drive has been read yet, because nobody is watching so far. This screen: nobody is watching."
    )
    assert "run diskwatch watch --once" in told


def test_a_first_pass_under_way_asks_for_patience():
    told = instead_of_bands(known(), "w")
    assert told is not None
    assert "because process 1234 has not ended its first pass" in told
    assert "Wait a minute" in told


def test_a_trouble_explains_an_empty_history():
    told = instead_of_bands(known(trouble=("smartctl was not found; install it.",)), "w")
    assert told == "No drive has been read yet, because of this: smartctl was not found; install it."


def test_a_history_that_cannot_be_read_is_named_where_the_drives_would_be():
    snapshot = Snapshot(bays=None, error="history.db: permission denied")
    assert instead_of_bands(snapshot, "w") == "The drives cannot be shown: history.db: permission denied"
    assert tells_trouble(snapshot)


def test_where_drives_stand_nothing_stands_instead():
    assert instead_of_bands(known(RETIRE), "w") is None
    assert not tells_trouble(known(RETIRE))


def test_an_error_over_an_empty_history_is_still_noted():
    assert tells_trouble(known())
    assert not tells_trouble(known(error="gone"))


def test_troubles_from_outside_are_made_harmless():
    assert troubles(known(KEEP, trouble=("\x1b[2J",)), NOW, HALF_AN_HOUR) == ("\\x1b[2J",)


@unhurried
@given(st.text(max_size=80), st.integers(1, 200), st.booleans())
def test_no_head_is_wider_than_the_screen(text, width, nobody):
    snapshot = known(KEEP, watcher=None if nobody else 4_194_304)
    assert top(snapshot, width, watching=text).cell_len <= width
    assert top(None, width, watching=text).cell_len <= width
    assert all(line.cell_len <= width for line in notes((text,), width, Face(), most=2))
