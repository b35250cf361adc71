"""Every sentence that a judgement is told in, in one place: raw facts first, then what they mean.

For a person who has never heard of SMART, with the trade's term in brackets where a help desk needs it. No
sentence says or implies that a drive is safe; a test reads them all.
"""

from collections.abc import Mapping

from diskwatch.records import Attribute, SelfTest, Settled
from diskwatch.trends.norms import YEAR, Norm
from diskwatch.units import once_in, plain, rfc3339, say_count, say_days

_NAMES: Mapping[str, tuple[str, str]] = {
    "reallocated-sectors": (
        "sector replaced by a spare one (reallocated)",
        "sectors replaced by spare ones (reallocated)",
    ),
    "pending-sectors": (
        "sector that could not be read and waits (pending)",
        "sectors that could not be read and wait (pending)",
    ),
    "offline-uncorrectable": (
        "sector that its own scan could not read (offline uncorrectable)",
        "sectors that its own scan could not read (offline uncorrectable)",
    ),
    "reported-uncorrectable": (
        "read that it gave up (reported uncorrectable)",
        "reads that it gave up (reported uncorrectable)",
    ),
    "grown-defects": ("defect grown in use (grown defects)", "defects grown in use (grown defects)"),
    "uncorrected-reads": ("read that it gave up (uncorrected)", "reads that it gave up (uncorrected)"),
    "uncorrected-writes": ("write that it gave up (uncorrected)", "writes that it gave up (uncorrected)"),
    "media-errors": (
        "time that stored data could not be recovered (media errors)",
        "times that stored data could not be recovered (media errors)",
    ),
    "crc-errors": (
        "transfer damaged on the cable or connector (interface CRC errors)",
        "transfers damaged on the cable or connector (interface CRC errors)",
    ),
    "link-resets": ("reset of the link to it", "resets of the link to it"),
    "command-timeouts": (
        "command that it did not answer in time (command timeouts)",
        "commands that it did not answer in time (command timeouts)",
    ),
    "kernel-io-errors": ("request that the kernel saw fail", "requests that the kernel saw fail"),
    "unsafe-power-offs": (
        "time that power went away without notice (unsafe power-offs)",
        "times that power went away without notice (unsafe power-offs)",
    ),
}

_STREAMS: Mapping[str, str] = {
    "media": "New bad spots turned up",
    "flash-media": "Stored data could not be recovered",
    "link": "Transfers were damaged on the way between drive and computer",
    "timeouts": "Commands went unanswered",
    "power": "Power went away without notice",
    "kernel-errors": "Requests failed",
}


def signal_name(signal: str, count: int = 2) -> str:
    """What a counter counts, for a person, and the trade's term; in the singular for a count of 1."""
    one, many = _NAMES.get(signal, (signal.replace("-", " "),) * 2)
    return one if count == 1 else many


def rose(signal: str, old: int, new: int) -> str:
    """A counter rose."""
    return f"{_upper(signal_name(signal))} rose from {say_count(old)} to {say_count(new)}."


def fell(signal: str, old: int, new: int) -> str:
    """A counter fell although such a counter cannot."""
    return (
        f"{_upper(signal_name(signal))} fell from {say_count(old)} to {say_count(new)}, which such a counter "
        f"cannot do; it is followed from the new value on and nothing is concluded from the fall."
    )


def fresh_defects(risen: Mapping[str, tuple[int, int]]) -> str:
    """Defect counters stand above what they were when the drive was first read.

    Args:
        risen: (first value, value now) by signal, the most telling first.
    """
    told = [
        f"{say_count(now - first)} new {signal_name(signal, now - first)}"
        for signal, (first, now) in risen.items()
    ]
    return (
        f"{', '.join(told)} since it has been watched: fresh defects; back up what matters and see whether "
        f"more follow."
    )


def drift(norm: Norm, *, episodes: int, days: float, evidence: float) -> str:
    """A ledger alarm."""
    return (
        f"{_STREAMS[norm.stream]} on {_times(episodes)} in {say_days(max(days, 1))} of powered time; "
        f"the norm is {_rate(norm.per_year)}. "
        f"A drive within the norm would show this at most {once_in(evidence)} of watching."
    )


def damage(*, fresh: int, pending: int, replaced: int, score: float, limit: float, days: int) -> str:
    """The odds rule called."""
    return (
        f"{_spots(fresh)} appeared within {days} days; {say_count(pending)} {_waits(pending)} to be read or "
        f"replaced and {say_count(replaced)} {'was' if replaced == 1 else 'were'} replaced so far "
        f"(damage measure {score:g}, the limit is {limit:g})."
    )


def self_assessment_failed(bits: str, counted: Mapping[str, int]) -> str:
    """The drive's own verdict is that it is failing, with what its error counters hold."""
    beside = f"; it counts {_list(counted)}" if counted else ""
    return f"The drive itself reports that it is failing (self-assessment: failed{bits}){beside}."


def critical_warning(names: str) -> str:
    """What an NVMe drive warns of, in brackets behind the verdict."""
    return f"; it warns of {names}"


def failing_attribute(attribute: Attribute) -> str:
    """An attribute's normalised value has fallen to its threshold."""
    return (
        f"Attribute {attribute.number} ({plain(attribute.name)}) has fallen to {attribute.value}, its limit is "
        f"{attribute.threshold} (raw value {plain(attribute.raw)})."
    )


def spare_below(spare: int, threshold: int) -> str:
    """The reserve of spare blocks is below the drive's own limit."""
    return f"Only {spare} % of its spare blocks are left; the drive's own limit is {threshold} %."


def worn(used: int, spare: int | None, *, falling: bool) -> str:
    """A solid-state drive is past its rated endurance."""
    rest = f"; {spare} % of its spare blocks are left" if spare is not None else ""
    fall = " and falling" if falling and spare is not None else ""
    return f"{used} % of the endurance that its maker rated is used up{rest}{fall}."


def unreadable_in_self_test(test: SelfTest) -> str:
    """The drive's own test met a sector that it could not read."""
    where = f" at block {say_count(test.lba)}" if test.lba is not None else ""
    when = f", at {say_count(test.hours)} powered hours" if test.hours is not None else ""
    return f"The drive's own test ({plain(test.name)}) met a sector that could not be read{where}{when}."


def self_test_failed(test: SelfTest) -> str:
    """The drive's own test failed otherwise."""
    when = f" at {say_count(test.hours)} powered hours" if test.hours is not None else ""
    return f"The drive's own test ({plain(test.name)}) ended{when} with: {plain(test.result)}."


def hot(celsius: int, limit: int) -> str:
    """The drive is at or above its own temperature limit."""
    return f"It is at {celsius} °C; its own limit is {limit} °C: see to its cooling."


def warns_of_heat() -> str:
    """An NVMe drive's only warning is its temperature."""
    return "The drive warns that its temperature is outside its own limits: see to its cooling."


def unreadable(times: int, explanation: str) -> str:
    """Passes in a row brought nothing."""
    return f"It could not be read {times} times in a row. {explanation}"


def no_smart() -> str:
    """A virtual disk: there is nothing to read."""
    return "A virtual disk has no readings of its own (no SMART): it is watched by its traffic alone."


def first_reading(old: Mapping[str, int]) -> str:
    """Read for the first time: levels, no trend yet."""
    if not old:
        return "Read for the first time: its counters are a starting level, not a trend."
    return f"It came with old defects: {_list(old)}. That is a level, not a trend; a rise will speak."


def quiet(old: Mapping[str, int], risen: Mapping[str, int], word: Settled | None = None) -> str:
    """Nothing asks for a deed. The same words every day: what changes daily would be written daily.

    Args:
        old: what the defect counters held when the drive was first read, where not 0.
        risen: how far error counters have risen since, or since the owner's word, where they have.
        word: the owner's last word, or None.
    """
    came = f"It came with old defects: {_list(old)}. " if old else ""
    said = f"{settled(word)} " if word else ""
    since = "since then" if word else "since it has been watched"
    if not risen:
        return f"{came}{said}No error counter has gone beyond its norm {since}."
    return f"{came}{said}{_upper(since)}: {_list(risen)}. That is within the norm so far."


def settled(word: Settled) -> str:
    """The owner's word."""
    about = f" about {', '.join(signal_name(one) for one in word.signals)}" if word.signals else ""
    instead = f" {plain(word.replaced_by)} took its place." if word.replaced_by else ""
    return f"On {rfc3339(word.at)[:10]} the owner said{about}: “{plain(word.because)}”.{instead}"


def link_again(risen: Mapping[str, int], word: Settled) -> str:
    """Damaged transfers within 30 powered days of the owner's word that the link was seen to."""
    return (
        f"{_list(risen)} came after the link was seen to on {rfc3339(word.at)[:10]}: reseat or replace the "
        f"cable once more, or try another port, then watch."
    )


def link_is_quiet(days: int) -> str:
    """A link finding ends on evidence."""
    return f"No transfer was damaged in {say_days(days)} of powered time: the link is taken for mended."


def pending_is_over(days: int) -> str:
    """A first pending sector ends on evidence."""
    return (
        f"The sectors that could not be read have been rewritten, and {say_days(days)} brought no new defect: "
        f"that finding ends. It is no promise for the days to come."
    )


def call_changed(before: str | None, after: str, reason: str) -> str:
    """The call changed."""
    return f"Call is now {after}{f', it was {before}' if before else ''}: {reason}"


def needs_reading() -> str:
    """What a drive without a call lacks."""
    return "It has not been read yet; the first reading gives a call."


def virtual_stays() -> str:
    """A virtual disk without readings."""
    return "Nothing that is read from it can change this call: it has no readings of its own."


def stands() -> str:
    """A call that rests on a lasting finding."""
    return "The call does not fall by itself: a while without new trouble is no proof that the trouble is over."


def passes() -> str:
    """A call that rests on the present moment only."""
    return "The call ends with what it tells of."


def first_defect_would() -> str:
    """What makes keep a look at once."""
    return "A first fresh sector that cannot be read makes it look at once."


def one_more_would(stream: str, now: float, after: float, alarm: float, absorbed: float) -> str:
    """What one more episode would do to a ledger."""
    reached = "which makes it look" if after >= alarm else f"look comes from {once_in(alarm)} on"
    return (
        f"{_STREAMS[stream]}: evidence stands at {once_in(now)}; another occasion, more than {absorbed:g} "
        f"powered days after the last, would bring it to {once_in(after)} ({reached})."
    )


def unread_would(limit: int) -> str:
    """What failing passes do."""
    return f"{limit} passes in a row without a reading make it look."


def damage_would(call: str, limit: float, days: int) -> str:
    """What the odds rule needs."""
    return (
        f"A damage measure of {limit:g} (spots of the last {days} days, pending and replaced ones together) "
        f"makes it {call}."
    )


def verdict_would() -> str:
    """What makes any call a retire."""
    return "A failed self-assessment, spare blocks below their limit or read-only media make it retire."


def budget(days: float) -> str:
    """The bound on false alarms, with what it rests on."""
    return (
        f"A drive within its norms raises a drift alarm at most once in {days / YEAR:g} years of "
        f"watching. That is proved, under the episode assumption, for twice the thresholds in use; for these "
        f"it was computed."
    )


def _list(values: Mapping[str, int]) -> str:
    return ", ".join(f"{say_count(count)} {signal_name(signal, count)}" for signal, count in values.items())


def _upper(text: str) -> str:
    return text[:1].upper() + text[1:]


def _times(count: int) -> str:
    return "1 occasion" if count == 1 else f"{say_count(count)} separate occasions"


def _rate(per_year: float) -> str:
    if per_year < 1:
        return f"one in {1 / per_year:g} years"
    return "one a year" if per_year == 1 else f"{per_year:g} a year"


def _spots(count: int) -> str:
    return "1 fresh bad spot" if count == 1 else f"{say_count(count)} fresh bad spots"


def _waits(count: int) -> str:
    return "waits" if count == 1 else "wait"
