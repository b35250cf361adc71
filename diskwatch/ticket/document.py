"""All parts of a ticket put together, within 1 MiB, with its digest."""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, replace

from diskwatch import __version__, analyser
from diskwatch.history.proof import Copy
from diskwatch.history.reader import Past
from diskwatch.judge import rules
from diskwatch.records import Bays, ClassDay, DriveLine
from diskwatch.ticket import (
    canonical,
    cautions,
    expected,
    happened,
    latency,
    ledgers,
    signals,
    stake,
    stated,
    thought,
    watching,
    who,
)
from diskwatch.ticket.asked import asked_for
from diskwatch.ticket.hiding import Hiding
from diskwatch.ticket.names import Hidden, names
from diskwatch.ticket.part import Json, Part, at
from diskwatch.ticket.schema import NAME, Shape
from diskwatch.ticket.shortening import shortened
from diskwatch.ticket.who import Host
from diskwatch.ticket.writing import text_of
from diskwatch.units import DAY, day_number

MOST_BYTES = 1 << 20
"""What a ticket may measure, as it is written."""

_MOST_EVENTS = 5_000
_MOST_ANSWER = 256_000


@dataclass(frozen=True, slots=True, kw_only=True)
class About:
    """What a ticket needs besides the history.

    Attributes:
        at: now, UTC seconds since 1970.
        host: the machine.
        settings: those that matter, plain JSON values; None where they are not known.
        since: leave out events and changes before this, UTC seconds since 1970; None for none.
        hide: kinds of names to hide.
    """

    at: int
    host: Host
    settings: Json | None = None
    since: int | None = None
    hide: tuple[Hidden, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class _Limits:
    """How much of the detail goes in.

    Attributes:
        before: events and changes before this are left out; None for none.
        events: how many events at most.
        answer: letters of the drive's own answer at most.
        letters: letters of any other text at most; None for as many as there are.
        items: items of any list at most; None likewise.
    """

    before: int | None
    events: int = _MOST_EVENTS
    answer: int = _MOST_ANSWER
    letters: int | None = None
    items: int | None = None


def ticket(past: Past, bays: Bays, number: int, about: About) -> dict[str, object]:
    """The ticket of a drive.

    Args:
        past: the history.
        bays: all drives as last known.
        number: the drive's number.
        about: what else is needed.

    Raises:
        HistoryError: the history cannot be read.
    """
    line = next(one for one in bays.every if one.number == number)
    found = _Found.of(past, line, about)
    aliases = names(about.hide, bays.every, about.host)
    for limits in _limits(about.since, found.copies):
        hiding = Hiding(aliases)
        whole = _whole(line, found, about, limits)
        told = hiding.document(whole, Shape.whole())
        document = dict(told) if isinstance(told, Mapping) else {}
        document["hidden"] = hiding.listed(about.hide)
        document["digest"] = {"sha256": canonical.digest(document)}
        if len(text_of(document).encode("utf-8")) <= MOST_BYTES:
            break
    return document


def _limits(since: int | None, copies: tuple[Copy, ...]) -> Iterator[_Limits]:
    """Ever less, until it fits; older detail goes only before a dated exact state, as long as there is one."""
    yield _Limits(before=since)
    cuts = [copies[-back].at for back in (156, 52, 26, 13, 4, 1) if back <= len(copies)]
    for cut in cuts:
        yield _Limits(before=max(cut, since or cut))
    newest = _Limits(before=max([*cuts[-1:], *([since] if since is not None else [])], default=None))
    for events, answer, letters, items in (
        (1_000, 64_000, 2_000, None),
        (300, 64_000, 1_000, 300),
        (100, 16_000, 400, 100),
        (30, 4_000, 200, 30),
        (10, 1_000, 80, 10),
    ):
        yield replace(newest, events=events, answer=answer, letters=letters, items=items)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Found:
    """What the history holds of a drive, read once."""

    state: analyser.DriveState | None
    copies: tuple[Copy, ...]
    parts: Mapping[str, Part]
    events: Callable[[_Limits], tuple[Part, int]]
    signals: Callable[[_Limits], tuple[Part, int]]
    answer: Callable[[_Limits], Part]

    @classmethod
    def of(cls, past: Past, line: DriveLine, about: About) -> "_Found":
        number = line.number
        state = _state(past.state(number))
        days = past.pass_days(number)
        reading = past.last_reading(number)
        entries = past.day_book(drive=number)
        pasts = past.signal_pasts(number)
        printed = past.printed(number)
        copies = past.copies(number)
        # A drive that is gone was last seen at work long ago.
        seen = about.at if line.last_pass is None else min(about.at, line.last_pass.at)
        return cls(
            state=state,
            copies=copies,
            parts={
                "ledgers": ledgers.ledgers_part(
                    state,
                    line.findings,
                    ledgers.Copies(
                        made=copies,
                        load=lambda of: _state(past.state_of(number, of)),
                        passes=lambda after: past.followed(number, ledgers.FOLLOWED, after),
                        exact_from=past.exact_from(number),
                    ),
                ),
                "latency": latency.latency_part(
                    _classes(past, number, day_number(line.first_seen)),
                    _classes(past, number, day_number(seen) - latency.WINDOW),
                ),
                "attributes": stated.attributes_part(reading),
                "self_tests": stated.self_tests_part(reading),
                "moves": who.moves_part(past.places(number)),
                "watching": watching.watching_part(line, days, about.at),
                "odds": expected.odds_part(line, about.at),
                "margin": expected.margin_part(line, about.at),
                "copy_plan": stake.copy_part(
                    line, past.rollups(number, seen - stake.RATE_DAYS * DAY, about.at)
                ),
            },
            events=lambda limits: happened.events_part(entries, limits.before, limits.events),
            signals=lambda limits: signals.signals_part(line, pasts, state, limits.before),
            answer=lambda limits: stated.answer_part(printed, limits.answer),
        )


def _classes(past: Past, number: int, first: int) -> tuple[tuple[int, ClassDay], ...]:
    """A drive's mean times by class of load, of so many days from a day on."""
    until = first + latency.WINDOW + 1
    return past.class_days(number, first, until) or latency.condensed(
        past.rollups(number, first * DAY, until * DAY)
    )


def _state(kept: str | None) -> analyser.DriveState | None:
    """A state, or None where there is none or this program cannot read it."""
    if kept is None:
        return None
    try:
        return analyser.load(kept)
    except ValueError:
        return None


def _whole(line: DriveLine, found: _Found, about: About, limits: _Limits) -> dict[str, object]:
    events, events_out = found.events(limits)
    told, changes_out = found.signals(limits)
    parts = {
        "drive": who.drive_part(line),
        "owner": who.owner_part(line),
        "machine": who.host_part(about.host),
        "call": thought.call_part(line),
        "findings": thought.findings_part(line),
        "signals": told,
        **found.parts,
        "events": events,
        "answer": found.answer(limits),
        "settings": Part(
            value=about.settings, reason="They could not be read." if not about.settings else None
        ),
    }
    document: dict[str, object] = {
        "schema": NAME,
        "made_at": at(about.at),
        "made_by": {
            "program": "diskwatch",
            "version": __version__,
            "rules_version": rules.VERSION,
            "parameters_version": None if found.state is None else found.state.parameters,
        },
        "asked_for": asked_for(*((None, None) if line.call is None else (line.call.word, line.call.cause))),
        **{name: part.value for name, part in parts.items()},
        "cautions": list(cautions.cautions(line)),
        "not_known": [
            {"member": name, "reason": part.reason} for name, part in parts.items() if part.reason is not None
        ],
        "thinned": _thinned(limits, events_out, changes_out),
    }
    document = shortened(document, limits.letters, limits.items)
    stored = canonical.storable(document)
    return dict(stored) if isinstance(stored, Mapping) else {}


def _thinned(limits: _Limits, events: int, changes: int) -> Json | None:
    cut = limits.letters is not None
    if not events and not changes and not cut:
        return None
    said = [f"{events:,} events and {changes:,} changes of counters are left out"]
    if limits.before is not None:
        said.append(
            f"all of them before {at(limits.before)}" if limits.events == _MOST_EVENTS else "the oldest"
        )
    said.append(
        "every ledger is told from a dated exact state on, so that its evidence can be worked out again"
    )
    if cut:
        said.append("long texts and lists are cut")
    return {
        "before": at(limits.before),
        "sentence": "; ".join(said) + ".",
        "events": events,
        "changes": changes,
        "shortened": cut,
    }
