"""A reading's counters carried into the drive's state: levels, rises, ledgers, damage."""

from collections.abc import Mapping
from dataclasses import replace

from diskwatch.analyser.outcomes import entry
from diskwatch.analyser.state import DriveState
from diskwatch.judge import sentences
from diskwatch.records import Entry, Kind, Pass, Reading
from diskwatch.trends import episodes, increments, spots
from diskwatch.trends.norms import MAY_FALL, NORMS, STREAM_OF
from diskwatch.units import DAY, day_number


def followed(reading: Reading) -> Mapping[str, int]:
    """The counters of a reading that a ledger follows and that have a usable value."""
    return {
        value.signal: value.value
        for value in reading.values
        if value.signal in STREAM_OF and isinstance(value.value, int)
    }


def rises(
    state: DriveState, pass_: Pass, counts: Mapping[str, int]
) -> tuple[Mapping[str, int], tuple[Entry, ...]]:
    """How far each counter rose since its last usable value, and what to tell of that.

    A first value is a level. A counter that fell although it cannot invents nothing and is told.
    """
    risen, happened = {}, []
    for signal, new in counts.items():
        old = state.latest.get(signal)
        if old is None or old == new:
            continue
        moved = increments.step(old, new, may_fall=signal in MAY_FALL)
        if moved.reset:
            text = sentences.fell(signal, old, new)
            happened.append(entry(pass_, "reset", text, signal=signal, old=old, new=new))
        elif moved.rise:
            risen[signal] = moved.rise
            text = sentences.rose(signal, old, new)
            happened.append(entry(pass_, "rise", text, signal=signal, old=old, new=new))
    return risen, tuple(happened)


def streams(
    state: DriveState, pass_: Pass, counts: Mapping[str, int], risen: Mapping[str, int], hours: int | None
) -> Mapping[str, episodes.Stream]:
    """Every stream that the drive has, carried to the day of the pass.

    Args:
        state: the drive before the pass.
        pass_: the pass.
        counts: its counters.
        risen: how far they rose.
        hours: powered hours that the drive counts now, or None.
    """
    day = day_number(pass_.at)
    powered = None if hours is None or state.hours is None else hours - state.hours
    after = dict(state.streams)
    for norm in NORMS:
        if counts.keys().isdisjoint(norm.signals):
            continue
        stream = after.get(norm.stream) or episodes.begin(day)
        if day > stream.day:
            gap = episodes.powered_between(days=day - stream.day - 1, hours=powered)
            stream = episodes.next_day(stream, day=day, exposure=1 + gap, norm_per_day=norm.per_day)
        elif pass_.at < (state.last_at or 0) - DAY:
            # The clock was set back: closed days are not lived twice, the open one moves with the clock.
            stream = replace(stream, day=day)
        if risen and not risen.keys().isdisjoint(norm.signals):
            stream = episodes.rise(stream, norm_per_day=norm.per_day)
        after[norm.stream] = stream
    return after


def rose(
    before: Mapping[str, float], after: Mapping[str, episodes.Stream], risen: Mapping[str, int]
) -> Mapping[str, float]:
    """The powered days at which each stream last rose, carried past a reading that brought rises."""
    streams = dict.fromkeys(STREAM_OF[signal].stream for signal in risen)
    return {**before, **{stream: after[stream].powered + after[stream].exposure for stream in streams}}


def turns(pass_: Pass, reading: Reading) -> bool:
    """Whether the drive has a turning platter, as far as can be told."""
    drive = pass_.drive
    if drive is None:
        return False
    if drive.rotation_rpm is not None or drive.kind is Kind.HDD:
        return True
    return drive.kind is Kind.SAS and reading.number("percentage-used") is None


def damage(state: DriveState, pass_: Pass, reading: Reading) -> spots.Spots:
    """Damage for the odds rule, which was learnt on turning platters and is asked of nothing else."""
    if not turns(pass_, reading):
        return state.spots
    replaced = reading.number("reallocated-sectors")
    return spots.seen(
        state.spots,
        day=day_number(pass_.at),
        replaced=reading.number("grown-defects") if replaced is None else replaced,
        pending=reading.number("pending-sectors"),
    )
