"""The copy plan's facts: what is to be copied off the drive, how long that takes, and what may go wrong."""

from collections.abc import Iterable

from diskwatch.judge import copy_words
from diskwatch.judge.copy_plan import copy_plan, is_turning
from diskwatch.records import DriveLine, IoRollup
from diskwatch.ticket.part import Json, Part, short
from diskwatch.trends.read_rate import read_rate

RATE_DAYS = 14
"""Days of traffic that the rate of reading is taken from."""

_MOST_PLACES = 200


def copy_part(line: DriveLine, rollups: Iterable[IoRollup]) -> Part:
    """The facts, as far as the history knows them; nobody looks at the machine for a ticket.

    Args:
        line: the drive.
        rollups: its traffic of the last `RATE_DAYS`.
    """
    if not line.place.lives_here:
        return Part(value=None, reason="Nothing is known to be mounted from this drive.")
    turns = is_turning(line)
    plan = copy_plan(line, rate=read_rate(rollups, turns=turns), arrays=None)
    likely = plan.unreadable
    order: list[Json] = [
        {
            "mounted_at": short(held.mount.point),
            "used_bytes": held.mount.used_bytes,
            "hours": _between(held.hours),
        }
        for held in plan.held[:_MOST_PLACES]
    ]
    return Part(
        value={
            "order": order,
            "used_bytes": plan.used_bytes,
            "used_is_incomplete": plan.incomplete,
            "read_bytes_per_second": _between((plan.rate.low, plan.rate.high)),
            "rate_measured": plan.rate.stretches > 0,
            "hours": _between(plan.hours),
            "whole_drive_hours": _between(plan.whole_hours),
            "duration": copy_words.duration(plan),
            "unreadable_chance": None if likely is None else _between(likely.chances),
            "unreadable": copy_words.chance(plan, line.drive.kind),
        }
    )


def _between(pair: tuple[float, float] | None) -> Json | None:
    return None if pair is None else {"low": pair[0], "high": pair[1]}
