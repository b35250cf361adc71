"""Whether a document is as the schema asks: the part of JSON Schema (draft 2020-12) that ours uses.

The package from the registry that knows all of it takes 80 ms to load and 10 MiB, with a compiled part that old
machines lack a build of; it checks this checker in the tests.
"""

import re
from collections.abc import Callable, Iterator, Mapping
from datetime import datetime
from typing import Any

_TYPES: Mapping[str, Callable[[Any], bool]] = {
    "null": lambda thing: thing is None,
    "boolean": lambda thing: isinstance(thing, bool),
    "string": lambda thing: isinstance(thing, str),
    "object": lambda thing: isinstance(thing, dict),
    "array": lambda thing: isinstance(thing, list),
    "number": lambda thing: isinstance(thing, int | float) and not isinstance(thing, bool),
    "integer": lambda thing: (
        (isinstance(thing, int) and not isinstance(thing, bool))
        or (isinstance(thing, float) and thing.is_integer())
    ),
}
KNOWN = frozenset(
    {"$schema", "$id", "$defs", "$ref", "$comment", "title", "description", "type", "enum", "const", "format"}
    | {"properties", "required", "items", "pattern", "minimum", "minItems", "maxItems"}
)
"""Words of a schema that are understood here; a test holds our schema to them."""


def faults(thing: object, schema: Mapping[str, Any]) -> Iterator[str]:
    """What is wrong with a document, one sentence each, with the place.

    Args:
        thing: the document as it was read.
        schema: what it should be like.
    """
    yield from _Checker(schema).faults(thing, schema, "the ticket")


class _Checker:
    def __init__(self, whole: Mapping[str, Any]) -> None:
        self._defs: Mapping[str, Any] = whole.get("$defs", {})

    def faults(self, thing: Any, schema: Mapping[str, Any], where: str) -> Iterator[str]:
        if "$ref" in schema:
            yield from self.faults(thing, self._defs[schema["$ref"].removeprefix("#/$defs/")], where)
        wanted = schema.get("type", [])
        wanted = [wanted] if isinstance(wanted, str) else wanted
        if wanted and not any(_TYPES[one](thing) for one in wanted):
            yield f"{where} should be of type {' or '.join(wanted)}, not {_said(thing)}"
            return
        if "const" in schema and not _same(thing, schema["const"]):
            yield f"{where} should be {_said(schema['const'])}, not {_said(thing)}"
        if "enum" in schema and not any(_same(thing, one) for one in schema["enum"]):
            yield f"{where} should be one of {', '.join(map(_said, schema['enum']))}, not {_said(thing)}"
        if isinstance(thing, str):
            yield from _text_faults(thing, schema, where)
        elif isinstance(thing, dict):
            yield from self._object_faults(thing, schema, where)
        elif isinstance(thing, list):
            yield from self._list_faults(thing, schema, where)
        elif _TYPES["number"](thing) and thing < schema.get("minimum", thing):
            yield f"{where} should be at least {schema['minimum']}, not {_said(thing)}"

    def _object_faults(self, thing: dict[str, Any], schema: Mapping[str, Any], where: str) -> Iterator[str]:
        for name in schema.get("required", ()):
            if name not in thing:
                yield f"{where} lacks {name}"
        for name, piece in schema.get("properties", {}).items():
            if name in thing:
                yield from self.faults(thing[name], piece, name if where == "the ticket" else f"{where}.{name}")

    def _list_faults(self, thing: list[Any], schema: Mapping[str, Any], where: str) -> Iterator[str]:
        least, most = schema.get("minItems", 0), schema.get("maxItems", len(thing))
        if not least <= len(thing) <= most:
            yield f"{where} should have {least} to {most} items, not {len(thing)}"
        if "items" in schema:
            for place, item in enumerate(thing):
                yield from self.faults(item, schema["items"], f"{where}[{place}]")


def _text_faults(thing: str, schema: Mapping[str, Any], where: str) -> Iterator[str]:
    if "pattern" in schema and re.search(schema["pattern"], thing) is None:
        yield f"{where} is not written as it should be: {_said(thing)}"
    elif schema.get("format") == "date-time":
        try:
            datetime.fromisoformat(thing)
        except ValueError:
            yield f"{where} is no time: {_said(thing)}"


def _same(one: object, other: object) -> bool:
    return type(one) is type(other) and one == other


def _said(thing: object) -> str:
    words = repr(thing)
    return words if len(words) <= 60 else f"{words[:57]}..."
