"""An invented machine lives through months in seconds, and the whole judgement is tried on it.

Every drive, maker, serial and place in it is invented. The history goes into a temporary folder unless --state
names one, which is refused where it holds real drives.
"""

import argparse
import contextlib
import math
import re
import signal
import sys
import threading
from collections.abc import Iterator
from functools import partial
from pathlib import Path
from types import FrameType

from diskwatch.cli.common import Bar, print_json, settings, talk
from diskwatch.cli.dashboard import is_full_screen
from diskwatch.cli.pace import USUAL, Pace
from diskwatch.cli.rehearsed import answer, list_answer, told, told_list
from diskwatch.cli.scene import Seen, show
from diskwatch.places import state_folder
from diskwatch.records import DriveRound, IoSpan, ProbeDay
from diskwatch.rehearsal import scenarios, state
from diskwatch.rehearsal.course import Course
from diskwatch.rehearsal.happenings import MOST_DAYS
from diskwatch.rehearsal.probe import InventedProber
from diskwatch.rehearsal.scenario import MOST_SEED
from diskwatch.rehearsal.temporary import temporary
from diskwatch.service.asking import InTurn
from diskwatch.service.keeper import Keeper
from diskwatch.service.probing import Probing
from diskwatch.service.rounds import Rounds
from diskwatch.service.traffic import Traffic

_ENDS = (signal.SIGTERM, signal.SIGHUP)


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument(
        "scenario",
        nargs="?",
        default=scenarios.DEFAULT,
        metavar="SCENARIO",
        help=f"a scenario by name, or a file of your own (default: {scenarios.DEFAULT})",
    )
    parser.add_argument("--list", action="store_true", help="the scenarios, and what each should lead to")
    parser.add_argument("--days", type=_days, metavar="N", help="how many days (default: the scenario's)")
    parser.add_argument(
        "--speed",
        type=_speed,
        metavar="X",
        help="days of the invented machine a second (default: 2 in the dashboard, no limit without it)",
    )
    parser.add_argument("--seed", type=_seed, metavar="N", help="of chance (default: the scenario's)")
    parser.add_argument("--headless", action="store_true", help="without the dashboard, to the end")
    parser.add_argument("--json", action="store_true", help="one JSON object")


STATE = "folder that keeps the rehearsal's history (default: a temporary one in memory, gone afterwards)"
"""What --state means here; it says otherwise for every other command."""

SETTINGS = "settings file (TOML), which is only checked: a scenario brings all that an invented machine needs"
"""What --settings means here."""


def _days(text: str) -> int:
    if not re.fullmatch(r"[0-9]{1,6}", text) or not 1 <= int(text) <= MOST_DAYS:
        raise argparse.ArgumentTypeError(f"expected a number of days from 1 to {MOST_DAYS}, not {text!r}")
    return int(text)


def _seed(text: str) -> int:
    if not re.fullmatch(r"[+-]?[0-9]{1,19}", text) or abs(int(text)) > MOST_SEED:
        raise argparse.ArgumentTypeError(f"expected a whole number below 2^63, not {text!r}")
    return int(text)


def _speed(text: str) -> float:
    try:
        speed = float(text)
    except ValueError:
        speed = math.nan
    if not 0 < speed < math.inf:
        raise argparse.ArgumentTypeError(f"expected a number above 0, not {text!r}")
    return speed


def run(args: argparse.Namespace) -> int:
    """Rehearse; 0 when it ran to its end, whatever came of it; 4 when its history could not be kept."""
    if args.settings is not None:
        settings(args)
    if args.list:
        known = scenarios.listed()
        if args.json:
            print_json(list_answer(known))
        else:
            sys.stdout.write(told_list(known))
        return 0
    course = Course(scenarios.load(args.scenario), seed=args.seed, days=args.days)
    shown = not args.headless and not args.json and is_full_screen()
    if not args.headless and not args.json and not shown:
        talk("diskwatch: this is no full-screen terminal; the rehearsal runs without the dashboard")
    with _unwound(), _folder(args.state) as folder:
        if shown:
            trouble = show(course, folder, Pace(args.speed or USUAL), live_through, kept=args.state is not None)
        else:
            trouble = live_through(course, folder, None if args.speed is None else Pace(args.speed))
        ended = course.ended()
    if args.json:
        print_json(answer(ended))
    else:
        sys.stdout.write(told(ended))
        if args.state is not None and trouble is None:
            talk(f"The history of these INVENTED drives is kept in {args.state}.")
    if trouble is not None:
        talk(f"diskwatch: not stored: {trouble}")
        return 4
    return 0


@contextlib.contextmanager
def _folder(named: str | None) -> Iterator[Path]:
    """The state folder: the one named, else a temporary one in memory."""
    if named is None:
        with temporary() as folder:
            yield folder
        return
    chosen = state_folder(named)
    if state.claim(chosen):
        talk(f"{named}: the history of an earlier rehearsal was removed; this one takes its place.")
    yield chosen


@contextlib.contextmanager
def _unwound() -> Iterator[None]:
    """Let the end that is asked for, or a terminal that is closed, clear up as the end of the run does."""

    def leave(number: int, _: FrameType | None) -> None:
        for one in _ENDS:
            signal.signal(one, signal.SIG_IGN)  # a second word must not break the clearing up
        raise SystemExit(128 + number)

    # Nobody else's wish is undone: what was started to outlive its terminal ignores its end.
    before = {one: old for one in _ENDS if (old := signal.getsignal(one)) is not signal.SIG_IGN}
    for one in before:
        signal.signal(one, leave)
    try:
        yield
    finally:
        for one, old in before.items():
            signal.signal(one, old)


def live_through(course: Course, folder: Path, pace: Pace | None, seen: Seen | None = None) -> str | None:
    """Join the invented machine with the rounds, the traffic and the history of the real watch.

    Args:
        course: what is lived through.
        folder: where the history lies.
        pace: how fast its days pass, and whether they go on; None for as fast as they go, to the end.
        seen: is told the traffic of each step; nothing of a step in which the machine was off.

    Returns:
        Why the history could not be kept; None where it was.
    """
    keeper = Keeper(folder)
    traffic = Traffic(course.machine, course.clock.now, course.clock.steady)
    probing = Probing(
        InventedProber(course.machine, course.seed),
        past=partial(_probes, keeper),
        on_battery=lambda: False,
        ours=lambda *_: None,
        note=keeper.note,
    )
    rounds = Rounds(course.machine, keeper, course.clock.now, asking=InTurn, probed=probing.take)
    gathered: list[IoSpan] = []

    def ask() -> tuple[DriveRound, ...]:
        keeper.add_traffic(gathered)
        gathered.clear()
        done = rounds.run()
        if course.scenario.probe and (ready := probing.after(done, rounds.found, now=course.clock.now)):
            done += rounds.run(only=ready)
        return done

    def count() -> None:
        spans = traffic.look(dict(rounds.blocks)).spans
        gathered.extend(spans)
        if seen is not None:
            seen(spans)

    keeper.note(state.begun(course.scenario.title, course.clock.now()))
    try:
        # Under the dashboard the terminal is not ours to write a bar to.
        with Bar("rehearsing", quiet=threading.current_thread() is not threading.main_thread()) as bar:
            shown, lived = 0, 0.0
            for days in course.run(ask, count):
                if days >= shown:
                    shown = int(days) + 1
                    bar.show(int(days), course.days)
                if pace is not None and not pace.passed(days - lived):
                    break
                lived = days
        keeper.add_traffic(gathered)
    finally:
        keeper.close()
    return keeper.trouble


def _probes(keeper: Keeper, number: int, after: int) -> tuple[ProbeDay, ...] | None:
    return keeper.ask(lambda history: history.probes(number, after=after))
