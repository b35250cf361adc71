from diskwatch.cli.answers import drive_answer
from diskwatch.records import DriveLine, SignalNow
from tests.samples import HDD, HERE, NOON


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
