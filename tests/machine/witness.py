"""What an answer states of each signal: the judge of the reader, by rules apart from the reader's.

Every number must stand in the line or the field that belongs to its signal, a 0 like any other. A signal that
no rule here knows is a failure, so that whoever adds one says where it stands.
"""

import re
from collections.abc import Iterator, Sequence
from typing import Any

from diskwatch.machine.reading import Understood
from diskwatch.records import Attribute, SignalKind, Value
from tests.machine.recordings import ATA_NAMES, LABELS, VERDICTS

_APART = ",.'\u2019 \u00a0\u202f\u00ff\ufffd"
_WHOLE = re.compile(rf"[0-9]{{1,3}}(?:[{_APART}][0-9]{{3}})+|[0-9]+")
_BEHIND = re.compile(r"\s*(?:%|Celsius|C|Pages|bytes|rpm|minutes|Pending Defects?.*)$")

FIELDS = {
    **LABELS,
    "Critical Warning": ("critical-warning", 1),
    "Thermal Temp. 1 Total Time": ("light-throttling-seconds", 1),
    "Thermal Temp. 2 Total Time": ("heavy-throttling-seconds", 1),
    **{f"Temperature Sensor {number}": (f"temperature-sensor-{number}", 1) for number in range(1, 9)},
    "Current temperature": ("temperature", 1),
    "Pending defect count": ("pending-sectors", 1),
}
KEYS = {
    "critical_warning": ("critical-warning", 1),
    "temperature": ("temperature", 1),
    "available_spare": ("available-spare", 1),
    "available_spare_threshold": ("spare-threshold", 1),
    "percentage_used": ("percentage-used", 1),
    "data_units_read": ("data-read", 512_000),
    "data_units_written": ("data-written", 512_000),
    "host_reads": ("read-commands", 1),
    "host_writes": ("write-commands", 1),
    "controller_busy_time": ("busy-minutes", 1),
    "power_cycles": ("power-cycles", 1),
    "power_on_hours": ("power-on-hours", 1),
    "unsafe_shutdowns": ("unsafe-power-offs", 1),
    "media_errors": ("media-errors", 1),
    "num_err_log_entries": ("error-log-entries", 1),
    "warning_temp_time": ("warning-temperature-minutes", 1),
    "critical_comp_time": ("critical-temperature-minutes", 1),
}
STATISTICS = {
    (1, 0x08): "power-on-resets",
    (1, 0x10): "power-on-hours",
    (1, 0x18): "data-written",
    (1, 0x20): "write-commands",
    (1, 0x28): "data-read",
    (1, 0x30): "read-commands",
    (3, 0x10): "head-flying-hours",
    (3, 0x20): "reallocated-sectors",
    (3, 0x28): "read-recovery-attempts",
    (3, 0x30): "start-failures",
    (3, 0x38): "pending-sectors",
    (4, 0x08): "reported-uncorrectable",
    (4, 0x10): "command-resets",
    (5, 0x08): "temperature",
    (5, 0x20): "highest-temperature",
    (5, 0x28): "lowest-temperature",
    (5, 0x50): "over-temperature-minutes",
    (6, 0x08): "hardware-resets",
    (6, 0x18): "crc-errors",
    (7, 0x08): "percentage-used",
}
"""By page and offset (ACS-3, log 04h; numbers as smartctl prints them)."""


def whole(text: str) -> int | None:
    """The one number that a field holds, thousands set apart or not; None where it holds anything else."""
    head = _BEHIND.sub("", text.partition("[")[0].strip())
    if re.fullmatch(r"0x[0-9a-fA-F]+", head):
        return int(head, 16)
    if re.fullmatch(r"-[0-9]{1,3}", head):
        return int(head)
    return int("".join(filter(str.isdigit, head))) if _WHOLE.fullmatch(head) else None


def labelled(lines: Sequence[str]) -> Iterator[tuple[str, str]]:
    """Label and rest of every line that has a colon or an equals sign."""
    for line in lines:
        label, mark, rest = re.sub("[:=]", "\0", line, count=1).partition("\0")
        if mark:
            yield " ".join(label.split()).lower(), rest


def sizes(lines: Sequence[str], document: Any) -> set[int]:
    """Sizes of a block that are stated."""
    told = {document.get("logical_block_size")} if isinstance(document, dict) else set()
    told |= {
        int(found[1]) for line in lines if (found := re.search(r"([0-9]+) bytes logical", line)) is not None
    }
    return {size for size in told if isinstance(size, int)}


def of_row(row: Attribute, signal: str, size: set[int]) -> set[int]:  # noqa: C901 - one table
    """What a row of the attribute table may state of a signal."""
    raw = row.raw
    bare = re.sub(r"\s*\(.*\)$", "", raw)
    number = int(bare) if re.fullmatch("[0-9]+", bare) else None
    parts = [int(part) for part in re.findall("[0-9]+", bare)]
    if signal.startswith("raw-"):
        return {int(raw)}
    if signal.endswith(("-errors", "-operations")) and row.number in {1, 7, 195}:
        packed = parts if "/" in bare else [(number or 0) >> 32, (number or 0) % 2**32]
        return {packed[signal.endswith("-operations")]}
    if signal in {"command-timeouts", "slow-commands", "slower-commands"}:
        which = ("command-timeouts", "slow-commands", "slower-commands").index(signal)
        if number is None:
            return {parts[2 - which]}
        return {number >> 16 * which & 0xFFFF} if number >= 2**32 else {number}
    if signal == "load-cycles" and number is not None and number >= 2**24:
        return {number % 2**24}
    if signal == "load-cycles":
        return set(parts[:1])
    if signal in {"lowest-temperature", "highest-temperature"}:
        found = re.search(r"Min/Max (-?[0-9]+)/(-?[0-9]+)", raw)
        return {int(found[1 + (signal == "highest-temperature")])} if found else set()
    if signal == "temperature":
        return {int(bare) if int(bare) < 2**16 else int(bare) % 256}
    if signal.endswith("-hours"):
        return {number} if number is not None else {int(raw.partition("h")[0])}
    if signal in {"data-written", "data-read"}:
        unit = re.search(r"(32mib|mib|gib|lbas)", row.name.lower())
        steps = {"32mib": {2**25}, "mib": {2**20}, "gib": {2**30}, "lbas": size}[unit[1] if unit else ""]
        return {(number or 0) * step for step in steps}
    if signal in {"percentage-used", "available-spare"}:
        told = whole(raw)
        return {100 - (row.value or 0), row.value or -1, -1 if told is None else told}
    return {number} if number is not None else set()


def stated(value: Value, found: Understood, lines: Sequence[str], document: Any) -> set[int]:
    """Every number that an answer states for a value, by its signal and its source."""
    signal, source = value.signal.removesuffix("-by-attribute"), value.source
    size = sizes(lines, document)
    numbers: set[int | None] = set()
    if source.startswith("attribute "):
        numbers |= set(_in_table(signal, source, found, size))
    elif source in {"NVMe log 02h", "SCSI log"}:
        numbers |= {*_in_fields(signal, lines), *_in_health(signal, document)}
    elif source == "log 04h":
        numbers |= set(_in_statistics(signal, lines, size))
    elif source.endswith("error log"):
        numbers |= set(_in_error_rows(signal, source.split()[1], lines))
    elif source == "log 01h":
        numbers |= set(_in_error_log(lines, document))
    elif source == "SCSI background scan log":
        numbers |= set(_in_scan(lines))
    elif source == "NVMe log 01h":
        numbers |= set(_in_entries(lines, document))
    elif source == "smartctl":
        numbers |= set(_beside_the_table(signal, document))
    return {number for number in numbers if number is not None}


def _in_table(signal: str, source: str, found: Understood, size: set[int]) -> Iterator[int]:
    for row in found.reading.attributes:
        if f"attribute {row.number}" == source:
            assert ATA_NAMES.get(row.name, signal) == signal or signal not in ATA_NAMES.values(), row
            yield from of_row(row, signal, size)


def _in_fields(signal: str, lines: Sequence[str]) -> Iterator[int]:
    steps = {name.lower(): step for name, (whose, step) in FIELDS.items() if whose == signal}
    for label, rest in labelled(lines):
        number = whole(rest) if label in steps else None
        if number is not None:
            yield number * steps[label]
    for line in lines if signal == "power-on-hours" else ():
        told = re.search(r"hours:minutes\s+([0-9]+):|powered up = ([0-9]+)\.", line)
        if told:
            yield int(told[1] or told[2])


def _in_health(signal: str, document: Any) -> Iterator[int | None]:
    log = (document or {}).get("nvme_smart_health_information_log")
    if not isinstance(log, dict):
        return
    for key, (whose, step) in KEYS.items():
        for told in (log.get(key), log.get(f"{key}_s")) if whose == signal else ():
            if isinstance(told, int) or (isinstance(told, str) and told.isdigit()):
                yield int(told) * step
    sensors = log.get("temperature_sensors")
    if signal.startswith("temperature-sensor-") and isinstance(sensors, list):
        yield from sensors[int(signal[-1]) - 1 : int(signal[-1])]


def _in_statistics(signal: str, lines: Sequence[str], size: set[int]) -> Iterator[int]:
    for line in lines:
        row = re.match(
            r"\s*(0x[0-9a-f]{2}|[0-9]+)\s+(0x[0-9a-f]{3})\s+[0-9]\s+(-?[0-9]+)~?\s", line, re.IGNORECASE
        )
        if row is None:
            continue
        place = int(row[1], 16 if "x" in row[1].lower() else 10), int(row[2], 16)
        if STATISTICS.get(place) == signal:
            yield from (int(row[3]) * step for step in (size if signal.startswith("data-") else {1}))


def _in_error_rows(signal: str, what: str, lines: Sequence[str]) -> Iterator[int]:
    for line in lines:
        words = line.split()
        # A flipped letter beside the label leaves the row its columns.
        if len(words) != 8 or f"{what}:" not in words[0]:
            continue
        moved = re.fullmatch(r"([0-9]+)[.,]([0-9]{3})", words[6])
        if moved and signal.startswith("data-"):
            yield int("".join(moved.groups())) * 10**6
        elif not signal.startswith("data-"):
            yield int(words[7])


def _in_error_log(lines: Sequence[str], document: Any) -> Iterator[int | None]:
    for label, rest in labelled(lines):
        told = rest.split()
        yield int(told[0]) if label == "ata error count" and told and told[0].isdigit() else None
    yield 0 if any("no errors logged" in line.lower() for line in lines) else None
    log = (document or {}).get("ata_smart_error_log")
    yield (log.get("summary") or {}).get("count") if isinstance(log, dict) else None


def _in_scan(lines: Sequence[str]) -> Iterator[int]:
    begun = next(number for number, line in enumerate(lines) if "background scan results" in line.lower())
    rows = [line for line in lines[begun:] if re.match(r"\s*[0-9]+\s+[0-9]+:[0-9]+\s", line)]
    waiting = [one for one in rows if re.search("require write|reassignment pending", one, re.IGNORECASE)]
    least = 1 if rows and len(rows) == len(waiting) else 0  # what was found later may tell of the same block
    yield from range(least, len(waiting) + 1)


def _in_entries(lines: Sequence[str], document: Any) -> Iterator[int]:
    pattern = re.compile(r"(?:0x[0-9a-f]{4}|-)\s+0x([0-9a-f]{4})", re.IGNORECASE)
    kinds = [int(one[1], 16) >> 9 & 7 for one in map(pattern.search, lines) if one]
    empty = any("no errors logged" in line.lower() for line in lines)
    yield from range(0 if empty or len(kinds) > kinds.count(2) else 1, kinds.count(2) + 1)
    table = (document or {}).get("nvme_error_information_log")
    yield from range(len(table.get("table") or ()) + 1) if isinstance(table, dict) else ()


def _beside_the_table(signal: str, document: Any) -> Iterator[int | None]:
    for key, name, whose in (
        ("temperature", "current", "temperature"),
        ("power_on_time", "hours", "power-on-hours"),
        ("endurance_used", "current_percent", "percentage-used"),
        ("spare_available", "current_percent", "available-spare"),
        ("spare_available", "threshold_percent", "spare-threshold"),
    ):
        part = (document or {}).get(key)
        yield part.get(name) if whose == signal and isinstance(part, dict) else None


def check(found: Understood, lines: Sequence[str], document: Any = None) -> None:
    """Fail where the reader brought a number that the answer does not state in its place."""
    flat = [" ".join(line.split()) for line in lines]
    told = repr(document)
    for row in found.reading.attributes:
        _check_row(row, flat, told)
    for value in found.reading.values:
        assert (value.value is None) is (value.reason is not None), value
        if isinstance(value.value, int):
            assert value.value in stated(value, found, lines, document), value
        elif value.signal == "self-assessment" and value.value is not None and document is None:
            said = [rest.lower() for label, rest in labelled(lines) if label in {v.lower() for v in VERDICTS}]
            words = ("passed", "ok") if value.value == "passed" else ("fail", "impending", "exceeded")
            assert any(word in one for word in words for one in said), value
        else:
            assert value.value is None or value.kind is SignalKind.WORD
    for test in found.reading.self_tests:
        parts = [test.name, test.result, *(str(part) for part in (test.hours,) if part is not None)]
        near = [
            line
            for line in flat
            if all(" ".join(part.split()) in line for part in parts[:2])
            and all(hours in _joined(line) for hours in parts[2:])
        ]
        assert near or all(_as_told(part) in told for part in parts), test
        blocks = {int(word, 16) if "x" in word else int(word) for line in near for word in _numbers(line)}
        assert test.lba is None or test.lba in blocks or str(test.lba) in told, test
    if found.drive is not None:
        for number, names in (
            (found.drive.capacity_bytes, ("capacity", "size")),
            (found.drive.rotation_rpm, ("rotation rate",)),
        ):
            near = [rest for label, rest in labelled(lines) if any(name in label for name in names)]
            assert number is None or number in map(whole, near) or str(number) in told, number


def _joined(line: str) -> str:
    """A line whose numbers stand without separators of thousands."""
    return re.sub(r"(?<=[0-9])[ .,'](?=[0-9]{3}(?![0-9]))", "", line)


def _numbers(line: str) -> list[str]:
    return re.findall(r"0x[0-9a-fA-F]+|[0-9]+", line)


def _check_row(row: Attribute, flat: Sequence[str], told: str) -> None:
    raw = " ".join(row.raw.split())
    for line in flat:
        words = line.split()
        # A flipped blank may print a number as 05, which states it as well.
        numbered = bool(words) and words[0].isascii() and words[0].isdecimal() and int(words[0]) == row.number
        if numbered and words[1:2] == [row.name] and line.endswith(raw):
            parts = (row.value, row.worst, row.threshold)
            if all(part is None or f"{part:03}" in words for part in parts):
                return
    assert all(_as_told(piece) in told for piece in (row.name, row.raw)), row


def _as_told(piece: str) -> str:
    """A piece of text as it stands in the representation of a document, control characters escaped."""
    return repr(piece)[1:-1]
