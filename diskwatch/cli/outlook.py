"""What is to be expected of the drives within 24 months, and what nobody can know."""

import argparse
import sys
import textwrap
from collections.abc import Iterator

from diskwatch import analyser
from diskwatch.cli.answers import drive_answer
from diskwatch.cli.common import now, print_json, settings, state_folder
from diskwatch.errors import NothingToWorkOn
from diskwatch.history.reader import Past
from diskwatch.judge import outlook_told as told
from diskwatch.judge.margin_told import replace_by_told
from diskwatch.judge.odds_told import odds_told
from diskwatch.judge.outlook import DAYS, Outlook, outlook
from diskwatch.judge.stakes import odds_of, replace_by_of
from diskwatch.records import Bays, DriveLine
from diskwatch.units import day_number, plain, rfc3339

_WIDTH = 78


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("--json", action="store_true", help="one JSON object")


def run(args: argparse.Namespace) -> int:
    """Tell the outlook; 0, 3 where no drive was read yet."""
    if args.settings is not None:
        settings(args)
    with Past.open(state_folder(args)) as past:
        bays = past.bays(now())
        kept = {line.number: past.state(line.number) for line in bays.drives}
    if not bays.drives:
        raise NothingToWorkOn("no drive has been read yet", hint="start 'diskwatch watch'")
    states = {
        number: analyser.start() if text is None else analyser.load(text) for number, text in kept.items()
    }
    every = [(line, of(line, states[line.number], bays.at)) for line in bays.drives]
    if args.json:
        print_json(answer(bays, every))
    else:
        sys.stdout.write("\n".join(plain(one) for one in _listed(bays, every)) + "\n")
    return 0


def of(line: DriveLine, state: analyser.DriveState, at: int) -> Outlook:
    """The outlook of one drive."""
    first = line.first_seen if state.first_at is None else state.first_at
    return outlook(
        state.streams, state.standing, line.forecasts, first_day=day_number(first), day=day_number(at)
    )


def answer(bays: Bays, every: list[tuple[DriveLine, Outlook]]) -> dict[str, object]:
    """What ``outlook --json`` prints."""
    return {
        "schema": "diskwatch/outlook/1",
        "at": rfc3339(bays.at),
        "days": DAYS,
        "source": told.source(),
        "drives": [_drive(line, ahead, bays.at) for line, ahead in every],
    }


def _drive(line: DriveLine, ahead: Outlook, at: int) -> dict[str, object]:
    known = drive_answer(line, at)
    names = (
        *("serial", "model", "device", "label", "call", "replace_by", "margin_days", "margin_reason"),
        *("odds", "odds_reason", "warranty_until", "backed_up"),
    )
    return {
        **{name: known[name] for name in names},
        "failure": {"chance": None, "reason": told.failure_unknown()},
        "limits": [
            {
                "signal": one.forecast.signal,
                "limit": one.forecast.limit,
                "chance": {"low": one.low, "high": one.high},
                "days": {"low": one.forecast.low, "high": one.forecast.high},
                "probability": one.forecast.probability,
                "made": rfc3339(one.forecast.made_on_day * 86_400)[:10],
            }
            for one in ahead.limits
        ],
        "fresh": [
            {
                "stream": one.stream,
                "chance": one.chance,
                "under_way": one.under_way,
                "episodes": one.episodes,
                "powered_days": one.powered_days,
            }
            for one in ahead.fresh
        ],
        "unknown": dict(ahead.unknown),
    }


def _listed(bays: Bays, every: list[tuple[DriveLine, Outlook]]) -> Iterator[str]:
    yield "What is to be expected within 24 months, as things go now."
    yield from textwrap.wrap(told.source(), _WIDTH)
    for line, ahead in every:
        yield ""
        yield f"{line.name}, {line.place.device}: {line.call.word.value if line.call else 'not read yet'}"
        for one in _told(line, ahead, bays.at):
            yield from textwrap.wrap(plain(one), _WIDTH, initial_indent="  ", subsequent_indent="    ")


def _told(line: DriveLine, ahead: Outlook, at: int) -> Iterator[str]:
    by = replace_by_of(line, at)
    if by is not None:
        yield replace_by_told(by, day_number(at))
    if (odds := odds_of(line, at)) is not None:
        yield odds_told(odds)
    yield from (told.limit_told(one) for one in ahead.limits)
    yield from (told.fresh_told(one) for one in ahead.fresh)
    yield from (told.limit_unknown(signal, reason) for signal, reason in ahead.unknown.items())
    yield told.failure_unknown()
