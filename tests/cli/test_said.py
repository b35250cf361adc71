from dataclasses import replace

import pytest

from diskwatch.cli.said import days_ago, said
from diskwatch.records import DriveLine
from diskwatch.records.owner import OwnerFacts
from tests.samples import HDD, HERE, NOON

LINE = DriveLine(number=1, drive=HDD, place=HERE, label="archive", first_seen=NOON, last_pass=None, call=None)
TODAY = NOON // 86_400


def test_a_drive_of_which_nothing_was_said_has_no_words():
    assert said(LINE, NOON) is None


def test_a_warranty_that_is_over_is_said_to_be_over():
    def of(day):
        return said(replace(LINE, owner=OwnerFacts(warranty_until=day)), NOON)

    assert of("2024-10-04") == "You said: its warranty lasts until 2024-10-04."
    assert of("2024-10-03") == "You said: its warranty ended on 2024-10-03."


@pytest.mark.parametrize(
    ("day", "ago"),
    [
        ("2024-10-05", "today"),
        ("2024-10-04", "today"),
        ("2024-10-03", "yesterday"),
        ("2018-10-04", "2,192 days ago"),
    ],
)
def test_how_long_ago_a_day_was_is_said_as_people_say_it(day, ago):
    assert days_ago(day, TODAY) == ago
