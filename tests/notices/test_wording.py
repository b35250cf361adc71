import re

import pytest
from hypothesis import given, strategies as st

from diskwatch.notices.wording import LONGEST_SUMMARY, Urgency, of_call, of_calm, of_trial, of_trouble
from diskwatch.records import CallWord, Cause, Identity, Place
from diskwatch.units import is_active
from tests.notices.samples import line
from tests.samples import DAY, HDD, NOON, with_serial


def words(word, **more):
    found = line(word, **more)
    return of_call(found, found.call, NOON + 3 * DAY)


@pytest.mark.parametrize(
    ("word", "summary", "urgency"),
    [
        ("keep", "Nordwall N… (sda) is called keep again", Urgency.LOW),
        ("look", "Look at Nordwall NW4000 INVENT… (sda)", Urgency.NORMAL),
        ("copy", "Copy the data off Nordwall N… (sda) now", Urgency.CRITICAL),
        ("retire", "Stop relying on Nordwall NW4000… (sda)", Urgency.CRITICAL),
    ],
)
def test_the_summary_names_deed_and_drive_and_the_urgency_fits(word, summary, urgency):
    found = words(word)
    assert found.urgency is urgency
    assert found.summary.split()[0] == summary.split()[0]
    assert "(sda)" in found.summary
    assert len(found.summary) <= LONGEST_SUMMARY


def test_a_label_of_the_owners_stands_alone():
    assert words("copy", label="archive").summary == "Copy the data off archive now"


def test_the_body_has_reason_deed_date_and_what_lives_there():
    body = words("copy").body
    assert body.startswith("16 new sectors wait (pending). Copy it off now and replace it by ")
    assert re.search(r"So since \d{4}-\d\d-\d\d\.", body)
    assert "serial INV0001, /dev/sda; it holds /srv/photos." in body


@pytest.mark.parametrize("cause", [None, *Cause])
def test_a_look_says_which_hand_is_wanted_and_a_cable_asks_for_no_new_drive(cause):
    body = words("look", cause=cause).body
    assert "backup" in body
    if cause is Cause.LINK:
        assert "cable" in body
        assert "replace" not in body


letters = st.text(st.characters(codec=None), max_size=80)


@given(letters, letters, letters, st.sampled_from(CallWord))
def test_whatever_a_drive_calls_itself_no_letter_acts_and_the_summary_fits(model, serial, reason, word):
    drive = with_serial(HDD, serial, "/dev/sda")
    drive = type(drive)(
        identity=Identity(wwn=None, model=model or None, serial=serial or None, path="/dev/sda"),
        kind=drive.kind,
    )
    found = words(word, drive=drive, place=Place(device="/dev/sda", bay=None), reason=reason)
    assert len(found.summary) <= LONGEST_SUMMARY
    assert not any(is_active(letter) or letter in "\n\r\t" for letter in found.summary + found.body)


ALL = [
    *(words(word, cause=cause) for word in CallWord for cause in (None, *Cause)),
    of_trouble("Nobody is watching the drives."),
    of_calm(1, NOON),
    of_calm(6, NOON),
    of_trial(NOON),
]


@pytest.mark.parametrize("found", ALL, ids=lambda one: one.summary)
def test_no_notice_promises_anything_and_each_summary_fits(found):
    assert len(found.summary) <= LONGEST_SUMMARY
    told = f"{found.summary} {found.body}".lower()
    assert not re.search(r"\b(safe|healthy|health|fine|good condition|nothing to worry)\b", told)


def test_the_monthly_word_says_that_it_is_no_promise():
    assert "no promise" in of_calm(2, NOON).body
    assert "no promise" in words("keep").body
