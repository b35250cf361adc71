import hashlib
import json
from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import pytest
import rfc8785
from hypothesis import HealthCheck, given, settings, strategies as st
from jsonschema import Draft202012Validator

from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.records import Entry, Outcome, SelfTest
from diskwatch.ticket import document
from diskwatch.ticket.checking import faults
from diskwatch.ticket.consistency import loose_ends
from diskwatch.ticket.document import About, ticket
from diskwatch.ticket.page import LINES, WIDTH, page
from diskwatch.ticket.schema import schema
from diskwatch.ticket.writing import text_of
from diskwatch.units import is_active, rfc3339
from tests.history import examples
from tests.samples import DAY, HDD, NOON, NVME, SSD, VIRTUAL, missed, read, reading
from tests.ticket.lives import HOST, a_ticket, about, days, live, opened

VALID = Draft202012Validator(schema())
HOSTILE = '\x1b]0;owned\x07\x00\x9b31m"\\$(reboot)`id`\u202e</script>\r\n%s{}\ud800'


def sound(made: dict[str, Any]) -> dict[str, Any]:
    """Whatever reads a ticket from outside finds nothing wrong with it; gives what it reads."""
    text = text_of(made)
    assert len(text.encode()) <= document.MOST_BYTES
    assert not any(is_active(letter) for letter in text)
    told: dict[str, Any] = json.loads(text)
    assert [error.message for error in VALID.iter_errors(told)] == []
    assert list(faults(told, schema())) == []
    digest = {key: value for key, value in told.items() if key != "digest"}
    assert told["digest"]["sha256"] == hashlib.sha256(rfc8785.dumps(digest)).hexdigest()
    lines = page(told).splitlines()
    assert len(lines) <= LINES
    assert not any(is_active(letter) for line in lines for letter in line)
    return told


def undescribed(thing: object, piece: dict[str, Any], where: str = "") -> Iterator[str]:
    """Members that the schema says nothing of; numbers behind sentences are free."""
    if "$ref" in piece:
        piece = schema()["$defs"][piece["$ref"].rpartition("/")[2]]
    if isinstance(thing, dict) and where.rpartition(".")[2] not in {"data", "parameters"}:
        for key, value in thing.items():
            if key in piece.get("properties", {}):
                yield from undescribed(value, piece["properties"][key], f"{where}.{key}")
            else:
                yield f"{where}.{key}"
    elif isinstance(thing, list) and not where.endswith("changes"):
        for one in thing:
            yield from undescribed(one, piece.get("items", {}), where)


def test_a_ticket_tells_the_drive_the_call_and_what_led_to_it(folder):
    passes = days(40, lambda day: {"pending_sectors": 8 * (day >= 20), "reallocated_sectors": 8 * (day >= 30)})
    with opened(folder, passes) as past:
        told = sound(a_ticket(past, NOON + 40 * DAY))
    assert told["drive"]["serial"] == HDD.identity.serial
    assert told["drive"]["power_on_hours"] > 1_000
    assert told["call"]["word"] == "look"
    assert {"fact:first-defect"} <= {one["name"] for one in told["findings"]}
    pending = next(one for one in told["signals"] if one["name"] == "pending-sectors")
    assert [value for _, value in pending["changes"]] == [0, 8]
    assert pending["first"]["value"] == pending["baseline"] == 0
    assert told["watching"]["passes"] == 80
    assert list(loose_ends(told)) == []
    assert list(undescribed(told, dict(schema()))) == []


def test_what_is_null_has_its_reason(folder):
    with opened(folder, [missed(NOON, Outcome.TIMED_OUT)]) as past:
        told = sound(a_ticket(past, NOON))
    reasons = {one["member"] for one in told["not_known"]}
    null = {name for name, value in told.items() if value is None} - {"thinned"}
    assert null == reasons
    assert {"call", "answer", "owner", "odds", "margin"} <= null


lives = st.lists(
    st.one_of(
        st.tuples(
            st.just("read"),
            st.sampled_from(
                (
                    "pending_sectors",
                    "crc_errors",
                    "media_errors",
                    "percentage_used",
                    "temperature",
                    "grown_defects",
                )
            ),
            st.integers(0, 120) | st.integers(2**53 - 2, 2**80),
        ),
        st.tuples(st.sampled_from([one for one in Outcome if one is not Outcome.READ]), st.none(), st.none()),
    ),
    min_size=1,
    max_size=15,
)


@settings(max_examples=12, deadline=None, suppress_health_check=list(HealthCheck))
@given(
    life=lives,
    drive=st.sampled_from((HDD, SSD, NVME, VIRTUAL)),
    steps=st.lists(st.integers(-3 * DAY, 9 * DAY), min_size=15, max_size=15),
    words=examples.words | st.just(HOSTILE[:-1]),
)
def test_any_life_gives_a_valid_ticket_that_holds_together(tmp_path_factory, life, drive, steps, words):
    at, passes = NOON, []
    for (what, signal, value), step in zip(life, steps, strict=False):
        at += step
        if isinstance(what, Outcome):
            passes.append(replace(missed(at, what), explanation=words))
        else:
            passes.append(replace(read(at, **{signal: value, "power_on_hours": at // 3600}), answer=words))
    with opened(tmp_path_factory.mktemp("any") / "state", passes, drive=drive) as past:
        told = sound(a_ticket(past, at))
    assert list(loose_ends(told)) == []


@settings(max_examples=12, deadline=None, suppress_health_check=list(HealthCheck))
@given(
    drive=examples.drives,
    place=examples.places,
    findings=st.lists(examples.findings, max_size=4),
    call=st.none() | examples.calls,
    entries=st.lists(examples.entries, max_size=5),
    beside=examples.readings_beside_values,
    state=st.none() | examples.words,
)
def test_whatever_stands_in_a_history_the_ticket_is_valid(  # noqa: PLR0917  # as hypothesis hands them in
    tmp_path_factory, drive, place, findings, call, entries, beside, state
):
    folder = tmp_path_factory.mktemp("whatever") / "state"
    with History.open(folder) as history:
        known = history.admit(drive, place, NOON)
        pass_ = replace(examples.a_pass(NOON, examples.a_value()), reading=beside, answer=drive.identity.serial)
        part = examples.a_part(known, pass_, findings=tuple(findings), call=call, state=state)
        history.record(examples.a_round(part, at=NOON, entries=tuple(entries)))
        history.note(*(replace(one, drive=known.number) for one in entries))
    with Past.open(folder) as past:
        sound(a_ticket(past, NOON))


def test_hostile_words_of_a_drive_stay_inert(folder):
    junk = HOSTILE * 1_600
    drive = replace(HDD, identity=replace(HDD.identity, model=HOSTILE, serial=junk), firmware=HOSTILE)
    test = SelfTest(name=HOSTILE, result=junk, extended=True, passed=False)
    passes = [
        replace(
            read(NOON, pending_sectors=1), reading=reading(pending_sectors=1, self_tests=(test,)), answer=junk
        )
    ]
    noted = [Entry(at=NOON, drive=1, kind="rise", text=junk, data={HOSTILE: junk}) for _ in range(150)]
    with opened(folder, passes, drive=drive, entries=noted) as past:
        told = sound(a_ticket(past, NOON))
    assert told["thinned"] is not None


def test_a_ticket_that_would_be_too_large_leaves_out_the_oldest_and_says_so(folder):
    passes = days(60, lambda day: {"crc_errors": day // 20}, a_day=1)
    noted = [
        Entry(
            at=NOON + number * 1_000, drive=1, kind="kernel", text=f"Invented trouble {number}. " * 12, data={}
        )
        for number in range(5_000)
    ]
    with opened(folder, passes, entries=noted) as past:
        copies = past.copies(1)
        told = sound(a_ticket(past, NOON + 60 * DAY))
    thinned = told["thinned"]
    assert thinned["events"] + len(told["events"]) >= 5_000
    assert thinned["before"] in {rfc3339(one.at) for one in copies}
    assert min(one["at"] for one in told["events"]) >= thinned["before"]
    assert not thinned["shortened"]
    assert list(loose_ends(told)) == []


def test_only_what_came_since_a_time_is_told_where_that_is_asked_for(folder):
    passes = days(40, lambda day: {"crc_errors": day // 10})
    with opened(folder, passes) as past:
        told = sound(a_ticket(past, NOON + 40 * DAY, since=NOON + 15 * DAY))
    (crc,) = [one for one in told["signals"] if one["name"] == "crc-errors"]
    assert [value for _, value in crc["changes"]] == [0, 2, 3]
    assert crc["changes_left_out"] == told["thinned"]["changes"] == 1
    assert list(loose_ends(told)) == []


def test_the_drives_own_answer_stands_there_word_for_word(folder):
    words = "smartctl 7.3 (invented)\n  \t ID# 5  \u00a0\x00\n" * 50
    with opened(folder, [replace(read(NOON, pending_sectors=0), answer=words)]) as past:
        told = sound(a_ticket(past, NOON))
    assert told["answer"] == {"at": "2024-10-04T12:00:00Z", "text": words, "left_out": 0}


def test_the_page_keeps_to_its_columns(folder):
    with opened(folder, days(40, lambda day: {"pending_sectors": day // 8})) as past:
        told = page(a_ticket(past, NOON + 40 * DAY))
    assert max(map(len, told.splitlines())) <= WIDTH
    assert told.splitlines()[2].startswith("Model")


@pytest.mark.parametrize("number", [1, 2])
def test_each_drive_has_a_ticket_of_its_own(folder, number):
    with History.open(folder) as history:
        live(history, days(3, lambda _day: {"crc_errors": 1}))
        live(history, days(3, lambda _day: {"media_errors": 2}), drive=NVME)
    with Past.open(folder) as past:
        told = sound(ticket(past, past.bays(NOON), number, About(at=NOON, host=HOST)))
    assert told["drive"]["serial"] == (HDD, NVME)[number - 1].identity.serial
    assert about(NOON).host is HOST
