"""How a pass ended, and the one sentence that says why and what can be done.

smartctl's exit bits decide nothing alone: 3 stands for a drive asleep, since we ask for that status, but also
for two troubles at once; bits 3 to 7 speak of the drive and stay set for years. So what was understood of the
answer comes first, then its words, then the bits.
"""

import re
from collections.abc import Iterable
from dataclasses import replace

from diskwatch.machine.endings import SAY_WHICH, Verdict, quoted
from diskwatch.machine.held import Family
from diskwatch.machine.reading import Support, Understood
from diskwatch.machine.text import names_version
from diskwatch.records import Kind, Outcome

ASLEEP_STATUS = 3
"""The exit status that smartctl is told to end with where a drive is in standby."""

_NOT_PARSED, _TROUBLES = 1, 0b111
"""smartctl's exit bits (its manual page): the command line was not understood; that, or the device could not be
opened, or a command to it failed."""

_ASLEEP = re.compile(
    r"device is in [\w ()-]*\b(?:standby|sleep|stopped|idle)\w*\b[\w ()-]* mode|device is not ready",
    re.IGNORECASE,
)
_UNPROVED = re.compile(r"\bin SLEEP mode|not ready", re.IGNORECASE)
"""smartctl says SLEEP also where the question for the power mode failed, since a drive in that mode answers
nothing (seen with version 7.3 on a node that is no disk), and NOT READY of any SCSI drive that is not."""

_RESTS = "It is asleep and was not woken; it is asked again when it is awake."
_REFUSED = re.compile(r"permission denied|operation not permitted|\bEACCES\b|\bEPERM\b", re.IGNORECASE)
_NOT_THERE: tuple[tuple[re.Pattern[str], str], ...] = (
    # The node of a disk that the kernel took offline, after a command that timed out, is there still.
    (
        re.compile(r"no such device or address|\bENXIO\b", re.IGNORECASE),
        "It answers no more, though its device is still there: look at its cable and power, then copy it off.",
    ),
    (
        re.compile(
            r"no such device|no such file or directory|no such node|\bENOENT\b|\bENODEV\b", re.IGNORECASE
        ),
        "It is not there any more: if nobody unplugged it, look at its cable and power.",
    ),
)
_UNKNOWN_BRIDGE = "It cannot be asked, since smartctl does not know its USB adapter"
_NO_ANSWER = "It answers no question of ATA, SCSI or NVMe, as is usual for virtual disks"
_TRY = "look at its cable and power, or try it at another port"
_SHOULD_ANSWER = {
    Kind.NVME: ("NVMe", "see that it sits firmly and has power, or try it in another slot"),
    Kind.SAS: ("SCSI", _TRY),
    Kind.USB: ("ATA, SCSI or NVMe", f"{_TRY} or behind another adapter"),
    Kind.SSD: ("ATA", _TRY),
    Kind.HDD: ("ATA", _TRY),
}
"""What every drive of a kind answers, and what to try where one does not; a virtual disk need not answer."""

_NO_SMART: tuple[tuple[re.Pattern[str], str], ...] = (
    (re.compile(r"unknown usb bridge", re.IGNORECASE), _UNKNOWN_BRIDGE),
    (
        re.compile(r"lacks smart capability|does not support smart|don't support ata smart", re.IGNORECASE),
        "It has no SMART",
    ),
)
_NO_LANGUAGE = re.compile(r"unable to detect device type|neither ata, scsi nor nvme", re.IGNORECASE)
_NOISE = re.compile(
    r"copyright|=== start|use smartctl -h|please specify device type|a mandatory smart command|$", re.IGNORECASE
)


def of_words(
    said: Iterable[str], status: int | None, what: Understood, *, expects_smart: bool, kind: Kind, command: str
) -> Verdict:
    """The verdict on a whole answer.

    Args:
        said: every line of text, complaint and standard error.
        status: smartctl's exit status.
        what: what was understood of the answer.
        expects_smart: whether the kernel lets one expect SMART of it.
        kind: what sort of device the machine takes it for.
        command: what was run.
    """
    lines = [line for line in said if line.strip()]
    # A SCSI drive answers though its exception control is off, even that it predicts its failure; an ATA drive
    # whose SMART is off answers nothing that holds.
    if what.support is Support.OFF and not (what.family is Family.SCSI and what.says_something):
        return Verdict(
            outcome=Outcome.NO_SMART,
            explanation="It has its SMART switched off: 'smartctl -s on' with its device switches it on.",
        )
    if what.says_something and what.support is not Support.NONE:
        return Verdict(outcome=Outcome.READ)
    asleep = _first(lines, _ASLEEP)
    if asleep is not None:
        return Verdict(
            outcome=Outcome.ASLEEP, explanation=_RESTS, unproved=_UNPROVED.search(asleep) is not None
        )
    refused = _first(lines, _REFUSED)
    if refused is not None:
        return Verdict(
            outcome=Outcome.REFUSED,
            explanation="It may not be asked without the rights of root: let the system service watch, or run "
            f"the command as root ({quoted(refused)}).",
        )
    gone = next((why for pattern, why in _NOT_THERE if _first(lines, pattern) is not None), None)
    if gone is not None:
        return Verdict(outcome=Outcome.ABSENT, explanation=gone)
    lacking = next((why for pattern, why in _NO_SMART if _first(lines, pattern) is not None), None)
    if lacking is None and _first(lines, _NO_LANGUAGE) is not None:
        lacking = _no_answer(kind)
    if lacking is not None:
        return _without_smart(lacking)
    if status == ASLEEP_STATUS:
        return Verdict(
            outcome=Outcome.ASLEEP,
            explanation=_RESTS,
            unproved=not what.genuine,
            strange=not what.genuine,
        )
    if what.support is Support.NONE or not expects_smart:
        return _without_smart("It has no SMART")
    telling = next((line for line in lines if _is_telling(line.strip())), None)
    return _of_tool(status, what, quoted(command), telling) or _garbled(what, telling)


def through_no_type(types: Iterable[str]) -> Verdict:
    """The verdict on a drive behind a USB adapter that no device type reaches."""
    return _without_smart(
        f"It cannot be asked through its USB adapter: none of smartctl's types {', '.join(types)} brings its "
        "readings; without that adapter, or behind another, it may be read"
    )


def _no_answer(kind: Kind) -> str:
    """What to say of a device that speaks no language: of a real drive that is no usual thing."""
    if kind not in _SHOULD_ANSWER:
        return _NO_ANSWER
    language, deed = _SHOULD_ANSWER[kind]
    return (
        f"It answers no question of {language}, as a drive of its kind should: {deed}, and where it answered "
        "before, copy off what matters first"
    )


def _without_smart(why: str) -> Verdict:
    return Verdict(outcome=Outcome.NO_SMART, explanation=f"{why}; its traffic is watched all the same.")


def _of_tool(status: int | None, what: Understood, tool: str, telling: str | None) -> Verdict | None:
    """The verdict where the tool is why there is no reading; None where the drive is."""
    troubles = (status or 0) & _TROUBLES
    if not what.genuine:
        why = f"It gave no answer that makes sense, since what {tool} wrote is not smartctl's"
    elif troubles == _NOT_PARSED:
        why = f"It was not read, since {tool} did not understand the question"
    elif troubles == 0 and what.drive is None:
        why = f"It was not read, since {tool} told neither a drive nor any trouble"
    else:
        return None
    return replace(_not_read(f"{why}: {SAY_WHICH}", telling), strange=not what.genuine)


def _garbled(what: Understood, telling: str | None) -> Verdict:
    """An answer in which nothing of a drive's state can be found."""
    if what.drive is not None:
        why = "It says who it is, but not how it is: its SMART data could not be read"
    elif telling is None:
        why = "It could not be read, and smartctl ended without a word about why"
    else:
        why = "It gave no answer that makes sense"
    return _not_read(
        f"{why}; if it stays so, copy off what matters first, then look at its cable and adapter",
        telling if what.drive is None else None,
    )


def _not_read(why: str, telling: str | None) -> Verdict:
    words = f" ({quoted(telling)})" if telling is not None else ""
    return Verdict(outcome=Outcome.GARBLED, explanation=f"{why}{words}.")


def _is_telling(line: str) -> bool:
    return not names_version(line) and _NOISE.match(line) is None


def _first(lines: Iterable[str], pattern: re.Pattern[str]) -> str | None:
    return next((line for line in lines if pattern.search(line) is not None), None)
