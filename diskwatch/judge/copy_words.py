"""The copy plan in words, for a person in a hurry: what first, how long, what to leave alone.

What is advised is common practice among those who rescue data; the order (easy parts first, bad places last, no
repair of a file system on a drive with errors) is that of the manual of GNU ddrescue.
"""

import math
from collections.abc import Iterator

from diskwatch.judge.copy_plan import CopyPlan, Held, Holds
from diskwatch.judge.language import _, ngettext
from diskwatch.records import CallWord, Cause, Kind
from diskwatch.records.array import Array
from diskwatch.trends.read_rate import ReadRate
from diskwatch.units import plain, say_bytes, say_count

_NAMES = {
    Holds.HOME: _("a home folder of yours"),
    Holds.HISTORY: _("the history of diskwatch"),
    Holds.DATA: _("data"),
    Holds.SYSTEM: _("system"),
    Holds.SWAP: _("swap space, needs no copy"),
}
_BY_CALL = {
    CallWord.RETIRE: _(
        "Rely on this drive for nothing more: copy off now what you have nowhere else, then take it out."
    ),
    CallWord.COPY: _("Copy off now what you have nowhere else, then replace the drive."),
    CallWord.LOOK: _(
        "The drive wants a look first, see 'diskwatch why'; make sure meanwhile that a backup of today exists."
    ),
    CallWord.KEEP: _(
        "Nothing asks for a copy now beyond the backup that every drive needs; this is the plan for that day."
    ),
}


def urgency(plan: CopyPlan) -> str:
    """What the call means for the copy."""
    if plan.call is None:
        return _("The drive has not been read yet, so nothing is known of its state: back it up as any other.")
    return _BY_CALL[plan.call]


def holding(held: Held) -> str:
    """One file system: where, how much, what, how long."""
    what = ", ".join(_NAMES[one] for one in held.holds)
    used, total = held.mount.used_bytes, held.mount.total_bytes
    much = _("how much is not known") if used is None else say_bytes(used)
    if used is not None and total is not None:
        much = _("{used} of {total}").format(used=much, total=say_bytes(total))
    long = "" if held.hours is None or Holds.SWAP in held.holds else f", {between(held.hours)}"
    return f"{plain(held.mount.point)}: {much} ({what}){long}"


def nothing_known() -> str:
    """No file system is known on the drive."""
    return _("No mounted file system is known on it.")


def backup(day: str, ago: str) -> str:
    """What the owner said of the last backup."""
    return _(
        "By your word it was backed up on {day}, {ago}: what has come since then is at stake first of all."
    ).format(day=day, ago=ago)


def duration(plan: CopyPlan) -> str:
    """How long a full copy takes, and what that rests on."""
    if plan.hours is None and plan.whole_hours is None:
        return _("How long a copy takes is not known: neither what is used nor the size of the drive is.")
    told = []
    if plan.hours is not None and plan.used_bytes is not None:
        least = _("at least ") if plan.incomplete else ""
        told.append(
            _("Reading all that is used ({least}{used}) takes {time}.").format(
                least=least, used=say_bytes(plan.used_bytes), time=between(plan.hours)
            )
        )
    if plan.whole_hours is not None:
        told.append(
            _("Reading the whole drive, sector by sector, takes {time}.").format(time=between(plan.whole_hours))
        )
    told += [
        _rate(plan.rate, turns=plan.turns),
        _("Many small files take longer, and at a bad place a drive may stall for minutes."),
    ]
    return " ".join(told)


def _rate(rate: ReadRate, *, turns: bool) -> str:
    speed = _("{low} to {high} a second").format(
        low=say_bytes(round(rate.low)), high=say_bytes(round(rate.high))
    )
    if rate.stretches == 0:
        return _(
            "That is reckoned with {speed}, as usual for its sort (common practice, no source), since this "
            "drive has not been seen reading in bulk."
        ).format(speed=speed)
    inner = _(", halved for the inner tracks") if turns else ""
    return ngettext(
        "That is reckoned with {speed}, which this drive really gave in {count} five-minute stretch{inner}.",
        "That is reckoned with {speed}, which this drive really gave in {count} five-minute stretches{inner}.",
        rate.stretches,
    ).format(speed=speed, count=say_count(rate.stretches), inner=inner)


def chance(plan: CopyPlan, kind: Kind) -> str:
    """How likely a full read is to meet a sector that cannot be read."""
    if plan.pending:
        first = ngettext(
            "{count} sector is known not to be readable now, so a full read will meet it",
            "{count} sectors are known not to be readable now, so a full read will meet them",
            plan.pending,
        ).format(count=say_count(plan.pending))
        return _(
            "{first}: a program that copies file by file may stop there, and what it has not reached by then "
            "may be lost. That is why what cannot be replaced comes first."
        ).format(first=first)
    if plan.unreadable is None:
        why = _("what it stands on cannot be seen") if kind is Kind.VIRTUAL else _("its size is not known")
        return _("How likely a full read is to meet an unreadable sector cannot be said: {why}.").format(
            why=why
        )
    best, worst = plan.unreadable.chances
    return _(
        "Makers of such drives allow at most one unreadable bit in {one} to {other} read. At that bound, "
        "reading the whole drive meets an unreadable sector with a chance of {best} to {worst}. This is the "
        "bound of a class, no forecast for this drive: errors come in clusters, and most drives do far better."
    ).format(
        one=_power(plan.unreadable.rates[1]),
        other=_power(plan.unreadable.rates[0]),
        best=percent(best),
        worst=percent(worst),
    )


def fellows(plan: CopyPlan) -> Iterator[str]:
    """What other drives hold of the same, and how that changes the urgency."""
    if plan.arrays is None:
        yield _("Whether other drives hold the same cannot be seen: it is not plugged in here now.")
        return
    if not plan.arrays:
        yield _("No other drive of this machine holds the same, as far as the kernel shows: no array, no pool.")
        return
    for array in plan.arrays:
        yield _fellow(array)
    yield _("An array is no backup: what is deleted or overwritten is so on all of its members at once.")


def _fellow(array: Array) -> str:
    name = plain(f"{array.kind} {array.name}" + (f" ({array.level})" if array.level else ""))
    if array.elsewhere is None:
        filling = _(", which is being filled or brought into line") if array.rebuilding else ""
        return _(
            "It is a part of {name}{filling}; whether the others hold the same now is not known: take it that "
            "they do not."
        ).format(name=name, filling=filling)
    if not array.elsewhere:
        lacks = (
            ngettext(
                ", which lacks {count} member now", ", which lacks {count} members now", array.missing
            ).format(count=array.missing)
            if array.missing
            else ""
        )
        return _(
            "It is a part of {name}{lacks}: when this drive goes, all that lies in there goes. The copy is as "
            "urgent as for a lone drive, and it covers more than this drive."
        ).format(name=name, lacks=lacks)
    return _(
        "It is a part of {name}: its fellows hold the same, so what lies in there outlives this drive "
        "and can be replaced without haste, as long as none of them fails before. Take out the right one: go "
        "by its serial."
    ).format(name=name)


def order(plan: CopyPlan, history_hint: str) -> Iterator[str]:
    """What to do, step by step.

    Args:
        plan: the plan.
        history_hint: how to move this program's own history.
    """
    yield _("Get a place for the copy first: another drive, never this one.")
    yield _("Stop what writes to the drive; where you can, mount it read-only.")
    by = {
        sort: [plain(one.mount.point) for one in plan.held if one.holds[0] is sort]
        for sort in (Holds.HOME, Holds.DATA, Holds.SYSTEM)
    }
    first = by[Holds.HOME] + by[Holds.DATA]
    if first:
        yield _("Copy what cannot be replaced (pictures, papers, mail, keys), of {points}.").format(
            points=", ".join(first)
        )
        yield _("Then all the rest of {points}.").format(points=", ".join(first))
    if any(Holds.HISTORY in one.holds for one in plan.held):
        yield _("Move the history of diskwatch off it: {hint}.").format(hint=history_hint)
    if by[Holds.SYSTEM]:
        yield _("Then {points}: it can be installed anew, but think of /etc, /srv and /var.").format(
            points=", ".join(by[Holds.SYSTEM])
        )
    if not plan.held:
        yield _(
            "No mounted file system is known on it: find out what it holds before it goes; an image of the "
            "whole drive leaves nothing out."
        )
    if any(Holds.SWAP in one.holds for one in plan.held):
        yield _("Turn its swap space off: programs whose memory lies there end with the drive.")
    yield _(
        "Open some of the copies and see that they are whole; only then come tests, repairs and the exchange."
    )


def cautions(plan: CopyPlan, *, kind: Kind, cause: Cause | None) -> Iterator[str]:
    """What to leave alone."""
    yield _(
        "Run no repair of the file system, no defragmentation and no long self-test on it before the copy is "
        "done."
    )
    if cause is Cause.LINK:
        yield _(
            "All points to its cable or connector: with a backup made, power down, reseat or replace the "
            "cable, and copy then."
        )
    elif plan.turns or kind is Kind.USB:
        yield _("Do not switch it off and on to see whether that helps: each start may be its last.")
    else:
        yield _(
            "Do not switch it off and on before the copy is done: some drives at their end do not come back."
        )
    if kind in {Kind.SSD, Kind.NVME} or (kind in {Kind.USB, Kind.SAS} and not plan.turns):
        yield _(
            "A worn solid-state drive must not lie without power for long: JESD218 asks one of the client "
            "class to hold its data for a year at 30 °C once it is worn, of the enterprise class for three "
            "months at 40 °C."
        )
    yield _(
        "If it clicks, grinds or vanishes, or the data are worth more than the money, turn it off and leave it "
        "to professionals before any attempt of your own. Do not open it."
    )
    yield _("The maker's warranty terms and your local rules hold; nothing here overrides them.")


def between(hours: tuple[float, float]) -> str:
    """A length of time as an interval: ``3 to 5 hours``, ``40 minutes to 2 hours``."""
    low, high = (_time(one) for one in hours)
    if low == high:
        return _("about {time}").format(time=low)
    (count, unit), (_more, other) = low.split(" "), high.split(" ")
    if unit.rstrip("s") == other.rstrip("s"):
        return _("{low} to {high}").format(low=count, high=high)
    return _("{low} to {high}").format(low=low, high=high)


def _time(hours: float) -> str:
    if hours < 1 / 60:
        return _("1 minute")
    for size, one, many in ((24.0, "day", "days"), (1.0, "hour", "hours"), (1 / 60, "minute", "minutes")):
        if hours >= size * (2 if size > 1 else 1):
            count = max(1, round(hours / size))
            return f"{say_count(count)} {one if count == 1 else many}"
    raise AssertionError(hours)


def percent(share: float) -> str:
    """A chance for a person, two digits at most: ``less than 0.1 %``, ``0.8 %``, ``27 %``."""
    amount = share * 100
    if amount < 0.1:
        return _("less than 0.1 %")
    return f"{amount:.1f} %" if amount < 9.95 else f"{min(amount, 99):.0f} %"


def _power(rate: float) -> str:
    return f"10^{round(-math.log10(rate))}"
