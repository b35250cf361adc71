"""The steps that a ledger took from one state to another, so that its evidence can be worked out again."""

from dataclasses import dataclass, replace

from diskwatch.analyser import DriveState, counters
from diskwatch.records import Pass
from diskwatch.trends import episodes
from diskwatch.trends.episodes import Stream
from diskwatch.trends.norms import NORMS


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One powered day, or several in a row that are alike.

    Attributes:
        day: UTC day number of the first.
        exposure: powered days that it covers; None where it is the day that was open at the start.
        rose: whether a counter of the stream rose on it.
        days: how many such days follow each other; 1 wherever a counter rose.
    """

    day: int
    exposure: float | None
    rose: bool
    days: int = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class Run:
    """A ledger's way from a dated exact state to a moment.

    Attributes:
        at: date of the state, UTC seconds since 1970; None where it is the first day of all.
        start: the stream in that state.
        steps: what came then.
        end: the stream after them.
    """

    at: int | None
    start: Stream
    steps: tuple[Step, ...]
    end: Stream


class Trace:
    """Follows all ledgers of a drive from a state on, a pass at a time, by the analyser's own arithmetic."""

    def __init__(self, begin: DriveState) -> None:
        """Begin at a state."""
        self._begin = begin
        self._state = begin
        self._starts = dict(begin.streams)
        self._steps: dict[str, list[Step]] = {}

    def take(self, pass_: Pass) -> None:
        """Take in the next pass."""
        state = self._state
        if pass_.reading is None:
            self._state = replace(state, last_at=pass_.at)
            return
        counts = counters.followed(pass_.reading)
        risen, _ = counters.rises(state, pass_, counts)
        hours = pass_.reading.number("power-on-hours")
        after = counters.streams(state, pass_, counts, risen, hours)
        for norm in NORMS:
            stream = after.get(norm.stream)
            still = stream is state.streams.get(norm.stream) and risen.keys().isdisjoint(norm.signals)
            if stream is None or still:
                continue
            start = self._starts.setdefault(norm.stream, episodes.begin(stream.day))
            steps = self._steps.setdefault(norm.stream, [])
            rose = not risen.keys().isdisjoint(norm.signals)
            _take(steps, state.streams.get(norm.stream, start), stream, rose=rose)
        self._state = replace(
            state,
            last_at=pass_.at,
            hours=state.hours if hours is None else hours,
            latest={**state.latest, **counts},
            streams=after,
        )

    def run(self, stream: str) -> Run | None:
        """The way of one ledger so far; None where the drive has no such counters."""
        now = self._state.streams.get(stream)
        if now is None:
            return None
        return Run(
            at=self._begin.last_at if stream in self._begin.streams else None,
            start=self._starts[stream],
            steps=tuple(self._steps.get(stream, ())),
            end=now,
        )


def _take(steps: list[Step], was: Stream, now: Stream, *, rose: bool) -> None:
    if now.day > was.day:
        new = Step(day=now.day, exposure=now.exposure, rose=rose)
        last = steps[-1] if steps else None
        alike = (
            last is not None
            and not last.rose
            and not rose
            and last.exposure == new.exposure
            and last.day + last.days == new.day
        )
        if alike and last is not None:
            steps[-1] = replace(last, days=last.days + 1)
        else:
            steps.append(new)
    elif rose and (not steps or not steps[-1].rose):
        # The day may be the last of several alike: it parts from them.
        if not steps:
            steps.append(Step(day=now.day, exposure=None, rose=True))
        elif steps[-1].days > 1:
            last = steps.pop()
            steps += [
                replace(last, days=last.days - 1),
                replace(last, day=last.day + last.days - 1, days=1, rose=True),
            ]
        else:
            steps[-1] = replace(steps[-1], rose=True)
