"""What is to be hidden, and by which alias each name is told: stable, and telling nothing."""

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from enum import StrEnum

from diskwatch.records import DriveLine
from diskwatch.records.placeholders import empty_serial, empty_wwn
from diskwatch.ticket.who import Host

_OF_A_USER = re.compile(r"/(?:home|run/media)/([^/]+)")


class Hidden(StrEnum):
    """A kind of name that may be hidden."""

    SERIAL = "serial"
    HOST = "host"
    PATHS = "paths"


@dataclass(frozen=True, slots=True, kw_only=True)
class Name:
    """One name that is to be hidden.

    Attributes:
        kind: as the owner asks for it.
        text: the name itself.
        alias: what is told instead.
        wwn: whether it is a world-wide name, which is written in many ways.
    """

    kind: Hidden
    text: str
    alias: str
    wwn: bool = False


def names(kinds: Iterable[Hidden], lines: Iterable[DriveLine], host: Host) -> tuple[Name, ...]:
    """Every name to hide; the same history and machine always give the same aliases.

    Args:
        kinds: what the owner asks to hide.
        lines: all drives of the history: one may be told of in another one's ticket.
        host: the machine.
    """
    asked = set(kinds)
    drives = sorted(lines, key=lambda line: line.number)
    found: list[Name] = []
    if Hidden.SERIAL in asked:
        found += _serials(drives)
    points = {mount.point for line in drives for mount in line.place.lives_here}
    if Hidden.HOST in asked:
        found += _people(host, points)
    if Hidden.PATHS in asked:
        found += [
            Name(kind=Hidden.PATHS, text=point, alias=f"path-{place}")
            for place, point in enumerate(sorted(points), 1)
            if point.strip("/ ")
        ]
    once = {(name.kind, name.text): name for name in reversed(found) if name.text.strip()}
    return tuple(once.values())


def _serials(drives: Iterable[DriveLine]) -> Iterator[Name]:
    known: dict[str, str] = {}
    for line in drives:
        who = line.drive.identity
        if who.serial is not None and not empty_serial(who.serial):
            known.setdefault(who.serial, f"serial-{line.number}")
        if who.wwn is not None and not empty_wwn(who.wwn):
            yield Name(kind=Hidden.SERIAL, text=who.wwn, alias=f"wwn-{line.number}", wwn=True)
        other = line.owner.replaced_by
        if other is not None:
            known.setdefault(other, f"serial-of-the-one-after-{line.number}")
    for serial, alias in known.items():
        yield Name(kind=Hidden.SERIAL, text=serial, alias=alias)


def _people(host: Host, points: Iterable[str]) -> Iterator[Name]:
    yield Name(kind=Hidden.HOST, text=host.name, alias="host-1")
    yield Name(kind=Hidden.HOST, text=host.name.partition(".")[0], alias="host-1")
    # People whom this machine's list of users does not know may still have their names in paths.
    homes = {found[1] for point in points if (found := _OF_A_USER.match(point)) is not None}
    for place, user in enumerate((*host.users, *sorted(homes - set(host.users))), 1):
        yield Name(kind=Hidden.HOST, text=user, alias=f"user-{place}")
