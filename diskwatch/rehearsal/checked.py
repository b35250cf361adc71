"""Whether the tables of a file fit the types of a scenario: the first key that does not, and what is expected.

The types are those of `scenario` and `happenings`; each number of theirs has a lower and an upper bound, so
that nothing that an owner writes can lead the physics astray.
"""

import difflib
import math
import re
from collections.abc import Callable, Iterator, Sequence
from typing import Any

from msgspec import inspect

from diskwatch.units import plain

_LONGEST = 60
"""Letters of a wrong value that are shown."""

_EXACT = 10**18
"""Whole numbers from which on only their size is told."""


def fault(found: object, wanted: type) -> str | None:
    """The first key whose value does not fit: as it stands in the file, what is expected, what was found.

    Args:
        found: the tables of the file.
        wanted: a record type.
    """
    return next(_faults(found, inspect.type_info(wanted), ""), None)


def _faults(found: object, wanted: inspect.Type, where: str) -> Iterator[str]:
    told = f"{where}: " if where else ""
    if isinstance(wanted, inspect.UnionType):
        yield from _of_one(found, wanted.types, where)
    elif isinstance(wanted, inspect.StructType):
        yield from _of_table(found, wanted, where)
    elif isinstance(wanted, inspect.VarTupleType):
        yield from _of_list(found, wanted, where)
    elif not _FITS[type(wanted)](found, wanted):
        yield f"{told}expected {_EXPECTED[type(wanted)](wanted)}, not {_shown(found)}"


def _of_one(found: object, types: Sequence[inspect.Type], where: str) -> Iterator[str]:
    """One of several: tables told apart by a key, or a value that may be left out."""
    tables = [one for one in types if isinstance(one, inspect.StructType)]
    if not tables:
        # TOML has no word for nothing: what stands in a file is the value.
        yield from _faults(found, next(one for one in types if not isinstance(one, inspect.NoneType)), where)
        return
    key = str(tables[0].tag_field)
    if not isinstance(found, dict):
        yield f"{where}: expected a table, not {_shown(found)}"
        return
    tags = {str(one.tag): one for one in tables}
    what = found.get(key)
    if not isinstance(what, str) or what not in tags:
        shown = f", not {_shown(what)}" if key in found else ""
        yield f"{where}{_key(where, key)}: expected one of {', '.join(sorted(tags))}{shown}"
        return
    yield from _of_table({name: value for name, value in found.items() if name != key}, tags[what], where)


def _of_table(found: object, wanted: inspect.StructType, where: str) -> Iterator[str]:
    if not isinstance(found, dict):
        yield f"{where}: expected a table, not {_shown(found)}" if where else "expected tables and keys"
        return
    fields = {one.encode_name: one for one in wanted.fields}
    for name in found:
        if name not in fields:
            near = difflib.get_close_matches(name, fields, n=1, cutoff=0.5)
            hint = f"did you mean {near[0]}?" if near else f"known are: {', '.join(fields)}"
            yield f"{where}{_key(where, _shorter(plain(name)))}: no such key; {hint}"
    for name, one in fields.items():
        if name in found:
            yield from _faults(found[name], one.type, _inner(where, name, one.type))
        elif one.required:
            yield f"{_inner(where, name, one.type)}: is missing; expected {_expected(one.type)}"


def _of_list(found: object, wanted: inspect.VarTupleType, where: str) -> Iterator[str]:
    least, most = wanted.min_length or 0, wanted.max_length
    if not isinstance(found, list):
        yield f"{where}: expected {_expected(wanted)}, not {_shown(found)}"
    elif len(found) < least or (most is not None and len(found) > most):
        yield f"{where}: expected {_expected(wanted)}, not {len(found)}"
    else:
        for place, one in enumerate(found, 1):
            yield from _faults(one, wanted.item_type, f"{where} {place}")


def _key(where: str, name: str) -> str:
    return f"{', ' if where.endswith(tuple('0123456789')) else ' ' if where else ''}{name}"


def _inner(where: str, name: str, type_: inspect.Type) -> str:
    """A key as it stands in the file: ``days``, ``[room] celsius``, ``[[drive]] 2, rpm``."""
    if not where and isinstance(type_, inspect.StructType):
        return f"[{name}]"
    if not where and isinstance(type_, inspect.VarTupleType):
        return f"[[{name}]]"
    return f"{where}{_key(where, name)}"


def _shown(found: object) -> str:
    """A value as it stands in the file, short."""
    if isinstance(found, bool):
        return "true" if found else "false"
    if isinstance(found, int) and abs(found) >= _EXACT:
        return f"a number {'below -' if found < 0 else 'above '}10^18"
    if isinstance(found, str | int | float):
        return _shorter(repr(found))
    return "a table" if isinstance(found, dict) else "a list" if isinstance(found, list) else "a date or time"


def _shorter(text: str) -> str:
    return text if len(text) <= _LONGEST else f"{text[:_LONGEST]}…"


def _whole(found: Any, wanted: Any) -> bool:
    number = isinstance(found, int) and not isinstance(found, bool)
    return number and _within(found, wanted) and not (wanted.multiple_of and found % wanted.multiple_of)


def _number(found: Any, wanted: Any) -> bool:
    number = isinstance(found, int | float) and not isinstance(found, bool)
    return number and (isinstance(found, int) or math.isfinite(found)) and _within(found, wanted)


def _within(found: Any, wanted: Any) -> bool:
    above = (wanted.ge is None or found >= wanted.ge) and (wanted.gt is None or found > wanted.gt)
    return above and (wanted.le is None or found <= wanted.le)


def _text(found: object, wanted: Any) -> bool:
    return (
        isinstance(found, str)
        and len(found) >= (wanted.min_length or 0)
        and (wanted.max_length is None or len(found) <= wanted.max_length)
        and (wanted.pattern is None or re.search(wanted.pattern, found) is not None)
    )


_FITS: dict[type, Callable[[Any, Any], bool]] = {
    inspect.IntType: _whole,
    inspect.FloatType: _number,
    inspect.StrType: _text,
    inspect.BoolType: lambda found, _: isinstance(found, bool),
    inspect.LiteralType: lambda found, wanted: isinstance(found, str) and found in wanted.values,
    inspect.EnumType: lambda found, wanted: isinstance(found, str) and found in list(wanted.cls),
}


def _expected(wanted: inspect.Type) -> str:
    if isinstance(wanted, inspect.UnionType):
        return _expected(next(one for one in wanted.types if not isinstance(one, inspect.NoneType)))
    return _EXPECTED[type(wanted)](wanted)


def _bounded(name: str, wanted: Any) -> str:
    least = f"above {wanted.gt:g}" if wanted.gt is not None else f"from {_round(wanted.ge)}"
    up_to = f"{' and up' if wanted.gt is not None else ''} to {_round(wanted.le)}"
    steps = f", a multiple of {wanted.multiple_of}" if wanted.multiple_of else ""
    return f"{name} {least}{up_to}{steps}"


def _round(bound: float) -> str:
    if abs(bound) >= _EXACT:
        return f"{'-' if bound < 0 else ''}2^63"
    return str(int(bound)) if bound == int(bound) else f"{bound:g}"


def _text_expected(wanted: Any) -> str:
    if wanted.pattern is not None:
        return "a device such as /dev/sda or /dev/nvme0"
    least = wanted.min_length or 0
    return f"a text of {least} to {wanted.max_length} letters"


def _list_expected(wanted: Any) -> str:
    what = "texts" if isinstance(wanted.item_type, inspect.StrType) else "entries"
    return f"a list of {wanted.min_length or 0} to {wanted.max_length} {what}"


_EXPECTED: dict[type, Callable[[Any], str]] = {
    inspect.IntType: lambda wanted: _bounded("a whole number", wanted),
    inspect.FloatType: lambda wanted: _bounded("a number", wanted),
    inspect.StrType: _text_expected,
    inspect.BoolType: lambda _: "true or false",
    inspect.LiteralType: lambda wanted: f"one of {', '.join(sorted(wanted.values))}",
    inspect.EnumType: lambda wanted: f"one of {', '.join(wanted.cls)}",
    inspect.VarTupleType: _list_expected,
    inspect.StructType: lambda _: "a table",
}
