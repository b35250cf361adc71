"""What the owner has said of a drive. Pure."""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import UTC, date, datetime

from diskwatch.errors import UsageError
from diskwatch.units import DAY, is_active, plain

LABEL, ASSET, WARRANTY, BACKED_UP, REPLACED_BY = "label", "asset", "warranty-until", "backed-up", "replaced-by"
"""Names of the facts, as the history keeps them."""

TOLD = (LABEL, ASSET, WARRANTY, BACKED_UP)
"""Facts that an owner tells by themselves."""

LONGEST = 60
"""Letters of a label or an asset number, at most: they stand in one line beside other things."""

LONGEST_REASON = 500
"""Letters of the reason why something is settled, at most."""

_DAY = re.compile(r"\d{4}-\d{2}-\d{2}", re.ASCII)


@dataclass(frozen=True, slots=True, kw_only=True)
class OwnerFacts:
    """What the owner has said of a drive; what was not said is None.

    Attributes:
        asset: number or name in the owner's own inventory.
        warranty_until: last day of the maker's warranty, ``2027-05-31``.
        backed_up: day of the last backup that the owner made of it.
        replaced_by: the drive that took its place: its serial, else what else tells it from others.
        replaced_at: when that was said, UTC seconds since 1970.
    """

    asset: str | None = None
    warranty_until: str | None = None
    backed_up: str | None = None
    replaced_by: str | None = None
    replaced_at: int | None = None


def owner_facts(kept: Mapping[str, tuple[str, int]]) -> OwnerFacts:
    """The facts of one drive from its rows.

    Args:
        kept: value and time of saying, UTC seconds since 1970, by the fact's name; an empty value takes back.
    """
    said = {name: value or None for name, (value, _) in kept.items()}
    return OwnerFacts(
        asset=said.get(ASSET),
        warranty_until=said.get(WARRANTY),
        backed_up=said.get(BACKED_UP),
        replaced_by=said.get(REPLACED_BY),
        replaced_at=kept[REPLACED_BY][1] if said.get(REPLACED_BY) else None,
    )


def checked_fact(name: str, value: str, now: int) -> str:
    """A fact as it is kept; empty text takes it back.

    Args:
        name: one of `TOLD`.
        value: what the owner wrote.
        now: UTC seconds since 1970.

    Raises:
        UsageError: there is no such fact, or it cannot be right.
    """
    if name not in TOLD:
        raise UsageError(
            f"there is no owner's fact {plain(name[:LONGEST])}", hint=f"known are: {', '.join(TOLD)}"
        )
    if name in {WARRANTY, BACKED_UP}:
        return _day(name, value.strip(), now)
    return checked_text(f"--{name}", value, LONGEST)


def checked_text(what: str, text: str, longest: int) -> str:
    """Words of the owner, outer blanks removed.

    Args:
        what: what they are given as, for complaints.
        text: the words.
        longest: letters, at most.

    Raises:
        UsageError: they are too long, or hold letters that a terminal acts on.
    """
    words = text.strip()
    if len(words) > longest:
        raise UsageError(f"{what} has {len(words):,} letters", hint=f"write at most {longest}")
    odd = next((letter for letter in words if is_active(letter) or letter in "\t\n\r"), None)
    if odd is not None:
        raise UsageError(
            f"{what} holds the control character U+{ord(odd):04X}",
            hint="write it in plain letters, on one line",
        )
    return words


def _day(name: str, text: str, now: int) -> str:
    if not text:
        return ""
    shown = plain(text[:LONGEST])
    try:
        day = date.fromisoformat(text) if _DAY.fullmatch(text) else None
    except ValueError:
        day = None
    if day is None:
        raise UsageError(f"--{name} {shown} is no day of the calendar", hint="write it like 2027-05-31")
    # Somewhere it is tomorrow already.
    if name == BACKED_UP and day > datetime.fromtimestamp(now + DAY, UTC).date():
        raise UsageError(f"--{name} {shown} has not come yet", hint="name the day of a backup that was made")
    return day.isoformat()
