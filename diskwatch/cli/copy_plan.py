"""What is at stake on a drive, and how to get it off: what lives there, how long it takes, in which order."""

import argparse
import os
import pwd
import sys
import textwrap
from collections.abc import Iterator
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path

from diskwatch.cli.answers import copy_plan_answer
from diskwatch.cli.common import drive_option, now, print_json, settings, state_folder
from diskwatch.cli.said import days_ago
from diskwatch.history.reader import Past
from diskwatch.judge import copy_words
from diskwatch.judge.copy_plan import CopyPlan, copy_plan, is_turning
from diskwatch.machine.blocks import physical_drives
from diskwatch.machine.here import found_of, mount_of
from diskwatch.machine.mounts import mount_lines
from diskwatch.machine.redundancy import arrays_on
from diskwatch.machine.stacks import stack_on
from diskwatch.machine.zfs import pools
from diskwatch.records import DriveLine
from diskwatch.records.array import Array
from diskwatch.trends.read_rate import read_rate
from diskwatch.units import DAY, day_number, plain

WIDTH = 80
_ROLLUP_DAYS = 90
"""Traffic by five minutes is kept no longer."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Looked:
    """What only this computer can tell of a drive: None and nothing where it is not plugged in here."""

    arrays: tuple[Array, ...] | None = None
    homes: frozenset[str] = frozenset()
    history: str | None = None


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    drive_option(parser)
    parser.add_argument("--json", action="store_true", help="one JSON object")


def run(args: argparse.Namespace) -> int:
    """Show the plan; 0, 2 where no drive is meant, 3 where there is no history."""
    if args.settings is not None:
        settings(args)
    folder, at = state_folder(args), now()
    with Past.open(folder) as past:
        line = past.find(args.drive)
        plan, parts = planned(past, line, folder, at)
    if args.json:
        print_json(copy_plan_answer(line, plan, parts, at))
    else:
        sys.stdout.write("\n".join(plain(one) for one in _told(line, parts)) + "\n")
    return 0


def planned(past: Past, line: DriveLine, folder: Path, at: int) -> tuple[CopyPlan, dict[str, tuple[str, ...]]]:
    """The plan of one drive, and its sentences by part in the order in which they are told.

    Args:
        past: the history.
        line: the drive.
        folder: where the history lies.
        at: now, UTC seconds since 1970.
    """
    # A drive that is gone may have been read long ago; what it gave then is what is known of it.
    seen = at if line.last_pass is None else min(at, line.last_pass.at)
    rollups = past.rollups(line.number, seen - _ROLLUP_DAYS * DAY, at)
    looked = _look(line, folder)
    plan = copy_plan(
        line,
        rate=read_rate(rollups, turns=is_turning(line)),
        arrays=looked.arrays,
        homes=looked.homes,
        history=looked.history,
    )
    drive = line.drive
    return plan, {
        "urgency": (copy_words.urgency(plan), *_backup(line, at)),
        "holds": tuple(map(copy_words.holding, plan.held)) or (copy_words.nothing_known(),),
        "fellows": tuple(copy_words.fellows(plan)),
        "duration": (copy_words.duration(plan),),
        "unreadable": (copy_words.chance(plan, drive.kind),),
        "order": tuple(copy_words.order(plan, "diskwatch move-history DIR, with DIR on another drive")),
        "cautions": tuple(
            copy_words.cautions(plan, kind=drive.kind, cause=None if line.call is None else line.call.cause)
        ),
    }


def _backup(line: DriveLine, at: int) -> tuple[str, ...]:
    day = line.owner.backed_up
    return () if day is None else (copy_words.backup(day, days_ago(day, day_number(at))),)


def _look(line: DriveLine, folder: Path) -> _Looked:
    found = found_of(line.drive, line.place, physical_drives())
    if found is None:
        return _Looked()
    points = {mount.point for mount in line.place.lives_here}
    lines = mount_lines()

    def point_of(place: Path) -> str | None:
        mount = mount_of(place, lines)
        return mount.point if mount is not None and mount.point in points else None

    return _Looked(
        arrays=arrays_on(stack_on(Path("/sys"), found.blocks), pools=pools()),
        homes=frozenset(point for home in _homes() if (point := point_of(home)) is not None),
        history=point_of(folder),
    )


def _homes() -> Iterator[Path]:
    """The home folder of whoever asks, also where they ask through sudo."""
    with suppress(RuntimeError):
        yield Path.home()
    with suppress(KeyError, ValueError):
        yield Path(pwd.getpwuid(int(os.environ["SUDO_UID"])).pw_dir)


TITLES = {
    "holds": "What lives there",
    "fellows": "Whether other drives hold the same",
    "duration": "How long a copy takes",
    "unreadable": "Sectors that cannot be read",
    "order": "In this order",
    "cautions": "What to leave alone",
}


def _told(line: DriveLine, parts: dict[str, tuple[str, ...]]) -> Iterator[str]:
    word = "no call yet" if line.call is None else f"called {line.call.word.value}"
    serial = line.drive.identity.serial or "not known"
    head = f"Copy plan for {line.name}, serial {serial}, {line.place.device}: {word}"
    yield from textwrap.wrap(plain(head), WIDTH)
    for text in parts["urgency"]:
        yield from _wrapped(text, "  ")
    for name, title in TITLES.items():
        yield ""
        yield f"{title}:"
        for number, text in enumerate(parts[name], 1):
            yield from _wrapped(text, f"  {number}. " if name == "order" else "  - ")


def _wrapped(text: str, first: str) -> list[str]:
    return textwrap.wrap(plain(text), WIDTH, initial_indent=first, subsequent_indent=" " * max(4, len(first)))
