"""What the kernel prints about drives in trouble: every text that we know, in one table, with where it stands.

A text that is not here is counted and not guessed at. Each row says what a line means for the drive that it
names (``name``); more names catch what is told besides. The wording of a line changed with the versions of the
kernel; rows accept every wording since about 3.17 (bounds of versions from memory), and say which they are.

The first letters choose the few rows that are tried: among a hundred thousand lines of other things the table
costs next to nothing.
"""

import re
from dataclasses import dataclass
from enum import IntEnum, auto
from typing import NamedTuple


class Says(IntEnum):
    """What one line says; what it means shows only together with the lines around it.

    Numbers, since these are looked up for every line of a flood.
    """

    REQUEST = auto()
    PAGE_LOST = auto()
    PAGE_UNREAD = auto()
    EXCEPTION = auto()
    COMMAND_FAILED = auto()
    RESULT = auto()
    ERROR_BITS = auto()
    LINK_BITS = auto()
    RESET = auto()
    SLOWED = auto()
    GIVEN_UP = auto()
    DETAIL = auto()
    SENSE_KEY = auto()
    SENSE_MORE = auto()
    HOST_RESULT = auto()
    OFFLINED = auto()
    STOPPED = auto()
    NVME_TIMEOUT = auto()
    NVME_LOST_INTERRUPT = auto()
    NVME_DOWN = auto()
    NVME_STATUS = auto()
    FILE_SYSTEM = auto()
    ARRAY_DROPPED = auto()
    ARRAY_MENDED = auto()
    WOKE = auto()


@dataclass(frozen=True, slots=True, kw_only=True)
class Text:
    """One wording.

    Attributes:
        says: what it says.
        starts: what a line with it begins with; one of these.
        pattern: the whole line.
        holds: letters that every such line holds: looking for them costs a tenth of trying the pattern.
        source: the kernel's file that prints it, and since when.
    """

    says: Says
    starts: tuple[str, ...]
    pattern: re.Pattern[str]
    source: str
    holds: str = ""


def _text(says: Says, starts: str, pattern: str, source: str, holds: str = "") -> Text:
    return Text(
        says=says, starts=tuple(starts.split("|")), pattern=re.compile(pattern), source=source, holds=holds
    )


_ATA = r"(?P<name>ata\d+(?:\.\d\d)?): "
_SD = r"(?:sd|sr) (?P<address>\d+:\d+:\d+:\d+): (?:\[(?P<name>[a-z0-9]+)\] )?"
_WHY = r"(?P<why>[^,:]+)"


def _any(*patterns: str) -> str:
    return f"(?:{'|'.join(patterns)})"


_ATA_DETAILS = _any(
    r"cmd .*",
    r"status: \{.*\}",
    r"irq_stat .*",
    r"configured for .*",
    r"EH complete.*",
    r"SATA link (?:up|down).*",
    r"[PS]ATA max .*",
    r"(?:link|port) is slow to respond.*",
    r"link online but .*",
    r"qc timeout .*",
    r"Read log .* failed.*",
    r"Entering .* power mode",
    r"applying bridge limits",
    r"(?:COMRESET|SRST|softreset|hardreset|revalidation) failed.*",
    r"failed to .*",
    r"model number mismatch.*",
    r"retrying .*",
    r"ATA-\d+: .*",
    r"\d+ sectors, .*",
    r"detaching .*",
    r"[Ff]eatures: .*",
    r"(?:device|NCQ) .*",
)
_SD_DETAILS = _any(
    r"(?:tag#\d+ )?(?:CDB|cmd_age|abort|timing out|uas_eh|data cmplt|Done|scmd).*",
    r"tag#.*",
    r"Attached .*",
    r"Power-on or device reset occurred",
    r"Mode Sense.*",
    r"Write (?:Protect|cache).*",
    r"\d+ .*blocks.*",
    r"Synchroniz(?:e|ing) .*",
    r"Starting disk.*",
    r"(?:No Caching|Assuming|Preferred|Optimal|Embedded) .*",
    r"Unit Not Ready",
    r"Read Capacity.*",
)
_NVME_DOWN = _any(
    r"controller is down; will reset: .*",
    r"Removing after probe failure.*",
    r"Disabling device after reset failure: .*",
    r"Device not ready; aborting \w+.*",
    r"Device shutdown incomplete.*",
    r"frozen state error detected.*",
)
_BTRFS = _any(
    r"parent transid verify failed.*",
    r"bad tree block.*",
    r".*lost page write.*",
    r"csum failed.*",
    r".*checksum.*",
    r"unable to fixup.*",
    r"i/o error.*",
    r".*forced readonly.*",
    r".*IO failure.*",
)
_XFS = _any(
    r"metadata I/O error.*",
    r"log I/O error.*",
    r".*Shutting down filesystem.*",
    r"Corruption .*",
    r"Metadata (?:CRC|corruption) .*",
)

TEXTS = (
    _text(
        Says.REQUEST,
        "I/O error, dev|critical |timeout error|recoverable tran|protection erro|device offline |"
        "device resource|operation not su|zone resource |duration limit |blk_update_request|print_req_error|"
        "end_request: ",
        rf"(?:(?:blk_update_request|print_req_error|end_request): )?{_WHY} error, dev (?P<name>[^, ]+), "
        r"sector (?P<sector>\d+)(?: op 0x[0-9a-f]+:\((?P<op>[A-Z_]+)\))?(?: flags .*)?",
        "block/blk-core.c, blk-mq.c: bare since 5.16, behind a function's name from 3.17 on",
    ),
    _text(
        Says.PAGE_LOST,
        "Buffer I/O error",
        r"Buffer I/O error on dev(?:ice)? (?P<name>[\w!/-]+), logical block \d+, lost (?:a?sync )?page write.*",
        "fs/buffer.c, since 4.x",
    ),
    _text(
        Says.PAGE_UNREAD,
        "Buffer I/O error",
        r"Buffer I/O error on dev(?:ice)? (?P<name>[\w!/-]+), logical block \d+(?:, async page read)?",
        "fs/buffer.c",
    ),
    _text(
        Says.EXCEPTION,
        "ata",
        _ATA + r"(?P<words>exception Emask 0x[0-9a-f]+ .*)",
        "drivers/ata/libata-eh.c",
        holds="exception Emask",
    ),
    _text(
        Says.COMMAND_FAILED,
        "ata",
        _ATA + r"failed command: (?P<words>[A-Z0-9 ./()-]+)",
        "drivers/ata/libata-eh.c",
        holds="failed command",
    ),
    _text(
        Says.RESULT,
        "ata",
        _ATA + r"cmd .*\bres .*Emask 0x[0-9a-f]+ \((?P<why>[A-Za-z ]+)\)(?: <F>)?",
        "drivers/ata/libata-eh.c; may stand in two lines",
        holds="res ",
    ),
    _text(
        Says.RESULT,
        " ",
        r" +res .*Emask 0x[0-9a-f]+ \((?P<why>[A-Za-z ]+)\)(?: <F>)?",
        "drivers/ata/libata-eh.c, the second of the two",
    ),
    _text(
        Says.ERROR_BITS,
        "ata",
        _ATA + r"error: \{ (?P<words>[A-Z0-9 ]+) \}",
        "drivers/ata/libata-eh.c",
        holds="error: {",
    ),
    _text(
        Says.LINK_BITS,
        "ata",
        _ATA + r"SError: \{ (?P<words>[A-Za-z0-9 ]*) \}",
        "drivers/ata/libata-eh.c",
        holds="SError: {",
    ),
    _text(
        Says.RESET,
        "ata",
        _ATA + r"(?P<words>(?:hard|soft) resetting link)",
        "drivers/ata/libata-core.c, -eh.c",
        holds="resetting link",
    ),
    _text(
        Says.SLOWED,
        "ata",
        _ATA + r"(?P<words>(?:limiting (?:SATA link )?speed to|NCQ disabled due to) .+)",
        "drivers/ata/libata-core.c, -eh.c",
    ),
    _text(
        Says.GIVEN_UP,
        "ata",
        _ATA + r"(?P<words>disable device|disabled|reset failed, giving up.*)",
        "drivers/ata/libata-eh.c, -core.c: 'disabled' until 5.x",
    ),
    _text(
        Says.DETAIL,
        "ata",
        _ATA + _ATA_DETAILS,
        "drivers/ata: lines of a trouble that say nothing more about its cause",
    ),
    _text(
        Says.SENSE_KEY,
        "sd ",
        _SD + r"(?:tag#\d+ )?Sense Key : (?P<why>[\w ]+?) (?:\[.*\] ?)+",
        "drivers/scsi/constants.c",
        holds="Sense Key",
    ),
    _text(
        Says.SENSE_MORE,
        "sd ",
        _SD + r"(?:tag#\d+ )?Add\. Sense: (?P<words>.+)",
        "drivers/scsi/scsi_logging.c",
        holds="Add. Sense",
    ),
    _text(
        Says.HOST_RESULT,
        "sd ",
        _SD + r"(?:tag#\d+ )?(?:UNKNOWN\(0x[0-9a-f]+\)|FAILED|SUCCESS) Result: hostbyte=(?P<why>\w+) .*",
        "drivers/scsi/scsi_logging.c",
        holds="Result: hostbyte",
    ),
    _text(
        Says.OFFLINED,
        "sd ",
        _SD + r"(?P<words>Device offlined - not ready after error recovery"
        r"|rejecting I/O to (?:offline|dead) device)",
        "drivers/scsi/scsi_error.c, scsi_lib.c",
    ),
    _text(
        Says.STOPPED,
        "sd ",
        _SD + r"(?:Stopping disk|Synchronize Cache\(\d+\) failed: Result: hostbyte=DID_NO_CONNECT .*)",
        "drivers/scsi/sd.c: it is being taken out, by a person or by pulling it",
    ),
    _text(
        Says.DETAIL,
        "sd ",
        _SD + _SD_DETAILS,
        "drivers/scsi/sd.c and others",
    ),
    _text(
        Says.NVME_TIMEOUT,
        "nvme ",
        r"nvme (?P<name>nvme\d+): (?P<words>I/O (?:tag )?\d+ .*timeout, "
        r"(?:aborting|reset controller|disable controller).*)",
        "drivers/nvme/host/pci.c; the opcode is told since 6.x",
        holds="timeout, ",
    ),
    _text(
        Says.NVME_LOST_INTERRUPT,
        "nvme ",
        r"nvme (?P<name>nvme\d+): (?P<words>I/O (?:tag )?\d+ .*timeout, completion polled)",
        "drivers/nvme/host/pci.c",
        holds="polled",
    ),
    _text(
        Says.NVME_DOWN,
        "nvme ",
        r"nvme (?P<name>nvme\d+): (?P<words>" + _NVME_DOWN + ")",
        "drivers/nvme/host/pci.c, core.c",
    ),
    _text(
        Says.NVME_STATUS,
        "nvme",
        r"(?P<name>nvme\d+(?:c\d+)?n\d+): (?P<op>[A-Za-z/ ]+)\(0x[0-9a-f]+\) @ LBA (?P<block>\d+), \d+ blocks, "
        r"(?P<words>.+ \(sct (?P<sct>0x[0-9a-f]+) / sc (?P<sc>0x[0-9a-f]+)\)).*",
        "drivers/nvme/host/core.c, since 5.18",
        holds=" @ LBA ",
    ),
    _text(
        Says.FILE_SYSTEM,
        "EXT4-fs error",
        r"EXT4-fs error \(device (?P<name>[\w!-]+)\): (?P<words>\w+:\d+: .*)",
        "fs/ext4/super.c",
    ),
    _text(
        Says.FILE_SYSTEM,
        "EXT4-fs (",
        r"EXT4-fs \((?P<name>[\w!-]+)\): (?P<words>Remounting filesystem read-only|failed to convert .*"
        r"|.*I/O error.*)",
        "fs/ext4/super.c",
    ),
    _text(
        Says.FILE_SYSTEM,
        "BTRFS error|BTRFS info|BTRFS warning",
        r"BTRFS (?:error|info|warning) \(device [^)]+\): (?P<words>bdev /dev/(?P<name>[\w!-]+) errs: .*)",
        "fs/btrfs/volumes.c: of the devices of a file system the one that it names",
        holds="bdev /dev/",
    ),
    _text(
        Says.FILE_SYSTEM,
        "BTRFS error|BTRFS critical|BTRFS warning",
        r"BTRFS (?:error|critical|warning)(?: \(device (?P<name>[\w!-]+)(?: state \w+)?\))?: (?P<words>"
        + _BTRFS
        + ")",
        "fs/btrfs/volumes.c, disk-io.c, scrub.c",
    ),
    _text(
        Says.FILE_SYSTEM,
        "XFS (",
        r"XFS \((?P<name>[\w!-]+)\): (?P<words>" + _XFS + ")",
        "fs/xfs",
    ),
    _text(
        Says.FILE_SYSTEM,
        "Aborting journal",
        r"(?P<words>Aborting journal on device (?P<name>[\w!]+?(?:-\d+)?)-\d+)\.",
        "fs/jbd2/journal.c",
    ),
    _text(
        Says.FILE_SYSTEM,
        "JBD2: ",
        r"JBD2: (?P<words>(?:.*[Ee]rror|Detected IO errors) .* (?P<name>[\w!]+(?:-\d+)?)-\d+)\.?",
        "fs/jbd2/journal.c",
    ),
    _text(
        Says.ARRAY_DROPPED,
        "md/",
        r"md/raid\w+:(?P<array>md\w+): (?P<words>Disk failure on (?P<name>[\w!-]+), disabling device)\b.*",
        "drivers/md/raid1.c, raid5.c, raid10.c",
    ),
    _text(
        Says.ARRAY_MENDED,
        "md/",
        r"md/raid\w+:(?P<array>md\w+): (?P<words>read error (?:corrected|not correctable) "
        r"\(.* on (?P<name>[\w!-]+)\)\.?)",
        "drivers/md/raid1.c, raid5.c, raid10.c",
    ),
    _text(Says.WOKE, "PM: suspend exit|PM: hibernation ", r"PM: (?:suspend|hibernation) exit", "kernel/power"),
)
"""All wordings, of Linux 6.1 where nothing else is said; tried in this order."""

_START = 3


def _by_start() -> dict[str, tuple[Text, ...]]:
    found: dict[str, list[Text]] = {}
    for text in TEXTS:
        for start in text.starts:
            rows = found.setdefault(start[:_START], [])
            if text not in rows:
                rows.append(text)
    return {start: tuple(rows) for start, rows in found.items()}


_BY_START = _by_start()
_SPACE = tuple(text for text in TEXTS if text.starts == (" ",))


class Told(NamedTuple):
    """What a line said.

    Attributes:
        says: what it says; None where it is about drives as far as its first letters go, and no row knows it.
        parts: what its pattern caught, by name.
    """

    says: Says | None
    parts: dict[str, str | None]


_UNKNOWN = Told(None, {})


def told(line: str) -> Told | None:
    """What a line of the kernel says.

    Returns:
        None for one that begins like none of ours.
    """
    rows = _BY_START.get(line[:_START])
    if rows is None:
        rows = _SPACE if line[:1] == " " else ()
    mine = False
    for text in rows:
        if not line.startswith(text.starts):
            continue
        mine = True
        if text.holds not in line:
            continue
        found = text.pattern.fullmatch(line)
        if found is not None:
            return Told(text.says, found.groupdict())
    return _UNKNOWN if mine else None
