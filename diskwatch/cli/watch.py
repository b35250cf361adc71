"""Watch the drives in the foreground, until it is ended; with --once one full pass of all drives, then end."""

import argparse
import os
import select
import sys
import threading
from collections.abc import Callable
from pathlib import Path

from diskwatch.cli.common import settings, state_folder, talk
from diskwatch.errors import DiskwatchError, NothingToWorkOn, SettingsError, UsageError
from diskwatch.history.reader import Past
from diskwatch.machine.probe import DiskProber
from diskwatch.machine.real import RealMachine
from diskwatch.machine.senses import RealSenses
from diskwatch.records import DriveRound, Way
from diskwatch.rehearsal.state import holds_rehearsal
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
    if holds_rehearsal(folder):
        raise UsageError(
            f"{folder} keeps a rehearsal, whose drives are invented: real ones are not watched into it",
            hint="name another folder with --state",
        )
    told = None if args.tied else Voice().say
    if args.once:
        return _once(_watch(owner, folder, told))
    return _Watches(args, owner, folder, told).run()


def _once(watch: Watch) -> int:
    _say_trouble(watch)
    rounds = watch.once()
    for trouble in watch.machine_troubles:
        talk(f"diskwatch: {trouble}")
    if not rounds and not watch.trouble:
        raise NothingToWorkOn("this machine shows no drive at all", hint="see 'diskwatch preflight'")
    return _ended(watch)


def _say_trouble(watch: Watch) -> None:
    if watch.trouble:
        talk(f"diskwatch: {watch.trouble}; watching goes on without it")


def _ended(watch: Watch) -> int:
    if watch.trouble:
        talk(f"diskwatch: not stored: {watch.trouble}")
        return 4
    return 0


class _Watches:
    """One watch after the other: each goes on where the history was moved to, or with other settings."""

    def __init__(self, args: argparse.Namespace, owner: Settings, folder: Path, told: Told | None) -> None:
        self._args, self._owner, self._told = args, owner, told
        self._at_work = _watch(owner, folder, told, self._reread)

    def run(self) -> int:
        """Watch to the end."""
        _say_trouble(self._at_work)
        if self._args.tied:
            threading.Thread(target=self._end_with_parent, daemon=True).start()
        while (there := self._at_work.run()) is not None:
            # A watch that begins anew knows of no other place, and of no signal to the one before it.
            before, self._at_work = self._at_work, _watch(self._owner, there, self._told, self._reread)
            self._at_work.hear_signals()
            if before.ended:
                self._at_work.end()
        return _ended(self._at_work)

    def _reread(self) -> None:
        if _terminal_is_gone():
            # The kernel says so by the same signal that asks for other settings.
            self._at_work.end()
            return
        try:
            self._owner = settings(self._args)
        except SettingsError as error:
            talk(f"diskwatch: {error}; the settings that held before go on")
            raise

    def _end_with_parent(self) -> None:
        while os.read(sys.stdin.fileno(), 4096):
            pass
        self._at_work.end()


def _watch(owner: Settings, folder: Path, told: Told | None, reread: Callable[[], None] | None = None) -> Watch:
    this = machine(owner, folder)
    return Watch(
        this, owner, folder, told=told, senses=senses(owner), tester=this, prober=DiskProber(), reread=reread
    )


def _terminal_is_gone() -> bool:
    """Whether standard input is a terminal that has hung up."""
    if not os.isatty(0):
        return False
    line = select.poll()
    line.register(0, 0)
    return any(event & (select.POLLHUP | select.POLLERR | select.POLLNVAL) for _, event in line.poll(0))


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
