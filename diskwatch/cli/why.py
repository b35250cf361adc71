"""The chain from a drive's readings to its call, and what would change it."""

import argparse
import sys
import textwrap
from collections.abc import Iterator
from datetime import datetime

from diskwatch import analyser
from diskwatch.cli import files, judged, measured
from diskwatch.cli.answers import why_answer
from diskwatch.cli.common import now, print_json, settings, state_folder
from diskwatch.cli.said import said
from diskwatch.history.forecasts import Kept
from diskwatch.history.reader import Past
from diskwatch.judge import sentences
from diskwatch.judge.expert import expert_line
from diskwatch.language import _
from diskwatch.records import DriveLine
from diskwatch.units import once_in, plain, say_count, say_days

_WIDTH = 78


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument(
        "drive", metavar="DRIVE", help="serial, WWN, device, label, or an unambiguous part of one"
    )
    parser.add_argument("--json", action="store_true", help="one JSON object")


def run(args: argparse.Namespace) -> int:
    """Explain a drive; 0, 2 where no drive is meant, 3 where there is no history."""
    if args.settings is not None:
        settings(args)
    with Past.open(state_folder(args)) as past:
        number = past.find(args.drive).number
        line = next(one for one in past.bays(now()).every if one.number == number)
        kept = past.state(number)
        forecasts = past.kept_forecasts(number)
        reading = past.last_reading(number)
        heard = past.day_book(drive=number, kinds={"kernel"})
    sectors = files.failing(line, heard, () if reading is None else reading.self_tests)
    state = analyser.start() if kept is None else analyser.load(kept)
    why = analyser.explain(state)
    if args.json:
        print_json(
            {
                **why_answer(line, why, now()),
                **measured.answer(why, forecasts, now()),
                "files": files.answer(sectors),
            }
        )
    else:
        sys.stdout.write("\n".join(plain(one) for one in _told(line, why, forecasts, sectors)) + "\n")
    return 0


def _told(
    line: DriveLine, why: analyser.Explanation, forecasts: tuple[Kept, ...], sectors: tuple[files.Failing, ...]
) -> Iterator[str]:
    yield f"{line.name}, serial {line.drive.identity.serial or 'not known'}, {line.place.device}"
    if (words := said(line, now())) is not None:
        yield words
    if line.call is None:
        yield "Call: none yet."
    else:
        yield f"Call: {line.call.word.value}, since {_when(line.call.at)}, by the rule {line.call.rule}"
        yield from _wrapped(line.call.reason)
    for title, lines in chapters(line, why, forecasts, now()):
        yield from _part(title, lines)
    yield from _part("Which file a failing sector belongs to", files.told(sectors))


def chapters(
    line: DriveLine, why: analyser.Explanation, forecasts: tuple[Kept, ...], at: int
) -> Iterator[tuple[str, Iterator[str] | tuple[str, ...]]]:
    """The chain in parts, each with its title; a part may have no lines.

    Args:
        line: the drive.
        why: the chain behind its call.
        forecasts: all that were kept about it.
        at: now, UTC seconds since 1970.
    """
    yield "What stands", _standing(why)
    yield "Counters followed (first read, now)", _counters(why)
    yield "Evidence: how rarely a drive within the norm would come to this", _evidence(why)
    yield "Latency at equal load", measured.latency(why)
    yield "Temperature", measured.temperature(why)
    yield "Probe: timed reads while nothing else goes on", measured.probe(why)
    if why.damage is not None:
        damage = why.damage
        parts = (
            f"{say_count(damage.fresh)} fresh spots in {damage.window_days} days, "
            f"{_known(damage.pending)} sectors pending, {_known(damage.replaced)} replaced"
        )
        limits = f"copy from {damage.copy_at:g}, retire from {damage.retire_at:g}"
        yield "Damage measure", (f"{damage.measure:g}: {parts} ({limits})",)
    yield "Cause: the table's rows that it was weighed by", judged.causes(why)
    yield "What became of other drives that showed the same", judged.odds(line, at)
    yield "Forecasts", measured.forecasts(line.forecasts, forecasts, at)
    yield "Margin", judged.margin(line, at)
    yield "Rule that decided", () if why.rule is None else (why.rule,)
    yield "What would change the call", why.would_change
    yield "What the bound on false alarms rests on, and what breaks it", measured.bound(why)


def _standing(why: analyser.Explanation) -> Iterator[str]:
    for one in why.findings:
        yield f"{one.sentence} (since {_when(one.since)})"
        yield _("For experts: {line}").format(line=expert_line(one))


def _counters(why: analyser.Explanation) -> Iterator[str]:
    for one in why.counters:
        yield f"{sentences.signal_name(one.signal)}: {say_count(one.first)}, {say_count(one.latest)}"


def _evidence(why: analyser.Explanation) -> Iterator[str]:
    for one in why.evidence:
        yield (
            f"{one.stream}: {once_in(one.days)} after {say_days(one.powered_days)} powered; "
            f"{one.episodes} {'occasion' if one.episodes == 1 else 'occasions'}, "
            f"the norm is {one.norm_per_year:g} a year; "
            f"alarms at {once_in(one.alarms_at)}"
        )


def _known(count: int | None) -> str:
    return "an unknown number of" if count is None else say_count(count)


def _part(title: str, lines: Iterator[str] | tuple[str, ...]) -> Iterator[str]:
    first = True
    for one in lines:
        if first:
            yield ""
            yield f"{title}:"
            first = False
        yield from _wrapped(one)


def _wrapped(text: str) -> list[str]:
    return textwrap.wrap(plain(text), _WIDTH, initial_indent="  ", subsequent_indent="    ")


def _when(at: int) -> str:
    return datetime.fromtimestamp(at).astimezone().strftime("%Y-%m-%d %H:%M")
