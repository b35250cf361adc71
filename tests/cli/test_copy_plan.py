import pytest

from diskwatch.history.writer import History
from diskwatch.records import IoSpan, Mount, Place
from tests.cli.run import run
from tests.history.examples import NOON, a_call, a_drive, a_part, a_pass, a_round, a_value
from tests.trends.test_read_rate import rollup

TB = 10**12


@pytest.fixture
def state(tmp_path):
    """A drive in trouble, with two file systems of which one has a hostile name, and bulk reads behind it."""
    folder = tmp_path / "state"
    with History.open(folder) as history:
        place = Place(
            device="/dev/sda",
            bay=None,
            lives_here=(
                Mount(point="/", used_bytes=TB // 10, total_bytes=TB),
                Mount(point="/srv/\x1b[31mred", used_bytes=TB, total_bytes=2 * TB),
            ),
        )
        known = history.admit(a_drive("INV-1", "/dev/sda"), place, NOON)
        read = a_pass(NOON, a_value(value=16))
        history.record(a_round(a_part(known, read, call=a_call())))
        history.admit(a_drive("INV-2", "/dev/sdb"), Place(device="/dev/sdb"), NOON)
        history.tell(known.number, {"backed-up": "2026-11-20"}, NOON)
    return folder


def test_the_plan_stays_within_80_columns_and_shows_no_raw_control_letter(state):
    ended = run("copy-plan", "INV-1", "--state", state)
    assert (ended.code, ended.err) == (0, "")
    assert max(map(len, ended.out.splitlines())) <= 80
    assert "\x1b" not in ended.out
    told = " ".join(ended.out.split())
    assert "By your word it was backed up on 2026-11-20" in told
    assert "16 sectors are known not to be readable now" in told
    assert "cannot be seen: it is not plugged in here now" in told
    assert told.index("/srv/\\x1b[31mred: 1 TB of 2 TB (data)") < told.index("/: 100 GB of 1 TB (system)")


def test_the_numbers_of_the_json_are_those_of_the_history(state):
    plan = run("copy-plan", "INV-1", "--json", "--state", state).json
    assert plan["schema"] == "diskwatch/copy-plan/1"
    assert plan["drive"]["serial"] == "INV-1"
    assert [held["what"] for held in plan["holds"]] == [["data"], ["system"]]
    assert plan["used_bytes"] == TB + TB // 10
    assert (plan["arrays"], plan["pending_sectors"], plan["backed_up"]) == (None, 16, "2026-11-20")
    assert plan["read_rate"]["source"] == "usual for its sort"
    assert plan["hours"]["low"] == pytest.approx(plan["used_bytes"] / plan["read_rate"]["high"] / 3600)
    assert set(plan["told"]) == {"urgency", "holds", "fellows", "duration", "unreadable", "order", "cautions"}


def test_the_rate_that_the_drive_really_gave_is_taken_where_it_was_read_in_bulk(state):
    counts = rollup(150e6).counts
    with History.open(state) as history:
        for five in range(4):
            history.add_traffic(
                [IoSpan(drive=1, at=NOON - 300 * five, seconds=300.0, counts=counts)],
            )
    rate = run("copy-plan", "INV-1", "--json", "--state", state).json["read_rate"]
    assert rate["source"] == "measured"
    assert rate["stretches"] >= 3
    assert rate["high"] == pytest.approx(150e6, rel=0.01)


def test_a_drive_of_which_nothing_is_known_has_a_plan_all_the_same(state):
    ended = run("copy-plan", "INV-2", "--state", state)
    assert ended.code == 0
    assert "No mounted file system is known on it" in " ".join(ended.out.split())


def test_an_unknown_or_ambiguous_drive_is_wrong_usage_and_no_history_nothing_to_work_on(state, tmp_path):
    assert run("copy-plan", "nobody", "--state", state).code == 2
    assert run("copy-plan", "INV", "--state", state).code == 2
    assert run("copy-plan", "INV-1", "--state", tmp_path / "none").code == 3
