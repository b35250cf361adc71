"""What a notice says: a summary that stands alone, and a body with the deed and the date.

A summary has at most 40 characters, since that is what small screens and lock screens show of it. Whatever came
from a drive is made harmless here.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime
from enum import IntEnum

from diskwatch.judge.margin_told import replace_by_told
from diskwatch.judge.stakes import replace_by_of
from diskwatch.records import Call, CallWord, Cause, DriveLine
from diskwatch.units import day_number, plain

LONGEST_SUMMARY = 40
_LONGEST_DEVICE = 9
_DEVICES = "/dev/"


class Urgency(IntEnum):
    """How much a notice presses (Desktop Notifications Specification, "Urgency Levels")."""

    LOW = 0
    NORMAL = 1
    CRITICAL = 2


@dataclass(frozen=True, slots=True, kw_only=True)
class Words:
    """A notice in words.

    Attributes:
        summary: one line of at most 40 characters.
        body: sentences, plain text without markup.
        urgency: how much it presses.
    """

    summary: str
    body: str
    urgency: Urgency


_SUMMARIES: Mapping[CallWord, str] = {
    CallWord.KEEP: "{} is called keep again",
    CallWord.LOOK: "Look at {}",
    CallWord.COPY: "Copy the data off {} now",
    CallWord.RETIRE: "Stop relying on {}",
}

_URGENCIES: Mapping[CallWord, Urgency] = {
    CallWord.KEEP: Urgency.LOW,
    CallWord.LOOK: Urgency.NORMAL,
    CallWord.COPY: Urgency.CRITICAL,
    CallWord.RETIRE: Urgency.CRITICAL,
}

# Common practice, no source: which hand each cause wants first.
_LOOKS: Mapping[Cause, str] = {
    Cause.LINK: "Check its cable and plug before anything else.",
    Cause.POWER: "Check its power cable and supply before anything else.",
    Cause.HEAT: "See to its cooling: dust, fans, room around it.",
    Cause.LOAD: "See what keeps it so busy.",
}
_BACKUP = "Make sure that a backup of today exists."


def of_call(line: DriveLine, call: Call, now: int) -> Words:
    """A notice of a drive's call.

    Args:
        line: the drive.
        call: its call.
        now: UTC seconds since 1970.
    """
    told = [plain(call.reason).strip(), _deed(line, call, now), f"So since {_date(call.at)}.", _who(line)]
    return Words(
        summary=_summary(line, call.word),
        body=" ".join(one for one in told if one),
        urgency=_URGENCIES[call.word],
    )


def of_trouble(trouble: str) -> Words:
    """A notice that the watch does not do its work.

    Args:
        trouble: what is wrong, one sentence.
    """
    return Words(
        summary="Drives: the watch is in trouble",
        body=f"{plain(trouble)} What happens to a drive now may go untold. See 'diskwatch preflight'.",
        urgency=Urgency.NORMAL,
    )


def of_calm(drives: int, now: int) -> Words:
    """The monthly notice that all is quiet, for those who asked for it.

    Args:
        drives: how many are watched.
        now: UTC seconds since 1970.
    """
    which = "The only drive is" if drives == 1 else f"All {drives} drives are"
    return Words(
        summary="Drives: all quiet, somebody is watching",
        body=f"{which} called keep as of {_date(now)}. That is no promise: many drives fail without any sign, "
        "so go on backing up.",
        urgency=Urgency.LOW,
    )


def of_trial(now: int) -> Words:
    """The notice that ``notify --try`` sends."""
    return Words(
        summary="A trial notice of diskwatch",
        body=f"Notices about your drives come this way. Sent by hand on {_date(now)}; nothing has happened.",
        urgency=Urgency.NORMAL,
    )


def _summary(line: DriveLine, word: CallWord) -> str:
    frame = _SUMMARIES[word]
    room = LONGEST_SUMMARY - len(frame.format(""))
    name = plain(line.name).removeprefix(_DEVICES)
    device = plain(line.place.device).removeprefix(_DEVICES)
    # Two drives of one model differ by their device alone, but a label of the owner's needs no help.
    tail = f" ({device})" if line.label is None and device != name and len(device) <= _LONGEST_DEVICE else ""
    return frame.format(_fitted(name, room - len(tail)) + tail)


def _fitted(text: str, room: int) -> str:
    return text if len(text) <= room else text[: room - 1].rstrip() + "…"


def _deed(line: DriveLine, call: Call, now: int) -> str:
    match call.word:
        case CallWord.KEEP:
            return "Nothing asks for a deed any more. That is no promise: go on backing up."
        case CallWord.LOOK:
            hand = None if call.cause is None else _LOOKS.get(call.cause)
            return f"{hand or 'It wants a closer look.'} {_BACKUP}"
        case CallWord.COPY:
            by = replace_by_of(line, now)
            if by is None:
                return "Copy off now what you have nowhere else, then replace the drive."
            return replace_by_told(by, day_number(now))
        case CallWord.RETIRE:
            return "Copy off now what you have nowhere else, then take the drive out of service."


def _who(line: DriveLine) -> str:
    identity = line.drive.identity
    parts = [identity.model, f"serial {identity.serial}" if identity.serial else None, line.place.device]
    lives = ", ".join(mount.point for mount in line.place.lives_here)
    holds = f"; it holds {lives}" if lives else ""
    return plain(f"{', '.join(part for part in parts if part)}{holds}.")


def _date(at: int) -> str:
    return datetime.fromtimestamp(at).astimezone().date().isoformat()
