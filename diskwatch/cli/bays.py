"""The drives, where they are, what to do with each, and why; worst call first."""

import argparse
import platform
import shutil
import sys
import textwrap
from pathlib import Path

from diskwatch.cli.answers import bays_answer
from diskwatch.cli.common import now, print_json, settings, state_folder
from diskwatch.cli.endangered import Warner
from diskwatch.cli.said import said
from diskwatch.errors import NothingToWorkOn
from diskwatch.history.reader import Past
from diskwatch.judge.stakes import in_time
from diskwatch.records import Bays, CallWord, DriveLine
from diskwatch.units import plain, say_bytes, say_span

_CODES = 10
"""Exit code of keep under --code; look, copy and retire follow."""


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("--json", action="store_true", help="one JSON object")
    parser.add_argument(
        "--code",
        action="store_true",
        help="exit with 10, 11, 12 or 13 for the worst call: keep, look, copy, retire",
    )
    parser.add_argument(
        "--join",
        metavar="FILE",
        nargs="+",
        default=[],
        help="add the drives of other machines, from what 'diskwatch bays --json' printed there",
    )


def run(args: argparse.Namespace) -> int:
    """Show the bays; 0, with --code 10 to 13, 2 where a file is wrong, 3 where no drive was read yet."""
    if args.settings is not None:
        settings(args)
    if args.join:
        return _run_joined(args)
    bays = _bays(args, empty=args.json)
    if args.json:
        print_json(bays_answer(bays, machine=platform.node()))
    else:
        sys.stdout.write(listed(bays, _columns()))
    if not bays.drives:
        raise _nothing()
    return _CODES + worst(bays) if args.code else 0


def _run_joined(args: argparse.Namespace) -> int:
    from diskwatch.cli import joined  # noqa: PLC0415 - a list of this machine alone is to come at once

    others = [joined.saved(Path(name)) for name in args.join]
    bays = _bays(args, empty=True)
    own = bays_answer(bays, machine=platform.node())
    every = [joined.here(own, bays.at), *others]
    if args.json:
        print_json(joined.joined_answer(own, every, bays.at))
    else:
        told = [plain(f"Trouble: {one}") for one in bays.trouble]
        sys.stdout.write("\n".join([*joined.joined_lines(every, bays.at, _columns()), *told]) + "\n")
    found = joined.worst_first(every)
    if not found:
        raise _nothing()
    return _CODES + joined.rank(found[0][1]) if args.code else 0


def _nothing() -> NothingToWorkOn:
    return NothingToWorkOn("no drive has been read yet", hint="start 'diskwatch watch'")


def _columns() -> int:
    return shutil.get_terminal_size((80, 24)).columns


def _bays(args: argparse.Namespace, *, empty: bool) -> Bays:
    """All drives of this machine; where nothing has been recorded yet, none, if that is an answer."""
    folder = state_folder(args)
    try:
        with Past.open(folder) as past:
            return Warner(folder)(past.bays(now()))
    except NothingToWorkOn:
        if empty:
            return Bays(at=now(), watcher=None, drives=())
        raise


def worst(bays: Bays) -> int:
    """Rank of the worst call; a drive that was never read counts as look."""
    return max((line.call.word.rank if line.call else CallWord.LOOK.rank for line in bays.drives), default=0)


def listed(bays: Bays, width: int) -> str:
    """The list for a person, at most so many columns wide."""
    watched = f"watched by process {bays.watcher}" if bays.watcher is not None else "NOBODY IS WATCHING"
    lines = [f"{len(bays.drives)} {'drive' if len(bays.drives) == 1 else 'drives'}, {watched}."]
    lines += [plain(f"Trouble: {one}") for one in bays.trouble]
    for line in bays.drives:
        lines.append("")
        lines += _band(line, bays.at, width)
    for line in bays.departed:
        lines.append("")
        lines += _departed(line, width)
    return "\n".join(lines) + "\n"


def _departed(line: DriveLine, width: int) -> list[str]:
    serial = f", serial {line.drive.identity.serial}" if line.drive.identity.serial else ""
    told = f"{'gone':<7} {line.name}{serial}: {line.owner.replaced_by} took its place, by your word."
    return textwrap.wrap(plain(told), max(20, width), subsequent_indent=" " * 8)


def _band(line: DriveLine, at: int, width: int) -> list[str]:
    drive, word = line.drive, line.call.word.value if line.call else "-"
    size = say_bytes(drive.capacity_bytes) if drive.capacity_bytes is not None else None
    serial = f"serial {drive.identity.serial}" if drive.identity.serial else None
    lives = ", ".join(mount.point for mount in line.place.lives_here)
    about = [line.name, size, serial, line.place.device, line.place.bay, f"holds {lives}" if lives else None]
    head = f"{word:<7} {', '.join(part for part in about if part)}"
    told = [line.call.reason, *in_time(line, at)] if line.call else []
    last = line.last_pass
    if last is not None:
        ago = say_span(max(0, at - last.at))
        # An explanation is a whole sentence already.
        how = "read." if last.explanation is None else f"{last.outcome.value}: {last.explanation}"
        told.append(f"Last pass {ago} ago: {how}")
    if line.left_out is not None:
        told.append(line.left_out)
    if (words := said(line, at)) is not None:
        told.append(words)
    body = textwrap.wrap(plain(" ".join(told)), max(20, width - 8), break_long_words=True)
    first, *rest = textwrap.wrap(plain(head), max(20, width), subsequent_indent=" " * 8) or [word]
    return [first, *rest, *(" " * 8 + part for part in body)]
