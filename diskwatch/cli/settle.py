"""Say what was done about a drive, so that its call can fall: the cable was changed, the drive replaced.

What stands is then counted anew from that day; what the drive still reports by itself comes back with its next
reading. A drive whose place another one has taken is left out of the bays; its own call no word makes fall.
"""

import argparse
import sys

from diskwatch.cli.common import drive_option, settings, state_folder
from diskwatch.errors import UsageError
from diskwatch.history.reader import Past
from diskwatch.records.owner import LONGEST_REASON, checked_text
from diskwatch.units import plain


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    drive_option(parser)
    parser.add_argument("--because", metavar="TEXT", required=True, help="what was done, in your words")
    parser.add_argument("--replaced-by", metavar="DRIVE", help="the drive that took its place")


def run(args: argparse.Namespace) -> int:
    """Settle; 0, 2 where no drive is meant, 3 where there is no history, 4 where nothing could be kept."""
    if args.settings is not None:
        settings(args)
    because = checked_text("--because", args.because, LONGEST_REASON)
    if not because:
        raise UsageError("--because holds no words", hint="say what was done: it goes into the day book")
    folder = state_folder(args)
    with Past.open(folder) as past:
        line = past.find(args.drive)
        new = None if args.replaced_by is None else past.find(args.replaced_by)
    if new is not None and new.number == line.number:
        raise UsageError("a drive cannot be replaced by itself", hint="name the new one behind --replaced-by")
    from diskwatch.cli.asking import done  # noqa: PLC0415 - what is wrong is told of at once
    from diskwatch.service.owner import SETTLE  # noqa: PLC0415 - likewise

    words = {
        "drive": line.number,
        "because": because,
        "replaced_by": None if new is None else new.number,
    }
    for sentence in done(folder, SETTLE, words).done:
        sys.stdout.write(plain(f"{line.name} ({line.place.device}): {sentence}") + "\n")
    return 0
