from math import log

import pytest

from diskwatch.judge.service_times import say_ms, slower, times_anew


def told(**other):
    facts = {
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
