"""What is missing on this machine for a full watch, each with its cure; nothing is stored or changed."""

import argparse
import os
import sys
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from pathlib import Path

from diskwatch.cli.common import print_json, settings, state_folder
from diskwatch.cli.watch import machine, senses
from diskwatch.errors import DiskwatchError, HistoryError
from diskwatch.history.lock import watcher
from diskwatch.history.opening import refuse_foreign
from diskwatch.machine.protocol import Found, Machine
from diskwatch.places import HISTORY, is_there
from diskwatch.records import Pass
from diskwatch.service.readiness import Check, checks
from diskwatch.settings import Settings
from diskwatch.units import plain


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("--json", action="store_true", help="one JSON object")


def run(args: argparse.Namespace) -> int:
    """Look at everything that a watch needs; 0 where nothing is missing, 4 where something is."""
    owner = settings(args)
    folder = state_folder(args)
    this = machine(owner, folder)
    survey = this.survey()
    passes = _asked(this, survey.found)
    found = checks(
        [(one.place.device, answer) for one, answer in zip(survey.found, passes, strict=True)],
        survey.troubles,
        history=_unwritable(folder),
        watcher=watcher(folder),
        kernel_log=_deaf(owner),
    )
    if args.json:
        print_json({"schema": "diskwatch/preflight/1", "checks": [_answer(one) for one in found]})
    else:
        sys.stdout.write("".join(_told(one) for one in found))
    return 4 if any(one.lacking for one in found) else 0


def _asked(this: Machine, found: tuple[Found, ...]) -> tuple[Pass, ...]:
    """Ask all drives at once, so that one that hangs costs its own time only."""
    if not found:
        return ()
    with ThreadPoolExecutor(max_workers=len(found)) as pool:
        answers = tuple(pool.map(this.ask, found))
    return tuple(
        replace(answer, drive=answer.drive or one.drive) for one, answer in zip(found, answers, strict=True)
    )


def _deaf(owner: Settings) -> DiskwatchError | None:
    """Why the kernel's log cannot be read."""
    try:
        senses(owner).log(None).close()
    except DiskwatchError as error:
        return error
    return None


def _unwritable(folder: Path) -> str | None:
    """Why the history cannot be written, found out without writing anything."""
    place = folder / HISTORY
    try:
        refuse_foreign(place)
    except HistoryError as error:
        return str(error)
    while not is_there(place):
        place = place.parent
    if os.access(place, os.W_OK):
        return None
    return f"{place} cannot be written by you."


def _answer(check: Check) -> dict[str, object]:
    return {"name": check.name, "lacking": check.lacking, "text": check.text, "cure": check.cure}


def _told(check: Check) -> str:
    mark = "lacking" if check.lacking else "fine"
    cure = f"\n         To cure: {check.cure}." if check.cure else ""
    return f"{mark:<7}  {plain(check.name)}: {plain(check.text)}{cure}\n"
