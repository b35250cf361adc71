import inspect
import re
from itertools import product
from pathlib import Path

from diskwatch.records import CallWord, Cause
from diskwatch.ticket import asked, cautions
from diskwatch.ticket.asked import UNREAD, asked_for


def test_every_call_and_cause_asks_for_one_thing_in_one_sentence():
    for word, cause in product(CallWord, (None, *Cause)):
        told = asked_for(word, cause)
        assert told.endswith(".")
        assert told.count(". ") == 0
    assert asked_for(None, None) == UNREAD


def test_a_cable_never_asks_for_a_new_drive():
    for cause in (Cause.LINK, Cause.POWER, Cause.HEAT, Cause.LOAD):
        assert asked_for(CallWord.LOOK, cause).startswith("No new drive is asked for")


def test_a_retired_drive_is_to_be_replaced_whatever_the_cause():
    assert all("replace this drive" in asked_for(CallWord.RETIRE, cause) for cause in (None, *Cause))


def test_no_text_says_or_implies_that_a_drive_is_safe():
    for module in (asked, cautions):
        text = Path(inspect.getfile(module)).read_text(encoding="utf-8")
        said = " ".join(re.findall(r'"([^"]*)"', text)).casefold()
        words = set(re.findall(r"[a-z]+", said))
        assert "drive" in words
        assert not words & {
            "safe",
            "safely",
            "healthy",
            "health",
            "fine",
            "good",
            "reliable",
            "ok",
            "guarantee",
        }
