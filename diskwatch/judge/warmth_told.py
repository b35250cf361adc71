"""Sentences about how warm a drive runs; a limit that is exceeded is a fact (`diskwatch.judge.sentences`)."""

from diskwatch.judge.language import _
from diskwatch.units import once_in


def hotter(*, highest: int, usual: float, line: float, evidence: float) -> str:
    """The ledger of temperature alarmed.

    Args:
        highest: of the day before, degrees Celsius.
        usual: highest of a usual day in its first weeks.
        line: where the norm ends.
        evidence: M in days.
    """
    return _(
        "It runs hotter than it used to: up to {highest} °C a day, usually {usual} °C in its first weeks; the "
        "norm ends at {line} °C. A drive within the norm would show this at most {once} of watching: see to "
        "its cooling."
    ).format(highest=highest, usual=f"{usual:g}", line=f"{line:g}", once=once_in(evidence))


def standing(*, usual: float | None, learnt_days: int, days: float | None, alarms_at: float) -> str:
    """What the ledger of temperature has come to.

    Args:
        usual: highest of a usual day in its first weeks, degrees Celsius; None while it is being learnt.
        learnt_days: days that it was learnt from so far.
        days: M in days; None likewise.
        alarms_at: M in days at which it alarms.
    """
    if usual is None or days is None:
        return _("What is usual is still being learnt, from {days} of 30 days.").format(days=learnt_days)
    return _("Usually up to {usual} °C a day: {once}, alarms at {alarm}.").format(
        usual=f"{usual:g}", once=once_in(days), alarm=once_in(alarms_at)
    )
