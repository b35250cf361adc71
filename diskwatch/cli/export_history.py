"""Write the past of drives to a file that another machine, or a later history, can take in."""

import argparse
import os
import sys
from collections.abc import Iterable
from pathlib import Path

from diskwatch.cli.common import now, settings, state_folder, talk
from diskwatch.errors import DiskwatchError, NothingToWorkOn
from diskwatch.history.exchange import written
from diskwatch.history.reader import Past
from diskwatch.language import ngettext
from diskwatch.units import plain


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument(
        "--drive", metavar="D", help="only this drive: serial, WWN, device, label, or a part of one"
    )
    parser.add_argument(
        "--format", choices=("csv", "json"), default="json", help="how to write it (default: json)"
    )
    parser.add_argument("-o", metavar="FILE", dest="file", help="write to FILE (default: standard output)")


def run(args: argparse.Namespace) -> int:
    """Export; 0, 2 where no drive is meant, 3 where there is no history, 4 where it cannot be written."""
    if args.settings is not None:
        settings(args)
    at = now()
    with Past.open(state_folder(args)) as past:
        drives = past.bays(at).every if args.drive is None else (past.find(args.drive),)
        if not drives:
            raise NothingToWorkOn("no drive has been read yet", hint="see 'diskwatch preflight'")
        numbers = sorted(drive.number for drive in drives)
        # One drive after the other: ten years of several would fill the memory.
        pieces = written((line for number in numbers for line in past.lines(number)), args.format, at)
        if args.file is None:
            sys.stdout.writelines(pieces)
            return 0
        _put(Path(args.file), pieces)
    told = ngettext(
        "the past of one drive is in {file}", "the past of {count} drives is in {file}", len(numbers)
    )
    talk("diskwatch: " + told.format(count=len(numbers), file=args.file))
    return 0


def _put(path: Path, pieces: Iterable[str]) -> None:
    """Put a file in place whole, or leave what was there."""
    making = path.with_name(f".{path.name}.{os.getpid()}")
    try:
        with making.open("x", encoding="utf-8", newline="") as file:
            file.writelines(pieces)
            file.flush()
            os.fsync(file.fileno())
        making.replace(path)
    except OSError as error:
        making.unlink(missing_ok=True)
        raise DiskwatchError(f"{plain(str(path))} cannot be written: {error.strerror}") from error
