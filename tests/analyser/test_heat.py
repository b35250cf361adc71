from diskwatch import analyser
from diskwatch.analyser.heat import limit_of
from diskwatch.records import CallWord, Cause, Reading, Settled
from diskwatch.trends.temperature import THRESHOLD
from tests.analyser.lives import lived
from tests.samples import DAY, NOON, read


def warm(celsius, *, first=0, **more):
    """A reading a day."""
    return [read(NOON + (first + day) * DAY, temperature=one, **more) for day, one in enumerate(celsius)]


def test_a_drive_that_runs_much_hotter_than_it_used_to_drifts_for_heat():
    steps = lived(*warm([35, 36] * 20 + [58] * 30, crc_errors=0))
    call = steps[-1].call
    assert (call.word, call.cause, call.rule) == (CallWord.LOOK, Cause.HEAT, "drift:temperature")
    assert call.evidence >= THRESHOLD
    assert "the norm ends at 47.5 °C" in call.reason
    drifts = [entry for step in steps for entry in step.happened if entry.kind == "drift"]
    assert [entry.data["signal"] for entry in drifts] == ["temperature"]


def test_a_summer_within_the_norm_is_no_drift():
    steps = lived(*warm([35, 36] * 20 + [44] * 60))
    assert steps[-1].call.word is CallWord.KEEP
    assert 0 < steps[-1].evidence["temperature"] < THRESHOLD


def test_the_usual_temperature_is_learnt_before_there_is_evidence():
    assert "temperature" not in lived(*warm([35] * 20))[-1].evidence


def test_the_drives_own_limit_draws_the_line_closer():
    hot = [35] * 40 + [46] * 40
    with_limit = lived(*warm(hot, warning_celsius=48))[-1]
    assert with_limit.evidence["temperature"] > lived(*warm(hot))[-1].evidence["temperature"]


def test_the_owners_word_lets_the_usual_temperature_be_learnt_anew():
    state = lived(*warm([35] * 40 + [58] * 30))[-1].state
    word = Settled(at=NOON + 71 * DAY, because="it stands in the warm room now", signals=("temperature",))
    state = analyser.settle(state, word).state
    after = lived(*warm([58] * 60, first=72), state=state)[-1]
    assert after.call.word is CallWord.KEEP


def test_a_warning_limit_goes_before_a_critical_one():
    assert limit_of(Reading(warning_celsius=70, critical_celsius=80)) == 70
    assert limit_of(Reading(critical_celsius=80)) == 80
    assert limit_of(Reading()) is None


def test_a_state_that_comes_back_from_text_is_written_to_the_same_text_again():
    text = analyser.dump(lived(*warm([35, 36] * 20))[-1].state)
    assert analyser.dump(analyser.load(text)) == text
