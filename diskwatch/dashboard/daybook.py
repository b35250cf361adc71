"""Entries of the day book as lines: a day's date once, then hour, kind, drive and what happened. Pure."""

from collections.abc import Iterator, Mapping, Sequence
from datetime import UTC, datetime, tzinfo

from rich.cells import cell_len
from rich.text import Text

from diskwatch.dashboard.cells import fit, wrap
from diskwatch.records import Entry
from diskwatch.units import plain

_WIDEST_KIND = 10
_NARROW = 60
_LOUD = frozenset({"call", "drift", "trouble"})


def entry_lines(
    entries: Sequence[Entry], names: Mapping[int, str], width: int, zone: tzinfo | None = None
) -> Iterator[Text]:
    """The lines of some entries, in the order given.

    Args:
        entries: what happened.
        names: harmless names of drives by number.
        width: columns that every line must keep within.
        zone: the zone of the dates; None for the host's own.
    """
    day = ""
    for entry in entries:
        moment = datetime.fromtimestamp(entry.at, UTC).astimezone(zone)
        today = f"{moment:%A} {moment.day} {moment:%B %Y}"
        if today != day:
            if day:
                yield Text()
            day = today
            yield fit(Text(f" {day}", style="bold underline"), width)
        yield from _entry(entry, f"{moment:%H:%M}", names, width)


def _entry(entry: Entry, hour: str, names: Mapping[int, str], width: int) -> Iterator[Text]:
    kind = plain(entry.kind)
    lead = f"   {hour}  " if width < _NARROW else f"   {hour}  {kind:<{_WIDEST_KIND}}  "
    who = names.get(entry.drive, "") if entry.drive is not None else ""
    told = f"{who}: {plain(entry.text)}" if who else plain(entry.text)
    room = max(width - cell_len(lead) - 1, 10)
    style = "bold" if entry.kind in _LOUD else ""
    for number, part in enumerate(wrap(told, room)):
        begin = lead if number == 0 else " " * cell_len(lead)
        yield fit(Text.assemble((begin, style), part), width)
