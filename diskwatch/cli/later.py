"""Put the notices of one drive off, for this user alone.

A notice comes again when the days are over, or at once when the drive's call becomes a stronger one. Nothing
else changes: the drive stays as it is called, and every other command goes on showing it.
"""

import argparse
import sys
from datetime import datetime

from diskwatch import places
from diskwatch.cli.common import drive_option, now, settings, state_folder
from diskwatch.errors import UsageError
from diskwatch.history.later import DAYS, PutOff, put_off
from diskwatch.history.reader import Past
from diskwatch.language import _
from diskwatch.records import DriveLine
from diskwatch.units import DAY, plain

MOST_DAYS = 90
"""A drive in trouble is not to be put off for ever."""


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    drive_option(parser)
    parser.add_argument(
        "--days",
        metavar="N",
        type=int,
        default=DAYS,
        help=f"for how many days, 1 to {MOST_DAYS} (default: {DAYS})",
    )


def run(args: argparse.Namespace) -> int:
    """Put off; 0, 2 where no drive is meant, 3 where there is no history, 4 where it cannot be written down."""
    if args.settings is not None:
        settings(args)
    if not 1 <= args.days <= MOST_DAYS:
        raise UsageError(
            f"--days {args.days} is not possible", hint=f"name a number of days from 1 to {MOST_DAYS}"
        )
    at = now()
    with Past.open(state_folder(args)) as past:
        line = past.find(args.drive)
    sys.stdout.write(defer(line, at, args.days) + "\n")
    return 0


def defer(line: DriveLine, at: int, days: int = DAYS) -> str:
    """Put this user's notices about a drive off; tells until when in harmless sentences.

    Args:
        line: the drive.
        at: now, UTC seconds since 1970.
        days: for how many days.

    Raises:
        HistoryError: it cannot be written down.
    """
    until = at + days * DAY
    word = None if line.call is None else line.call.word
    put_off(places.user_state(), line.drive.identity, PutOff(until=until, call=word), at)
    when = datetime.fromtimestamp(until).astimezone().strftime("%Y-%m-%d %H:%M")
    text = (
        _(
            "Notices about {drive} ({device}) are put off for you until {when}. It has no call yet; should it "
            "get a stronger one than keep, a notice comes at once."
        )
        if word is None
        else _(
            "Notices about {drive} ({device}) are put off for you until {when}. Its call stays {call}; should "
            "it become a stronger one, a notice comes at once."
        )
    )
    return plain(text.format(drive=line.name, device=line.place.device, when=when, call=word))
