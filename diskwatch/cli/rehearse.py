"""An invented machine lives through months in seconds, and the whole judgement is tried on it.

Every drive, maker, serial and place in it is invented. The history goes into a temporary folder unless --state
names one, which is refused where it holds real drives.
"""

import argparse
import contextlib
import math
import os
import re
import sys
import tempfile
import threading
from collections.abc import Iterator
from functools import partial
from pathlib import Path

from diskwatch.cli.answers import replay_answer
from diskwatch.cli.common import Bar, print_json, settings, talk
from diskwatch.cli.dashboard import is_full_screen
from diskwatch.cli.pace import USUAL, Pace
from diskwatch.cli.scene import show
from diskwatch.places import state_folder
from diskwatch.records import CallWord, DriveRound, IoSpan, ProbeDay, summed
from diskwatch.rehearsal import scenarios, state
from diskwatch.rehearsal.course import Course, Ended
from diskwatch.rehearsal.happenings import MOST_DAYS
from diskwatch.rehearsal.probe import InventedProber
from diskwatch.rehearsal.scenario import MARK, MOST_SEED
from diskwatch.rehearsal.story import Story
from diskwatch.rehearsal.verdict import Outcome, Verdict
from diskwatch.service.asking import InTurn
from diskwatch.service.keeper import Keeper
from diskwatch.service.probing import Probing
from diskwatch.service.rounds import Rounds
from diskwatch.service.traffic import Traffic
from diskwatch.units import DAY, plain, rfc3339, say_count

_MEMORY = Path("/dev/shm")  # noqa: S108 - a folder of a name of its own is made in it


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
        _list(as_json=args.json)
        return 0
    course = Course(scenarios.load(args.scenario), seed=args.seed, days=args.days)
    shown = not args.headless and not args.json and is_full_screen()
    if not args.headless and not args.json and not shown:
        talk("diskwatch: this is no full-screen terminal; the rehearsal runs without the dashboard")
    with _folder(args.state) as folder:
        if shown:
            trouble = show(course, folder, Pace(args.speed or USUAL), live_through)
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
    """The state folder: the one named, else one in memory, so that no drive is written to for a game."""
    if named is not None:
        chosen = state_folder(named)
        if state.claim(chosen):
            talk(f"{named}: the history of an earlier rehearsal was removed; this one takes its place.")
        yield chosen
        return
    where = _MEMORY if os.access(_MEMORY, os.W_OK | os.X_OK) else None
    with tempfile.TemporaryDirectory(prefix="diskwatch-rehearsal-", dir=where) as folder:
        yield Path(folder)


def live_through(course: Course, folder: Path, pace: Pace | None) -> str | None:
    """Join the invented machine with the rounds, the traffic and the history of the real watch.

    Args:
        course: what is lived through.
        folder: where the history lies.
        pace: how fast its days pass, and whether they go on; None for as fast as they go, to the end.

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
        gathered.extend(traffic.look(dict(rounds.blocks)).spans)

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


def _list(*, as_json: bool) -> None:
    known = scenarios.listed()
    if as_json:
        print_json(
            {
                "schema": "diskwatch/scenarios/1",
                "invented": True,
                "scenarios": [
                    {
                        "name": name,
                        "title": one.title,
                        "about": " ".join(one.about.split()),
                        "place": one.place,
                        "days": one.days,
                        "drives": len(one.drive),
                        "serials": [drive.serial for drive in one.drive],
                        "expected": [wish.because for wish in one.expect],
                    }
                    for name, one in known.items()
                ],
            }
        )
        return
    print(f"Machines, drives, makers and places of these scenarios are all {MARK}.")
    width = max(map(len, known), default=0)
    for name, one in known.items():
        drives = "1 INVENTED drive" if len(one.drive) == 1 else f"{len(one.drive)} INVENTED drives"
        print(plain(f"{name:<{width}}  {one.days:>4} days, {drives} in {one.place}: {one.title}"))
        for wish in one.expect:
            print(plain(f"    {' '.join(wish.because.split())}"))


def answer(ended: Ended) -> dict[str, object]:
    """What ``rehearse --json`` prints: the object of ``replay --json``, and what was expected."""
    stories = ended.stories.values()
    drives = tuple(one for story in stories if (one := story.told) is not None)
    summary = summed(drives, skipped=sum(story.missed for story in stories))
    return {
        **replay_answer(drives, summary),
        "schema": "diskwatch/rehearsal/1",
        "invented": True,
        "scenario": ended.scenario.title,
        "place": ended.scenario.place,
        "seed": ended.seed,
        "from": rfc3339(ended.start),
        "to": rfc3339(ended.end),
        "counters_moved": {story.serial: sorted(story.moved) for story in stories},
        "expected": [_expected(one) for one in ended.outcomes],
    }


def _expected(one: Outcome) -> dict[str, object]:
    wish = one.wish
    return {
        "serial": one.serial,
        "call": wish.call.value if wish.call else None,
        "cause": wish.cause.value if wish.cause else None,
        "from_day": wish.from_day,
        "by_day": wish.by_day,
        "foretells": wish.foretells,
        "stays": wish.stays.value if wish.stays else None,
        "never_cause": [cause.value for cause in wish.never_cause],
        "needs": list(wish.needs),
        "because": wish.because,
        "verdict": one.verdict.value,
        "at": None if one.at is None else rfc3339(one.at),
        "day": one.day,
    }


def told(ended: Ended) -> str:
    """The rehearsal for a person."""
    scenario = ended.scenario
    lived = say_count(round((ended.end - ended.start) / DAY))
    lines = [
        f"{scenario.title}: {lived} days in {scenario.place}, seed {ended.seed}. EVERYTHING HERE IS INVENTED.",
        *(["", *scenario.about.strip().splitlines()] if scenario.about.strip() else []),
    ]
    for story in ended.stories.values():
        lines += ["", f"{story.serial}  {story.model}", *_told_story(story, ended.start)]
    lines += ["", "Expected:"]
    for one in ended.outcomes:
        when = f" on day {one.day:g}" if one.day is not None else ""
        word = _SAID.get(one.verdict, one.verdict.value)
        lines.append(f"  {word + when:<24} {one.serial}: {_wished(one)}")
        lines.append(f"  {'':<24} ({one.wish.because})")
    return "\n".join(plain(line) for line in lines) + "\n"


_SAID = {Verdict.OPEN: "not yet"}
"""Verdicts that are told to a person in other words."""


def _told_story(story: Story, start: int) -> Iterator[str]:
    told = story.told
    if told is None:
        yield "  It was never there."
        return
    if told.worst is CallWord.KEEP:
        yield "  It was keep all the time; that is no promise."
    else:
        for call in told.calls:
            yield f"  day {(call.at - start) / DAY:7.2f}  {call.word.value:<6}  {call.reason}"
    for drift in told.drifts:
        day = (drift.at - start) / DAY
        yield f"  day {day:7.2f}  ledger alarm ({drift.signal}), evidence {drift.evidence:.0f} days"
    if told.failed and told.warned_at is None:
        moved = ", ".join(sorted(story.moved))
        what = f"only these error counters had moved: {moved}" if moved else "no error counter had moved"
        yield f"  It died, and nothing had told to copy it off: {what}. Only a copy made in time helps."


def _wished(one: Outcome) -> str:
    wish = one.wish
    parts = []
    if wish.call is not None:
        cause = f" for {wish.cause.value}" if wish.cause else ""
        parts.append(f"{wish.call.value}{cause} from day {wish.from_day:g} to {wish.by_day or 0:g}")
    if wish.foretells is not None:
        parts.append(f"foretold by day {wish.by_day or 0:g} when its {wish.foretells} reaches the limit")
    if wish.stays is not None:
        parts.append(f"never more than {wish.stays.value}")
    if wish.never_cause:
        parts.append(f"never blamed on {', '.join(cause.value for cause in wish.never_cause)}")
    if one.verdict is Verdict.NOT_YET_JUDGED:
        parts.append(f"needs {' and '.join(wish.needs)}")
    return "; ".join(parts)
