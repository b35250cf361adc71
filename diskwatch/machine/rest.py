"""Whether a drive that answers nothing sleeps, or is in trouble.

smartctl says SLEEP where the question for the power mode failed: a drive in that mode answers nothing, but a
dying one does not either. A drive that moved data since it was last asked does not sleep; and no drive sleeps
for ever unheard.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace

from diskwatch.machine.outcomes import Verdict
from diskwatch.machine.protocol import Found
from diskwatch.records import Outcome
from diskwatch.units import DAY, say_span

LONGEST = 8 * DAY
"""Seconds for which silence alone is taken for sleep: a disk for weekly copies rests for seven days."""

Completed = Callable[[], int | None]
"""Requests of a drive that came to an end since it appeared; None where the kernel does not count them."""

_CARE = "copy off what matters first, then look at its cable and adapter"


@dataclass(frozen=True, slots=True)
class _Heard:
    """A drive as last asked: its instance, its completed requests, and since when it is silent."""

    instance: str
    completed: int | None
    since: int | None


class Rest:
    """Remembers, from pass to pass, which drives are silent and whether they are in use."""

    def __init__(self) -> None:
        self._heard: dict[str, _Heard] = {}

    def judged(
        self, found: Found, verdict: Verdict, *, before: int | None, after: int | None, at: int
    ) -> Verdict:
        """Take in how a pass ended, and correct what it says of sleep.

        Args:
            found: the drive.
            verdict: how the pass ended.
            before: requests completed when it was about to be asked, or None where that is not known.
            after: the same when it had been asked: what the question itself moved must not count next time.
            at: when, UTC seconds since 1970.
        """
        key = found.place.device
        last = self._heard.get(key)
        if last is not None and last.instance != found.instance:
            last = None
        silent = verdict.outcome is Outcome.ASLEEP and verdict.unproved
        known_since = last.since if last is not None and last.since is not None else at
        self._heard[key] = _Heard(found.instance, after, known_since if silent else None)
        if not silent:
            return verdict
        if last is not None and None not in {last.completed, before} and last.completed != before:
            return Verdict(
                outcome=Outcome.GARBLED,
                explanation="It did not answer whether it is awake, though it was in use since it was last "
                f"asked: {_CARE}.",
            )
        if at - known_since >= LONGEST:
            return Verdict(
                outcome=Outcome.GARBLED,
                explanation=f"It has not said for {say_span(at - known_since)} whether it is awake: {_CARE}; "
                "reading anything from it ends a sleep that was meant.",
            )
        return replace(
            verdict,
            explanation="It is asleep, or does not even answer whether it is, and was not woken: if it is in "
            "use all the same, look at its cable and adapter.",
        )
