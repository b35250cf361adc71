"""What a band shows below itself on request: whole reason, findings, exact times, who the drive is. Pure."""

from rich.text import Text

from diskwatch.dashboard.ages import ago, exact, since
from diskwatch.dashboard.band import INDENT, band, edge
from diskwatch.dashboard.cells import fit, wrap
from diskwatch.dashboard.weight import Face
from diskwatch.dashboard.words import cause, kind, reason
from diskwatch.records import DriveLine, Mount
from diskwatch.units import once_in, plain, say_bytes

_LEAST_ROOM = 10


def unfolded(line: DriveLine, now: int, width: int, face: Face) -> tuple[Text, ...]:
    """The lines below the band of one drive.

    Args:
        line: the drive.
        now: the current time, UTC seconds since 1970.
        width: columns that every line must keep within.
        face: what the terminal can show.

    Returns:
        Lines no wider than ``width``, free of control characters; long sentences go on in the next line.
    """
    room = max(width - INDENT - 2, _LEAST_ROOM)
    indent = Text.assemble(edge(line, face), " " * (INDENT - 1))
    lines: list[Text] = []
    above = band(line, now, width, face)
    for paragraph in _paragraphs(line, now, above):
        for number, part in enumerate(wrap(paragraph, room)):
            lines.append(fit(Text.assemble(indent, "" if number == 0 else "  ", part), width))
    return tuple(lines)


def _paragraphs(line: DriveLine, now: int, above: tuple[Text, ...]) -> list[str]:
    why = reason(line)
    told = [] if any(why in row.plain for row in above) else [f"Why: {why}"]
    if line.call is not None:
        told.append(f"Called {line.call.word} {since(line.call.at, now)} by the rule {plain(line.call.rule)}.")
        if line.call.cause is not None:
            told.append(f"{cause(line).capitalize()}.")
    lead = line.call.reason if line.call is not None else None
    for finding in line.findings:
        evidence = (
            "a fact, which needs no evidence"
            if finding.evidence is None
            else f"a drive within the norm would show this at most {once_in(finding.evidence)}"
        )
        stands = f"{since(finding.since, now)}; {evidence}"
        sentence = "The above" if finding.sentence == lead else plain(finding.sentence)
        told.append(f"Finding {plain(finding.name)}: {sentence} ({stands})")
    told.append(_last_pass(line, now))
    told.append(_who(line))
    told.extend(_mounted(mount) for mount in line.place.lives_here)
    return told


def _last_pass(line: DriveLine, now: int) -> str:
    last = line.last_pass
    if last is None:
        return f"Never asked; first seen {exact(line.first_seen)}."
    told = f"Last pass {exact(last.at)}, {ago(last.at, now)}: {last.outcome}."
    if last.explanation is not None and plain(last.explanation) != reason(line):
        told += f" {plain(last.explanation)}"
    return told


def _who(line: DriveLine) -> str:
    identity = line.drive.identity
    parts = [
        f"model {plain(identity.model)}" if identity.model else "model not known",
        f"serial {plain(identity.serial)}" if identity.serial else "serial not known",
        f"WWN {plain(identity.wwn)}" if identity.wwn else "WWN not known",
        f"firmware {plain(line.drive.firmware)}" if line.drive.firmware else "firmware not known",
        f"kind {kind(line)}",
        f"device {plain(line.place.device)}",
        f"bay {plain(line.place.bay)}" if line.place.bay else "bay not known",
    ]
    told = f"Who: {', '.join(parts)}."
    return f"{told} Only its path tells it from other drives." if identity.weak else told


def _mounted(mount: Mount) -> str:
    if mount.used_bytes is None or mount.total_bytes is None:
        return f"Holds {plain(mount.point)}; how much is in use there is not known."
    return (
        f"Holds {plain(mount.point)}: {say_bytes(mount.used_bytes)} of {say_bytes(mount.total_bytes)} in use."
    )
