import pytest

from diskwatch.cli.daybook import since_when
from diskwatch.errors import UsageError
from diskwatch.history.writer import History
from diskwatch.records import Entry
from tests.cli.run import run
from tests.samples import DAY, HDD, HERE, NOON


@pytest.fixture
def state(tmp_path):
    with History.open(tmp_path) as history:
        known = history.admit(HDD, HERE, NOON)
        history.note(
            Entry(at=NOON, drive=known.number, kind="first-seen", text="First seen \x1b[31mhere."),
            Entry(at=NOON + DAY, drive=None, kind="watch", text="Watching began.", data={"n": 1}),
        )
    return tmp_path


def test_the_json_has_the_shape_that_scripts_rely_on(state):
    answer = run("daybook", "--json", "--state", state).json
    assert set(answer) >= {"schema", "entries"}
    first, second = answer["entries"]
    assert set(first) == {"at", "drive", "kind", "text", "data"}
    assert (first["drive"], second["drive"]) == ("INV0001", None)
    assert second["data"] == {"n": 1}


def test_text_from_outside_reaches_the_terminal_without_its_escapes(state):
    assert "\x1b" not in run("daybook", "--state", state).out


def test_it_can_be_asked_for_one_drive_or_from_a_time_on(state):
    assert len(run("daybook", "--json", "--drive", "INV0001", "--state", state).json["entries"]) == 1
    since = "2024-10-05T11:00:00Z"
    assert [
        one["kind"] for one in run("daybook", "--json", "--since", since, "--state", state).json["entries"]
    ] == ["watch"]


def test_a_drive_that_is_not_there_and_a_time_that_is_none_are_wrong_usage(state):
    assert run("daybook", "--drive", "nobody", "--state", state).code == 2
    assert run("daybook", "--since", "yesterday-ish", "--state", state).code == 2


def test_times_are_read_as_rfc_3339_or_as_a_span_before_now():
    assert since_when("7d", NOON) == NOON - 7 * DAY
    assert since_when("1970-01-02", NOON) == DAY
    assert since_when("1970-01-02T01:00:00+01:00", NOON) == DAY
    with pytest.raises(UsageError, match="no time"):
        since_when("soon", NOON)
