"""The ticket of a drive: what a help desk or a warranty desk needs to act without asking back.

JSON by its own schema (--schema), or one printed page (--text). Serials, host and user names and mount paths
can be hidden (--hide): each is then told by an alias that stays the same throughout.
"""

import argparse
import os
import pwd
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from diskwatch.cli.common import now, settings, state_folder, talk
from diskwatch.cli.daybook import since_when
from diskwatch.errors import NothingToWorkOn, SettingsError, UsageError
from diskwatch.history.reader import Past
from diskwatch.records import Bays, DriveLine
from diskwatch.ticket.document import About, ticket
from diskwatch.ticket.names import Hidden
from diskwatch.ticket.page import page
from diskwatch.ticket.part import Json
from diskwatch.ticket.schema import schema_text
from diskwatch.ticket.who import Host
from diskwatch.ticket.writing import put, text_of

if TYPE_CHECKING:
    from diskwatch.settings import Settings

_FIRST_USER, _LAST_USER = 1_000, 60_000
"""Numbers of accounts that people have; the lower ones are the system's (Debian policy 9.2.2)."""


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument(
        "drive", metavar="DRIVE", nargs="?", help="serial, WWN, device, label, or an unambiguous part of one"
    )
    parser.add_argument("--all", action="store_true", help="a list with the tickets of all drives")
    parser.add_argument(
        "--since", metavar="T", help="leave out events and changes before T: 2026-12-01, or 90d for days"
    )
    parser.add_argument("-o", metavar="FILE", dest="file", help="write to FILE (default: standard output)")
    parser.add_argument("--force", action="store_true", help="write over FILE where it is there already")
    parser.add_argument("--hide", metavar="WHAT", help=f"hide these, each told by an alias: {','.join(Hidden)}")
    parser.add_argument("--text", action="store_true", help="one printed page for a person")
    parser.add_argument("--schema", action="store_true", help="the JSON Schema of a ticket, and nothing else")


def run(args: argparse.Namespace) -> int:
    """Make tickets; 0, 2 where no drive is meant or FILE is there already, 3 where there is no drive."""
    if args.schema:
        return _write(args, schema_text())
    at = now()
    hide = _kinds(args.hide)
    since = None if args.since is None else since_when(args.since, at)
    about = About(at=at, host=this_host(), settings=_settings(args), since=since, hide=hide)
    with Past.open(state_folder(args)) as past:
        bays = past.bays(at)
        tickets = [ticket(past, bays, line.number, about) for line in _meant(args, past, bays)]
    if args.text:
        return _write(args, "\f".join(page(one) for one in tickets))
    return _write(args, text_of(tickets if args.all else tickets[0]))


def _kinds(words: str | None) -> tuple[Hidden, ...]:
    if words is None:
        return ()
    asked = [one.strip() for one in words.split(",")]
    unknown = [one for one in asked if one not in set(Hidden)]
    if unknown:
        raise UsageError(
            f"--hide {words!r}: there is no {unknown[0]!r} to hide", hint=f"known are: {', '.join(Hidden)}"
        )
    return tuple(kind for kind in Hidden if kind in asked)


def _meant(args: argparse.Namespace, past: Past, bays: Bays) -> tuple[DriveLine, ...]:
    if not bays.every:
        raise NothingToWorkOn("no drive has been read yet", hint="see 'diskwatch preflight'")
    if args.all:
        if args.drive is not None:
            raise UsageError("DRIVE and --all ask for different things", hint="leave one of them out")
        return bays.every
    if args.drive is not None:
        return (past.find(args.drive),)
    if len(bays.every) > 1:
        known = ", ".join(line.place.device for line in bays.every)
        raise UsageError(f"there are {len(bays.every)} drives", hint=f"name one, or --all: {known}")
    return bays.every


def this_host() -> Host:
    """This machine, and the names of people that a ticket may have to hide."""
    about = os.uname()
    users = [
        entry.pw_name for entry in pwd.getpwall() if _FIRST_USER <= entry.pw_uid < _LAST_USER and entry.pw_name
    ]
    named = [os.environ.get(name, "") for name in ("SUDO_USER", "USER", "LOGNAME")]
    people = [name for name in dict.fromkeys([*users, *named]) if name and name != "root"]
    return Host(
        name=about.nodename,
        system=about.sysname,
        kernel=about.release,
        architecture=about.machine,
        users=tuple(sorted(people)),
    )


def _settings(args: argparse.Namespace) -> Json | None:
    """Those that matter; a file that is wrong keeps nobody from a ticket unless it was named."""
    try:
        found = settings(args)
    except SettingsError as error:
        if args.settings is not None:
            raise
        talk(f"diskwatch: {error}")
        return None
    return that_matter(found)


def that_matter(found: "Settings") -> Json:
    """The settings that whoever reads a ticket should know, plain JSON values."""
    return {
        "readings_every_seconds": int(found.smart.every),
        "timeout_seconds": int(found.smart.timeout),
        "traffic_every_seconds": int(found.io.every),
    }


def _write(args: argparse.Namespace, text: str) -> int:
    if args.file is None:
        sys.stdout.write(text)
        return 0
    put(Path(args.file), text, force=args.force)
    talk(f"diskwatch: written to {args.file}")
    return 0
