"""What a part of a ticket is: a value, or the reason why it is not known."""

from collections.abc import Mapping
from dataclasses import dataclass

from diskwatch.units import rfc3339

LONGEST = 4_000
"""Letters of one text from outside; the answer of the drive has its own limit."""

_MOST_ITEMS, _LONGEST_KEY = 200, 200

Json = Mapping[str, object]


@dataclass(frozen=True, slots=True, kw_only=True)
class Part:
    """One member of a ticket.

    Attributes:
        value: what is known, plain JSON values; None where nothing is.
        reason: why not, one sentence; None where it is known.
    """

    value: object
    reason: str | None = None


def at(moment: int | None) -> str | None:
    """A time as RFC 3339 writes it; None where there is none, or no calendar has it."""
    if moment is None:
        return None
    try:
        return rfc3339(moment)
    except (ValueError, OverflowError, OSError):
        return None


def short(words: str | None) -> str | None:
    """A text from outside, cut where it is longer than anybody reads, which is then said in it."""
    if words is None or len(words) <= LONGEST:
        return words
    return f"{words[:LONGEST]} [... {len(words) - LONGEST:,} letters left out]"


def plain_data(thing: object, depth: int = 6) -> object:
    """Numbers behind a sentence: long texts cut, and nothing nested deeper than anybody reads."""
    if isinstance(thing, str):
        return short(thing)
    if isinstance(thing, Mapping):
        kept = list(thing.items())[:_MOST_ITEMS]
        return (
            {str(key)[:_LONGEST_KEY]: plain_data(value, depth - 1) for key, value in kept} if depth else "[...]"
        )
    if isinstance(thing, list | tuple):
        return [plain_data(value, depth - 1) for value in thing[:_MOST_ITEMS]] if depth else "[...]"
    return thing
