"""An invented drive's answer as the plain text that smartctl 7.3 prints: rehearses the reader of text."""

from diskwatch.rehearsal.document import OUI
from diskwatch.rehearsal.told import Logged, Row, Told

_HEAD = "smartctl 7.3 2022-02-28 r5338 [x86_64-linux-invented] (local build)"
_ERRORS = "Error Information (NVMe Log 0x01, 16 of 64 entries)"
_FAILING = {"now": "FAILING_NOW", "past": "In_the_past", "": "-"}


def lines(told: Told) -> tuple[str, ...]:
    """The answer to ``smartctl --all``, line by line."""
    verdict = "PASSED" if told.passed else "FAILED!"
    about = _nvme_about(told) if told.nvme else _ata_about(told)
    state = _nvme_state(told) if told.nvme else _ata_state(told)
    return (
        _HEAD,
        "Copyright (C) 2002-22, its authors; the drive below is INVENTED",
        "",
        "=== START OF INFORMATION SECTION ===",
        *about,
        "",
        f"=== START OF {'' if told.nvme else 'READ '}SMART DATA SECTION ===",
        f"SMART overall-health self-assessment test result: {verdict}",
        "",
        *state,
    )


def _ata_about(told: Told) -> tuple[str, ...]:
    turns = f"{told.rpm} rpm" if told.rpm else "Solid State Device"
    return (
        f"Device Model:     {told.model}",
        f"Serial Number:    {told.serial}",
        f"LU WWN Device Id: 5 {OUI:06x} {told.number:09x}",
        f"Firmware Version: {told.firmware}",
        f"User Capacity:    {told.capacity:,} bytes [{told.capacity / 1e12:.2f} TB]",
        "Sector Sizes:     512 bytes logical, 4096 bytes physical",
        f"Rotation Rate:    {turns}",
        "Device is:        In smartctl database [for details use: -P show]",
        "ATA Version is:   ACS-3 T13/2161-D revision 5",
        "SMART support is: Available - device has SMART capability.",
        "SMART support is: Enabled",
    )


def _ata_state(told: Told) -> tuple[str, ...]:
    tests = (
        (
            "SMART Self-test log structure revision number 1",
            "Num  Test_Description    Status                  Remaining  LifeTime(hours)  LBA_of_first_error",
            *(
                f"#{place:2}  {test.name:<18}  {test.result:<22}  {'00%':>9}  {test.hours or 0:>8}"
                f"         {'-' if test.lba is None else test.lba}"
                for place, test in enumerate(told.tests, 1)
            ),
        )
        if told.tests
        else ("SMART Self-test log structure revision number 1", "No self-tests have been logged.")
    )
    return (
        "SMART Attributes Data Structure revision number: 10",
        "Vendor Specific SMART Attributes with Thresholds:",
        "ID# ATTRIBUTE_NAME          FLAG     VALUE WORST THRESH TYPE      UPDATED  WHEN_FAILED RAW_VALUE",
        *(_printed(row) for row in told.rows),
        "",
        "SMART Error Log Version: 1",
        "No Errors Logged",
        "",
        *tests,
        "",
        "SCT Status Version:                  3",
        "Device State:                        Active (0)",
        f"Current Temperature:                   {told.celsius:3} Celsius",
        f"Specified Max Operating Temperature:   {told.limit:3} Celsius",
        "",
    )


def _printed(row: Row) -> str:
    flag, sort = ("0x0033", "Pre-fail") if row.prefail else ("0x0032", "Old_age")
    return (
        f"{row.number:3} {row.name:<23} {flag}   {row.value:03}   {row.worst:03}   {row.threshold:03}    "
        f"{sort:<8}  Always   {_FAILING[row.failing]:>11} {row.raw}"
    ).replace("         -", "       -", 1)


def _nvme_about(told: Told) -> tuple[str, ...]:
    size = f"{told.capacity:,} [{told.capacity / 1e12:.2f} TB]"
    return (
        f"Model Number:                       {told.model}",
        f"Serial Number:                      {told.serial}",
        f"Firmware Version:                   {told.firmware}",
        f"IEEE OUI Identifier:                0x{OUI:06x}",
        f"Total NVM Capacity:                 {size}",
        "NVMe Version:                       1.4",
        "Number of Namespaces:               1",
        f"Namespace 1 Size/Capacity:          {size}",
        "Namespace 1 Formatted LBA Size:     512",
        f"Namespace 1 IEEE EUI-64:            {OUI:06x} {told.number:010x}",
        f"Warning  Comp. Temp. Threshold:     {told.limit} Celsius",
        f"Critical Comp. Temp. Threshold:     {told.limit + 6} Celsius",
    )


def _nvme_state(told: Told) -> tuple[str, ...]:
    log = told.log
    return (
        "SMART/Health Information (NVMe Log 0x02)",
        f"Critical Warning:                   0x{log['critical_warning']:02x}",
        f"Temperature:                        {log['temperature']} Celsius",
        f"Available Spare:                    {log['available_spare']}%",
        f"Available Spare Threshold:          {log['available_spare_threshold']}%",
        f"Percentage Used:                    {log['percentage_used']}%",
        f"Data Units Read:                    {_units(log['data_units_read'])}",
        f"Data Units Written:                 {_units(log['data_units_written'])}",
        f"Host Read Commands:                 {log['host_reads']:,}",
        f"Host Write Commands:                {log['host_writes']:,}",
        f"Controller Busy Time:               {log['controller_busy_time']:,}",
        f"Power Cycles:                       {log['power_cycles']:,}",
        f"Power On Hours:                     {log['power_on_hours']:,}",
        f"Unsafe Shutdowns:                   {log['unsafe_shutdowns']:,}",
        f"Media and Data Integrity Errors:    {log['media_errors']:,}",
        f"Error Information Log Entries:      {log['num_err_log_entries']:,}",
        f"Warning  Comp. Temperature Time:    {log['warning_temp_time']}",
        f"Critical Comp. Temperature Time:    {log['critical_comp_time']}",
        "",
        _ERRORS,
        *(_nvme_errors(told.errors) if told.errors else ("No Errors Logged",)),
        "",
        "Self-test Log (NVMe Log 0x06)",
        "Self-test status: No self-test in progress",
        *(_nvme_tests(told) if told.tests else ("No Self-tests Logged",)),
        "",
    )


def _nvme_errors(errors: tuple[Logged, ...]) -> tuple[str, ...]:
    # The status field is printed with its phase tag, bit 0.
    return (
        "Num   ErrCount  SQId   CmdId  Status  PELoc          LBA  NSID    VS",
        *(
            f"{place:3} {one.count:10} {0 if one.lba is None else 1:5}  0x0014  0x{one.status << 1:04x}  0x028"
            f" {'-' if one.lba is None else one.lba:>12}     1     -"
            for place, one in enumerate(errors)
        ),
    )


def _nvme_tests(told: Told) -> tuple[str, ...]:
    return (
        "Num  Test_Description  Status                       Power_on_Hours  Failing_LBA  NSID Seg SCT Code",
        *(
            f"{place:2}   {test.name:<16}  {test.result:<27} {test.hours or 0:>15}"
            + (f"{'-':>13}     -   -   -    -" if test.lba is None else f"{test.lba:>13}     1   2   2 0x81")
            for place, test in enumerate(told.tests)
        ),
    )


def _units(count: int) -> str:
    return f"{count:,} [{count * 512_000 / 1e12:.2f} TB]"
