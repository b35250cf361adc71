from diskwatch.judge import sentences
from diskwatch.trends.norms import NORMS, STREAM_OF
from tests.samples import attribute


def test_a_drift_tells_the_facts_first_and_then_the_bound():
    media = STREAM_OF["pending-sectors"]
    told = sentences.drift(media, episodes=3, days=40, evidence=27_000)
    assert told == (
        "New bad spots turned up on 3 separate occasions in 40 days of powered time; "
        "the norm is one in 2 years. "
        "A drive within the norm would show this at most once in 73 years of watching."
    )


def test_every_stream_and_each_of_its_counters_has_words():
    for norm in NORMS:
        assert sentences.drift(norm, episodes=1, days=1, evidence=1)
        for signal in norm.signals:
            assert sentences.signal_name(signal) != signal.replace("-", " ")


def test_text_from_a_drive_stays_inert():
    hostile = attribute(5)
    object.__setattr__(hostile, "raw", "\x1b[31m1")
    assert "\x1b" not in sentences.failing_attribute(hostile)
