import json

import pytest

from diskwatch.cli.rehearse import live_through
from diskwatch.cli.shown import Shown
from diskwatch.errors import DiskwatchError
from diskwatch.history.reader import Past
from diskwatch.rehearsal import scenarios
from diskwatch.rehearsal.course import Course
from diskwatch.units import DAY
from tests.cli.test_rehearse import SMALL


@pytest.fixture(scope="module")
def rehearsed(tmp_path_factory):
    """A history of invented drives, one of them scratched; the answers from it, and its last moment."""
    folder = tmp_path_factory.mktemp("rehearsed")
    script = folder / "small.toml"
    script.write_text(SMALL, encoding="utf-8")
    course = Course(scenarios.load(str(script)), days=19)
    assert live_through(course, folder / "state", None) is None
    with Past.open(folder / "state") as past:
        yield past, Shown(lambda: past, folder / "state", None), course.clock.now()


@pytest.fixture
def scratched(rehearsed):
    return rehearsed[0].find("INVENTED-1").number


def test_every_drive_has_its_line_through_time(rehearsed, scratched):
    past, shown, now = rehearsed
    strands = shown.strands(past.bays(now))
    assert set(strands) == {line.number for line in past.bays(now).every}
    days = [day for day, _ in strands[scratched].evidence]
    assert days == sorted(set(days))
    assert max(worth for _, worth in strands[scratched].evidence) > 30


def test_the_chain_begins_with_what_to_do_and_holds_what_why_tells(rehearsed, scratched):
    _, shown, now = rehearsed
    chapters = shown.why(scratched, now)
    titles = [chapter.title for chapter in chapters]
    assert titles[:2] == ["What to do, and by when", "What would change the call"]
    assert len(titles) == len(set(titles))
    assert {"What stands", "Rule that decided", "Margin"} <= set(titles)
    assert all(isinstance(line, str) and line for chapter in chapters for line in chapter.lines)


def test_the_plan_is_the_one_of_copy_plan_in_its_order(rehearsed, scratched):
    _, shown, now = rehearsed
    chapters = shown.plan(scratched, now)
    assert chapters[0].title == "How urgent it is"
    (order,) = [chapter for chapter in chapters if chapter.numbered]
    assert order.title == "In this order"


def test_the_signals_that_the_call_rests_on_come_first_and_have_their_values(rehearsed, scratched):
    past, shown, now = rehearsed
    curves = shown.curves(scratched, now - 30 * DAY, now)
    line = past.find("INVENTED-1")
    assert curves[0].signal in line.findings[0].signals
    assert {curve.signal for curve in curves} == {signal.name for signal in line.signals}
    for curve in curves:
        if isinstance(curve.now, int):
            assert curve.points[-1][1] == curve.now
            assert list(curve.points) == sorted(curve.points)


def test_time_in_which_nobody_was_there_to_read_it_is_a_gap(rehearsed, scratched):
    _, shown, now = rehearsed
    (since, until) = shown.curves(scratched, now - 30 * DAY, now + 9 * DAY)[0].gaps[-1]
    assert now - DAY <= since <= now
    assert until == now + 9 * DAY
    assert shown.curves(scratched, now - DAY, now)[0].gaps == ()


def test_the_day_book_comes_by_drive_and_kind_with_its_newest(rehearsed, scratched):
    _, shown, _ = rehearsed
    entries = shown.day_book(scratched, ("call",), 2)
    assert len(entries) == 2
    assert {entry.kind for entry in entries} == {"call"}
    assert {entry.drive for entry in entries} == {scratched}


def test_the_ticket_is_shown_and_written_alike_and_no_file_is_written_over(
    rehearsed, scratched, tmp_path, monkeypatch
):
    _, shown, now = rehearsed
    monkeypatch.chdir(tmp_path)
    assert "INVENTED-1" in shown.ticket(scratched, (), now)
    assert "INVENTED-1" not in shown.ticket(scratched, ("serial",), now)
    first, second = shown.save(scratched, ("serial",), now), shown.save(scratched, (), now)
    assert first != second
    written = [
        path.read_text(encoding="utf-8") for path in sorted(tmp_path.iterdir(), key=lambda one: one.name)
    ]
    assert len(written) == 2
    assert sum("INVENTED-1" in text for text in written) == 1
    assert all(json.loads(text)["digest"]["sha256"] for text in written)


def test_notices_are_put_off_for_this_user(rehearsed, scratched, tmp_path, monkeypatch):
    _, shown, now = rehearsed
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path))
    assert "are put off for you until" in shown.put_off(scratched, now)
    assert [path for path in tmp_path.rglob("*") if path.is_file()]


def test_a_drive_that_is_not_known_any_more_is_an_error_that_can_be_told(rehearsed):
    _, shown, now = rehearsed
    with pytest.raises(DiskwatchError, match="does not know this drive any more"):
        shown.why(999, now)
