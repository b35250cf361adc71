"""What would change a call, in sentences."""

from diskwatch.judge.language import _
from diskwatch.judge.names import happened
from diskwatch.trends.norms import YEAR
from diskwatch.units import once_in


def needs_reading() -> str:
    """What a drive without a call lacks."""
    return _("It has not been read yet; the first reading gives a call.")


def virtual_stays() -> str:
    """A virtual disk without readings."""
    return _("Nothing that is read from it can change this call: it has no readings of its own.")


def stands() -> str:
    """A call that rests on a finding which only the owner can end."""
    return _(
        "The call does not fall by itself: a while without new trouble is no proof that the trouble is over. "
        "It falls on your word, once the trouble has been seen to ('diskwatch settle')."
    )


def drive_says_so() -> str:
    """A call that rests on what the drive itself states."""
    return _(
        "The call does not fall by itself, and your word ends it only until the next reading: the drive itself "
        "states what it rests on."
    )


def falls_with_the_link(days: float) -> str:
    """A call that rests on the link alone."""
    return _(
        "The call falls after {days} powered days without a damaged transfer, or on your word that the cable "
        "was reseated or replaced ('diskwatch settle')."
    ).format(days=f"{days:g}")


def falls_when_rewritten(days: int) -> str:
    """A call that rests on pending sectors alone."""
    return _(
        "The call falls when the sectors that wait have been rewritten and {days} days brought no new defect, "
        "or on your word ('diskwatch settle')."
    ).format(days=days)


def falls_when_cool(days: int) -> str:
    """A call that rests on temperature alone."""
    return _(
        "The call falls when no evidence of running hot is left, at the earliest {days} days after it last "
        "stood at its alarm, or on your word ('diskwatch settle')."
    ).format(days=days)


def passes() -> str:
    """A call that rests on the present moment only."""
    return _("The call ends with what it tells of.")


def first_defect_would() -> str:
    """What makes keep a look at once."""
    return _("A first fresh sector that cannot be read makes it look at once.")


def one_more_would(stream: str, now: float, after: float, alarm: float, absorbed: float) -> str:
    """What one more episode would do to a ledger."""
    text = (
        _(
            "{what}: evidence stands at {now}; another occasion, more than {absorbed} powered days after the "
            "last, would bring it to {after}, which makes it look."
        )
        if after >= alarm
        else _(
            "{what}: evidence stands at {now}; another occasion, more than {absorbed} powered days after the "
            "last, would bring it to {after}; look comes from {alarm} on."
        )
    )
    return text.format(
        what=happened(stream),
        now=once_in(now),
        after=once_in(after),
        alarm=once_in(alarm),
        absorbed=f"{absorbed:g}",
    )


def unread_would(limit: int) -> str:
    """What failing passes do."""
    return _("{limit} passes in a row without a reading make it look.").format(limit=limit)


def damage_would(call: str, limit: float, days: int) -> str:
    """What the odds rule needs."""
    return _(
        "A damage measure of {limit} (spots of the last {days} days, pending and replaced ones together) makes "
        "it {call}."
    ).format(limit=f"{limit:g}", days=days, call=call)


def verdict_would() -> str:
    """What makes any call a retire."""
    return _("A failed self-assessment, spare blocks below their limit or read-only media make it retire.")


def budget(days: float) -> str:
    """The bound on false alarms, with what it rests on."""
    return _(
        "A drive within its norms raises a drift alarm at most once in {years} years of watching. That is "
        "proved, under the episode assumption, for twice the thresholds in use; for these it was computed."
    ).format(years=f"{days / YEAR:g}")
