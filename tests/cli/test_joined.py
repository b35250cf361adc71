import json
import os

import pytest
from hypothesis import given, strategies as st

from diskwatch.cli.joined import joined_lines, saved, worst_first
from diskwatch.errors import DiskwatchError, UsageError
from tests.cli.run import run
from tests.cli.test_watch import GOOD, once

AT = "2026-12-01T12:00:00Z"
NOON = 1_796_126_400


def drive(serial="INV-1", call="keep", **more):
    return {
        "serial": serial,
        "model": "Aldertree 4000",
        "device": "/dev/sda",
        "call": call,
        "capacity_bytes": 4 * 10**12,
        "lives_here": ["/srv"],
        "last_pass": {"at": AT, "outcome": "read"},
        "reason": "Because.",
        **more,
    }


def answer(*drives, **more):
    return {
        "schema": "diskwatch/bays/1",
        "machine": "studio",
        "at": AT,
        "watched": True,
        "drives": drives,
        **more,
    }


@pytest.fixture
def file(tmp_path):
    """Writes what a machine saved."""

    def write(content, name="saved.json"):
        path = tmp_path / name
        path.write_text(content if isinstance(content, str) else json.dumps(content))
        return path

    return write


def test_all_drives_stand_in_one_list_worst_first_with_their_machine(file):
    one = saved(file(answer(drive("A", "look"), drive("B", "keep")), "a.json"))
    other = saved(file(answer(drive("C", "retire"), drive("D", None), machine="office"), "b.json"))
    found = [(at.machine, held["serial"]) for at, held in worst_first([one, other])]
    assert found == [("office", "C"), ("office", "D"), ("studio", "A"), ("studio", "B")]


def test_a_machine_that_does_not_say_its_name_bears_that_of_the_file(file):
    assert saved(file(answer(machine=None), "attic.json")).machine == "attic"


def test_a_list_that_was_joined_before_keeps_each_drives_machine(file):
    one = saved(file(answer(drive("A", machine="office"))))
    assert any("office: Aldertree" in part for part in joined_lines([one], NOON, 80))


@pytest.mark.parametrize(
    ("content", "why"),
    [
        ("", "is no list of drives"),
        ("[]", "its schema is not"),
        ('{"schema": "diskwatch/ticket/1"}', "its schema is not"),
        ("[" * 100_000, "is no list of drives"),
        ('{"schema": NaN}', "NaN"),
        (answer(at=None), "a time is missing"),
        (answer(at="soon"), "soon is no time"),
        (answer() | {"drives": {}}, "no list of drives"),
        (answer("x"), "drive 1 is no object"),
        (answer(drive(), drive(call="panic")), "the call of drive 2"),
        (answer(drive(serial=7)), "serial of drive 1 is no text"),
        (answer(drive(call=["keep"])), "the call of drive 1"),
        (answer(drive(capacity_bytes=1.5)), "capacity_bytes of drive 1"),
        (answer(drive(capacity_bytes="x")), "capacity_bytes of drive 1"),
        (answer(drive(lives_here="/")), "lives_here of drive 1"),
        (answer(drive(last_pass={"at": AT})), "last_pass of drive 1"),
        (answer(drive(last_pass={"at": "x", "outcome": "read"})), "x is no time"),
    ],
)
def test_a_file_that_is_no_such_list_is_named_with_what_is_wrong(file, content, why):
    with pytest.raises(UsageError, match=r"saved\.json is no list of drives") as told:
        saved(file(content))
    assert why in str(told.value)
    assert len(str(told.value)) < 500


def test_a_file_that_cannot_be_read_is_named(tmp_path):
    for path in (tmp_path / "none", tmp_path):
        with pytest.raises(DiskwatchError, match="cannot be read") as told:
            saved(path)
        assert told.value.exit_code == 4


def test_what_a_file_holds_stays_inert_and_within_the_width(file):
    odd = "\x1b[2J\u202e" * 30
    one = saved(file(answer(drive(odd, reason=odd, device=odd, lives_here=[odd]), machine=odd)))
    lines = list(joined_lines([one], NOON, 80))
    assert max(map(len, lines)) <= 80
    assert not any("\x1b" in part or "\u202e" in part for part in lines)


things = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False, allow_infinity=False) | st.text(),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(), inner, max_size=3),
    max_leaves=5,
)


@given(name=st.sampled_from(sorted(drive())), thing=things)
def test_whatever_stands_in_a_drive_it_is_shown_or_refused(tmp_path_factory, name, thing):
    path = tmp_path_factory.mktemp("joined") / "saved.json"
    path.write_text(json.dumps(answer({**drive(), name: thing})))
    try:
        one = saved(path)
    except UsageError:
        return
    assert list(joined_lines([one], NOON, 80))


@pytest.fixture
def state(tmp_path):
    once(tmp_path, [GOOD])
    return tmp_path / "state"


def test_the_command_joins_its_own_drives_and_those_of_others(state, file, tmp_path):
    mine = run("bays", "--json", "--state", state)
    other = file(answer(drive("OTHER-1", "retire"), machine="office"), "office.json")
    ended = run("bays", "--join", other, "--state", state)
    assert (ended.code, ended.err) == (0, "")
    assert "office: watched, saved" in ended.out
    assert ended.out.index("OTHER-1") < ended.out.index("/dev/inv1")
    told = run("bays", "--json", "--join", other, "--state", state).json
    assert told["drives"][0]["machine"] == "office"
    assert {one["machine"] for one in told["drives"]} == {"office", mine.json["machine"]}
    assert len(told["drives"]) == len(mine.json["drives"]) + 1
    assert [one["file"] for one in told["joined"]] == [None, str(other)]
    assert run("bays", "--code", "--join", other, "--state", state).code == 13
    saved_mine = file(mine.out, "mine.json")
    alone = run("bays", "--join", saved_mine, other, "--state", tmp_path / "none")
    assert alone.code == 0, "a machine without drives of its own may look after others"


def test_one_wrong_file_is_named_and_nothing_is_shown(state, file, tmp_path):
    good = file(answer(drive()), "good.json")
    ended = run("bays", "--join", good, file("{}", "bad.json"), "--state", state)
    assert (ended.code, ended.out) == (2, "")
    assert "bad.json is no list of drives" in ended.err
    ended = run("bays", "--join", good, tmp_path / "none.json", "--state", state)
    assert (ended.code, ended.out) == (4, "")
    assert "none.json cannot be read" in ended.err
    assert run("bays", "--join", "--state", state).code == 2


def test_no_drive_on_any_machine_is_nothing_to_work_on(file, tmp_path):
    assert run("bays", "--join", file(answer()), "--state", tmp_path / "none").code == 3


@pytest.mark.skipif(os.geteuid() == 0, reason="root may read everything")
def test_a_file_without_the_right_to_read_ends_with_4(state, file):
    path = file(answer())
    path.chmod(0)
    assert run("bays", "--join", path, "--state", state).code == 4
