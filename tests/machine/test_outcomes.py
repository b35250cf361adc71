import pytest

from diskwatch.machine.endings import Verdict, quoted
from diskwatch.machine.outcomes import _SHOULD_ANSWER, of_words
from diskwatch.machine.reading import understood
from diskwatch.records import Kind, Outcome
from tests.machine.recordings import FIXTURES, text_of

HEAD = (
    "smartctl 7.3 2022-02-28 r5338 [x86_64-linux-6.1.0] (local build)",
    "Copyright (C) 2002-22, its authors",
    "",
)


def fixture(name: str) -> tuple[str, ...]:
    return tuple(text_of(FIXTURES / name / "all.txt").splitlines())


def verdict(
    lines: tuple[str, ...],
    status: int,
    *,
    expects_smart: bool = True,
    kind: Kind = Kind.HDD,
    err: str = "",
) -> tuple[str, str]:
    found = judged(lines, status, expects_smart=expects_smart, kind=kind, err=err)
    return found.outcome.value, found.explanation or ""


def judged(
    lines: tuple[str, ...],
    status: int,
    *,
    expects_smart: bool = True,
    kind: Kind = Kind.HDD,
    err: str = "",
) -> Verdict:
    what = understood(lines, None, type_=None, path="/dev/x")
    found = of_words((*lines, err), status, what, expects_smart=expects_smart, kind=kind, command="/opt/tool")
    assert (found.explanation is None) is (found.outcome is Outcome.READ)
    assert found.explanation is None or is_a_sentence_about_it(found.explanation)
    return found


def is_a_sentence_about_it(text: str) -> bool:
    return text.startswith("It ") and text.endswith(".") and not text.endswith("..") and "/dev/x:" not in text


@pytest.mark.parametrize("status", [0, 4, 8, 32, 64, 192, 255])
def test_a_drive_that_states_values_was_read_whatever_the_bits_say(status: int):
    assert verdict(fixture("invented_hdd_failing"), status) == ("read", "")


@pytest.mark.parametrize(
    ("line", "status"),
    [
        ("Device is in STANDBY mode, exit(3)", 3),
        ("Device is in STANDBY mode, exit(2)", 2),
        ("Device is in SLEEP mode, exit(2)", 2),
        ("Device is in STANDBY (OS) mode, exit(3)", 3),
        ("device is NOT READY (e.g. spun down, busy)", 2),
        ("", 3),
    ],
)
def test_a_sleeping_drive_is_asleep(line: str, status: int):
    outcome, why = verdict((*HEAD, line), status)
    assert outcome == "asleep"
    assert "not woken" in why


@pytest.mark.parametrize(
    ("line", "unproved"),
    [
        ("Device is in STANDBY mode, exit(3)", False),
        ("Device is in STANDBY (OS) mode, exit(3)", False),
        ("Device is in SLEEP mode, exit(3)", True),
        ("device is NOT READY (e.g. spun down, busy)", True),
    ],
)
def test_words_that_a_drive_without_any_answer_gets_too_are_no_proof_of_sleep(line: str, unproved: bool):
    assert judged((*HEAD, line), 3).unproved is unproved


@pytest.mark.parametrize(
    "line",
    [
        "Smartctl open device: /dev/sda failed: Permission denied",
        "Read Device Identity failed: Operation not permitted",
    ],
)
def test_a_drive_that_may_not_be_opened_is_refused_and_the_cure_is_named(line: str):
    outcome, why = verdict((*HEAD, line, ""), 2)
    assert outcome == "refused"
    assert "root" in why


@pytest.mark.parametrize("line", ["No such device", "No such device or address", "No such file or directory"])
def test_a_drive_that_is_gone_is_absent(line: str):
    outcome, why = verdict((*HEAD, f"Smartctl open device: /dev/sda failed: {line}"), 2)
    assert outcome == "absent"
    assert "cable" in why


def test_a_disk_whose_device_is_still_there_is_not_said_to_be_gone():
    _, why = verdict((*HEAD, "Smartctl open device: /dev/sda failed: No such device or address"), 2)
    assert "device is still there" in why
    assert "not there any more" not in why


def test_what_is_said_on_the_error_channel_counts_too():
    assert verdict((), 2, err="cannot open: Permission denied")[0] == "refused"


NO_LANGUAGE = (*HEAD, "/dev/x1: Unable to detect device type", "Please specify device type with the -d option.")


def test_a_virtual_disk_of_no_language_has_no_smart():
    outcome, why = verdict(NO_LANGUAGE, 1, kind=Kind.VIRTUAL)
    assert outcome == "no-smart"
    assert "usual for virtual disks" in why


@pytest.mark.parametrize(
    ("kind", "language", "deed"),
    [
        (Kind.HDD, "question of ATA,", "cable and power, or try it at another port"),
        (Kind.SSD, "question of ATA,", "another port"),
        (Kind.SAS, "question of SCSI,", "another port"),
        (Kind.NVME, "question of NVMe,", "another slot"),
        (Kind.USB, "question of ATA, SCSI or NVMe,", "another adapter"),
    ],
)
def test_a_real_drive_of_no_language_is_not_explained_away_as_virtual(kind: Kind, language: str, deed: str):
    outcome, why = verdict(NO_LANGUAGE, 1, kind=kind)
    assert outcome == "no-smart"
    assert "virtual" not in why
    assert language in why
    assert deed in why
    assert "copy off what matters first" in why


def test_every_kind_but_virtual_is_known_to_answer_some_language():
    assert set(_SHOULD_ANSWER) == set(Kind) - {Kind.VIRTUAL}


def test_an_unknown_usb_bridge_has_no_smart():
    outcome, why = verdict(fixture("invented_usb_bridge_unknown"), 1)
    assert outcome == "no-smart"
    assert "USB adapter" in why


def test_a_drive_without_smart_says_who_it_is_all_the_same():
    assert verdict(fixture("invented_virtual_no_smart"), 4)[0] == "no-smart"
    assert verdict(fixture("megaraid_vd_0"), 0)[0] == "no-smart"


def test_smart_that_is_switched_off_is_said_with_the_cure():
    lines = tuple(
        line.replace("SMART support is: Enabled", "SMART support is: Disabled")
        for line in fixture("invented_hdd_sister")
    )
    outcome, why = verdict(lines, 4)
    assert outcome == "no-smart"
    assert "switched off" in why


def test_a_scsi_drive_that_predicts_its_failure_is_heard_though_its_smart_is_called_disabled():
    # Seen with smartctl 7.3 and the kernel's scsi_debug disk: "Disabled", and the prediction all the same.
    lines = tuple(
        line.replace("SMART support is:     Enabled", "SMART support is:     Disabled")
        for line in fixture("invented_sas_megaraid_failing")
    )
    assert "SMART support is:     Disabled" in lines
    assert verdict(lines, 12)[0] == "read"


def test_a_drive_that_does_not_answer_sensibly_is_garbled_with_its_words():
    outcome, why = verdict(fixture("invented_scsi_short_inquiry"), 2)
    assert outcome == "garbled"
    assert "Short INQUIRY response" in why


@pytest.mark.parametrize(
    ("head", "complaint"),
    [
        (HEAD[0], "Smartctl open device: /dev/sdq [SAT] failed: Input/output error"),
        ("smartctl pre-7.5 2024-11-01 r5600", "Smartctl open device: /dev/sdq failed: INQUIRY failed"),
        ("smartctl version 5.38", "Smartctl: Device Read Identity Failed: I/O error"),
    ],
)
def test_the_tools_own_reason_is_shown_though_it_begins_with_its_name(head: str, complaint: str):
    outcome, why = verdict((head, HEAD[1], "", complaint), 2)
    assert outcome == "garbled"
    assert f"({complaint})" in why


def test_where_the_tool_gives_no_reason_that_is_said_and_its_version_is_not_taken_for_one():
    outcome, why = verdict((*HEAD, "A mandatory SMART command failed: exiting."), 2)
    assert outcome == "garbled"
    assert "without a word about why" in why


def test_a_drive_that_names_itself_but_gives_no_data_is_garbled():
    lines = fixture("invented_hdd_failing")
    cut = lines[: lines.index("=== START OF READ SMART DATA SECTION ===")]
    outcome, why = verdict((*cut, "Read SMART Data failed: Input/output error"), 4)
    assert outcome == "garbled"
    assert "could not be read" in why


@pytest.mark.parametrize(
    ("lines", "status", "word"),
    [
        ((), 0, "wrote is not smartctl's"),
        (("AAAA", "AAAA"), 0, "wrote is not smartctl's"),
        (("sudo: a password is required",), 1, "wrote is not smartctl's"),
        ((*HEAD, "=======> UNRECOGNIZED OPTION: all"), 1, "did not understand the question"),
        (HEAD, 0, "neither a drive nor any trouble"),
    ],
)
def test_where_the_tool_is_at_fault_it_and_its_setting_are_named_and_no_cable(
    lines: tuple[str, ...], status: int, word: str
):
    outcome, why = verdict(lines, status)
    assert outcome == "garbled"
    assert word in why
    assert "/opt/tool" in why
    assert "[smart] command in the settings" in why
    assert "cable" not in why


@pytest.mark.parametrize(
    "lines",
    [
        ("Read Device Identity failed: Input/output error",),
        ("Smartctl open device: /dev/sdq failed: INQUIRY failed",),
        (*HEAD, "Read Device Identity failed: scsi error medium or hardware error (serious)"),
    ],
)
def test_where_the_tool_had_trouble_with_the_drive_the_drive_is_what_to_look_at(lines: tuple[str, ...]):
    outcome, why = verdict(lines, 2)
    assert outcome == "garbled"
    assert "copy off what matters first" in why
    assert "[smart]" not in why


def test_an_exit_status_alone_that_stands_for_sleep_is_proof_only_where_smartctl_shows_that_it_is_there():
    assert judged(HEAD, 3).unproved is False
    assert judged((), 3).unproved is True
    assert judged((), 3).outcome is Outcome.ASLEEP


def test_silence_and_noise_are_garbled_unless_no_smart_was_to_be_expected():
    assert verdict((), 0)[0] == "garbled"
    assert verdict(("\x00\x1b[2J 197 Current_Pending_Sector 0x0032",), 0)[0] == "garbled"
    assert verdict(("Read Device Identity failed: Inappropriate ioctl for device",), 2, expects_smart=False)[
        0
    ] == ("no-smart")


def test_words_of_a_drive_are_made_harmless_and_cut():
    _, why = verdict(("evil \x1b[31m words \u202e" + "x" * 1_000,), 2)
    assert why.isprintable()
    assert len(why) < 500
    assert quoted("\x1b" + "y" * 500) == "\\x1b" + "y" * 196
