from diskwatch.cli.answers import drive_answer
from diskwatch.records import DriveLine, SignalNow
from tests.analyser.lives import lived
from tests.samples import DAY, HDD, HERE, NOON, read


def test_what_is_not_known_is_null_and_never_zero():
    line = DriveLine(
        number=1, drive=HDD, place=HERE, label=None, first_seen=NOON, last_pass=None, call=None,
        signals=(SignalNow(name="temperature", value=None, unit="celsius", since=NOON, evidence=None),),
    )  # fmt: skip
    answer = drive_answer(line)
    for key in ("call", "cause", "reason", "margin_days", "odds", "label", "last_pass"):
        assert answer[key] is None
    signals = answer["signals"]
    assert isinstance(signals, dict)
    assert signals["temperature"]["value"] is None


def test_a_drive_that_is_to_be_copied_has_odds_a_margin_or_the_reason_and_a_day():
    steps = lived(
        read(NOON, pending_sectors=0, reallocated_sectors=0),
        read(NOON + DAY, pending_sectors=9, reallocated_sectors=0),
    )
    line = DriveLine(
        number=1, drive=HDD, place=HERE, label=None, first_seen=NOON, last_pass=None,
        call=steps[-1].call, findings=steps[-1].findings,
    )  # fmt: skip
    answer = drive_answer(line, NOON + DAY)
    odds = answer["odds"]
    assert isinstance(odds, dict)
    assert {"days", "share", "low", "high", "source"} <= odds.keys()
    assert (odds["days"], odds["probability"], odds["since"]) == (30, 0.8, "2024-10-05")
    assert answer["odds_reason"] is None
    assert (answer["margin_days"], bool(answer["margin_reason"])) == (None, True)
    assert answer["replace_by"] == "2024-10-19"
