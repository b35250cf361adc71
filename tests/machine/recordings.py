"""Recorded and invented answers of smartctl, and what their texts say by rules apart from the reader's."""

import os
import re
from dataclasses import dataclass, field
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
FIXTURES = ROOT / "fixtures" / "smartctl"
SHARED = Path(os.environ.get("DISKWATCH_SHARED", ROOT.parent / "shared")) / "data" / "smartctl"


def text_of(path: Path) -> str:
    output = path.read_bytes()
    try:
        return output.decode("utf-8")
    except UnicodeDecodeError:
        return output.decode("latin-1")


def answers() -> list[Path]:
    """Every answer to --all, from the repository and, where it is there, from the shared folder."""
    own = [path for pattern in ("all.txt", "day?.txt") for path in FIXTURES.glob(f"*/{pattern}")]
    return sorted(own) + sorted(SHARED.glob("*/_*--all*"))


def name_of(path: Path) -> str:
    return f"{path.parent.name}-{path.stem[:20]}"


ATA_NAMES = {
    "Reallocated_Sector_Ct": "reallocated-sectors",
    "Later_Bad_Block": "reallocated-sectors",
    "Power_On_Hours": "power-on-hours",
    "Spin_Retry_Count": "spin-retries",
    "Power_Cycle_Count": "power-cycles",
    "Start_Stop_Count": "start-stops",
    "Load_Cycle_Count": "load-cycles",
    "End-to-End_Error": "end-to-end-errors",
    "End-to-End_Error_Count": "end-to-end-errors",
    "Reported_Uncorrect": "reported-uncorrectable",
    "Uncorrectable_Error_Cnt": "reported-uncorrectable",
    "Command_Timeout": "command-timeouts",
    "Reallocated_Event_Count": "reallocation-events",
    "Current_Pending_Sector": "pending-sectors",
    "Pending_Sector_Count": "pending-sectors",
    "Offline_Uncorrectable": "offline-uncorrectable",
    "UDMA_CRC_Error_Count": "crc-errors",
    "CRC_Error_Count": "crc-errors",
    "Temperature_Celsius": "temperature",
    "Temperature_Internal": "temperature",
    "Unsafe_Shutdown_Count": "unsafe-power-offs",
    "Unexpect_Power_Loss_Ct": "unsafe-power-offs",
    "High_Fly_Writes": "high-fly-writes",
    "Head_Flying_Hours": "head-flying-hours",
}

LABELS = {
    "Temperature": ("temperature", 1),
    "Available Spare": ("available-spare", 1),
    "Available Spare Threshold": ("spare-threshold", 1),
    "Percentage Used": ("percentage-used", 1),
    "Data Units Read": ("data-read", 512_000),
    "Data Units Written": ("data-written", 512_000),
    "Host Read Commands": ("read-commands", 1),
    "Host Write Commands": ("write-commands", 1),
    "Controller Busy Time": ("busy-minutes", 1),
    "Power Cycles": ("power-cycles", 1),
    "Power On Hours": ("power-on-hours", 1),
    "Unsafe Shutdowns": ("unsafe-power-offs", 1),
    "Media and Data Integrity Errors": ("media-errors", 1),
    "Error Information Log Entries": ("error-log-entries", 1),
    "Warning Comp. Temperature Time": ("warning-temperature-minutes", 1),
    "Critical Comp. Temperature Time": ("critical-temperature-minutes", 1),
    "Thermal Temp. 1 Transition Count": ("light-throttlings", 1),
    "Thermal Temp. 2 Transition Count": ("heavy-throttlings", 1),
    "Current Drive Temperature": ("temperature", 1),
    "Elements in grown defect list": ("grown-defects", 1),
    "Non-medium error count": ("non-medium-errors", 1),
    "Accumulated start-stop cycles": ("start-stops", 1),
    "Accumulated load-unload cycles": ("load-cycles", 1),
    "Percentage used endurance indicator": ("percentage-used", 1),
}


@dataclass
class Truth:
    """What a text says."""

    model: str | None = None
    serial: str | None = None
    firmware: str | None = None
    capacity: int | None = None
    wwn: str | None = None
    signals: dict[str, int] = field(default_factory=dict)
    rows: dict[int, list[str]] = field(default_factory=dict)
    assessment: str | None = None
    tests: int = 0


def digits(text: str) -> int | None:
    """All digits before a bracket or a word, joined."""
    head = re.split(r"[\[%A-Za-z]", text)[0]
    joined = "".join(letter for letter in head if letter in "0123456789")
    return int(joined) if joined else None


WHO = {
    "Device Model": "model",
    "Model Number": "model",
    "Serial Number": "serial",
    "Serial number": "serial",
    "Firmware Version": "firmware",
    "Revision": "firmware",
}
WWN = {"LU WWN Device Id": "naa.", "Logical Unit id": "naa.", "Namespace 1 IEEE EUI-64": "eui."}
SIZES = {"User Capacity", "Total NVM Capacity", "Namespace 1 Size/Capacity"}
VERDICTS = {"SMART overall-health self-assessment test result", "SMART Health Status"}


def truth_of(text: str) -> Truth:
    """Read a text line by line, by splitting and joining alone."""
    truth = Truth()
    for line in text.splitlines():
        label, _, rest = line.partition(":")
        label, rest = " ".join(label.split()), rest.strip()
        _note_identity(truth, label, rest)
        _note_field(truth, label, rest)
        _note_row(truth, line.split(), line)
    truth.tests = _tests(text)
    return truth


def _note_identity(truth: Truth, label: str, rest: str) -> None:
    if label in WHO:
        setattr(truth, WHO[label], rest)
    elif label == "Vendor":
        truth.model = rest
    elif label == "Product":
        truth.model = f"{truth.model} {rest}"
    elif label in SIZES:
        truth.capacity = truth.capacity or digits(rest)
    elif label in WWN:
        truth.wwn = WWN[label] + rest.replace(" ", "").removeprefix("0x")
    elif label in VERDICTS:
        truth.assessment = "passed" if rest in {"PASSED", "OK"} else "failed"


def _note_field(truth: Truth, label: str, rest: str) -> None:
    if label == "Critical Warning":
        truth.signals["critical-warning"] = int(rest, 16)
    elif label in LABELS:
        signal, step = LABELS[label]
        number = digits(rest)
        assert number is not None, label
        truth.signals[signal] = number * step


def _note_row(truth: Truth, words: list[str], line: str) -> None:
    if len(words) >= 10 and words[0].isdigit() and words[2].startswith("0x") and len(words[2]) == 6:
        truth.rows[int(words[0])] = words
        signal, number = ATA_NAMES.get(words[1], ""), digits(words[9])
        if signal and number is not None:
            truth.signals.setdefault(signal, number)
    elif len(words) == 8 and words[0] in {"read:", "write:"}:
        what = words[0].rstrip(":")
        truth.signals[f"uncorrected-{what}s"] = int(words[7])
        moved = int(words[6].replace(".", "").replace(",", "")) * 10**6
        truth.signals["data-read" if what == "read" else "data-written"] = moved
    elif "hours powered up" in line:
        truth.signals["power-on-hours"] = int(float(words[-1]))
    elif "power on time, hours:minutes" in line:
        truth.signals["power-on-hours"] = int(words[5].partition(":")[0])


def _tests(text: str) -> int:
    inside, count = False, 0
    for line in text.splitlines():
        if line.startswith("Num ") and "Test" in line:
            inside = True
        elif not line.strip():
            inside = False
        elif inside and re.match(r"\s*#?\s*[0-9]+\s", line):
            count += 1
    return count
