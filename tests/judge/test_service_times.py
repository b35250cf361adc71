from math import log
from typing import Any

import pytest

from diskwatch.judge.service_times import say_ms, slower, standing, times_anew, with_heat
from diskwatch.trends.latency_now import LatencyNow


def told(**other: Any) -> str:
    facts: dict[str, Any] = {
        "times": 1.63,
        "now_us": 8_200,
        "usual_us": 5_040,
        "tolerance": log(1.15),
        "evidence": 30_700.0,
        "follows_heat": False,
    }
    return slower("read-latency", **{**facts, **other})


def test_slowness_is_told_with_its_numbers_its_norm_and_its_evidence():
    assert told() == (
        "Reads take 1.6 times as long at the same load as in its first weeks (8.2 ms, usually 5.0 ms); "
        "the norm is at most 1.15 times. "
        "A drive within the norm would show this at most once in 84 years of watching."
    )


def test_slowness_that_follows_the_temperature_asks_for_cooling_first():
    assert told(follows_heat=True).endswith("see to its cooling first.")


@pytest.mark.parametrize(
    ("microseconds", "words"), [(180, "0.18 ms"), (999, "1 ms"), (8_240, "8.2 ms"), (120_400, "120 ms")]
)
def test_times_have_two_digits_that_count(microseconds, words):
    assert say_ms(microseconds) == words


def test_new_references_are_said_to_hide_a_slowing():
    assert "would not show" in times_anew(known=False)
    assert "hold again" in times_anew(known=True)


def now(**other: Any) -> LatencyNow:
    facts: dict[str, Any] = {
        "evidence": 800.0,
        "scored": 140,
        "classes": 6,
        "usual_us": 5_040,
        "shift": log(1.1),
        "tolerance": log(1.2),
        "onset": None,
        "follows_heat": None,
        "twice": None,
        "seen_on": 20_000,
    }
    return LatencyNow(**{**facts, **other})


def test_a_ledger_of_latency_is_laid_open_with_its_norm_and_its_alarm():
    assert standing("read-latency", now(), 30_437.5) == (
        "Reads take 1.1 times as long as usual at the same load (5.5 ms, usually 5.0 ms), over 6 classes of "
        "work and 140 days that could be compared; the norm is at most 1.2 times: once in 2 years, alarms at "
        "once in 83 years."
    )


def test_while_it_is_learnt_what_is_lacking_is_said():
    told = standing("write-latency", now(evidence=None, scored=3, shift=None), 73_050.0)
    assert told.startswith("Writes: what is usual is still being learnt")
    assert "17 more days" in told


@pytest.mark.parametrize(("follows", "words"), [(None, "cannot be told"), (True, "cooling"), (False, "do not")])
def test_whether_times_follow_the_temperature_is_told_three_ways(follows, words):
    assert words in with_heat(follows)
