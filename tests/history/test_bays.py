import pytest

from diskwatch.history.bays import all_that_can_be_read, drive_lines
from diskwatch.history.writer import History
from diskwatch.records import CallWord, FindingKind, KnownDrive, LastPass, Outcome, SignalNow
from diskwatch.records.owner import OwnerFacts
from tests.history.examples import (
    DAY,
    NOON,
    a_call,
    a_drive,
    a_finding,
    a_part,
    a_pass,
    a_place,
    a_round,
    a_value,
    full_round,
)


@pytest.fixture
def lines(history):
    return lambda: drive_lines(history._db.conn)


def _admit(history: History, name: str, device: str) -> KnownDrive:
    return history.admit(a_drive(name, device), a_place(device), NOON)


def test_a_drive_not_asked_yet_has_neither_pass_nor_call(history, lines):
    known = _admit(history, "INV-1", "/dev/sda")
    (line,) = lines()
    assert (line.number, line.drive, line.place, line.first_seen) == (1, known.drive, known.place, NOON)
    assert (line.last_pass, line.call, line.label) == (None, None, None)
    assert (line.findings, line.signals, line.traffic) == ((), (), None)


def test_signals_stand_by_name_with_since_when_and_evidence(history, lines):
    known = _admit(history, "INV-1", "/dev/sda")
    read = a_pass(NOON, a_value(value=8), a_value("crc-errors", None, "events", reason="Not printed."))
    history.record(a_round(a_part(known, read, evidence={"pending-sectors": 4000.0})))
    later = a_pass(NOON + DAY, a_value(value=8))
    history.record(a_round(a_part(known, later), at=NOON + DAY))
    (line,) = lines()
    assert line.signals == (
        SignalNow(name="crc-errors", value=None, unit="events", since=NOON, evidence=None),
        SignalNow(name="pending-sectors", value=8, unit="sectors", since=NOON, evidence=4000.0),
    )
    assert line.last_pass == LastPass(at=NOON + DAY, outcome=Outcome.READ, explanation=None)


def test_a_ledger_without_values_is_no_signal(history, lines):
    known = _admit(history, "INV-1", "/dev/sda")
    history.record(a_round(a_part(known, a_pass(NOON), evidence={"read-latency": 3.0})))
    assert lines()[0].signals == ()


def test_a_pass_that_brought_nothing_says_why(history, lines):
    known = _admit(history, "INV-1", "/dev/sda")
    slow = a_pass(NOON, outcome=Outcome.TIMED_OUT, explanation="It did not answer within 60 seconds.")
    history.record(a_round(a_part(known, slow)))
    assert lines()[0].last_pass == LastPass(
        at=NOON, outcome=Outcome.TIMED_OUT, explanation="It did not answer within 60 seconds."
    )


def test_worst_call_comes_first_and_a_drive_not_read_counts_as_look(history, lines):
    words = {"a": CallWord.KEEP, "b": None, "c": CallWord.COPY, "d": CallWord.RETIRE, "e": CallWord.LOOK}
    parts = []
    for name, word in words.items():
        known = _admit(history, name, f"/dev/sd{name}")
        parts.append(a_part(known, call=None if word is None else a_call(word)))
    history.record(a_round(*parts))
    assert "".join(line.drive.identity.serial for line in lines()) == "dcbea"


def test_drives_of_one_call_stand_by_label_or_device(history, lines):
    for name, device in [("one", "/dev/sdb"), ("two", "/dev/sdc"), ("three", "/dev/sda")]:
        _admit(history, name, device)
    history._db["owner_fact"].insert({"drive": 2, "fact": "label", "value": "/a first", "at": NOON})
    assert [line.drive.identity.serial for line in lines()] == ["two", "three", "one"]
    assert lines()[0].label == "/a first"


def test_the_leading_finding_has_the_worst_call_then_no_need_of_evidence_then_the_most(history, lines):
    known = _admit(history, "INV-1", "/dev/sda")
    standing = (
        a_finding("level", kind=FindingKind.LEVEL, calls=None, evidence=None),
        a_finding("weak", evidence=400.0),
        a_finding("strong", evidence=9000.0),
        a_finding("fact", kind=FindingKind.FACT, evidence=None),
        a_finding("odds", kind=FindingKind.RULE, calls=CallWord.COPY, evidence=None),
    )
    history.record(a_round(a_part(known, findings=standing)))
    assert [one.name for one in lines()[0].findings] == ["odds", "fact", "strong", "weak", "level"]


def test_what_has_ended_does_not_stand(history, lines):
    known = _admit(history, "INV-1", "/dev/sda")
    history.record(a_round(a_part(known, findings=(a_finding("old"),))))
    history.record(a_round(a_part(known, findings=(a_finding("new"),)), at=NOON + 1))
    assert [one.name for one in lines()[0].findings] == ["new"]


def test_what_the_owner_said_stands_beside_a_drive_and_what_was_taken_back_does_not(history, lines):
    _admit(history, "INV-1", "/dev/sda")
    _admit(history, "INV-2", "/dev/sdb")
    history.tell(1, {"label": "left", "asset": "A-17", "replaced-by": "INV-2"}, NOON)
    history.tell(1, {"label": ""}, NOON + DAY)
    told = {line.number: line for line in lines()}
    assert told[1].label is None
    assert told[1].owner == OwnerFacts(asset="A-17", replaced_by="INV-2", replaced_at=NOON)
    assert told[2].owner == OwnerFacts()


@pytest.mark.parametrize(
    ("statement", "said"),
    [
        ("UPDATE drive SET kind = 'htd' WHERE number = 1", "the sort of device"),
        ("UPDATE drive SET lives_here = '[' WHERE number = 1", "what lives on it"),
        ("UPDATE drive SET capacity_bytes = 'large' WHERE number = 1", "the size"),
        ("UPDATE drive SET rotation_rpm = 'fast' WHERE number = 1", "how fast it turns"),
        ("UPDATE drive SET outcome = 'reae' WHERE number = 1", "how its last pass went"),
        ("UPDATE call SET word = 'loog' WHERE drive = 1", "its call"),
        ("UPDATE finding SET signals = '[' WHERE drive = 1", "a finding"),
        ("UPDATE latest SET value = x'ff' WHERE series = 1", "the value of"),
        (
            "INSERT INTO forecast VALUES (1, 'percentage-used', 20000, 100.0, 'drife', 1, 2, 0.8, NULL, NULL)",
            "a forecast",
        ),
    ],
)
def test_what_cannot_be_right_is_said_and_costs_nothing_but_itself(history, statement, said):
    for number, name in ((1, "INVENTED-1"), (2, "INVENTED-2")):
        history.record(full_round(_admit(history, name, f"/dev/sd{number}")))
    (_, whole), nothing = all_that_can_be_read(history._db.conn)
    assert nothing == ()
    history._db.conn.execute(statement)
    lines, odd = all_that_can_be_read(history._db.conn)
    assert whole in lines
    assert {line.number for line in lines} == {1, 2}
    assert all(sentence.startswith(f"Of INVENTED-1 {said}") for sentence in odd)
    assert odd


def test_for_a_call_that_cannot_be_read_no_older_one_stands_in(history, lines):
    known = _admit(history, "INVENTED-1", "/dev/sda")
    for at, word in ((NOON, CallWord.KEEP), (NOON + DAY, CallWord.RETIRE)):
        history.record(a_round(a_part(known, a_pass(at), call=a_call(word, at=at)), at=at))
    history._db.conn.execute("UPDATE call SET word = 'retite' WHERE word = 'retire'")
    assert lines()[0].call is None
