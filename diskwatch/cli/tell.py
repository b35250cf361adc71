"""Tell what you know of a drive; an empty text takes it back.

A label is a name by which every command knows the drive from then on. All is kept in the history, and shown by
bays, the copy plan and the ticket.
"""

import argparse
import sys

from diskwatch.cli.common import drive_option, now, settings, state_folder
from diskwatch.errors import UsageError
from diskwatch.history.naming import names_of
from diskwatch.history.reader import Past
from diskwatch.records import DriveLine
from diskwatch.records.owner import LABEL, TOLD, checked_fact
from diskwatch.units import plain


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    drive_option(parser)
    parser.add_argument("--label", metavar="T", help="what you call it")
    parser.add_argument("--asset", metavar="T", help="its number in your inventory")
    parser.add_argument("--warranty-until", metavar="DATE", help="last day of its warranty, like 2027-05-31")
    parser.add_argument("--backed-up", metavar="DATE", help="day of your last backup of what lives there")


def run(args: argparse.Namespace) -> int:
    """Tell; 0, 2 where it cannot be right or no drive is meant, 3 without a history, 4 where none is kept."""
    if args.settings is not None:
        settings(args)
    written = {name: getattr(args, name.replace("-", "_")) for name in TOLD}
    facts = {name: checked_fact(name, text, now()) for name, text in written.items() if text is not None}
    if not facts:
        raise UsageError(
            "nothing is told", hint="give at least one of " + ", ".join(f"--{name}" for name in TOLD)
        )
    folder = state_folder(args)
    with Past.open(folder) as past:
        line = past.find(args.drive)
        _refuse_taken(facts.get(LABEL), line, past.bays(now()).every)
    from diskwatch.cli.asking import done  # noqa: PLC0415 - what is wrong is told of at once
    from diskwatch.service.owner import TELL  # noqa: PLC0415 - likewise

    for sentence in done(folder, TELL, {"drive": line.number, "facts": facts}).done:
        sys.stdout.write(plain(f"{line.name} ({line.place.device}): {sentence}") + "\n")
    return 0


def _refuse_taken(label: str | None, line: DriveLine, lines: tuple[DriveLine, ...]) -> None:
    """Two drives of one name could not be told apart, and one of them may be the one to take out."""
    for other in lines:
        if label and other.number != line.number and label.casefold() in names_of(other, lines):
            raise UsageError(
                f"{label} means the drive {plain(other.name)} ({plain(other.place.device)}) already",
                hint="choose another label",
            )
