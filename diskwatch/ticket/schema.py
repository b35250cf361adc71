"""The schema that ships with the program, and what it says of a place in a ticket."""

import json
import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any

NAME = "diskwatch/ticket/1"
"""What a ticket of this schema carries; within it, things are only ever added."""

OWN_WORD = "a word of the program's own"
"""What the schema remarks of texts that come from no drive and no person."""

_PLAIN_WORD = re.compile(r"[a-z][a-z0-9:.-]{0,80}")


def schema_text() -> str:
    """The schema as it ships: JSON Schema, draft 2020-12."""
    return files("diskwatch.ticket").joinpath("schema.json").read_text(encoding="utf-8")


@cache
def schema() -> Mapping[str, Any]:
    """The schema."""
    found: dict[str, Any] = json.loads(schema_text())
    return found


@dataclass(frozen=True, slots=True)
class Shape:
    """What the schema says of one place in a ticket.

    Attributes:
        of: the piece of the schema; empty where it says nothing.
    """

    of: Mapping[str, Any]

    @classmethod
    def whole(cls) -> "Shape":
        """Of the ticket itself."""
        return cls(schema())

    @property
    def described(self) -> bool:
        """Whether the schema knows this place."""
        return bool(self.of)

    def member(self, key: str) -> "Shape":
        """A member of an object."""
        return self._of(_resolved(self.of).get("properties", {}).get(key))

    def item(self) -> "Shape":
        """An item of a list."""
        return self._of(_resolved(self.of).get("items"))

    def is_own_word(self, text: str) -> bool:
        """Whether a text here is none that a drive or a person gave."""
        of = _resolved(self.of)
        if "enum" in of or "const" in of or of.get("format") == "date-time":
            return True
        return of.get("$comment") == OWN_WORD and _PLAIN_WORD.fullmatch(text) is not None

    def _of(self, piece: object) -> "Shape":
        return Shape(piece if isinstance(piece, Mapping) else {})


def _resolved(of: Mapping[str, Any]) -> Mapping[str, Any]:
    name = of.get("$ref", "")
    return schema()["$defs"][name.removeprefix("#/$defs/")] if name else of
