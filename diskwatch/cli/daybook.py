"""What happened to the drives, in order, oldest first."""

import argparse
import sys
from datetime import datetime

from diskwatch.cli.answers import daybook_answer
from diskwatch.cli.common import now, print_json, settings, state_folder
from diskwatch.errors import UsageError
from diskwatch.history.reader import Past
from diskwatch.records import DriveLine, Entry
from diskwatch.units import epoch_of, plain, seconds_of


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument(
        "--since", metavar="T", help="from then on: 2026-12-01T12:00:00Z, 2026-12-01, or 7d for days"
    )
    parser.add_argument(
        "--drive", metavar="D", help="only this drive: serial, WWN, device, label, or a part of one"
    )
    parser.add_argument("--json", action="store_true", help="one JSON object")


def run(args: argparse.Namespace) -> int:
    """Show the day book; 0, 2 where no drive is meant, 3 where there is no history."""
    if args.settings is not None:
        settings(args)
    since = None if args.since is None else since_when(args.since, now())
    with Past.open(state_folder(args)) as past:
        drive = None if args.drive is None else past.find(args.drive).number
        entries = past.day_book(since, drive, None, None)
        lines = {line.number: line for line in past.bays(now()).every}
    if args.json:
        print_json(daybook_answer(entries, {number: _name(line) for number, line in lines.items()}))
    else:
        sys.stdout.write("".join(_told(entry, lines) for entry in entries))
    return 0


def since_when(text: str, at: int) -> int:
    """A point in time: an RFC 3339 time, or a length of time before now.

    Raises:
        UsageError: it is neither.
    """
    try:
        return at - seconds_of(text)
    except ValueError:
        pass
    try:
        return epoch_of(text)
    except ValueError:
        raise UsageError(
            f"--since {text!r} is no time", hint="write 2026-12-01T12:00:00Z, 2026-12-01, or a span such as 7d"
        ) from None


def _name(line: DriveLine) -> str:
    return line.drive.identity.telling_serial or line.drive.identity.wwn or line.place.device


def _told(entry: Entry, lines: dict[int, DriveLine]) -> str:
    when = datetime.fromtimestamp(entry.at).astimezone().strftime("%Y-%m-%d %H:%M")
    line = lines.get(entry.drive) if entry.drive is not None else None
    who = f"{line.name} ({line.place.device}): " if line else ""
    return plain(f"{when}  {entry.kind:<10}  {who}{entry.text}") + "\n"
