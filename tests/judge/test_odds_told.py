import re

import pytest

from diskwatch.judge import odds
from diskwatch.judge.odds_told import no_odds, odds_told, what_failed_means
from diskwatch.records import Kind


@pytest.mark.parametrize("condition", odds.ORDER)
def test_every_row_is_told_with_group_year_interval_and_horizon(condition):
    told = odds_told(odds.odds({condition: 100}, day=100))
    assert "data-centre hard drives of 2013" in told
    assert re.search(r"(\d+ to \d+|fewer than \d+) of 100", told)
    assert re.search(r"within (14|30) days", told)


def test_the_figures_are_whole_and_those_of_the_table():
    assert odds_told(odds.odds({"score-7": 100}, day=100)) == (
        "Among about 130 data-centre hard drives of 2013 that came to a damage measure of 7, 21 to 33 of 100 "
        "had failed within 30 days."
    )
    assert "fewer than 10 of 100" in odds_told(odds.odds({"first-rise-after-14-days": 100}, day=100))


def test_without_odds_nothing_is_told_and_the_reason_is_at_hand():
    assert odds_told(None) == ""
    for kind in Kind:
        assert ("no figures" in no_odds(kind)) is (kind is not Kind.HDD)
    assert "quarter of failed hard drives" in no_odds(Kind.HDD)


def test_the_footnote_says_what_failed_means_and_what_the_interval_leaves_out():
    for part in ("took the drive out", "0 to 28 of 100", "at home", "not of this drive"):
        assert part in what_failed_means()
