"""How a pass ended where the command gave no whole answer, or is no smartctl: words about the tool alone."""

from dataclasses import dataclass

from diskwatch.machine.command import Answer, Ending
from diskwatch.records import Outcome
from diskwatch.units import plain

SAY_WHICH = "see whether [smart] command in the settings names smartctl, and one that works"
"""What to do about a command that is not the right one."""

_QUOTED = 200


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """How a pass ended.

    Attributes:
        outcome: how.
        explanation: why, one whole sentence about "it", since the drive's name stands beside it wherever it is
            shown; what a person needs first, what to do last, the tool's own words in brackets at the end.
            None for a drive that was read.
        unproved: True where the words say asleep, but a drive that answers nothing at all gets them too.
        strange: True where a command that is no smartctl at all would have ended so too.
    """

    outcome: Outcome
    explanation: str | None = None
    unproved: bool = False
    strange: bool = False


def quoted(text: str) -> str:
    """Words of a drive or a tool, harmless and not too long."""
    return plain(text.strip())[:_QUOTED]


def of_command(answer: Answer, *, command: str, timeout: float) -> Verdict | None:
    """The verdict where the command gave no whole answer; None where it did.

    Args:
        answer: what the command left behind.
        command: what was run.
        timeout: seconds that it had.
    """
    tool = quoted(command)
    if answer.ending in {Ending.MISSING, Ending.NOT_EXECUTABLE}:
        return Verdict(outcome=Outcome.NO_TOOL, explanation=_lacking(answer, tool))
    if answer.ending is Ending.TIMED_OUT:
        return Verdict(
            outcome=Outcome.TIMED_OUT,
            explanation=f"It gave no answer in {timeout:g} s and was given up for this round: where that comes "
            "again, copy off what matters first, then look at its cable and adapter.",
        )
    if answer.ending is Ending.HELD:
        return Verdict(
            outcome=Outcome.TIMED_OUT,
            explanation="It was not asked, since an earlier question to it is still stuck in the kernel: copy "
            "off what matters first, then look at its cable and adapter.",
        )
    if answer.ending is Ending.STOPPED:
        return Verdict(
            outcome=Outcome.TIMED_OUT, explanation="It had not answered yet when the watch was ended."
        )
    if answer.ending is Ending.NOT_STARTED:
        return Verdict(
            outcome=Outcome.NO_TOOL,
            explanation=f"It was not asked, since {tool} could not be started; it is tried again in the next "
            f"round ({quoted(answer.trouble)}).",
        )
    if answer.ending is Ending.TOO_MUCH:
        return Verdict(
            outcome=Outcome.GARBLED,
            explanation=f"It was not read, since {tool} wrote without end and was cut off: {SAY_WHICH}.",
            strange=True,
        )
    if answer.status is not None and answer.status < 0:
        return Verdict(
            outcome=Outcome.GARBLED,
            explanation=f"It was not read, since {tool} was ended by signal {-answer.status} before it was "
            "done; it is tried again in the next round.",
            strange=True,
        )
    return None


def of_stranger(verdict: Verdict, *, command: str) -> Verdict:
    """The verdict where nothing shows that the command is smartctl: then the drive has not been asked at all.

    Blaming the drive would turn a slip in the settings into a call for every drive of the machine.

    Args:
        verdict: on what the command left behind.
        command: what was run.
    """
    if not verdict.strange:
        return verdict
    return Verdict(outcome=Outcome.NO_TOOL, explanation=no_smartctl(command))


def no_smartctl(command: str) -> str:
    """What is wrong with a command that does not answer as smartctl does, and the cure."""
    return f"{quoted(command)} does not answer as smartctl does, so no drive can be read: {SAY_WHICH}."


def of_scan(answer: Answer, *, command: str, timeout: float) -> str | None:
    """Why there is no list of drives, and what to do, one sentence; None where the command gave one.

    Args:
        answer: what the command left behind.
        command: what was run.
        timeout: seconds that it had.
    """
    tool = quoted(command)
    if answer.ending in {Ending.MISSING, Ending.NOT_EXECUTABLE}:
        return _lacking(answer, tool)
    if answer.ending is Ending.ENDED and (answer.status or 0) >= 0:
        return None
    if answer.ending is Ending.TIMED_OUT:
        why = f"gave no list of drives in {timeout:g} s"
    elif answer.ending is Ending.TOO_MUCH:
        why = "wrote without end when asked for a list of drives"
    elif answer.ending is Ending.STOPPED:
        why = "was ended together with the watch"
    elif answer.ending is Ending.ENDED:
        why = f"was ended by signal {-(answer.status or 0)} when asked for a list of drives"
    else:
        why = f"could not be started ({quoted(answer.trouble)})"
    return (
        f"{tool} {why}, so drives behind a controller may be missing here; it is asked again in the next round."
    )


def _lacking(answer: Answer, tool: str) -> str:
    """What is wrong with the tool itself, and the cure."""
    if answer.ending is Ending.MISSING:
        return (
            f"{tool} was not found: install smartctl (on Debian and Ubuntu: apt install smartmontools), or "
            "name it in the settings under [smart] command."
        )
    return (
        f"{tool} cannot be run: name another smartctl in the settings under [smart] command "
        f"({quoted(answer.trouble)})."
    )
