"""A ticket as one printed page for a person: what a warranty desk asks for stands at the top. Pure."""

import textwrap
import unicodedata
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from diskwatch.ticket.part import Json
from diskwatch.units import plain, say_bytes, say_count

WIDTH = 72
"""Columns of the page."""

LINES = 60
"""Lines of the page: what A4 and Letter both hold in a common letter size."""

_LABEL = 16
_MOST_LETTERS = 400
_MOST_OF_EVENT = 160


def page(ticket: Json) -> str:
    """The page, of plain letters only, ending with a line feed.

    Args:
        ticket: the document as `diskwatch.ticket.document.ticket` makes it.
    """
    foot = [*_foot(ticket)]
    body: list[str] = []
    for part in (_head, _asked, _findings, _values, _tests, _events):
        body += part(ticket)
    room = LINES - len(foot)
    if len(body) > room:
        more = len(body) - room + 1
        body = [*body[: room - 1], f"({more} more lines: see the JSON form of this ticket)"]
    return "\n".join([*body, *foot]) + "\n"


def _head(ticket: Json) -> Iterator[str]:
    drive, owner, machine = (_object(ticket[name]) for name in ("drive", "owner", "machine"))
    yield from _wrapped("TICKET FOR A DRIVE")
    yield ""
    size, hours = drive["capacity_bytes"], drive["power_on_hours"]
    shown = (
        ("Model", drive["model"]),
        ("Serial", drive["serial"]),
        ("Firmware", drive["firmware"]),
        ("Size", None if size is None else f"{say_bytes(int(size))} ({say_count(int(size))} bytes)"),
        ("WWN", drive["wwn"]),
        ("Powered on", None if hours is None else f"{say_count(int(hours))} hours"),
        ("Warranty until", owner.get("warranty_until")),
        ("Asset", owner.get("asset")),
        ("Label", owner.get("label")),
        ("Where", ", ".join(str(one) for one in (drive["device"], drive["bay"], machine["host"]) if one)),
    )
    needed = {"Model", "Serial", "Firmware", "Size"}
    for label, value in shown:
        if value is not None or label in needed:
            yield from _labelled(label, "not known" if value is None else str(value))
    yield ""


def _asked(ticket: Json) -> Iterator[str]:
    call = _object(ticket["call"])
    yield from _wrapped(str(ticket["asked_for"]))
    if call:
        cause = f", cause: {call['cause']}" if call["cause"] else ""
        since = f" since {_day(call['since'])}" if call["since"] else ""
        yield from _wrapped(f"Call: {call['word']}{since}{cause}.")
    odds = _object(ticket["odds"])
    if odds.get("sentence"):
        yield from _wrapped(str(odds["sentence"]))
    yield ""


def _findings(ticket: Json) -> Iterator[str]:
    findings = _list(ticket["findings"])
    if not findings:
        return
    yield "What was found"
    for one in findings[:4]:
        since = f" (since {_day(one['since'])})" if one["since"] else ""
        yield from _wrapped(f"{one['sentence']}{since}", "- ")
    if len(findings) > 4:
        yield f"- and {len(findings) - 4} more"
    yield ""


def _values(ticket: Json) -> Iterator[str]:
    """Counts, wear and what else is kept by its changes, where it moved: first and latest."""
    moved = [
        one
        for one in _list(ticket["signals"])
        if one["kind"] != "word" and one["changes"] and one["first"]["value"] != one["latest"]["value"]
    ]
    if not moved:
        return
    moved.sort(key=lambda one: (one["evidence_days"] is None, one["name"]))
    yield f"{'Signal':<34}{'first read':>19}{'now':>19}"
    for one in moved[:10]:
        first, now = (_value(one[which]["value"]) for which in ("first", "latest"))
        yield f"{_fit(str(one['name']), 34)}{_fit(first, 19, right=True)}{_fit(now, 19, right=True)}"
    if len(moved) > 10:
        yield f"and {len(moved) - 10} more"
    yield ""


def _tests(ticket: Json) -> Iterator[str]:
    tests = _list(ticket["self_tests"])
    if not tests:
        return
    yield "Self-tests, newest first"
    for one in tests[:3]:
        at = f" at {say_count(int(one['hours']))} hours" if one["hours"] is not None else ""
        lba = f", first bad block {one['lba']}" if one["lba"] is not None else ""
        yield from _wrapped(f"{one['name']}: {one['result']}{at}{lba}", "- ")
    yield ""


def _events(ticket: Json) -> Iterator[str]:
    # Rises stand in the table of counters already.
    events = [one for one in _list(ticket["events"]) if one["kind"] != "rise"]
    if not events:
        return
    yield "What happened last"
    for one in events[-6:]:
        text = str(one["text"])
        cut = text if len(text) <= _MOST_OF_EVENT else f"{text[:_MOST_OF_EVENT]} ..."
        yield from _wrapped(f"{_day(one['at']) if one['at'] else 'some day'}: {cut}", "- ")
    yield ""


def _foot(ticket: Json) -> Iterator[str]:
    watching, hidden = _object(ticket["watching"]), _list(ticket["hidden"])
    first = watching["first_read"]
    gaps = len(watching["gaps"]) + watching["gaps_left_out"]
    yield from _wrapped(
        f"Watched since {_day(first)}; days with a reading: {say_count(watching['days_read'])}; "
        f"gaps of two days and more: {say_count(gaps)}."
        if first
        else "It has not been read yet."
    )
    if hidden:
        kinds = ", ".join(str(one["kind"]) for one in hidden)
        yield from _wrapped(f"Hidden, each told by an alias: {kinds}.")
    yield from _wrapped(str(_texts(ticket["cautions"])[0]))
    made = _object(ticket["made_by"])
    by = f"{made['program']} {made['version']}"
    yield from _wrapped(f"Made {ticket['made_at']} by {by}; SHA-256 of its JSON form:")
    yield str(_object(ticket["digest"])["sha256"])


def _object(thing: object) -> Mapping[str, Any]:
    return thing if isinstance(thing, Mapping) else {}


def _list(thing: object) -> Sequence[Mapping[str, Any]]:
    return thing if isinstance(thing, list) else []


def _texts(thing: object) -> Sequence[object]:
    return thing if isinstance(thing, list) else []


def _day(at: object) -> str:
    return str(at)[:10]


def _value(value: object) -> str:
    if value is None:
        return "not known"
    return say_count(value) if isinstance(value, int) else str(value)


def _labelled(label: str, value: str) -> Iterator[str]:
    shown = plain(value[:_MOST_LETTERS])
    lines = _lines(shown, WIDTH - _LABEL) or [""]
    yield f"{label:<{_LABEL}}{lines[0]}"
    for line in lines[1:3]:
        yield " " * _LABEL + line


def _wrapped(words: str, mark: str = "") -> Iterator[str]:
    shown = plain(words if len(words) <= _MOST_LETTERS else words[:_MOST_LETTERS] + " ...")
    for place, line in enumerate(_lines(shown, WIDTH - len(mark))):
        yield (mark if place == 0 else " " * len(mark)) + line


def _lines(words: str, width: int) -> list[str]:
    """Lines of so many columns; letters of double width are counted as what they take."""
    wide = any(_columns(letter) > 1 for letter in words)
    # Where any letter takes two columns, half as many letters fit in any case.
    return textwrap.wrap(words, width // 2 if wide else width, break_on_hyphens=False)


def _fit(words: str, width: int, *, right: bool = False) -> str:
    shown = plain(words)
    while shown and sum(map(_columns, shown)) > width - 1:
        shown = shown[:-1]
    gap = " " * (width - sum(map(_columns, shown)))
    return gap + shown if right else shown + gap


def _columns(letter: str) -> int:
    return 2 if unicodedata.east_asian_width(letter) in "WF" else 1
