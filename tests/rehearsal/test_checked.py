"""Whatever an owner writes into a file gives a scenario that can be lived through, or one clear line."""

import math
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings, strategies as st
from msgspec import inspect

from diskwatch.errors import UsageError
from diskwatch.rehearsal import checked, scenarios
from diskwatch.rehearsal.course import Course
from diskwatch.rehearsal.scenario import Scenario
from tests.rehearsal.test_course import lived

DRIVE = {
    "serial": "INVENTED-1",
    "model": "Nordwall INVENTED",
    "kind": "hdd",
    "device": "/dev/sda",
    "bay": "one",
    "capacity_gb": 1000,
}
CARD = {**DRIVE, "serial": "INVENTED-2", "kind": "nvme", "device": "/dev/nvme0", "bay": "two"}
WISH = {"call": "look", "by_day": 9, "because": "x"}


def tables(**more: Any) -> dict[str, Any]:
    return {"title": "a test", "about": "", "days": 1, "drive": [DRIVE], **more}


@pytest.mark.parametrize(
    ("found", "told"),
    [
        ([], "expected tables and keys"),
        (tables(days=0), "days: expected a whole number from 1 to 36525, not 0"),
        (tables(days=True), "days: expected a whole number from 1 to 36525, not true"),
        (tables(days=10**30), "days: expected a whole number from 1 to 36525, not a number above 10^18"),
        (tables(dayz=3), "dayz: no such key; did you mean days?"),
        (tables(title=""), "title: expected a text of 1 to 120 letters, not ''"),
        (tables(seed=2**63), "seed: expected a whole number from -2^63 to 2^63, not a number above 10^18"),
        (tables(habit="castle"), "habit: expected one of home, office, server, studio, not 'castle'"),
        (tables(room=[]), "[room]: expected a table, not a list"),
        (tables(room={"celsius": math.nan}), "[room] celsius: expected a number from -30 to 60, not nan"),
        (tables(room={"season": math.inf}), "[room] season: expected a number from 0 to 30, not inf"),
        (tables(drive=[]), "[[drive]]: expected a list of 1 to 64 entries, not 0"),
        (
            tables(drive=[DRIVE, {**DRIVE, "written_tb": 1e300}]),
            "[[drive]] 2, written_tb: expected a number from 0 to 1000000, not 1e+300",
        ),
        (
            tables(drive=[{**DRIVE, "pending": 5}]),
            "[[drive]] 1, pending: expected a whole number from 0 to 32000, a multiple of 8, not 5",
        ),
        (
            tables(drive=[{**DRIVE, "device": "sda"}]),
            "[[drive]] 1, device: expected a device such as /dev/sda or /dev/nvme0, not 'sda'",
        ),
        (
            tables(drive=[{"serial": "x"}]),
            "[[drive]] 1, model: is missing; expected a text of 1 to 120 letters",
        ),
        (
            tables(event=[{"what": "busy", "day": 1, "days": 0, "factor": 2}]),
            "[[event]] 1, days: expected a number above 0 and up to 36525, not 0",
        ),
        (
            tables(event=[{"what": "scratch", "day": math.inf, "drive": "INVENTED-1", "units": 1}]),
            "[[event]] 1, day: expected a number from 0 to 36525, not inf",
        ),
        (
            tables(expect=[{**WISH, "call": "rest"}]),
            "[[expect]] 1, call: expected one of keep, look, copy, retire, not 'rest'",
        ),
        (
            tables(expect=[{**WISH, "never_cause": "x"}]),
            "[[expect]] 1, never_cause: expected a list of 0 to 20 entries, not 'x'",
        ),
    ],
)
def test_the_first_wrong_key_is_named_with_what_is_expected_and_what_was_found(found, told):
    assert checked.fault(found, Scenario) == told


def test_what_befalls_a_drive_is_one_of_the_sorts_there_are():
    told = checked.fault(tables(event=[{"what": "rain", "day": 1}]), Scenario)
    assert told is not None
    assert told.startswith("[[event]] 1, what: expected one of blocks-fail, busy, ")
    assert told.endswith("not 'rain'")


def numbers(kind: inspect.Type, where: str) -> list[tuple[str, Any]]:
    """Every number of a type with its bounds, however deep it lies."""
    if isinstance(kind, inspect.StructType):
        return [found for one in kind.fields for found in numbers(one.type, f"{where}.{one.name}")]
    if isinstance(kind, inspect.UnionType):
        return [found for one in kind.types for found in numbers(one, where)]
    if isinstance(kind, inspect.VarTupleType):
        return numbers(kind.item_type, where)
    return [(where, kind)] if isinstance(kind, inspect.IntType | inspect.FloatType) else []


def test_every_number_of_a_scenario_has_two_bounds():
    every = numbers(inspect.type_info(Scenario), "")
    assert len(every) > 40
    assert [name for name, one in every if one.le is None or (one.ge is None and one.gt is None)] == []


HUGE = "a number of 6000 hexadecimal digits"
"""Stands for one: Python prints no number of that length in decimal ones."""


def toml(value: Any) -> str:
    """A value in TOML's words."""
    if value == HUGE:
        return "0x" + 6_000 * "f"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, float):
        return repr(value)
    if isinstance(value, int):
        return str(value) if abs(value) < 10**9 or value < 0 else hex(value)
    if isinstance(value, str):
        return '"' + "".join(f"\\U{ord(letter):08x}" for letter in value) + '"'
    if isinstance(value, list):
        return "[" + ", ".join(map(toml, value)) + "]"
    return "{" + ", ".join(f"{toml(key)} = {toml(one)}" for key, one in value.items()) + "}"


SCALARS = st.one_of(
    st.booleans(),
    st.integers(-10, 100),
    st.integers(-(2**80), 2**80),
    st.just(HUGE),
    st.floats(),
    st.text(st.characters(exclude_categories=["Cs"]), max_size=6),
    st.sampled_from(["INVENTED-1", "INVENTED-2", "hdd", "nvme", "ssd", "one", "two", "wall", "look", "keep"]),
)
VALUES = st.recursive(
    SCALARS,
    lambda inner: st.one_of(
        st.lists(inner, max_size=3), st.dictionaries(st.text("abc \n\x1b", max_size=3), inner, max_size=3)
    ),
    max_leaves=4,
)


def sound(kind: inspect.Type) -> st.SearchStrategy[Any]:
    """Values that a key may have, its bounds included."""
    if isinstance(kind, inspect.UnionType):
        return st.one_of(*(sound(one) for one in kind.types if not isinstance(one, inspect.NoneType)))
    if isinstance(kind, inspect.StructType):
        fields = {one.name: sound(one.type) for one in kind.fields}
        needed = {one.name: fields[one.name] for one in kind.fields if one.required}
        if kind.tag_field:
            needed[kind.tag_field] = st.just(kind.tag)
        return st.fixed_dictionaries(needed, optional={k: v for k, v in fields.items() if k not in needed})
    if isinstance(kind, inspect.VarTupleType):
        return st.lists(sound(kind.item_type), min_size=kind.min_length or 0, max_size=2)
    if isinstance(kind, inspect.IntType):
        assert kind.ge is not None
        assert kind.le is not None
        step = kind.multiple_of or 1
        return st.integers(int(kind.ge) // step, int(kind.le) // step).map(lambda one: one * step)
    if isinstance(kind, inspect.FloatType):
        return st.floats(kind.ge if kind.ge is not None else kind.gt, kind.le, exclude_min=kind.gt is not None)
    if isinstance(kind, inspect.LiteralType):
        return st.sampled_from(kind.values)
    if isinstance(kind, inspect.EnumType):
        return st.sampled_from([one.value for one in kind.cls])
    if isinstance(kind, inspect.BoolType):
        return st.booleans()
    return st.sampled_from(["INVENTED-1", "INVENTED-2", "one", "two", "wall"])


SOUND = sound(inspect.type_info(Scenario))


@st.composite
def files(draw) -> dict[str, Any]:
    """Files that are nearly right: sound values anywhere, then now and then a wrong one."""
    found: dict[str, Any] = draw(SOUND)
    found.update(days=1, step_minutes=360, every_hours=6, place="an invented place")
    found["drive"] = [{**one, **draw(st.sampled_from([DRIVE, CARD]))} for one in found["drive"]][:2]
    for _ in range(draw(st.integers(0, 2))):
        table = found
        while draw(st.booleans()):
            inner = [
                one
                for value in table.values()
                for one in (value if isinstance(value, list) else [value])
                if isinstance(one, dict)
            ]
            if not inner:
                break
            table = draw(st.sampled_from(inner))
        table[draw(st.sampled_from([*table, "colour", "\n\x1b[2J"]))] = draw(VALUES)
    return found


def loaded(path, text: str) -> Scenario | None:
    """The scenario of a file; None where it was refused in one line that names it."""
    path.write_text(text, encoding="utf-8")
    try:
        return scenarios.load(str(path))
    except UsageError as error:
        told = str(error)
        assert told.startswith(f"{path}: ")
        assert "\n" not in told
        assert len(told) < 700
        assert not any(word in told for word in ("`", "$.", "Expected", "Traceback", "msgspec", "Object"))
        return None


FUZZ = settings(
    max_examples=150,
    deadline=None,
    suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow],
)


@FUZZ
@given(files())
def test_any_file_gives_a_life_to_its_end_or_one_line(tmp_path, found):
    text = "\n".join(f"{toml(key)} = {toml(value)}" for key, value in found.items())
    scenario = loaded(tmp_path / "mine.toml", text)
    if scenario is not None:
        asked, _ = lived(Course(scenario, days=1))
        assert len(asked) <= 5


@FUZZ
@given(st.text(max_size=60) | st.text("[]{}=.\"'\n#ab0:-e", max_size=60))
def test_any_text_is_refused_in_one_line(tmp_path, text):
    text = text.encode(errors="ignore").decode()
    assert loaded(tmp_path / "mine.toml", text) is None


def test_what_is_no_text_too_long_or_no_file_is_refused_in_one_line(tmp_path):
    path = tmp_path / "mine.toml"
    for bad in (b"title = \xff", b"\0" * 10, b"#" * 2_000_000, b"a = " + b"[" * 5_000, b"a = " + b"9" * 5_000):
        path.write_bytes(bad)
        with pytest.raises(UsageError) as caught:
            scenarios.load(str(path))
        assert str(caught.value).startswith(f"{path}: is ")
    with pytest.raises(UsageError, match="is no file"):
        scenarios.load(f"{tmp_path}/")
