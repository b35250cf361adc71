"""Whether a drive that answers nothing sleeps, or is in trouble.

smartctl says SLEEP where the question for the power mode failed: a drive in that mode answers nothing, but a
dying one does not either. That a drive worked since it was last asked proves nothing: it may have fallen asleep
after that. Only one that completes requests while it does not answer is awake; and no drive sleeps for ever
unheard.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace

from diskwatch.machine.endings import Verdict
from diskwatch.machine.protocol import Found
from diskwatch.records import Outcome
from diskwatch.units import DAY, say_span

LONGEST = 8 * DAY
"""Seconds for which silence alone is taken for sleep: a disk for weekly copies rests for seven days.

They are counted while the machine is awake: a machine that was suspended for longer asked nothing meanwhile.
"""

Completed = Callable[[], int | None]
"""Requests of a drive that came to an end since it appeared, questions like ours not among them.

None where the kernel does not count them, or counts questions too.
"""

_CARE = "copy off what matters first, then look at its cable and adapter"


@dataclass(frozen=True, slots=True)
class _Heard:
    """A drive as last asked.

    Attributes:
        instance: which device it was.
        since: since when it is silent, seconds by the clock of `Rest.judged`; None where it answered.
        worked: whether it was silent and completed requests all the same while it was asked.
    """

    instance: str
    since: float | None
    worked: bool


class Rest:
    """Remembers, from pass to pass, which drives are silent and whether they work all the same."""

    def __init__(self) -> None:
        self._heard: dict[str, _Heard] = {}

    def judged(
        self, found: Found, verdict: Verdict, *, before: int | None, after: int | None, at: float
    ) -> Verdict:
        """Take in how a pass ended, and correct what it says of sleep.

        Args:
            found: the drive.
            verdict: how the pass ended.
            before: requests completed when it was about to be asked, or None where that is not known.
            after: the same when it had been asked.
            at: when, seconds by a clock that only moves forward and stands still while the machine sleeps.
        """
        key = found.place.device
        last = self._heard.get(key)
        if last is not None and last.instance != found.instance:
            last = None
        silent = verdict.outcome is Outcome.ASLEEP and verdict.unproved
        known_since = last.since if last is not None and last.since is not None else at
        worked = silent and None not in {before, after} and before != after
        self._heard[key] = _Heard(found.instance, known_since if silent else None, worked)
        if not silent:
            return verdict
        # Once may be the moment in which something else woke it.
        if worked and last is not None and last.worked:
            return Verdict(
                outcome=Outcome.GARBLED,
                explanation="It did not answer whether it is awake, though it worked while it was asked, twice "
                f"in a row: {_CARE}.",
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
