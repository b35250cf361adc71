"""smartctl's plain text as labelled lines, and the numbers in it.

Two things make its numbers harder than they look: thousands are set apart as the locale has it, with a comma,
a point, a blank, an apostrophe or a byte that is no UTF-8; and labels are padded with any number of blanks.
A number is read whole or not at all: half a number would be an invented one.
"""

import re
from collections.abc import Iterable
from dataclasses import dataclass, field

_SEPARATORS = ",.'\u2019 \u00a0\u202f\u00ff\ufffd"
_NUMBER = re.compile(
    rf"(?P<number>[0-9]{{1,3}}(?:(?P<apart>[{_SEPARATORS}])[0-9]{{3}}(?:(?P=apart)[0-9]{{3}})*)|[0-9]{{1,40}})"
    r"\s*(?:%|bytes|Celsius|C|Pages|rpm|minutes)?\s*(?:\[.*)?"
)
_VERSION = re.compile(r"smartctl (?:version |pre-)?[0-9]")
_OWN_WORDS = re.compile(r"Smartctl open device|Read Device Identity|A mandatory SMART command|=== START OF ")
_LABELLED = re.compile(r"\s*(?P<label>[^\s:=][^:=]{0,70}?)\s*[:=]\s*(?P<value>.*?)\s*")


def decoded(output: bytes) -> str:
    """Bytes of a command as text; a byte that is no UTF-8 stays a character of its own, nothing is dropped."""
    try:
        return output.decode("utf-8")
    except UnicodeDecodeError:
        return output.decode("latin-1")


def lines_of(text: str) -> tuple[str, ...]:
    """The lines of a text, ended by line feeds alone.

    A drive's name may hold other letters that pass for line ends, and would then be cut in two.
    """
    return tuple(line.removesuffix("\r") for line in text.removesuffix("\n").split("\n")) if text else ()


def whole(text: str) -> int | None:
    """A number that makes up the whole text, but for thousands' separators and a unit behind it; else None."""
    found = _NUMBER.fullmatch(text.strip())
    if found is None:
        return None
    return int(re.sub(r"[^0-9]", "", found["number"]))


def hexadecimal(text: str) -> int | None:
    """A number such as ``0x04`` that makes up the whole text, else None."""
    found = re.fullmatch(r"\s*0x([0-9a-fA-F]{1,32})\s*", text)
    return int(found[1], 16) if found else None


def names_version(line: str) -> bool:
    """Whether a line names smartctl's version; its complaints begin with its name as well, in another case."""
    return _VERSION.match(line.strip()) is not None


def is_of_smartctl(line: str) -> bool:
    """Whether a line shows that it was smartctl that wrote it."""
    return names_version(line) or _OWN_WORDS.match(line.strip()) is not None


@dataclass(frozen=True, slots=True)
class Sheet:
    """A plain answer of smartctl.

    Attributes:
        lines: its lines, blanks at their ends removed.
        fields: by label, in lower case with single blanks, the values in the order in which they stand.
    """

    lines: tuple[str, ...]
    fields: dict[str, tuple[str, ...]] = field(repr=False)

    @classmethod
    def of(cls, lines: Iterable[str]) -> "Sheet":
        """Take up lines."""
        kept = tuple(line.rstrip() for line in lines)
        fields: dict[str, tuple[str, ...]] = {}
        for line in kept:
            found = _LABELLED.fullmatch(line)
            if found is not None:
                label = " ".join(found["label"].split()).lower()
                fields[label] = (*fields.get(label, ()), found["value"])
        return cls(kept, fields)

    def get(self, *labels: str) -> str | None:
        """The first value under any of these labels, tried in this order, that is not empty; else None."""
        for label in labels:
            for value in self.fields.get(label.lower(), ()):
                if value:
                    return value
        return None

    def all(self, label: str) -> tuple[str, ...]:
        """Every value under a label."""
        return self.fields.get(label.lower(), ())

    def holds(self, *pieces: str) -> bool:
        """Whether any line holds any of these pieces of text, whatever their case."""
        return self.line_with(*pieces) is not None

    def line_with(self, *pieces: str) -> str | None:
        """The first line that holds any of these pieces of text, whatever their case; else None."""
        wanted = [piece.lower() for piece in pieces]
        for line in self.lines:
            lower = line.lower()
            if any(piece in lower for piece in wanted):
                return line.strip()
        return None
