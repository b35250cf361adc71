import inspect
import itertools
import re
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, strategies as st

from diskwatch.judge import copy_words
from diskwatch.judge.copy_plan import copy_plan
from diskwatch.records import CallWord, Cause, Kind, Mount
from diskwatch.records.array import Array
from diskwatch.trends.read_rate import ReadRate
from tests.judge.test_copy_plan import RATE, TB, line, plan
from tests.samples import HDD, NVME, SSD, VIRTUAL

MIRROR = Array(kind="md", name="md0", level="raid1", members=2, missing=0, rebuilding=False, elsewhere=True)


def told(made):
    return " ".join(copy_words.fellows(made))


def test_each_call_says_what_it_means_for_the_copy():
    made = plan(line())
    words = {copy_words.urgency(replace(made, call=word)) for word in (*CallWord, None)}
    assert len(words) == 5
    assert "nothing more" in copy_words.urgency(replace(made, call=CallWord.RETIRE))


def test_a_whole_mirror_takes_the_haste_away_and_a_degraded_one_does_not():
    whole = told(plan(line(), arrays=[MIRROR]))
    assert "outlives this drive" in whole
    assert "go by its serial" in whole
    assert "no backup" in whole
    broken = told(plan(line(), arrays=[replace(MIRROR, missing=1, elsewhere=False)]))
    assert "lacks 1 member now" in broken
    assert "as urgent as for a lone drive" in broken
    assert "take it that they do not" in told(plan(line(), arrays=[replace(MIRROR, elsewhere=None)]))
    filling = [replace(MIRROR, rebuilding=True, elsewhere=None)]
    assert "brought into line" in told(plan(line(), arrays=filling))


def test_a_drive_that_is_not_here_is_not_said_to_stand_alone():
    assert "cannot be seen" in told(plan(line(), arrays=None))
    assert "No other drive" in told(plan(line(), arrays=()))


def test_how_long_it_takes_names_what_that_rests_on():
    made = plan(line(Mount(point="/srv", used_bytes=TB)))
    assert "really gave in 12 five-minute stretches, halved for the inner tracks" in copy_words.duration(made)
    usual = copy_words.duration(plan(line(Mount(point="/srv", used_bytes=TB), Mount(point="/x")), rate=None))
    assert "common practice, no source" in usual
    assert "at least 1 TB" in usual
    nothing = copy_plan(line(drive=replace(HDD, capacity_bytes=None)), rate=None, arrays=())
    assert "not known" in copy_words.duration(nothing)


def test_sectors_that_are_known_not_to_be_readable_are_the_reason_for_the_order():
    words = copy_words.chance(plan(line(signals=[("pending-sectors", 1)])), Kind.HDD)
    assert words.startswith("1 sector is known")
    assert "what cannot be replaced comes first" in words


def test_the_chance_is_told_as_the_bound_of_a_class_and_no_forecast():
    words = copy_words.chance(plan(line()), Kind.HDD)
    assert "1" in words
    assert "10^14 to 10^15" in words
    assert "3.1 % to 27 %" in words
    assert "no forecast for this drive" in words
    assert "cannot be said" in copy_words.chance(plan(line(drive=VIRTUAL)), Kind.VIRTUAL)
    assert "size is not known" in copy_words.chance(
        plan(line(drive=replace(HDD, capacity_bytes=None))), Kind.HDD
    )


@pytest.mark.parametrize(
    ("hours", "words"),
    [
        ((0.001, 0.002), "about 1 minute"),
        ((0.5, 0.9), "30 to 54 minutes"),
        ((1.0, 1.04), "about 1 hour"),
        ((0.9, 1.6), "54 minutes to 2 hours"),
        ((6.2, 18.9), "6 to 19 hours"),
        ((30, 72), "30 hours to 3 days"),
    ],
)
def test_an_interval_of_time_is_said_as_people_say_it(hours, words):
    assert copy_words.between(hours) == words


@given(low=st.floats(0, 1e5), more=st.floats(0, 1e5))
def test_any_interval_of_time_can_be_said(low, more):
    assert re.fullmatch(r"(about )?[\d,]+ .*(minutes?|hours?|days?)", copy_words.between((low, low + more)))


@pytest.mark.parametrize(
    ("share", "words"),
    [(0.0, "less than 0.1 %"), (0.008, "0.8 %"), (0.0994, "9.9 %"), (0.5, "50 %"), (1.0, "99 %")],
)
def test_a_chance_is_said_in_two_digits_and_never_as_certainty(share, words):
    assert copy_words.percent(share) == words


def test_the_worn_solid_state_drive_and_the_platter_have_cautions_of_their_own():
    solid = " ".join(copy_words.cautions(plan(line(drive=SSD)), kind=Kind.SSD, cause=None))
    disk = " ".join(copy_words.cautions(plan(line()), kind=Kind.HDD, cause=Cause.MEDIA))
    cable = " ".join(copy_words.cautions(plan(line()), kind=Kind.HDD, cause=Cause.LINK))
    assert "JESD218" in solid
    assert "JESD218" not in disk
    assert "each start may be its last" in disk
    assert "reseat or replace the cable" in cable
    for words in (solid, disk, cable):
        assert "no repair of the file system" in words
        assert "professionals" in words
        assert "warranty terms and your local rules" in words


def test_the_order_begins_with_a_place_for_the_copy_and_ends_with_a_look_at_it():
    mounts = (
        Mount(point="/", used_bytes=TB),
        Mount(point="/home", used_bytes=TB),
        Mount(point="/srv/\x1b[31m", used_bytes=1),
        Mount(point="swap", used_bytes=0),
    )
    steps = list(copy_words.order(plan(line(*mounts), homes={"/home"}, history="/"), "HINT"))
    assert "another drive" in steps[0]
    assert "/home" in steps[2]
    assert "HINT" in steps[4]
    assert steps[5].startswith("Then /:")
    assert "swap" in steps[6]
    assert "whole" in steps[-1]
    assert not any("\x1b" in step for step in steps)
    assert any("image of the whole drive" in step for step in copy_words.order(plan(line()), ""))


def test_what_a_file_system_or_array_is_called_stays_inert():
    hostile = Mount(point="/mnt/\x1b[2J", used_bytes=1, total_bytes=2)
    made = plan(line(hostile), arrays=[replace(MIRROR, name="\x1b]0;x\x07")])
    words = [copy_words.holding(made.held[0]), *copy_words.fellows(made)]
    assert not any("\x1b" in one or "\x07" in one for one in words)


def test_no_word_of_the_plan_says_or_implies_that_a_drive_is_safe():
    text = Path(inspect.getfile(copy_words)).read_text(encoding="utf-8")
    said = " ".join(re.findall(r'"([^"]*)"', re.sub(r'""".*?"""', "", text, flags=re.DOTALL)))
    words = set(re.findall(r"[a-z]+", said.casefold()))
    assert {"drive", "copy"} <= words, "the texts were not found"
    assert not words & {
        "safe",
        "safely",
        "healthy",
        "health",
        "fine",
        "good",
        "guarantee",
        "reliable",
        "ok",
        "sound",
    }


@pytest.mark.parametrize(
    ("drive", "rate", "pending", "word"),
    list(itertools.product((HDD, SSD, NVME, VIRTUAL), (None, RATE), (None, 0, 3), (*CallWord, None))),
)
def test_every_plan_can_be_said_in_whole_sentences(drive, rate, pending, word):
    signals = [] if pending is None else [("pending-sectors", pending)]
    made = replace(plan(line(Mount(point="/srv"), drive=drive, signals=signals), rate=rate), call=word)
    words = [
        copy_words.urgency(made),
        copy_words.duration(made),
        copy_words.chance(made, drive.kind),
        *copy_words.fellows(made),
        *copy_words.order(made, "x"),
        *copy_words.cautions(made, kind=drive.kind, cause=None),
        copy_words.backup("2026-11-20", "11 days ago"),
        copy_words.nothing_known(),
    ]
    assert all(one[0].isupper() or one[0].isdigit() for one in words)
    assert all(one.endswith(".") and "{" not in one for one in words)


def test_a_rate_of_one_stretch_is_said_in_the_singular():
    made = plan(line(Mount(point="/", used_bytes=1)), rate=ReadRate(low=1e6, high=2e6, stretches=1))
    assert "in 1 five-minute stretch," in copy_words.duration(made)
