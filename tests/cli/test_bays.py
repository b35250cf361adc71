from dataclasses import replace

import pytest

from diskwatch.cli.answers import drive_answer
from diskwatch.cli.bays import listed, worst
from diskwatch.records import Bays, Call, CallWord, DriveLine, LastPass, Mount, Outcome, Place
from tests.cli.run import run, settings_for
from tests.player import lay
from tests.samples import HDD, HERE, NOON

CONTRACT = {
    *("serial", "model", "wwn", "device", "bay", "label", "kind", "capacity_bytes", "rotation_rpm"),
    *("lives_here", "last_pass", "call", "cause", "cause_probability", "cause_second", "reason"),
    *("margin_days", "odds", "signals"),
}


def line(word=None, **more):
    call = word and Call(
        word=word,
        at=NOON,
        cause=None,
        cause_probability=None,
        cause_second=None,
        reason="Because.",
        rule="x",
        evidence=None,
    )
    return DriveLine(
        number=1, drive=HDD, place=HERE, label=None, first_seen=NOON, last_pass=None, call=call, **more
    )


@pytest.fixture
def state(tmp_path):
    command = lay(
        tmp_path / "player",
        [
            {"node": "/dev/inv1", "type": "sat", "folder": "invented_hdd_failing"},
            {"node": "/dev/inv2", "type": "nvme", "folder": "invented_nvme_json"},
        ],
        json=True,
    )
    folder = tmp_path / "state"
    settings = settings_for(command, tmp_path, more='[watch]\nonly = ["/dev/inv1", "/dev/inv2"]\n')
    assert run("watch", "--once", "--state", folder, "--settings", settings).code == 0
    return folder


def test_the_json_has_the_shape_that_scripts_rely_on(state):
    answer = run("bays", "--json", "--state", state).json
    assert {"schema", "at", "watched", "drives"} <= set(answer)
    assert answer["watched"] is False
    for drive in answer["drives"]:
        assert set(drive) >= CONTRACT
        assert set(drive["last_pass"]) >= {"at", "outcome"}
        for signal in drive["signals"].values():
            assert set(signal) >= {"value", "unit", "since", "evidence"}
    worst_first = answer["drives"][0]
    assert (worst_first["call"], worst_first["cause"]) == ("retire", "media")


def test_integers_that_json_readers_cannot_hold_exactly_are_strings(state):
    answer = run("bays", "--json", "--state", state).json
    values = [signal["value"] for drive in answer["drives"] for signal in drive["signals"].values()]
    assert all(abs(value) <= 2**53 for value in values if isinstance(value, int))


@pytest.mark.parametrize(
    ("words", "code"),
    [
        ((CallWord.KEEP,), 0),
        ((CallWord.KEEP, None), 1),
        ((CallWord.LOOK, CallWord.COPY), 2),
        ((CallWord.RETIRE, None), 3),
    ],
)
def test_the_worst_call_counts_and_a_drive_that_was_never_read_counts_as_look(words, code):
    assert worst(Bays(at=NOON, watcher=None, drives=tuple(line(word) for word in words))) == code


def test_code_ends_with_the_worst_call(state):
    assert run("bays", "--code", "--state", state).code == 13


def test_a_state_without_any_reading_exits_3_and_json_still_prints_its_object(tmp_path):
    plain = run("bays", "--state", tmp_path / "nothing")
    assert (plain.code, plain.out) == (3, "")
    ended = run("bays", "--json", "--state", tmp_path / "nothing")
    assert (ended.code, ended.json["drives"]) == (3, [])
    assert ended.err.count("\n") == 1


@pytest.mark.parametrize("width", [40, 80, 120])
def test_the_list_fits_its_width_and_names_what_lives_there(width):
    place = Place(device="/dev/sda", bay="pci-0000:00:17.0-ata-1", lives_here=(Mount(point="/srv/photos"),))
    bays = Bays(at=NOON + 240, watcher=None, drives=(line(CallWord.COPY),))
    bays = Bays(
        at=NOON + 240,
        watcher=None,
        drives=(
            DriveLine(
                number=1, drive=HDD, place=place, label="archive", first_seen=NOON, call=bays.drives[0].call,
                last_pass=LastPass(at=NOON, outcome=Outcome.READ, explanation=None),
            ),
        ),
    )  # fmt: skip
    told = listed(bays, width)
    assert max(map(len, told.splitlines())) <= width
    assert "NOBODY IS WATCHING" in told
    assert "copy" in told
    assert "/srv/photos" in " ".join(told.split())
    assert "4 minutes ago" in " ".join(told.split())


def test_why_a_drive_was_left_out_stands_behind_its_last_pass():
    last = LastPass(at=NOON - 7200, outcome=Outcome.READ, explanation=None)
    silent = replace(line(), last_pass=last, left_out="It is asked again later.")
    told = listed(Bays(at=NOON, watcher=7, drives=(silent,)), 200)
    assert "Last pass 2 hours ago: read. It is asked again later." in told
    assert drive_answer(silent)["left_out"] == "It is asked again later."
    assert drive_answer(line())["left_out"] is None
