"""Watch the drives in the foreground, until it is ended; with --once one full pass of all drives, then end."""

import argparse
import os
import sys
import threading
from pathlib import Path

from diskwatch.cli.common import settings, state_folder, talk
from diskwatch.errors import DiskwatchError, NothingToWorkOn
from diskwatch.history.reader import Past
from diskwatch.machine.real import RealMachine
from diskwatch.machine.senses import RealSenses
from diskwatch.records import DriveRound, Way
from diskwatch.service.watch import Told, Watch, now
from diskwatch.settings import Settings
from diskwatch.units import plain


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("--once", action="store_true", help="one full pass of all drives, then end")
    # For the dashboard, which watches through a child of its own: the child ends when its standard input does,
    # so that it never outlives whoever started it, however that ended.
    parser.add_argument("--tied", action="store_true", help=argparse.SUPPRESS)


def run(args: argparse.Namespace) -> int:
    """Watch; 0 when all was recorded, 3 without any drive, 4 when the history could not be written."""
    owner = settings(args)
    folder = state_folder(args)
    told = None if args.tied else Voice().say
    watch = _watch(owner, folder, told)
    if watch.trouble:
        talk(f"diskwatch: {watch.trouble}; watching goes on without it")
    if args.once:
        rounds = watch.once()
        for trouble in watch.machine_troubles:
            talk(f"diskwatch: {trouble}")
        if watch.trouble:
            talk(f"diskwatch: not stored: {watch.trouble}")
            return 4
        if not rounds:
            raise NothingToWorkOn("this machine shows no drive at all", hint="see 'diskwatch preflight'")
        return 0
    at_work = [watch]
    if args.tied:
        threading.Thread(target=_end_with_parent, args=(at_work,), daemon=True).start()
    while (there := watch.run()) is not None:
        # The history lies there now, and a watch that begins anew knows of no other place.
        watch = _watch(owner, there, told)
        before, at_work[0] = at_work[0], watch
        if before.ended:
            watch.end()
    if watch.trouble:
        talk(f"diskwatch: not stored: {watch.trouble}")
        return 4
    return 0


def _watch(owner: Settings, folder: Path, told: Told | None) -> Watch:
    this = machine(owner, folder)
    return Watch(this, owner, folder, told=told, senses=senses(owner), tester=this)


def machine(owner: Settings, folder: Path) -> RealMachine:
    """This machine, as the owner wants it watched, with what the history in a folder knows of its adapters."""
    return RealMachine(
        command=owner.smart.command,
        timeout=float(owner.smart.timeout),
        only=owner.watch.only,
        ignore=owner.watch.ignore,
        ways=_ways(folder),
        now=now,
    )


def senses(owner: Settings) -> RealSenses:
    """What else this machine tells of its drives."""
    return RealSenses(owner.kernel_log.source)


def _ways(folder: Path) -> tuple[Way, ...]:
    """What was found out of USB adapters; without a history that can be read, it is found out anew."""
    try:
        with Past.open(folder) as past:
            return past.ways()
    except DiskwatchError:
        return ()


def _end_with_parent(at_work: list[Watch]) -> None:
    while os.read(sys.stdin.fileno(), 4096):
        pass
    at_work[0].end()


class Voice:
    """Says what each round brought; where nobody listens any more it falls silent, and the watch goes on."""

    def __init__(self) -> None:
        self._heard = True

    def say(self, part: tuple[DriveRound, ...]) -> None:
        """A line a drive: the call, or how the pass ended, and why."""
        if not self._heard:
            return
        try:
            for one in part:
                print(plain(_line(one)), flush=True)
        except (OSError, ValueError):
            self._heard = False


def _line(one: DriveRound) -> str:
    call = one.call
    word = call.word.value if call is not None else "-"
    told = call.reason if call is not None else ""
    if one.pass_.explanation and one.pass_.explanation not in told:
        told = f"{one.pass_.outcome.value}: {one.pass_.explanation} {told}".rstrip()
    who = one.known.drive.identity.model or one.known.place.device
    return f"{word:<6}  {who} ({one.known.place.device}): {told}"
