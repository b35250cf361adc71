"""What a smartctl understands: old ones know less, and say so of the first option that they do not know."""

import re
from dataclasses import dataclass, replace

from diskwatch.machine.command import Answer, Ending
from diskwatch.machine.optional import BACKGROUND, STATISTICS, TEMPERATURE
from diskwatch.machine.text import decoded

_USAGE = re.compile(
    r"(?:unrecogni[sz]ed|unknown|invalid|illegal|bad|unexpected|unsupported)\s+(?:command[- ]line\s+)?"
    r"(?:option|argument|flag|parameter|switch)"
    r"|argument required for option|usage:",
    re.IGNORECASE,
)
_NAMES_STANDBY = re.compile(r"(?:to|option:?|argument:?)\s+['\"]?-?-?n(?:ocheck)?\b|standby", re.IGNORECASE)
_NAMES_LOG = re.compile(r"argument to -l\b", re.IGNORECASE)
_NAMES_TYPE = re.compile(r"argument to -d\b", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Knows:
    """What a smartctl is taken to understand: JSON, a status for standby, and these logs behind ``-l``."""

    json: bool = True
    status: bool = True
    logs: frozenset[str] = frozenset({STATISTICS, TEMPERATURE, BACKGROUND})


def complaint_of(answer: Answer) -> str | None:
    """The line that says which option was not understood; None where the question was."""
    if answer.ending is not Ending.ENDED or answer.status == 0:
        return None
    said = f"{decoded(answer.out)}\n{decoded(answer.err)}"
    if "=== START OF" in said or _NAMES_TYPE.search(said) is not None:
        return None
    return next((line for line in said.splitlines() if _USAGE.search(line) is not None), None)


def lesser(knows: Knows, complaint: str) -> Knows | None:
    """What to try next after a complaint; None where nothing is left."""
    unknown = {log for log in knows.logs if _NAMES_LOG.search(complaint) and log in complaint}
    if unknown:
        return replace(knows, logs=knows.logs - unknown)
    if knows.status and (_NAMES_STANDBY.search(complaint) is not None or not knows.json):
        return replace(knows, status=False)
    return replace(knows, json=False) if knows.json else None
