"""What the figures of a drive mean: one table for each of the three families of drives.

Sources are named in the rows: [DB] the attribute names and formats that smartctl's own table gives, read in its
version 7.3; [SC] its manual page; [NVMe] the health log, page 02h, as the field names and comments of the
libnvme header restate it; [SCSI] the log pages as the makers' SCSI manuals give them. "practice" marks common
practice without a source, "memory" what was not looked up.

No standard fixes what an ATA attribute means: the same number is another quantity on another model. The *name*
that smartctl prints is the guard: a row counts only where its name says what the table says.
"""

import re
from collections.abc import Callable
from dataclasses import dataclass

from diskwatch.machine import packing
from diskwatch.machine.packing import Decoded
from diskwatch.records import SignalKind

_COUNT, _GAUGE, _WEAR, _TIME = SignalKind.COUNT, SignalKind.GAUGE, SignalKind.WEAR, SignalKind.TIME


@dataclass(frozen=True, slots=True)
class AtaMeaning:
    """What an ATA attribute means where its name agrees.

    Attributes:
        signal: the signal.
        numbers: ids that are known to carry it, best first.
        name: what its printed name must match, whatever the case.
        unit: unit of the value.
        kind: how it behaves.
        decode: from the printed raw value to the value.
        source: where the meaning comes from.
    """

    signal: str
    numbers: tuple[int, ...]
    name: re.Pattern[str]
    unit: str
    kind: SignalKind
    decode: Callable[[str], Decoded]
    source: str


def _ata(
    signal: str,
    numbers: tuple[int, ...],
    name: str,
    unit: str,
    source: str,
    *,
    kind: SignalKind = _COUNT,
    decode: Callable[[str], Decoded] = packing.count,
) -> AtaMeaning:
    return AtaMeaning(signal, numbers, re.compile(name, re.IGNORECASE), unit, kind, decode, source)


ATA: tuple[AtaMeaning, ...] = (
    _ata("reallocated-sectors", (5,), r"reallocated_sector", "sectors", "[DB]"),
    # Flash is retired in blocks; smartctl's table names such rows after blocks for some models [DB].
    _ata(
        "reallocated-sectors",
        (5,),
        r"(realloc|retired|later_bad|new_bad|runtime_bad)\w*bl(oc)?k",
        "blocks",
        "[DB]",
    ),
    _ata("pending-sectors", (197,), r"pending_(sector|ecc)", "sectors", "[DB]", kind=_GAUGE),
    _ata("offline-uncorrectable", (198,), r"offl\w*_(uncorrect|scan_unc)", "sectors", "[DB]", kind=_GAUGE),
    _ata(
        "reported-uncorrectable",
        (187,),
        r"reported_u|uncorrectable_(error|ecc)",
        "errors",
        "[DB]",
    ),
    # Three 16-bit words on some makers' drives; the low one counts the commands that timed out, the others
    # those that took long (memory). Only the low word may therefore be followed as a count.
    _ata("command-timeouts", (188,), r"command_timeout", "events", "[SC] memory", decode=packing.low_word),
    _ata("crc-errors", (199,), r"crc_err", "errors", "[DB]"),
    _ata("spin-retries", (10,), r"spin_retry", "events", "[DB]"),
    _ata("recalibration-retries", (11,), r"calibration_retry", "events", "[DB]"),
    _ata("end-to-end-errors", (184,), r"end-to-end_error", "errors", "[DB]"),
    _ata("reallocation-events", (196,), r"reallocated_event", "events", "[DB]"),
    _ata("power-cycles", (12,), r"power_cycle_c", "events", "[DB]"),
    _ata("start-stops", (4,), r"start_stop", "events", "[DB]"),
    # Loads and unloads may share the raw value as two 24-bit counts, "loads/unloads" [SC].
    _ata("load-cycles", (193, 225), r"load_cycle", "events", "[DB] [SC]", decode=packing.first_of_pair),
    _ata(
        "unsafe-power-offs",
        (174, 192),
        r"unsafe_shutdown|unexpect\w*_(power|pwr)|unclean_shutdown|cycle_ct_unplanned",
        "events",
        "[DB]",
    ),
    _ata("shocks", (191, 221), r"g-sense", "events", "[DB]"),
    _ata("high-fly-writes", (189,), r"high_fly", "events", "[DB]"),
    _ata("link-downshifts", (183,), r"sata_(interface_)?downshift", "events", "[DB]"),
    _ata("runtime-bad-blocks", (183,), r"runtime_bad", "blocks", "[DB]"),
    _ata("program-failures", (171, 181, 175), r"prog(ram)?_fail", "events", "[DB]"),
    _ata("erase-failures", (172, 182, 176), r"erase_fail", "events", "[DB]"),
    _ata("power-on-hours", (9,), r"power_on_(hours|time)", "hours", "[DB]", kind=_TIME, decode=packing.hours),
    _ata(
        "power-on-hours",
        (9,),
        r"power_on_\w*(minutes|seconds)",
        "hours",
        "[DB] [SC]",
        kind=_TIME,
        decode=packing.stated_hours,
    ),
    _ata("head-flying-hours", (240,), r"head_flying_h", "hours", "[DB] [SC]", kind=_TIME, decode=packing.hours),
    # 194 before 190: 190 is the older habit and holds 100 minus the temperature on some drives (memory).
    _ata(
        "temperature",
        (194, 190),
        r"^(?!.*(warn|fraction|x10)).*temp",
        "celsius",
        "[DB] [SC]",
        kind=_GAUGE,
        decode=packing.celsius,
    ),
)

PARTS: tuple[AtaMeaning, ...] = (
    # On makers' drives that keep three words, the upper two count commands that took longer than 5 and than 7.5
    # seconds (memory).
    _ata("slow-commands", (188,), r"command_timeout", "events", "[SC] memory", decode=packing.middle_word),
    _ata("slower-commands", (188,), r"command_timeout", "events", "[SC] memory", decode=packing.high_word),
    # Over its life or since it was switched on, as the maker has it [SC].
    _ata(
        "lowest-temperature",
        (194, 190),
        r"^(?!.*(warn|fraction|x10)).*temp",
        "celsius",
        "[SC]",
        kind=_GAUGE,
        decode=packing.lowest_celsius,
    ),
    _ata(
        "highest-temperature",
        (194, 190),
        r"^(?!.*(warn|fraction|x10)).*temp",
        "celsius",
        "[SC]",
        kind=_GAUGE,
        decode=packing.highest_celsius,
    ),
)
"""What stands beside the main value of a raw field; only where it is there."""

RATES: tuple[tuple[int, re.Pattern[str], str], ...] = (
    (1, re.compile(r"read_error_rate", re.IGNORECASE), "read"),
    (7, re.compile(r"seek_error_rate", re.IGNORECASE), "seek"),
    (195, re.compile(r"ecc_(recovered|on_the_fly)", re.IGNORECASE), "corrected"),
)
"""Attributes that hold a rate: what their signals begin with. Names [DB]."""

RATE_MAKERS = re.compile(r"ST[0-9]{3,}")
"""Models whose maker packs errors above 32 bits of operations into them (common practice, no source)."""

RETRACTS = _ata("power-off-retracts", (192, 228), r"power-off_retract", "events", "[DB]")
"""Emergency retracts of the heads. On a drive without heads the same default name hides an unknown meaning."""

LEFT_BY_NAME = re.compile(
    r"percent_lifetime_remain|(remaining_)?lifetime_(remaining|left|perc)|ssd_life_left|"
    r"(percent_|drive_?)life_remaining|perc_rated_life_remain|media_wearout",
    re.IGNORECASE,
)
"""Names whose *normalised* value is the share of rated life that is left, in percent (practice)."""

USED_BY_NAME = re.compile(r"(percent_|drive_?)life(time)?_used|perc_rated_life_used", re.IGNORECASE)
"""Names whose *raw* value is the share of rated life that is used up, in percent [DB]."""

SPARE_BY_NAME = re.compile(r"available_reservd_space|perc_avail_resrvd_space|spares_remaining", re.IGNORECASE)
"""Names whose *normalised* value is the share of spare blocks that is left, in percent (practice)."""

DEFAULT_NAMES = frozenset({"media_wearout_indicator", "available_reservd_space"})
"""Names that smartctl prints for any drive that its table does not know, so that they prove nothing [DB]."""

_MIB, _GIB = 2**20, 2**30
VOLUMES: dict[str, tuple[str, int | None]] = {
    "total_lbas_written": ("data-written", None),
    "total_lbas_read": ("data-read", None),
    "host_writes_32mib": ("data-written", 32 * _MIB),
    "host_reads_32mib": ("data-read", 32 * _MIB),
    "host_writes_mib": ("data-written", _MIB),
    "host_reads_mib": ("data-read", _MIB),
    "host_writes_gib": ("data-written", _GIB),
    "host_reads_gib": ("data-read", _GIB),
    "lifetime_writes_gib": ("data-written", _GIB),
    "lifetime_reads_gib": ("data-read", _GIB),
    "total_writes_gib": ("data-written", _GIB),
    "total_reads_gib": ("data-read", _GIB),
}
"""Names that state their unit [DB]: signal and bytes a step, None for the drive's logical sectors.

Names in GB are left out: whether makers count 10^9 or 2^30 there is not known.
"""
VOLUME_NUMBERS = (241, 242, 246, 225, 174, 175, 198, 199)
"""Ids that carry such names [DB], best first."""


@dataclass(frozen=True, slots=True)
class LogMeaning:
    """What a field of the NVMe health log or of a SCSI log page means.

    Attributes:
        signal: the signal.
        path: where it stands in the JSON document; empty where it does not.
        labels: what is printed before it in plain text, any of these.
        unit: unit of the value.
        kind: how it behaves.
        step: what one step of the field is in ``unit``.
        most: the value at which the field is full and stops, so that it no longer says anything.
        zero_unknown: whether 0 means that the drive does not report it.
    """

    signal: str
    path: tuple[str, ...]
    labels: tuple[str, ...]
    unit: str
    kind: SignalKind = _COUNT
    step: int = 1
    most: int | None = None
    zero_unknown: bool = False


def _nvme(
    signal: str,
    key: str,
    label: str,
    unit: str,
    kind: SignalKind = _COUNT,
    *,
    step: int = 1,
    most: int = 2**128 - 1,
    zero_unknown: bool = False,
) -> LogMeaning:
    path = ("nvme_smart_health_information_log", key)
    return LogMeaning(signal, path, (label,), unit, kind, step, most, zero_unknown)


NVME: tuple[LogMeaning, ...] = (
    _nvme("critical-warning", "critical_warning", "Critical Warning", "bits", _GAUGE),
    _nvme("temperature", "temperature", "Temperature", "celsius", _GAUGE),
    _nvme("available-spare", "available_spare", "Available Spare", "percent", _WEAR),
    _nvme("spare-threshold", "available_spare_threshold", "Available Spare Threshold", "percent", _GAUGE),
    _nvme("percentage-used", "percentage_used", "Percentage Used", "percent", _WEAR),
    # A unit is 1000 times 512 bytes, and 0 means "not reported" [NVMe].
    _nvme("data-read", "data_units_read", "Data Units Read", "bytes", step=512_000, zero_unknown=True),
    _nvme("data-written", "data_units_written", "Data Units Written", "bytes", step=512_000, zero_unknown=True),
    _nvme("read-commands", "host_reads", "Host Read Commands", "commands"),
    _nvme("write-commands", "host_writes", "Host Write Commands", "commands"),
    _nvme("busy-minutes", "controller_busy_time", "Controller Busy Time", "minutes"),
    _nvme("power-cycles", "power_cycles", "Power Cycles", "events"),
    _nvme("power-on-hours", "power_on_hours", "Power On Hours", "hours", _TIME),
    _nvme("unsafe-power-offs", "unsafe_shutdowns", "Unsafe Shutdowns", "events"),
    _nvme("media-errors", "media_errors", "Media and Data Integrity Errors", "errors"),
    _nvme("error-log-entries", "num_err_log_entries", "Error Information Log Entries", "events"),
    _nvme(
        "warning-temperature-minutes",
        "warning_temp_time",
        "Warning Comp. Temperature Time",
        "minutes",
        most=2**32 - 1,
    ),
    _nvme(
        "critical-temperature-minutes",
        "critical_comp_time",
        "Critical Comp. Temperature Time",
        "minutes",
        most=2**32 - 1,
    ),
    # smartctl prints these only where they are not 0, and has no key for them in version 7.3 (keys of later
    # versions from memory).
    *(
        _nvme(signal, f"thermal_temp_{number}_{key}", f"Thermal Temp. {number} {label}", unit, most=2**32 - 1)
        for number, how in ((1, "light"), (2, "heavy"))
        for signal, key, label, unit in (
            (f"{how}-throttlings", "transition_count", "Transition Count", "events"),
            (f"{how}-throttling-seconds", "total_time", "Total Time", "seconds"),
        )
    ),
)

_CYCLES = "scsi_start_stop_cycle_counter"
SCSI: tuple[LogMeaning, ...] = (
    LogMeaning(
        "temperature",
        ("temperature", "current"),
        ("Current Drive Temperature", "Current temperature"),
        "celsius",
        _GAUGE,
        most=255,  # FFh is "invalid" in the temperature page [SCSI]
    ),
    LogMeaning(
        "grown-defects",
        ("scsi_grown_defect_list",),
        ("Elements in grown defect list",),
        "sectors",
        most=2**32 - 1,
    ),
    LogMeaning("non-medium-errors", (), ("Non-medium error count",), "errors", most=2**32 - 1),
    LogMeaning(
        "pending-sectors",
        ("scsi_pending_defects", "count"),
        ("Pending defect count",),
        "sectors",
        _GAUGE,
        most=2**32 - 1,
    ),
    LogMeaning(
        "start-stops",
        (_CYCLES, "accumulated_start_stop_cycles"),
        ("Accumulated start-stop cycles",),
        "events",
        most=2**32 - 1,
    ),
    LogMeaning(
        "load-cycles",
        (_CYCLES, "accumulated_load_unload_cycles"),
        ("Accumulated load-unload cycles",),
        "events",
        most=2**32 - 1,
    ),
    LogMeaning(
        "percentage-used",
        ("scsi_percentage_used_endurance_indicator",),
        ("Percentage used endurance indicator",),
        "percent",
        _WEAR,
        most=255,
    ),
)
