import textwrap
from typing import get_args

import msgspec
import pytest

from diskwatch.errors import UsageError
from diskwatch.records import CallWord
from diskwatch.rehearsal import happenings, scenarios
from diskwatch.rehearsal.happenings import CableLoosens, Scratch
from diskwatch.rehearsal.scenario import (
    MARK,
    BaySpec,
    DriveSpec,
    Expectation,
    Holiday,
    RoomSpec,
    Scenario,
)
from diskwatch.rehearsal.verdict import Verdict
from tests.rehearsal.test_conclusions import lived

SMALL = """
title = "small"
about = "a test"
days = 10
[[drive]]
serial = "INVENTED-1"
model = "Nordwall INVENTED"
kind = "hdd"
device = "/dev/sda"
bay = "one"
capacity_gb = 1000
"""


SECOND = (
    SMALL[SMALL.index("[[drive]]") :]
    .replace("INVENTED-1", "INVENTED-2")
    .replace("sda", "sdb")
    .replace('"one"', '"two"')
)

MOVED = """
[[event]]
what = "moved"
day = {day}
drive = "INVENTED-{drive}"
to = "{to}"
"""


def written(tmp_path, text):
    path = tmp_path / "mine.toml"
    path.write_text(text, encoding="utf-8")
    return str(path)


def test_every_scenario_that_was_asked_for_is_there_and_sound():
    asked = {
        "scratched-media",
        "weak-head",
        "loose-cable",
        "worn-solid-state-drive",
        "exhausted-spare",
        "hot-summer",
        "blocked-fan",
        "bad-power-strip",
        "vanishing-controller",
        "busy-month",
        "firmware-update",
        "old-defects",
        "sudden-death",
    }
    known = scenarios.listed()
    assert asked <= set(known)
    assert scenarios.DEFAULT in known
    for name, one in known.items():
        assert one.expect, name
        assert all(MARK in drive.model for drive in one.drive)
        assert "invented" in one.place
        assert not list(scenarios.faults(one))


@pytest.mark.parametrize("name", ["busy-month", "firmware-update", "old-defects"])
def test_where_nothing_is_wrong_every_drive_is_to_stay_keep(name):
    wishes = scenarios.load(name).expect
    assert any(wish.stays is CallWord.KEEP for wish in wishes)


def test_an_owners_file_is_read_from_anywhere(tmp_path):
    assert scenarios.load(written(tmp_path, SMALL)).drive[0].capacity == 10**12


@pytest.mark.parametrize(
    ("text", "told"),
    [
        (SMALL + "colour = 1\n", "colour"),
        (SMALL.replace("days = 10", "days = 0"), "mine.toml: days: expected a whole number from 1 to"),
        (SMALL.replace("days = 10", 'days = "ten"'), "mine.toml: days: expected a whole number from 1 to"),
        (SMALL.replace('"INVENTED-1"', '"X-1"'), "X-1 does not begin with INVENTED"),
        (SMALL.replace("Nordwall INVENTED", "Nordwall"), "Nordwall does not contain INVENTED"),
        (SMALL + '[[event]]\nwhat = "cable-changed"\nday = 1\nbay = "two"\n', "bay two"),
        (SMALL + '[[event]]\nwhat = "blocks-fail"\nday = 1\ndrive = "INVENTED-1"\na_year = 2\n', "solid-state"),
        (SMALL + '[[event]]\nwhat = "rain"\nday = 1\n', "rain"),
        (SMALL + '[[expect]]\nbecause = "it is so"\n', "asks for nothing"),
        (SMALL + '[[expect]]\ncall = "look"\nbecause = "it is so"\n', "by_day"),
        (SMALL + '[[expect]]\ndrive = "INVENTED-9"\nstays = "keep"\nbecause = "x"\n', "INVENTED-9"),
        (SMALL + SMALL[SMALL.index("[[drive]]") :], "two drives have the serial"),
        (
            SMALL + SECOND + MOVED.format(day=4, drive=1, to="two"),
            "an event of day 4 moves INVENTED-1 to two, where INVENTED-2 is; expected a bay that is free then",
        ),
        (
            SMALL.replace("days = 10", 'days = 10\nhabit = "office"\nbackup_hour = 22') + 'backup = "source"\n',
            "mine.toml: backup_hour: expected one at which a machine of the habit office is on (",
        ),
        (
            SMALL.replace("days = 10", 'days = 10\nhabit = "home"\nbackup_hour = 3') + "self_tests_days = 2\n",
            "not 3; self_tests_days of INVENTED-1 would do nothing",
        ),
        ("title = ", "no TOML"),
    ],
)
def test_a_wrong_file_is_refused_in_one_line_that_names_it_and_the_fault(tmp_path, text, told):
    with pytest.raises(UsageError) as caught:
        scenarios.load(written(tmp_path, text))
    assert told in str(caught.value)
    assert "mine.toml" in str(caught.value)
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize("gone", ['what = "dies"', 'what = "vanishes"'])
def test_a_bay_is_free_once_its_drive_has_moved_on_or_is_gone_for_ever(tmp_path, gone):
    third = '[[bay]]\nname = "three"\n'
    swapped = "".join(
        MOVED.format(day=day, drive=drive, to=to)
        for day, drive, to in ((2, 2, "three"), (3, 1, "two"), (3, 2, "one"))
    )
    assert scenarios.load(written(tmp_path, SMALL + SECOND + third + swapped)).event
    left = f'[[event]]\nday = 1\ndrive = "INVENTED-2"\n{gone}\n'
    assert scenarios.load(
        written(tmp_path, SMALL + SECOND + MOVED.format(day=4, drive=1, to="two") + left)
    ).event
    back = left + "days = 2\n" if "vanishes" in gone else ""
    with pytest.raises(UsageError, match="where INVENTED-2 is"):
        scenarios.load(written(tmp_path, SMALL + SECOND + MOVED.format(day=4, drive=1, to="two") + back))


def keys(kind: type) -> set[str]:
    return {field.name for field in msgspec.structs.fields(kind)}


def test_the_owners_guide_names_every_key_and_every_event():
    guide = (scenarios.folder() / "README.md").read_text(encoding="utf-8")
    events = get_args(happenings.Event)
    wanted = set().union(
        *(keys(one) for one in (Scenario, DriveSpec, RoomSpec, BaySpec, Holiday, Expectation, *events))
    )
    wanted |= {str(one.__struct_config__.tag) for one in events}
    assert {one for one in wanted if one not in guide} == set()


def test_the_example_of_the_owners_guide_comes_out_as_it_says(tmp_path):
    guide = (scenarios.folder() / "README.md").read_text(encoding="utf-8")
    example = textwrap.dedent(guide.partition("```toml\n")[2].partition("```")[0])
    ended = lived(written(tmp_path, example))
    assert [one.verdict for one in ended.outcomes] == [Verdict.REACHED]


@pytest.mark.parametrize(
    ("text", "told"),
    [
        (
            SMALL + '[[expect]]\ncall = "look"\nfrom_day = 9\nby_day = 4\nbecause = "x"\n',
            "[[expect]] 1, by_day: 4 lies before from_day, 9",
        ),
        (SMALL + '[[expect]]\nstays = "keep"\ncause = "media"\nbecause = "x"\n', "cause: goes with a call"),
        (
            SMALL + '[[expect]]\ncall = "copy"\nby_day = 4\nstays = "look"\nbecause = "x"\n',
            "rules out the call copy",
        ),
        (SMALL.replace("days = 10", 'days = 10\nplace = "a home"'), "does not say that it is invented"),
        (SMALL.replace("/dev/sda", "/dev/nvme0"), "as /dev/sda would be"),
        (
            SMALL + 'joins_day = 5\n[[event]]\nwhat = "dies"\nday = 1\ndrive = "INVENTED-1"\n',
            "before it joins",
        ),
    ],
)
def test_what_contradicts_itself_is_refused(tmp_path, text, told):
    with pytest.raises(UsageError) as caught:
        scenarios.load(written(tmp_path, text))
    assert told in str(caught.value)


def test_a_name_that_is_not_known_gets_the_nearest_one():
    with pytest.raises(UsageError, match="did you mean loose-cable"):
        scenarios.load("lose-cable")
    with pytest.raises(UsageError, match="cannot be read"):
        scenarios.load("./none.toml")


def test_events_keep_their_sort_and_amounts():
    events = scenarios.load("scratched-media").event
    assert events == (Scratch(day=60, drive="INVENTED-NW-0101", units=12, growth=0.08),)
    assert isinstance(scenarios.load("loose-cable").event[0], CableLoosens)
