import copy
import json

import pytest
from hypothesis import given, settings, strategies as st
from jsonschema import Draft202012Validator

from diskwatch.ticket import checking, schema as shipped
from diskwatch.ticket.checking import faults
from tests.samples import DAY, NOON
from tests.ticket.lives import a_ticket, days, opened

SCHEMA = dict(shipped.schema())
VALID = Draft202012Validator(SCHEMA, format_checker=None)


def _words(piece):
    if isinstance(piece, dict):
        for key, value in piece.items():
            if key in {"properties", "$defs"}:
                for inner in value.values():
                    yield from _words(inner)
            else:
                yield key
                yield from _words(value) if key == "items" else ()


def test_our_schema_uses_only_words_that_the_checker_knows():
    found = set(_words(SCHEMA))
    assert {"type", "enum", "required", "$ref"} <= found
    assert found <= checking.KNOWN


@pytest.fixture(scope="module")
def made(tmp_path_factory):
    passes = days(30, lambda day: {"crc_errors": day // 5, "pending_sectors": 8 * (day > 20)})
    with opened(tmp_path_factory.mktemp("made") / "state", passes) as past:
        return json.loads(json.dumps(a_ticket(past, NOON + 30 * DAY)))


def _places(thing, path=()):
    yield path
    if isinstance(thing, dict | list):
        for key, value in thing.items() if isinstance(thing, dict) else enumerate(thing):
            yield from _places(value, (*path, key))


values = (
    st.none()
    | st.booleans()
    | st.integers(-3, 3)
    | st.floats(-2, 2)
    | st.sampled_from(
        (
            "",
            "keep",
            "look",
            "2026-12-01T12:00:00Z",
            "0",
            "-5",
            "read",
            "x" * 64,
            [],
            {},
            [1, 2, 3],
            "diskwatch",
        )
    )
)


@settings(max_examples=150, deadline=None)
@given(data=st.data())
def test_it_finds_a_document_right_or_wrong_as_the_independent_validator_does(made, data):
    changed = copy.deepcopy(made)
    for _ in range(data.draw(st.integers(1, 3))):
        path = data.draw(st.sampled_from([one for one in _places(changed) if one]))
        inner = changed
        for key in path[:-1]:
            inner = inner[key]
        if isinstance(inner, dict) and data.draw(st.booleans()):
            del inner[path[-1]]
        else:
            inner[path[-1]] = data.draw(values)
    assert bool(list(faults(changed, SCHEMA))) == (not VALID.is_valid(changed))


@pytest.mark.parametrize(
    ("change", "told"),
    [
        ({"schema": "another"}, "schema should be 'diskwatch/ticket/1', not 'another'"),
        ({"made_at": "yesterday"}, "made_at is not written as it should be: 'yesterday'"),
        ({"made_at": "2026-13-01T12:00:00Z"}, "made_at is no time: '2026-13-01T12:00:00Z'"),
        ({"findings": [3]}, "findings[0] should be of type object, not 3"),
        ({"watching": {}}, "watching lacks passes"),
    ],
)
def test_every_fault_is_named_with_its_place(made, change, told):
    assert told in list(faults({**made, **change}, SCHEMA))


def test_a_ticket_of_a_later_program_may_hold_more(made):
    assert list(faults({**made, "weather": "fine"}, SCHEMA)) == []
