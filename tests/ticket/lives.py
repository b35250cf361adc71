"""Invented drives that live through days under the real analyser, in a history in memory."""

from collections.abc import Callable, Iterable, Mapping
from contextlib import contextmanager
from dataclasses import replace
from pathlib import Path
from types import MappingProxyType
from typing import Any

from diskwatch import analyser
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.records import Drive, DriveRound, Entry, KnownDrive, Pass, Place, Round, Settled
from diskwatch.ticket.document import About, ticket
from diskwatch.ticket.who import Host
from tests.samples import DAY, HDD, HERE, NOON, read

HOST = Host(
    name="studio-box.example",
    system="Linux",
    kernel="6.1.0-invented",
    architecture="x86_64",
    users=("marigold",),
)


def about(at: int, **more: Any) -> About:
    return About(**{"at": at, "host": HOST, **more})


def live(
    history: History,
    passes: Iterable[Pass],
    *,
    known: KnownDrive | None = None,
    drive: Drive = HDD,
    place: Place = HERE,
    words: Mapping[int, Settled] = MappingProxyType({}),
) -> KnownDrive:
    """Take passes in as the watch does, each a round of its own; before some of them the owner speaks."""
    state = analyser.start()
    for number, pass_ in enumerate(passes):
        if number in words:
            state = analyser.settle(state, words[number]).state
        known = known or history.admit(drive, place, pass_.at)
        step = analyser.advance(state, replace(pass_, drive=drive))
        state = step.state
        part = DriveRound(
            known=known,
            pass_=replace(pass_, drive=drive),
            state=analyser.dump(state),
            findings=step.findings,
            evidence=step.evidence,
            call=step.call,
        )
        entries = tuple(replace(one, drive=known.number) for one in step.happened)
        history.record(Round(at=pass_.at, drives=(part,), entries=entries))
    assert known is not None
    return known


def days(
    count: int,
    signals: Callable[[int], Mapping[str, int]],
    *,
    begin: int = NOON,
    off: Callable[[int], bool] = lambda _day: False,
    a_day: int = 2,
) -> Iterable[Pass]:
    """Passes of so many days; the drive is off on some."""
    hours = 1_000
    for day in range(count):
        if off(day):
            continue
        for half in range(a_day):
            hours += 24 // a_day
            found: dict[str, object] = {"power_on_hours": hours, **signals(day)}
            yield read(begin + day * DAY + half * 3_600, HDD, **found)


@contextmanager
def opened(folder: Path, *passes: Iterable[Pass], entries: Iterable[Entry] = (), **more: Any):
    """A history in which drives have lived, open to read."""
    with History.open(folder) as history:
        for one in passes:
            live(history, one, **more)
        history.note(*entries)
    with Past.open(folder) as past:
        yield past


def a_ticket(past: Past, at: int, number: int = 1, **more: Any) -> dict[str, Any]:
    return ticket(past, past.bays(at), number, about(at, **more))
