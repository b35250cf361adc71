"""Check a ticket: its schema, its digest, and whether it holds together; every fault is named."""

import argparse
import json
from pathlib import Path
from typing import Any

from diskwatch.cli.common import talk
from diskwatch.errors import DiskwatchError
from diskwatch.ticket import canonical
from diskwatch.ticket.checking import faults
from diskwatch.ticket.consistency import loose_ends, unchecked
from diskwatch.ticket.schema import NAME, schema
from diskwatch.units import plain

_MOST_BYTES = 256 << 20


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("file", metavar="FILE", help="a ticket, or a list of tickets as --all makes it")


def run(args: argparse.Namespace) -> int:
    """Check; 0 where nothing is wrong, 1 where something is, 4 where the file cannot be read."""
    path = Path(args.file)
    tickets, wrong = _read(path)
    for place, one in enumerate(tickets, 1):
        of = f"ticket {place}: " if len(tickets) > 1 else ""
        wrong += [f"{of}{fault}" for fault in _faults(one)]
    for fault in wrong:
        print(plain(fault))
    if wrong:
        talk(f"diskwatch: {len(wrong):,} {'fault' if len(wrong) == 1 else 'faults'} in {args.file}")
        return 1
    for note in dict.fromkeys(note for one in tickets for note in unchecked(one)):
        talk(f"diskwatch: {note}")
    print("No fault was found: schema, digest and contents agree.")
    return 0


def _read(path: Path) -> tuple[list[Any], list[str]]:
    try:
        if path.stat().st_size > _MOST_BYTES:
            raise DiskwatchError(f"{plain(str(path))} is larger than any ticket")
        text = path.read_bytes().decode("utf-8")
    except OSError as error:
        raise DiskwatchError(f"{plain(str(path))} cannot be read: {error.strerror}") from error
    except UnicodeDecodeError:
        return [], ["the file is no UTF-8"]
    try:
        found = json.loads(text, object_pairs_hook=_once, parse_constant=_no_number)
    except (ValueError, RecursionError) as error:
        return [], [f"the file is no JSON: {error}"]
    if isinstance(found, list):
        return found, [] if found else ["the list of tickets is empty"]
    return [found], []


def _once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    """An object; a name that stands twice means different things to different readers (RFC 8259, 4)."""
    found = dict(pairs)
    if len(found) < len(pairs):
        names = [name for name, _ in pairs]
        twice = next(name for name in names if names.count(name) > 1)
        raise ValueError(f"the name {twice!r} stands twice in one object")
    return found


def _no_number(name: str) -> object:
    raise ValueError(f"{name} is no number")


def _faults(one: Any) -> list[str]:
    if not isinstance(one, dict) or one.get("schema") != NAME:
        return [f"it is no ticket of the schema {NAME}"]
    found = list(faults(one, schema()))
    told = one.get("digest")
    try:
        worked_out = canonical.digest(one)
    except (ValueError, RecursionError) as error:
        found.append(f"it has no canonical form: {error}")
    else:
        if not isinstance(told, dict) or told.get("sha256") != worked_out:
            found.append("the digest does not fit: something was changed since the ticket was made")
    # What has not the right shape cannot be asked whether it holds together.
    return found or list(loose_ends(one))
