"""When to speak. Pure: from what was told before and what is seen now to what is to be told.

A change of call is told at once, and once. What stands is repeated by its call until it is put off; quiet hours
bind all but ``retire``. Each way to a person (`diskwatch.notices.memory`) has a state of its own, so that one
that is out of reach never makes another speak twice.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from enum import StrEnum

from diskwatch.history.later import PutOff
from diskwatch.records import CallWord
from diskwatch.units import DAY

REPEATS: Mapping[CallWord, int] = {
    CallWord.LOOK: 7 * DAY,
    CallWord.COPY: DAY,
    CallWord.RETIRE: 4 * 3_600,
}
"""Seconds between two notices of a call that stands; what is not named here is told once."""

GRACE = 900
"""Seconds for which the watch may be in trouble before that is told: an update or a start is none."""

TROUBLE_REPEATS = DAY
"""Seconds between two notices that nobody is watching."""

CALM_EVERY = 30 * DAY
"""Seconds between two notices that all is quiet, for those who asked for them."""


class About(StrEnum):
    """What a notice is about."""

    CALL = "call"
    TROUBLE = "trouble"
    CALM = "calm"


@dataclass(frozen=True, slots=True, kw_only=True)
class Told:
    """What was last told of a drive.

    Attributes:
        call: the call that was told.
        at: when, UTC seconds since 1970.
    """

    call: CallWord
    at: int


@dataclass(frozen=True, slots=True, kw_only=True)
class State:
    """What was told by one way to a person.

    Attributes:
        drives: by the drive's lasting name; one of which nothing was ever told counts as told ``keep``.
        trouble_at: when it was last told that the watch is in trouble, UTC seconds; None where it was not.
        calm_at: when it was last told that all is quiet, UTC seconds; None where it was not.
    """

    drives: Mapping[str, Told] = field(default_factory=dict)
    trouble_at: int | None = None
    calm_at: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Seen:
    """What is to be seen now.

    Attributes:
        calls: the call of each drive that has one, by the drive's lasting name.
        put_off: what this user has put off, by the same names.
        troubled_for: seconds for which the watch has been in trouble; None where it is in none.
    """

    calls: Mapping[str, CallWord]
    put_off: Mapping[str, PutOff] = field(default_factory=dict)
    troubled_for: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Wishes:
    """What the owner wants.

    Attributes:
        quiet: first and first-not-any-more minute of the day in which only a ``retire`` speaks, local time;
            None for none. May run over midnight.
        monthly: whether to tell once a month that all is quiet and somebody is watching.
    """

    quiet: tuple[int, int] | None = None
    monthly: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Due:
    """One notice that is to be given now.

    Attributes:
        about: what it is about.
        drive: the drive's lasting name; None where it is about no single drive.
        call: the drive's call; None likewise.
        repeated: whether the same was told before.
    """

    about: About
    drive: str | None = None
    call: CallWord | None = None
    repeated: bool = False


def settled(state: State, seen: Seen, now: int) -> State:
    """The state with what no longer matters taken out, and with no time that lies ahead.

    A clock that was set back would otherwise silence all repeats until it is there again.

    Args:
        state: what was told.
        seen: what is to be seen now.
        now: UTC seconds since 1970.
    """
    return State(
        drives={
            name: replace(told, at=min(told.at, now))
            for name, told in state.drives.items()
            if name in seen.calls
        },
        trouble_at=None
        if state.trouble_at is None or seen.troubled_for is None
        else min(state.trouble_at, now),
        calm_at=None if state.calm_at is None else min(state.calm_at, now),
    )


def due(state: State, seen: Seen, wishes: Wishes, now: int, minute: int) -> tuple[Due, ...]:
    """What is to be told now, strongest call first.

    Args:
        state: what was told, `settled`.
        seen: what is to be seen now.
        wishes: what the owner wants.
        now: UTC seconds since 1970.
        minute: minute of the local day, 0 to 1439.
    """
    quiet = _within(minute, wishes.quiet)
    found = [
        one
        for name, call in seen.calls.items()
        if (one := _of_drive(name, call, state.drives.get(name), now)) is not None
        and not (quiet and call is not CallWord.RETIRE)
        and not (name in seen.put_off and seen.put_off[name].silences(call, now))
    ]
    found.sort(key=lambda one: -(one.call or CallWord.KEEP).rank)
    if not quiet:
        if (
            seen.troubled_for is not None
            and seen.troubled_for >= GRACE
            and _over(state.trouble_at, TROUBLE_REPEATS, now)
        ):
            found.append(Due(about=About.TROUBLE, repeated=state.trouble_at is not None))
        if wishes.monthly and _calm(seen) and _over(state.calm_at, CALM_EVERY, now):
            found.append(Due(about=About.CALM, repeated=state.calm_at is not None))
    return tuple(found)


def told(state: State, given: Due, now: int) -> State:
    """The state once a notice was given."""
    match given.about:
        case About.TROUBLE:
            return replace(state, trouble_at=now)
        case About.CALM:
            return replace(state, calm_at=now)
        case About.CALL:
            if given.drive is None or given.call is None:
                return state
            return replace(state, drives={**state.drives, given.drive: Told(call=given.call, at=now)})


def minutes_of(quiet: str) -> tuple[int, int] | None:
    """Quiet hours as the settings write them, ``22:00-07:00``, in minutes of the day; None for none."""
    if not quiet:
        return None
    first, last = (int(one[:2]) * 60 + int(one[3:]) for one in quiet.split("-"))
    return first, last


def _of_drive(name: str, call: CallWord, before: Told | None, now: int) -> Due | None:
    was = CallWord.KEEP if before is None else before.call
    if call is not was:
        return Due(about=About.CALL, drive=name, call=call)
    every = REPEATS.get(call)
    if every is None or before is None or now - before.at < every:
        return None
    return Due(about=About.CALL, drive=name, call=call, repeated=True)


def _calm(seen: Seen) -> bool:
    return (
        seen.troubled_for is None
        and bool(seen.calls)
        and all(call is CallWord.KEEP for call in seen.calls.values())
    )


def _over(at: int | None, every: int, now: int) -> bool:
    return at is None or now - at >= every


def _within(minute: int, quiet: tuple[int, int] | None) -> bool:
    if quiet is None:
        return False
    first, last = quiet
    return first <= minute < last if first <= last else minute >= first or minute < last
