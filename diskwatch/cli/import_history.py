"""Take in the past of drives that 'diskwatch export-history' wrote, on this machine or another.

What is known here stays; what is new is added, and the drive is judged anew from all of it. While a watch runs,
that watch does it.
"""

import argparse
import sys
from pathlib import Path

from diskwatch.cli.common import now, settings, state_folder, talk
from diskwatch.errors import DiskwatchError, HistoryHeld
from diskwatch.history.exchange import Line, read
from diskwatch.units import plain

DEED = "import-history"


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("file", metavar="FILE", help="what 'diskwatch export-history' wrote, JSON or CSV")


def run(args: argparse.Namespace) -> int:
    """Import; 0, 2 where FILE is no such file, 4 where it cannot be read or the history cannot be written."""
    if args.settings is not None:
        settings(args)
    text = _text(Path(args.file))
    lines, wrong = read(text)
    for why in wrong:
        talk(f"diskwatch: {args.file}: {why}")
    folder = state_folder(args)
    done, more = _taken_in(folder, text, lines)
    for why in more:
        talk(f"diskwatch: {args.file}: {why}")
    for sentence in done:
        sys.stdout.write(plain(sentence) + "\n")
    return 0


def _text(path: Path) -> str:
    try:
        return path.read_bytes().decode("utf-8")
    except OSError as error:
        raise DiskwatchError(f"{plain(str(path))} cannot be read: {error.strerror}") from error
    except UnicodeDecodeError as error:
        raise DiskwatchError(f"{plain(str(path))} cannot be read: it is no text") from error


def _taken_in(folder: Path, text: str, lines: tuple[Line, ...]) -> tuple[tuple[str, ...], tuple[str, ...]]:
    from diskwatch.history.writer import History  # noqa: PLC0415 - a file that is wrong is told of at once
    from diskwatch.service import requests  # noqa: PLC0415 - likewise
    from diskwatch.service.arrival import take_in  # noqa: PLC0415 - likewise

    try:
        history = History.open(folder)
    except HistoryHeld:
        answer = requests.wait(requests.leave(folder, DEED, {"text": text}))
        return answer.done, answer.wrong
    with history:
        told = take_in(history, lines, now())
    return told.done, told.wrong
