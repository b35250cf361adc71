"""How a pass ended, and the one sentence that says why and what can be done.

smartctl's exit bits decide nothing alone: 3 stands for a drive asleep, since we ask for that status, but also
for two troubles at once; bits 3 to 7 speak of the drive and stay set for years. So what was understood of the
answer comes first, then its words, then the bits.
"""

import re
from collections.abc import Iterable
from dataclasses import dataclass

from diskwatch.machine.command import Answer, Ending
from diskwatch.machine.held import Family
from diskwatch.machine.reading import Support, Understood
from diskwatch.records import Outcome
from diskwatch.units import plain

ASLEEP_STATUS = 3
"""The exit status that smartctl is told to end with where a drive is in standby."""

_QUOTED = 200

_ASLEEP = re.compile(
    r"device is in [\w ()-]*\b(?:standby|sleep|stopped|idle)\w*\b[\w ()-]* mode|device is not ready",
    re.IGNORECASE,
)
_REFUSED = re.compile(r"permission denied|operation not permitted|\bEACCES\b|\bEPERM\b", re.IGNORECASE)
_ABSENT = re.compile(
    r"no such device|no such file or directory|no such node|\bENXIO\b|\bENOENT\b|\bENODEV\b", re.IGNORECASE
)
_UNKNOWN_BRIDGE = (
    "smartctl does not know its USB adapter and cannot ask the drive behind it (a newer smartctl may; by hand, "
    "try the device types sat, sntasmedia, sntjmicron and sntrealtek)"
)
_NO_ANSWER = "it answers no question of ATA, SCSI or NVMe, as is usual for virtual disks"
_NO_SMART: tuple[tuple[re.Pattern[str], str], ...] = (
    (re.compile(r"unknown usb bridge", re.IGNORECASE), _UNKNOWN_BRIDGE),
    (re.compile(r"unable to detect device type|neither ata, scsi nor nvme", re.IGNORECASE), _NO_ANSWER),
    (
        re.compile(r"lacks smart capability|does not support smart|don't support ata smart", re.IGNORECASE),
        "it has no SMART",
    ),
)
_NOISE = re.compile(
    r"smartctl |copyright|=== start|use smartctl -h|please specify device type|a mandatory smart command|$",
    re.IGNORECASE,
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """How a pass ended.

    Attributes:
        outcome: how.
        explanation: why, one sentence; None for a drive that was read.
    """

    outcome: Outcome
    explanation: str | None = None


def quoted(text: str) -> str:
    """Words of a drive or a tool, harmless and not too long."""
    return plain(text.strip())[:_QUOTED]


def of_command(answer: Answer, *, command: str, name: str, timeout: float) -> Verdict | None:
    """The verdict where the command gave no whole answer; None where it did.

    Args:
        answer: what the command left behind.
        command: what was run.
        name: the drive, as a person knows it.
        timeout: seconds that it had.
    """
    tool = quoted(command)
    if answer.ending is Ending.MISSING:
        return Verdict(
            outcome=Outcome.NO_TOOL,
            explanation=f"{name}: cannot be asked, since there is no command {tool}; install smartctl, or name "
            "it in the settings under [smart] command",
        )
    if answer.ending is Ending.NOT_EXECUTABLE:
        return Verdict(
            outcome=Outcome.NO_TOOL,
            explanation=f"{name}: cannot be asked, since {tool} cannot be run ({quoted(answer.trouble)}); name "
            "another smartctl in the settings under [smart] command",
        )
    if answer.ending is Ending.TIMED_OUT:
        return Verdict(
            outcome=Outcome.TIMED_OUT,
            explanation=f"{name}: gave no answer in {timeout:g} s and was given up for this round; a drive "
            "that does so often, or a cable or adapter before it, may be failing",
        )
    if answer.ending is Ending.HELD:
        return Verdict(
            outcome=Outcome.TIMED_OUT,
            explanation=f"{name}: an earlier question to it is still stuck in the kernel, so it was not asked "
            "again; the drive, or a cable or adapter before it, may be failing",
        )
    if answer.ending is Ending.STOPPED:
        return Verdict(
            outcome=Outcome.TIMED_OUT, explanation=f"{name}: the watch was ended before the drive had answered"
        )
    if answer.ending is Ending.NOT_STARTED:
        return Verdict(
            outcome=Outcome.GARBLED,
            explanation=f"{name}: {tool} could not be started ({quoted(answer.trouble)}); it will be tried "
            "again",
        )
    if answer.ending is Ending.TOO_MUCH:
        return Verdict(
            outcome=Outcome.GARBLED,
            explanation=f"{name}: {tool} wrote without end and was cut off; is it smartctl?",
        )
    if answer.status is not None and answer.status < 0:
        return Verdict(
            outcome=Outcome.GARBLED,
            explanation=f"{name}: {tool} was ended by signal {-answer.status} before it was done; it will be "
            "tried again",
        )
    return None


def of_words(
    said: Iterable[str], status: int | None, what: Understood, *, name: str, expects_smart: bool
) -> Verdict:
    """The verdict on a whole answer.

    Args:
        said: every line of text, complaint and standard error.
        status: smartctl's exit status.
        what: what was understood of the answer.
        name: the drive, as a person knows it.
        expects_smart: whether the kernel lets one expect SMART of it.
    """
    lines = [line for line in said if line.strip()]
    # A SCSI drive answers though its exception control is off, even that it predicts its failure; an ATA drive
    # whose SMART is off answers nothing that holds.
    if what.support is Support.OFF and not (what.family is Family.SCSI and what.says_something):
        return Verdict(
            outcome=Outcome.NO_SMART,
            explanation=f"{name}: its SMART is switched off; smartctl -s on switches it on",
        )
    if what.says_something and what.support is not Support.NONE:
        return Verdict(outcome=Outcome.READ)
    asleep = _first(lines, _ASLEEP)
    if asleep is not None:
        return _asleep(name, asleep)
    refused = _first(lines, _REFUSED)
    if refused is not None:
        return Verdict(
            outcome=Outcome.REFUSED,
            explanation=f"{name}: may not be asked without the rights of root; let the system service watch, "
            f"or run the command as root ({quoted(refused)})",
        )
    if _first(lines, _ABSENT) is not None:
        return Verdict(
            outcome=Outcome.ABSENT,
            explanation=f"{name}: is not there any more; if nobody unplugged it, look at its cable and power",
        )
    for pattern, why in _NO_SMART:
        if _first(lines, pattern) is not None:
            return Verdict(
                outcome=Outcome.NO_SMART, explanation=f"{name}: {why}; it is watched by its traffic only"
            )
    if status == ASLEEP_STATUS:
        return _asleep(name, None)
    return _not_understood(lines, what, name=name, expects_smart=expects_smart)


def _asleep(name: str, words: str | None) -> Verdict:
    """A drive that was left alone.

    smartctl prints SLEEP also where the question for the power mode failed, since a drive in that mode answers
    nothing. Seen with version 7.3 on a node that is no disk at all; a dying drive may look the same.
    """
    if words is not None and "sleep" in words.lower():
        return Verdict(
            outcome=Outcome.ASLEEP,
            explanation=f"{name}: is asleep, or does not even answer whether it is, and was not woken; if it "
            "is in use all the same, look at its cable, its adapter and the drive",
        )
    return Verdict(
        outcome=Outcome.ASLEEP, explanation=f"{name}: is asleep and was not woken; it is asked when it is awake"
    )


def _not_understood(lines: list[str], what: Understood, *, name: str, expects_smart: bool) -> Verdict:
    """An answer in which nothing of a drive's state can be found."""
    if what.support is Support.NONE or not expects_smart:
        return Verdict(
            outcome=Outcome.NO_SMART, explanation=f"{name}: it has no SMART; it is watched by its traffic only"
        )
    telling = next((line for line in lines if _NOISE.match(line.strip()) is None), None)
    if what.drive is not None:
        why = "says who it is but its SMART data could not be read"
    elif telling is None:
        why = "smartctl ended without a word about it"
    else:
        why = "gave no answer that makes sense"
    words = f" ({quoted(telling)})" if telling is not None and what.drive is None else ""
    return Verdict(
        outcome=Outcome.GARBLED,
        explanation=f"{name}: {why}{words}; if it stays so, look at its cable, its adapter and the drive",
    )


def _first(lines: Iterable[str], pattern: re.Pattern[str]) -> str | None:
    return next((line for line in lines if pattern.search(line) is not None), None)
