"""Which drive is it? Its label, serial and port; and its activity light blinks, where it has one.

The light blinks by reading, which a drive in doubt is spared: where the drive is called anything but keep, the
lights of the others blink instead, and the one that stays dark is it. A sleeping drive is not woken for it.
Ctrl-C ends it at any time.
"""

import argparse
import os
import sys
import textwrap
import threading
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from diskwatch.cli.common import drive_option, now, settings, state_folder
from diskwatch.errors import DiskwatchError, UsageError
from diskwatch.history.reader import Past
from diskwatch.language import _, ngettext
from diskwatch.machine.blink import Lamp, blink
from diskwatch.machine.blocks import node_of, physical_drives
from diskwatch.machine.here import found_of
from diskwatch.machine.protocol import Found
from diskwatch.machine.real import RealMachine
from diskwatch.records import CallWord, DriveLine, Kind, Outcome
from diskwatch.units import plain, say_bytes

SECONDS = 30
MOST_SECONDS = 300
_WIDTH = 80


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    drive_option(parser)
    parser.add_argument(
        "--seconds",
        metavar="N",
        type=int,
        default=SECONDS,
        help=f"how long to blink, 0 to {MOST_SECONDS}; 0: not at all (default: {SECONDS})",
    )


def run(args: argparse.Namespace) -> int:
    """Point; 0, 2 where no drive is meant, 3 without a history, 4 where this user may make no light blink."""
    owner = settings(args)
    if not 0 <= args.seconds <= MOST_SECONDS:
        raise UsageError(f"--seconds {args.seconds} is not possible", hint=f"name 0 to {MOST_SECONDS}")
    with Past.open(state_folder(args)) as past:
        line, lines = past.find(args.drive), past.bays(now()).drives
    _say(_who(line))
    if args.seconds == 0:
        return 0
    if line.drive.kind is Kind.VIRTUAL:
        _say("A virtual disk has no light.")
        return 0
    here = physical_drives()
    found = found_of(line.drive, line.place, here)
    if found is None:
        _say("It is not plugged in here now, so no light can blink.")
        return 0
    machine = RealMachine(command=owner.smart.command, timeout=float(owner.smart.timeout))
    alone = may_be_read(line)
    wanted = [line] if alone else [one for one in lines if one.number != line.number]
    chosen = _chosen(wanted, here, machine)
    if not alone:
        _say(_left_alone(line))
    for why in chosen.dark:
        _say(why)
    if not chosen.lamps:
        _say("No light blinks.")
        return 0
    _refuse_without_right(chosen.lamps)
    _say(_blinking(chosen, args.seconds, alone=alone))
    return _blink(chosen.lamps, args.seconds)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Chosen:
    """Lights that are to blink, of how many drives, and why others stay dark."""

    lamps: list[Lamp]
    drives: int
    dark: tuple[str, ...]


def may_be_read(line: DriveLine) -> bool:
    """Whether a drive may be read for no other purpose than its light: none that is in doubt."""
    called = line.call is not None and line.call.word is CallWord.KEEP
    return called and line.last_pass is not None and line.last_pass.outcome is Outcome.READ


def _chosen(wanted: Sequence[DriveLine], here: Sequence[Found], machine: RealMachine) -> _Chosen:
    lamps: list[Lamp] = []
    dark: list[str] = []
    drives = 0
    for line in wanted:
        found = found_of(line.drive, line.place, here)
        why = _why_dark(line, found, machine)
        if found is None or why is not None:
            dark.append(
                _("{drive} ({device}) stays dark: {why}.").format(
                    drive=line.name, device=line.place.device, why=why
                )
            )
            continue
        drives += 1
        # Namespaces of one NVMe drive share its light.
        lamps.append(Lamp(node=_path(found), size=found.drive.capacity_bytes or 0))
    return _Chosen(lamps=lamps, drives=drives, dark=tuple(dark))


def _path(found: Found) -> Path:
    return Path(node_of(found.blocks[0]))


def _why_dark(line: DriveLine, found: Found | None, machine: RealMachine) -> str | None:
    if found is None:
        return _("it is not plugged in here now")
    if not found.blocks:
        return _("it has no device of its own that could be read")
    if line.drive.kind is Kind.VIRTUAL:
        return _("a virtual disk has none")
    if not may_be_read(line):
        return _("it is not called keep, or its last pass brought no reading, so it is not read for this")
    outcome = machine.ask(found).outcome
    if outcome is Outcome.REFUSED and not os.access(_path(found), os.R_OK):
        return None  # that nobody may read it is told in a moment
    if outcome is Outcome.ASLEEP:
        return _("it is asleep, and is not woken for this")
    return None if outcome is Outcome.READ else _("it does not say whether it is awake")


def _refuse_without_right(lamps: Sequence[Lamp]) -> None:
    for lamp in lamps:
        if not os.access(lamp.node, os.R_OK):
            raise DiskwatchError(
                f"{plain(str(lamp.node))} cannot be read by this user, so no light blinks", hint="run as root"
            )


def _blink(lamps: list[Lamp], seconds: int) -> int:
    stop = threading.Event()
    try:
        wrong = blink(lamps, seconds, stop)
    except KeyboardInterrupt:
        # Who has found the drive need not wait: that is the usual end.
        stop.set()
        _say(_("Ended."))
        return 0
    for node, error in wrong.items():
        _say(
            _("{node} could not be read: {why}; it was left alone from then on.").format(
                node=node, why=error.strerror
            )
        )
    return 0


def _who(line: DriveLine) -> str:
    return "\n".join(f"{name:<8} {plain(value)}" for name, value in _facts(line))


def _facts(line: DriveLine) -> Iterator[tuple[str, str]]:
    drive = line.drive
    told = {
        "label": line.label,
        "asset": line.owner.asset,
        "model": drive.identity.model,
        "serial": drive.identity.serial,
        "size": None if drive.capacity_bytes is None else say_bytes(drive.capacity_bytes),
        "device": line.place.device,
        "port": line.place.bay,
        "holds": ", ".join(mount.point for mount in line.place.lives_here) or None,
        "call": None if line.call is None else line.call.word.value,
    }
    yield from ((name, value) for name, value in told.items() if value)
    yield "hint", _("the serial stands on the drive's own label; device names change from start to start")


def _left_alone(line: DriveLine) -> str:
    if line.call is None:
        return _("It has no call yet, so it is not read for this: the lights of the others blink instead.")
    if line.call.word is CallWord.KEEP:
        return _(
            "It did not answer in its last pass, so it is not read for this: the lights of the others "
            "blink instead."
        )
    return _("It is called {call}, so it is not read for this: the lights of the others blink instead.").format(
        call=line.call.word.value
    )


def _blinking(chosen: _Chosen, seconds: int, *, alone: bool) -> str:
    if alone:
        return _(
            "Its light blinks for {seconds} seconds, once a second, where it has one. Ctrl-C ends it."
        ).format(seconds=seconds)
    return ngettext(
        "The light of {count} other drive blinks for {seconds} seconds, once a second. It is among those that "
        "do not, unless something else uses it now; see that its serial is the right one. Ctrl-C ends it.",
        "The lights of {count} other drives blink for {seconds} seconds, once a second. It is among those that "
        "do not, unless something else uses it now; see that its serial is the right one. Ctrl-C ends it.",
        chosen.drives,
    ).format(count=chosen.drives, seconds=seconds)


def _say(text: str) -> None:
    for paragraph in text.split("\n"):
        sys.stdout.write("\n".join(textwrap.wrap(plain(paragraph), _WIDTH, subsequent_indent="  ")) + "\n")
    sys.stdout.flush()
