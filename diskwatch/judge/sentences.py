"""Every sentence that a finding or a call is told in: raw facts first, then what they mean.

For a person who has never heard of SMART, with the trade's term in brackets where a help desk needs it. No
sentence says or implies that a drive is safe; a test reads them all. What would change a call is said in
`diskwatch.judge.changes`, what becomes of other drives in `diskwatch.judge.odds_told`.
"""

from collections.abc import Mapping

from diskwatch.judge import names
from diskwatch.judge.language import _, marked, ngettext
from diskwatch.judge.names import begun, counted, happened
from diskwatch.records import Attribute, DriveWarning, SelfTest, Settled
from diskwatch.trends.norms import Norm
from diskwatch.units import once_in, plain, rfc3339, say_count, say_days

signal_name = names.signal_name


def rose(signal: str, old: int, new: int) -> str:
    """A counter rose."""
    return _("{counter} rose from {old} to {new}.").format(
        counter=begun(signal_name(signal)), old=say_count(old), new=say_count(new)
    )


def fell(signal: str, old: int, new: int) -> str:
    """A counter fell although such a counter cannot."""
    return _(
        "{counter} fell from {old} to {new}, which such a counter cannot do; it is followed from the new value "
        "on and nothing is concluded from the fall."
    ).format(counter=begun(signal_name(signal)), old=say_count(old), new=say_count(new))


def fresh_defects(risen: Mapping[str, tuple[int, int]], odds: str = "") -> str:
    """Defect counters stand above what they were when the drive was first read.

    Args:
        risen: (first value, value now) by signal, the most telling first.
        odds: what became of other drives that showed the same, or nothing.
    """
    told = ", ".join(
        _("{count} new {counter}").format(
            count=say_count(now - first), counter=signal_name(signal, now - first)
        )
        for signal, (first, now) in risen.items()
    )
    return _joined(
        _(
            "{counts} since it has been watched: fresh defects; back up what matters and see whether more "
            "follow."
        ).format(counts=told),
        odds,
    )


def drift(norm: Norm, *, episodes: int, days: float, evidence: float) -> str:
    """A ledger alarm."""
    return ngettext(
        "{what} on {count} occasion in {days} of powered time; the norm is {norm}. A drive within the norm "
        "would show this at most {once_in} of watching.",
        "{what} on {count} separate occasions in {days} of powered time; the norm is {norm}. A drive within "
        "the norm would show this at most {once_in} of watching.",
        episodes,
    ).format(
        what=happened(norm.stream),
        count=say_count(episodes),
        days=say_days(max(days, 1)),
        norm=_rate(norm.per_year),
        once_in=once_in(evidence),
    )


def damage(
    *, fresh: int, pending: int, replaced: int, score: float, limit: float, days: int, odds: str = ""
) -> str:
    """The odds rule called."""
    text = ngettext(
        "{count} fresh bad spot appeared within {days} days; sectors that wait to be read or replaced: "
        "{pending}, sectors replaced so far: {replaced} (damage measure {score}, the limit is {limit}).",
        "{count} fresh bad spots appeared within {days} days; sectors that wait to be read or replaced: "
        "{pending}, sectors replaced so far: {replaced} (damage measure {score}, the limit is {limit}).",
        fresh,
    ).format(
        count=say_count(fresh),
        days=days,
        pending=say_count(pending),
        replaced=say_count(replaced),
        score=f"{score:g}",
        limit=f"{limit:g}",
    )
    return _joined(text, odds)


def self_assessment_failed(warnings: str, counts: Mapping[str, int]) -> str:
    """The drive's own verdict is that it is failing, with what it warns of and what its error counters hold."""
    if warnings and counts:
        text = _(
            "The drive itself reports that it is failing (self-assessment: failed; it warns of {warnings}); it "
            "counts {counts}."
        )
    elif warnings:
        text = _(
            "The drive itself reports that it is failing (self-assessment: failed; it warns of {warnings})."
        )
    elif counts:
        text = _("The drive itself reports that it is failing (self-assessment: failed); it counts {counts}.")
    else:
        text = _("The drive itself reports that it is failing (self-assessment: failed).")
    return text.format(warnings=warnings, counts=counted(counts))


def failing_attribute(attribute: Attribute) -> str:
    """An attribute's normalised value has fallen to its threshold."""
    return _(
        "Attribute {number} ({name}) has fallen to {value}, its limit is {threshold} (raw value {raw})."
    ).format(
        number=attribute.number,
        name=plain(attribute.name),
        value=attribute.value,
        threshold=attribute.threshold,
        raw=plain(attribute.raw),
    )


def spare_below(spare: int, threshold: int) -> str:
    """The reserve of spare blocks is below the drive's own limit."""
    return _("Only {spare} % of its spare blocks are left; the drive's own limit is {threshold} %.").format(
        spare=spare, threshold=threshold
    )


def worn(used: int, spare: int | None, *, falling: bool) -> str:
    """A solid-state drive is past its rated endurance."""
    if spare is None:
        text = _("{used} % of the endurance that its maker rated is used up.")
    elif falling:
        text = _(
            "{used} % of the endurance that its maker rated is used up; {spare} % of its spare blocks are left "
            "and falling."
        )
    else:
        text = _(
            "{used} % of the endurance that its maker rated is used up; {spare} % of its spare blocks are left."
        )
    return text.format(used=used, spare=spare)


def unreadable_in_self_test(test: SelfTest) -> str:
    """The drive's own test met a sector that it could not read."""
    if test.lba is not None and test.hours is not None:
        text = _(
            "The drive's own test ({test}) met a sector that could not be read at block {block}, at {hours} "
            "powered hours."
        )
    elif test.lba is not None:
        text = _("The drive's own test ({test}) met a sector that could not be read at block {block}.")
    elif test.hours is not None:
        text = _("The drive's own test ({test}) met a sector that could not be read, at {hours} powered hours.")
    else:
        text = _("The drive's own test ({test}) met a sector that could not be read.")
    return text.format(test=plain(test.name), block=say_count(test.lba or 0), hours=say_count(test.hours or 0))


def self_test_failed(test: SelfTest) -> str:
    """The drive's own test failed otherwise."""
    if test.hours is None:
        text = _("The drive's own test ({test}) ended with: {result}.")
    else:
        text = _("The drive's own test ({test}) ended at {hours} powered hours with: {result}.")
    return text.format(test=plain(test.name), hours=say_count(test.hours or 0), result=plain(test.result))


def hot(celsius: int, limit: int) -> str:
    """The drive is at or above its own temperature limit."""
    return _("It is at {celsius} °C; its own limit is {limit} °C: see to its cooling.").format(
        celsius=celsius, limit=limit
    )


def warns_of_heat() -> str:
    """A drive's only warning is its temperature."""
    return _("The drive warns that its temperature is outside its own limits: see to its cooling.")


_WARNED: Mapping[DriveWarning, str] = {
    DriveWarning.ENCLOSURE: marked(
        "The drive warns that its enclosure is degraded: look at the enclosure's power supplies and fans."
    ),
    DriveWarning.SELF_TEST: marked(
        "The drive warns that a test which it ran in the background failed: see its self-test log."
    ),
    DriveWarning.SCAN: marked(
        "The drive warns that its own scan in the background met a defect of the medium: back up what matters "
        "and see whether more follow."
    ),
    DriveWarning.CACHE: marked(
        "The drive warns that its write cache would not outlast a loss of power: what was just written could "
        "be lost; see to its power, and have its maker asked."
    ),
    DriveWarning.POWER: marked("The drive warns that it expects to lose its power: see to its supply."),
    DriveWarning.STATISTICS: marked(
        "The drive warns that one of its statistics has reached a limit that was set in it."
    ),
    DriveWarning.HUMIDITY: marked("The drive warns that the humidity is outside its limits: see to the room."),
    DriveWarning.FIRMWARE: marked("The drive warns that its firmware is not to be trusted: ask its maker."),
    DriveWarning.ELEMENT: marked(
        "The drive warns that the state of one of its parts, such as a head, has changed: back up what matters."
    ),
    DriveWarning.UNNAMED: marked("The drive warns, and does not say of what that is known here."),
}


def warns_of(warning: DriveWarning) -> str:
    """What a SCSI drive warns of; not its temperature, and no test."""
    return _(_WARNED[warning])


def unreadable(times: int, explanation: str) -> str:
    """Passes in a row brought nothing."""
    return ngettext(
        "It could not be read {count} time. {why}",
        "It could not be read {count} times in a row. {why}",
        times,
    ).format(count=say_count(times), why=explanation)


def comes_and_goes(times: int, ago: int, window: int) -> str:
    """A drive was gone and came back.

    Args:
        times: how often within the window.
        ago: days since it was last gone.
        window: days.
    """
    return ngettext(
        "It was gone and came back {count} time within {window} days, last {ago} ago. As long as it may go "
        "again, do not count on it: look at its connection, its power and its firmware.",
        "It was gone and came back {count} times within {window} days, last {ago} ago. As long as it may go "
        "again, do not count on it: look at its connection, its power and its firmware.",
        times,
    ).format(count=say_count(times), window=window, ago=say_days(max(1, ago)))


def cool_again(days: int) -> str:
    """A drift of temperature ends on evidence."""
    return _(
        "For {days} it has not run hotter than its norm, and no evidence of it is left: that finding ends. It "
        "is no promise for the next hot days."
    ).format(days=say_days(days))


def no_smart() -> str:
    """A virtual disk: there is nothing to read."""
    return _("A virtual disk has no readings of its own (no SMART): it is watched by its traffic alone.")


def first_reading(old: Mapping[str, int]) -> str:
    """Read for the first time: levels, no trend yet."""
    if not old:
        return _("Read for the first time: its counters are a starting level, not a trend.")
    return _("It came with old defects: {counts}. That is a level, not a trend; a rise will speak.").format(
        counts=counted(old)
    )


def quiet(old: Mapping[str, int], risen: Mapping[str, int], word: Settled | None = None) -> str:
    """Nothing asks for a deed. The same words every day: what changes daily would be written daily.

    Args:
        old: what the defect counters held when the drive was first read, where not 0.
        risen: how far error counters have risen since, or since the owner's word, where they have.
        word: the owner's last word, or None.
    """
    came = _("It came with old defects: {counts}.").format(counts=counted(old)) if old else ""
    said = settled(word) if word else ""
    if risen:
        text = (
            _("Since then: {counts}. That is within the norm so far.")
            if word
            else _("Since it has been watched: {counts}. That is within the norm so far.")
        ).format(counts=counted(risen))
    else:
        text = (
            _("No error counter has gone beyond its norm since then.")
            if word
            else _("No error counter has gone beyond its norm since it has been watched.")
        )
    return _joined(came, said, text)


def settled(word: Settled) -> str:
    """The owner's word."""
    signals = ", ".join(signal_name(one) for one in word.signals)
    text = (
        _("On {day} the owner said of {signals}: “{because}”.")
        if signals
        else _("On {day} the owner said: “{because}”.")
    ).format(day=rfc3339(word.at)[:10], signals=plain(signals), because=plain(word.because))
    instead = _("{drive} took its place.").format(drive=plain(word.replaced_by)) if word.replaced_by else ""
    return _joined(text, instead)


def link_again(risen: Mapping[str, int], word: Settled) -> str:
    """Damaged transfers within 30 powered days of the owner's word that the link was seen to."""
    return _(
        "{counts} came after the link was seen to on {day}: reseat or replace the cable once more, or try "
        "another port, then watch."
    ).format(counts=counted(risen), day=rfc3339(word.at)[:10])


def power_shared(days: int, drives: int) -> str:
    """Heads retracted in an emergency whenever power went away on other drives."""
    return ngettext(
        "Its heads retracted in an emergency on {days} of the last 30 days, and on the same days power went "
        "away on {count} other drive: see to the power strip, the supply and their plugs.",
        "Its heads retracted in an emergency on {days} of the last 30 days, and on the same days power went "
        "away on {count} other drives: see to the power strip, the supply and their plugs.",
        drives,
    ).format(days=days, count=drives)


def link_is_quiet(days: int) -> str:
    """A link finding ends on evidence."""
    return _("No transfer was damaged in {days} of powered time: the link is taken for mended.").format(
        days=say_days(days)
    )


def pending_is_over(days: int) -> str:
    """A first pending sector ends on evidence."""
    return _(
        "The sectors that could not be read have been rewritten, and {days} brought no new defect: that "
        "finding ends. It is no promise for the days to come."
    ).format(days=say_days(days))


def call_changed(before: str | None, after: str, reason: str) -> str:
    """The call changed."""
    text = _("Call is now {after}, it was {before}: {reason}") if before else _("Call is now {after}: {reason}")
    return text.format(after=after, before=before, reason=reason)


def _rate(per_year: float) -> str:
    if per_year < 1:
        return _("one in {years} years").format(years=f"{1 / per_year:g}")
    return _("one a year") if per_year == 1 else _("{count} a year").format(count=f"{per_year:g}")


def _joined(*sentences: str) -> str:
    return " ".join(one for one in sentences if one)
