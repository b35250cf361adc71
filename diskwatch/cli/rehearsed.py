"""What a rehearsal came to, and the scenarios that there are: for a person, and as JSON."""

from collections.abc import Iterator, Mapping
from itertools import pairwise

from diskwatch.cli.answers import replay_answer
from diskwatch.records import CallWord, summed
from diskwatch.rehearsal.course import Ended
from diskwatch.rehearsal.scenario import MARK, Scenario
from diskwatch.rehearsal.story import Said, Story
from diskwatch.rehearsal.verdict import Outcome, Verdict
from diskwatch.units import DAY, plain, rfc3339, say_count


def list_answer(known: Mapping[str, Scenario]) -> dict[str, object]:
    """What ``rehearse --list --json`` prints: scenarios by name."""
    return {
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
                "expected": _reasons(one),
            }
            for name, one in known.items()
        ],
    }


def told_list(known: Mapping[str, Scenario]) -> str:
    """The scenarios for a person, and what each should lead to."""
    lines = [f"Machines, drives, makers and places of these scenarios are all {MARK}."]
    width = max(map(len, known), default=0)
    for name, one in known.items():
        drives = "1 INVENTED drive" if len(one.drive) == 1 else f"{len(one.drive)} INVENTED drives"
        lines.append(f"{name:<{width}}  {_days(one.days):>8}, {drives} in {one.place}: {one.title}")
        lines += [f"    {' '.join(reason.split())}" for reason in _reasons(one)]
    return "\n".join(plain(line) for line in lines) + "\n"


def _reasons(scenario: Scenario) -> list[str]:
    """Why each thing is expected; what is expected of several drives for one reason stands once."""
    return list(dict.fromkeys(wish.because for wish in scenario.expect))


def _days(number: int) -> str:
    return "1 day" if number == 1 else f"{say_count(number)} days"


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
        "cause_changes": {story.serial: _cause_changes(story) for story in stories},
        "expected": [_expected(one) for one in ended.outcomes],
    }


def _cause_changes(story: Story) -> list[dict[str, object]]:
    """Where a call stayed and its cause became another; changes of call stand among the calls."""
    return [
        {
            "at": rfc3339(one.at),
            "call": one.call.word.value,
            "before": _cause(before),
            "cause": _cause(one),
            "reason": one.call.reason,
        }
        for before, one in pairwise(story.said)
        if not one.changed
    ]


def _cause(one: Said) -> str | None:
    return one.call.cause.value if one.call.cause else None


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
        "because": wish.because,
        "verdict": one.verdict.value,
        "at": None if one.at is None else rfc3339(one.at),
        "day": one.day,
    }


def told(ended: Ended) -> str:
    """The rehearsal for a person."""
    scenario = ended.scenario
    lived = _days(round((ended.end - ended.start) / DAY))
    lines = [
        f"{scenario.title}: {lived} in {scenario.place}, seed {ended.seed}. EVERYTHING HERE IS INVENTED.",
        *(["", *scenario.about.strip().splitlines()] if scenario.about.strip() else []),
    ]
    for story in ended.stories.values():
        lines += ["", f"{story.serial}  {story.model}", *_told_story(story, ended.start)]
    lines += ["", "Expected:"]
    reasons: dict[str, list[str]] = {}
    for one in ended.outcomes:
        when = f" on day {one.day:g}" if one.day is not None else ""
        word = _SAID.get(one.verdict, one.verdict.value)
        # What an owner's file expects twice, for two reasons, is told once.
        reasons.setdefault(f"  {word + when:<24} {one.serial}: {_wished(one)}", []).append(one.wish.because)
    for line, why in reasons.items():
        lines += [line, *(f"  {'':<24} ({reason})" for reason in dict.fromkeys(why))]
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
        for before, one in pairwise((None, *story.said)):
            if one is None:
                continue
            was = f"(for {_cause(one)}, no longer {_cause(before)}) " if before and not one.changed else ""
            yield f"  day {(one.at - start) / DAY:7.2f}  {one.call.word.value:<6}  {was}{one.call.reason}"
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
    return "; ".join(parts)
