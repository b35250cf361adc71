import json
import threading
import time
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from diskwatch.machine.command import Answer, Door, Ending
from diskwatch.machine.protocol import Address, Found
from diskwatch.machine.smartctl import Scan, Smartctl
from diskwatch.records import Drive, Identity, Kind, Outcome, Place, Way
from tests.machine.recordings import FIXTURES
from tests.player import calls, lay

NOW = 1_800_000_000
HDD = FIXTURES / "invented_hdd_failing" / "all.txt"
NVME_JSON = FIXTURES / "invented_nvme_json" / "document.json"
USAGE = "\nUse smartctl -h to get a usage summary\n\n"
HEAD = "smartctl 7.3 2022-02-28 r5338 [x86_64-linux-invented] (local build)\n\n"


class Told(Door):
    """A door behind which nothing runs: it hands out answers and remembers the questions."""

    def __init__(self, *answers: Answer | Exception) -> None:
        super().__init__()
        self.answers = list(answers)
        self.asked: list[list[str]] = []
        self.owners: set[str] = set()

    def run(self, argv: Any, *, timeout: float, owner: str = "") -> Answer:
        assert 0 < timeout <= 60
        assert owner.startswith("/dev/") or argv[1:] in (["--scan"], ["--version"])
        self.asked.append(list(argv))
        self.owners.add(owner)
        answer = self.answers.pop(0) if len(self.answers) > 1 else self.answers[0]
        if isinstance(answer, Exception):
            raise answer
        return answer


def said(text: str | bytes, status: int = 0, err: str = "") -> Answer:
    out = text if isinstance(text, bytes) else text.encode()
    return Answer(ending=Ending.ENDED, status=status, out=out, err=err.encode())


def asked(
    node: str = "/dev/sdx", type_: str | None = "sat", *, serial: str | None = None, usb: bool = False
) -> Found:
    return Found(
        address=Address(node=node, type=type_),
        blocks=("sdx",),
        place=Place(device=node),
        drive=Drive(
            identity=Identity(wwn=None, model=None, serial=serial, path=node),
            kind=Kind.USB if usb else Kind.HDD,
        ),
    )


def smartctl(*answers: Answer | Exception, kept: tuple[Way, ...] = ()) -> tuple[Smartctl, Told]:
    door = Told(*answers)
    return Smartctl("smartctl", 60, lambda: NOW, kept=kept, door=door), door


def test_a_pass_is_one_process_that_wakes_no_drive():
    tool, door = smartctl(said(HDD.read_bytes(), 24))
    found = tool.ask(asked())
    assert door.asked == [["smartctl", "-n", "standby,3", "-d", "sat", "--json=o", "--all", "/dev/sdx"]]
    assert (found.outcome, found.exit_bits, found.at, found.explanation) == (Outcome.READ, 24, NOW, None)
    assert found.reading is not None
    assert found.reading.get("reallocated-sectors") == 2_264
    assert found.drive is not None
    assert found.drive.identity.serial == "INVENTED-BT-0001"


def test_without_a_type_none_is_passed_and_the_one_that_worked_is_remembered_for_this_drive():
    tool, door = smartctl(said(NVME_JSON.read_bytes()))
    for _ in range(2):
        assert tool.ask(asked(type_=None, serial="A")).outcome is Outcome.READ
    assert tool.ask(asked(type_=None, serial="B")).outcome is Outcome.READ
    assert ["-d" in argv for argv in door.asked] == [False, True, False]
    assert "nvme" in door.asked[1]


def test_a_remembered_type_that_fails_is_forgotten():
    noise = said("noise", 2)
    tool, door = smartctl(said(NVME_JSON.read_bytes()), noise, noise)
    for _ in range(3):
        tool.ask(asked(type_=None))
    assert ["-d" in argv for argv in door.asked] == [False, True, False]


def test_what_hangs_on_usb_stays_known_as_usb():
    tool, _ = smartctl(said(HDD.read_bytes()))
    drive = tool.ask(asked(usb=True)).drive
    assert drive is not None
    assert (drive.kind, drive.identity.model) == (Kind.USB, "Borealis Tundra BT4000")


def test_a_command_that_knows_no_json_is_asked_again_without_and_from_then_on_once():
    refusal = said(f"=======> UNRECOGNIZED OPTION: json=o\n{USAGE}", 1)
    tool, door = smartctl(refusal, said(HDD.read_bytes()))
    for _ in range(2):
        assert tool.ask(asked()).outcome is Outcome.READ
    assert ["--json=o" in argv for argv in door.asked] == [True, False, False]
    assert all("standby,3" in argv for argv in door.asked)


def test_a_command_that_knows_no_standby_status_either_is_asked_a_third_time():
    no_json = said(f"=======> UNRECOGNIZED OPTION: json=o\n{USAGE}", 1)
    no_status = said(
        f"=======> INVALID ARGUMENT TO -n: standby,3\n=======> VALID ARGUMENTS ARE: never{USAGE}", 1
    )
    tool, door = smartctl(no_json, no_status, said(HDD.read_bytes()))
    for _ in range(2):
        assert tool.ask(asked(usb=True)).outcome is Outcome.READ
    assert len(door.asked) == 4
    assert door.asked[3] == ["smartctl", "-n", "standby", "-d", "sat", "--all", "/dev/sdx"]


def test_a_standby_status_alone_that_is_not_known_costs_no_json():
    no_status = said(f"=======> INVALID ARGUMENT TO -n: standby,3\n{USAGE}", 1)
    tool, door = smartctl(no_status, said(NVME_JSON.read_bytes()))
    tool.ask(asked())
    assert door.asked[1] == ["smartctl", "-n", "standby", "-d", "sat", "--json=o", "--all", "/dev/sdx"]


UNKNOWN_BRIDGE = (FIXTURES / "invented_usb_bridge_unknown" / "all.txt").read_bytes()
SLEEP = "smartctl 7.3\n\nDevice is in SLEEP mode, exit(3)\n"


def types(door: Told) -> list[str | None]:
    return [argv[argv.index("-d") + 1] if "-d" in argv else None for argv in door.asked]


def test_an_ata_drive_listed_as_scsi_is_asked_through_sat_in_the_same_pass_and_from_then_on_at_once():
    behind = said("smartctl 7.3\n\nProbable ATA device behind a SAT layer\n", 2)
    tool, door = smartctl(behind, said(HDD.read_bytes()))
    for _ in range(2):
        assert tool.ask(asked(type_="scsi")).outcome is Outcome.READ
    assert types(door) == ["scsi", "sat", "sat"]


def test_a_scsi_answer_of_an_ata_drive_is_kept_where_sat_brings_none():
    text = (FIXTURES / "invented_sas_megaraid_failing" / "all.txt").read_text()
    vendor = next(line for line in text.splitlines() if line.startswith("Vendor:"))
    as_scsi = said(text.replace(vendor, "Vendor:               ATA"))
    tool, door = smartctl(as_scsi, said("noise", 2), as_scsi)
    for _ in range(2):
        assert tool.ask(asked(type_="scsi")).outcome is Outcome.READ
    assert types(door) == ["scsi", "sat", "scsi"]


def test_behind_an_unknown_adapter_the_types_are_tried_in_turn_and_the_one_that_worked_is_kept():
    tool, door = smartctl(
        said(UNKNOWN_BRIDGE, 1), said(SLEEP, 3), said("noise", 2), said(NVME_JSON.read_bytes())
    )
    for _ in range(2):
        assert tool.ask(asked(type_=None, usb=True)).outcome is Outcome.READ
    assert types(door) == [None, "sat", "scsi", "sntasmedia", "sntasmedia"]


def test_where_no_type_reaches_a_usb_drive_that_is_said_and_not_tried_again():
    tool, door = smartctl(said(UNKNOWN_BRIDGE, 1))
    found = [tool.ask(asked(type_=None, usb=True)) for _ in range(2)]
    assert types(door) == [None, "sat", "scsi", "sntasmedia", "sntjmicron", "sntrealtek", None]
    assert {one.outcome for one in found} == {Outcome.NO_SMART}
    assert all("none of smartctl's types" in (one.explanation or "") for one in found)


def test_a_type_that_hangs_ends_the_trying():
    hang = Answer(ending=Ending.TIMED_OUT)
    tool, door = smartctl(said(UNKNOWN_BRIDGE, 1), hang, said(UNKNOWN_BRIDGE, 1))
    for _ in range(2):
        assert tool.ask(asked(type_=None, usb=True)).outcome is Outcome.NO_SMART
    assert types(door) == [None, "sat", None]


def test_a_usb_drive_that_answered_before_and_is_silent_now_is_asked_no_other_way():
    tool, door = smartctl(said(NVME_JSON.read_bytes()), said(SLEEP, 3))
    assert tool.ask(asked(type_=None, usb=True)).outcome is Outcome.READ
    assert tool.ask(asked(type_=None, usb=True)).outcome is Outcome.ASLEEP
    assert types(door) == [None, "nvme"]


ADAPTER = "1f75:0621:0100 INV"
BEHIND_ADAPTER = replace(asked(type_=None, usb=True), adapter=ADAPTER, instance="boot 1, disk 7")


def kept(type_: str | None, *, instance: str = "boot 1, disk 7") -> Way:
    return Way(adapter=ADAPTER, instance=instance, type=type_)


def test_after_a_restart_a_usb_drive_is_asked_once_with_the_type_that_was_found_before():
    tool, door = smartctl(said(UNKNOWN_BRIDGE, 1), said(SLEEP, 3), said(NVME_JSON.read_bytes()))
    found = tool.ask(BEHIND_ADAPTER)
    assert types(door) == [None, "sat", "scsi"]
    assert found.way == kept("scsi")
    assert tool.ask(BEHIND_ADAPTER).way is None
    later, door = smartctl(said(NVME_JSON.read_bytes()), kept=(found.way,))
    assert later.ask(BEHIND_ADAPTER).outcome is Outcome.READ
    assert types(door) == ["scsi"]


@pytest.mark.parametrize("wrong", [said("noise", 2), said(UNKNOWN_BRIDGE, 1), said(f"{HEAD}{SLEEP}", 3)])
def test_a_type_from_before_that_reaches_another_drive_no_more_is_forgotten_and_tried_anew(wrong: Answer):
    tool, door = smartctl(
        said("/dev/sda -d sat # ATA device\n"),
        wrong,
        said(UNKNOWN_BRIDGE, 1),
        said(NVME_JSON.read_bytes()),
        kept=(kept("sntasmedia", instance="boot 0, disk 3"),),
    )
    tool.scan()
    found = tool.ask(BEHIND_ADAPTER)
    assert (found.outcome, found.way) == (Outcome.READ, kept("sat"))
    assert types(door)[1:] == ["sntasmedia", None, "sat"]
    tool.ask(BEHIND_ADAPTER)
    assert types(door)[4:] == ["sat"]


def test_a_usb_drive_that_stayed_plugged_in_and_rests_over_a_restart_is_asked_once_and_no_other_way():
    tool, door = smartctl(said(f"{HEAD}{SLEEP}", 3), kept=(kept("scsi"),))
    assert [tool.ask(BEHIND_ADAPTER).outcome for _ in range(2)] == [Outcome.ASLEEP, Outcome.ASLEEP]
    assert types(door) == ["scsi", "scsi"]


def test_a_usb_drive_that_no_type_reached_costs_no_questions_again_after_a_restart():
    tool, door = smartctl(said(UNKNOWN_BRIDGE, 1))
    way = tool.ask(BEHIND_ADAPTER).way
    assert (len(door.asked), way) == (6, kept(None))
    later, door = smartctl(said(UNKNOWN_BRIDGE, 1), kept=(kept(None),))
    assert "none of smartctl's types" in (later.ask(BEHIND_ADAPTER).explanation or "")
    assert types(door) == [None]


def test_a_type_that_smartctl_finds_by_itself_behind_an_adapter_is_kept_for_the_next_start_too():
    tool, door = smartctl(said(NVME_JSON.read_bytes()))
    assert tool.ask(BEHIND_ADAPTER).way == kept("nvme")
    assert types(door) == [None]


def test_a_type_from_before_that_hangs_is_kept_and_nothing_else_is_tried():
    tool, door = smartctl(Answer(ending=Ending.TIMED_OUT), kept=(kept("sat"),))
    assert [tool.ask(BEHIND_ADAPTER).outcome for _ in range(2)] == [Outcome.TIMED_OUT, Outcome.TIMED_OUT]
    assert types(door) == ["sat", "sat"]


def test_a_drive_that_is_silent_though_it_is_in_use_does_not_sleep():
    tool, _ = smartctl(said(HDD.read_bytes()), said(SLEEP, 3))
    assert tool.ask(asked(), completed=lambda: 5).outcome is Outcome.READ
    assert tool.ask(asked(), completed=iter((9, 11)).__next__).outcome is Outcome.ASLEEP
    assert tool.ask(asked(), completed=iter((15, 18)).__next__).outcome is Outcome.GARBLED


def test_a_machine_that_was_suspended_or_whose_clock_went_ahead_accuses_no_silent_drive():
    wall, awake = [NOW], [100.0]
    door = Told(said(HDD.read_bytes()), said(SLEEP, 3))
    tool = Smartctl("smartctl", 60, lambda: wall[0], door=door, awake=lambda: awake[0])
    assert tool.ask(asked()).outcome is Outcome.READ
    assert tool.ask(asked()).outcome is Outcome.ASLEEP
    wall[0] += 9 * 86_400
    assert tool.ask(asked()).outcome is Outcome.ASLEEP
    awake[0] += 9 * 86_400
    assert tool.ask(asked()).outcome is Outcome.GARBLED


def test_an_optional_log_is_asked_for_in_the_same_process_and_dropped_where_the_drive_lacks_it():
    tool, door = smartctl(said(HDD.read_bytes(), 24), said(HDD.read_bytes(), 28))
    for _ in range(3):
        assert tool.ask(asked()).outcome is Outcome.READ
    assert [argv[7:-1] for argv in door.asked] == [[], ["-l", "devstat"], ["-l", "scttempsts"]]


def test_a_log_that_smartctl_does_not_know_is_asked_for_no_more_of_any_drive():
    refusal = said(f"=======> INVALID ARGUMENT TO -l: devstat\n=======> VALID ARGUMENTS ARE: error{USAGE}", 1)
    tool, door = smartctl(said(HDD.read_bytes()), refusal, said(HDD.read_bytes()))
    for _ in range(2):
        assert tool.ask(asked()).outcome is Outcome.READ
    assert tool.ask(asked("/dev/sdy")).outcome is Outcome.READ
    assert tool.ask(asked("/dev/sdy")).outcome is Outcome.READ
    assert ["devstat" in argv for argv in door.asked] == [False, True, False, False, False]
    assert all("--json=o" in argv for argv in door.asked)


def test_counters_that_cannot_be_read_are_a_pass_like_any_other():
    def broken() -> int:
        raise OSError("gone")

    tool, _ = smartctl(said(HDD.read_bytes()))
    assert tool.ask(asked(), completed=broken).outcome is Outcome.GARBLED


def test_all_questions_to_one_drive_have_one_owner_whatever_their_type():
    tool, door = smartctl(said(UNKNOWN_BRIDGE, 1))
    tool.ask(asked(type_=None, usb=True))
    assert len(door.asked) == 6
    assert door.owners == {"/dev/sdx"}


def test_a_complaint_that_never_ends_is_asked_three_times_and_teaches_nothing():
    tool, door = smartctl(said(f"{HEAD}=======> UNRECOGNIZED OPTION: all\n{USAGE}", 1))
    assert tool.ask(asked()).outcome is Outcome.GARBLED
    assert len(door.asked) == 3
    tool.ask(asked())
    assert "--json=o" in door.asked[3]


def test_a_type_that_is_not_known_is_no_reason_to_ask_for_less():
    tool, door = smartctl(
        said(f"{HEAD}/dev/sdx: Unknown device type 'sntnew'\n=======> VALID ARGUMENTS ARE: ata\n", 1)
    )
    found = tool.ask(asked(type_="sntnew"))
    assert (len(door.asked), found.outcome) == (1, Outcome.GARBLED)
    assert "Unknown device type 'sntnew'" in (found.explanation or "")


def test_plain_text_in_spite_of_json_is_read_in_one_process():
    tool, door = smartctl(said(HDD.read_bytes()))
    assert tool.ask(asked()).outcome is Outcome.READ
    assert len(door.asked) == 1


def test_complaints_in_the_document_decide_as_words_do():
    document = {
        "smartctl": {
            "messages": [
                {"string": "Smartctl open device: /dev/sdx failed: Permission denied", "severity": "error"}
            ]
        }
    }
    tool, _ = smartctl(said(json.dumps(document), 2))
    assert tool.ask(asked()).outcome is Outcome.REFUSED


def test_a_drive_asleep_brings_neither_drive_nor_reading():
    tool, _ = smartctl(said("smartctl 7.3\n\nDevice is in STANDBY mode, exit(3)\n", 3))
    found = tool.ask(asked())
    assert (found.outcome, found.drive, found.reading, found.exit_bits) == (Outcome.ASLEEP, None, None, 3)


def test_a_name_with_an_odd_letter_that_passes_for_a_line_end_is_not_cut_in_two():
    tool, _ = smartctl(said(HDD.read_text().replace("INVENTED-BT-0001", "INVENTED\x1c-BT-\u20280001")))
    drive = tool.ask(asked()).drive
    assert drive is not None
    assert drive.identity.serial == "INVENTED-BT-0001"


def test_a_drive_without_smart_states_who_it_is_and_brings_no_reading():
    tool, _ = smartctl(said((FIXTURES / "invented_virtual_no_smart" / "all.txt").read_bytes(), 4))
    found = tool.ask(asked())
    assert (found.outcome, found.reading) == (Outcome.NO_SMART, None)
    assert found.drive is not None
    assert found.drive.kind is Kind.VIRTUAL


def test_a_fault_of_our_own_is_a_pass_like_any_other(caplog: pytest.LogCaptureFixture):
    tool, _ = smartctl(ZeroDivisionError("ours"))
    found = tool.ask(asked())
    assert (found.outcome, found.at) == (Outcome.GARBLED, NOW)
    assert "fault of diskwatch" in (found.explanation or "")
    assert "ours" in caplog.text


def test_the_scan_opens_nothing_and_lists_each_device_once():
    tool, door = smartctl(
        said(
            "/dev/sda -d scsi # /dev/sda, SCSI device\n"
            "/dev/sda -d scsi # /dev/sda, SCSI device\n"
            "/dev/bus/0 -d sat+megaraid,60 # /dev/bus/0 [megaraid_disk_60] [SAT], ATA device\n"
            "/dev/nvme0\n"
            "# /dev/sdz -d sat # device open failed\n"
            "-rf -d sat # no node\n"
            "/dev/sdb -d $(gone) # no type\n"
            "glob(3) found no matches\n\x00\xff\n"
        )
    )
    assert tool.scan() == Scan(
        entries=(
            Address(node="/dev/sda", type="scsi"),
            Address(node="/dev/bus/0", type="sat+megaraid,60"),
            Address(node="/dev/nvme0"),
        )
    )
    assert door.asked == [["smartctl", "--scan"]]


def test_a_scan_that_cannot_be_made_says_why():
    tool, _ = smartctl(Answer(ending=Ending.MISSING))
    found = tool.scan()
    assert found.entries == ()
    assert "install smartctl" in (found.trouble or "")


def script(folder: Path, body: str) -> str:
    path = folder / "smartctl"
    path.write_text(f"#!/bin/sh\n{body}\n")
    path.chmod(0o755)
    return str(path)


def test_a_real_command_is_asked_and_its_time_taken(tmp_path: Path):
    tool = Smartctl(script(tmp_path, f"cat {HDD}"), 30, lambda: NOW)
    found = tool.ask(asked())
    assert found.outcome is Outcome.READ
    assert 0 <= found.took_ms < 30_000


def test_device_statistics_are_asked_for_where_the_kernel_knows_of_them_and_hold_before_the_table(
    tmp_path: Path,
):
    command = lay(tmp_path, [{"node": "/dev/sdx", "type": "sat", "folder": "invented_hdd_statistics"}])
    tool = Smartctl(str(command), 30, lambda: NOW)
    reading = tool.ask(replace(asked(), has_statistics=True)).reading
    assert reading is not None
    assert (reading.get("reallocated-sectors"), reading.get("pending-sectors")) == (16, 8)
    assert (reading.get("power-on-hours"), reading.warning_celsius) == (37_109, 70)
    (call,) = calls(command)
    assert call.argv.count("-l") == 1


def test_a_hanging_drive_is_given_up_in_time_and_does_not_hold_another(tmp_path: Path):
    tool = Smartctl(
        script(tmp_path, f'case "$*" in *sdslow*) exec sleep 60;; *) cat {HDD};; esac'), 1.5, lambda: NOW
    )
    answers: dict[str, Outcome] = {}
    nodes = ["/dev/sdslow", "/dev/sdx"]

    def ask(node: str) -> None:
        answers[node] = tool.ask(asked(node)).outcome

    begun = time.monotonic()
    threads = [threading.Thread(target=ask, args=(node,)) for node in nodes]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(20)
    assert time.monotonic() - begun < 10
    assert answers == {"/dev/sdslow": Outcome.TIMED_OUT, "/dev/sdx": Outcome.READ}
    assert tool.abandoned == 0


def test_after_stop_nothing_is_run(tmp_path: Path):
    trace = tmp_path / "ran"
    tool = Smartctl(script(tmp_path, f"touch {trace}"), 30, lambda: NOW)
    tool.stop()
    assert tool.ask(asked()).outcome is Outcome.TIMED_OUT
    assert not trace.exists()


PAGE = "echo '<html><body>502 Bad Gateway</body></html>'"


@pytest.mark.parametrize(
    "body",
    ["exit 0", 'exec cat "$@"', PAGE, "exit 3", "echo sudo: a password is required >&2; exit 1"],
)
def test_a_command_that_is_no_smartctl_is_told_as_such_and_no_drive_is_blamed(tmp_path: Path, body: str):
    command = script(tmp_path, body)
    tool = Smartctl(command, 30, lambda: NOW)
    found = [tool.ask(asked(usb=usb)) for usb in (False, True)]
    assert {one.outcome for one in found} == {Outcome.NO_TOOL}
    told = f"{command} does not answer as smartctl does, so no drive can be read: see whether [smart] command "
    assert all((one.explanation or "").startswith(told) for one in found)
    assert tool.scan().trouble == found[0].explanation


@pytest.mark.parametrize("body", ["exec yes", "kill -9 $$"])
def test_what_is_no_smartctl_and_writes_without_end_or_dies_blames_no_drive(tmp_path: Path, body: str):
    tool = Smartctl(script(tmp_path, body), 30, lambda: NOW, door=Door(limit=10_000))
    assert tool.ask(asked()).outcome is Outcome.NO_TOOL


@pytest.mark.parametrize("proof", ["scan", "answer"])
def test_noise_is_the_drives_own_where_the_command_showed_before_that_it_is_smartctl(proof: str):
    tool, door = smartctl(said("/dev/sda -d sat # /dev/sda, ATA device\n"), said("\x00\xffnoise", 0))
    if proof == "answer":
        door.answers[0] = said(HDD.read_bytes())
        tool.ask(asked())
    else:
        tool.scan()
    assert tool.ask(asked()).outcome is Outcome.GARBLED
    assert tool.scan().trouble is None


def test_a_command_that_lists_no_drive_is_asked_once_whether_it_is_smartctl():
    tool, door = smartctl(said(""), said(HEAD), said(""))
    assert [tool.scan().trouble for _ in range(2)] == [None, None]
    assert [argv[1:] for argv in door.asked] == [["--scan"], ["--version"], ["--scan"]]


def test_a_command_that_turns_out_to_be_smartctl_after_all_is_no_trouble_any_more():
    tool, _ = smartctl(said("", 0), said("", 0), said(HDD.read_bytes()), said(""))
    assert "does not answer as smartctl does" in (tool.scan().trouble or "")
    assert tool.ask(asked()).outcome is Outcome.READ
    assert tool.scan().trouble is None


def test_a_missing_command_is_no_tool(tmp_path: Path):
    found = Smartctl(str(tmp_path / "none"), 30, lambda: NOW).ask(asked())
    assert (found.outcome, found.exit_bits) == (Outcome.NO_TOOL, None)


@pytest.mark.parametrize("recording", [HDD, NVME_JSON], ids=["text", "document"])
def test_what_was_printed_is_handed_on_word_for_word(recording):
    words = recording.read_text(encoding="utf-8")
    found = Smartctl("smartctl", 60, lambda: NOW, door=Told(said(words))).ask(asked())
    assert (found.outcome, found.answer) == (Outcome.READ, words)


def test_an_answer_too_long_to_be_kept_is_read_and_not_handed_on():
    words = HDD.read_text(encoding="utf-8") + "\n" * 300_000
    found = Smartctl("smartctl", 60, lambda: NOW, door=Told(said(words))).ask(asked())
    assert (found.outcome, found.answer) == (Outcome.READ, None)


def test_what_brought_no_reading_is_not_handed_on():
    found = Smartctl("smartctl", 60, lambda: NOW, door=Told(said("<html>"))).ask(asked())
    assert (found.outcome is Outcome.READ, found.answer) == (False, None)


def test_a_self_test_is_begun_with_the_type_that_reaches_the_drive_and_wakes_none():
    told, door = smartctl(said("Testing has begun.\n"))
    assert told.begin_test(asked(), extended=False) is None
    assert told.begin_test(asked(type_=None), extended=True) is None
    assert [words[1:] for words in door.asked] == [
        ["-n", "standby", "-d", "sat", "-t", "short", "/dev/sdx"],
        ["-n", "standby", "-t", "long", "/dev/sdx"],
    ]


def test_why_a_self_test_did_not_begin_is_told_in_the_tools_words_without_harm():
    told, _ = smartctl(said("head\n\nCan't start self-test without aborting current test \x1b[31m\n", 4))
    refused = told.begin_test(asked(), extended=False)
    assert refused is not None
    assert "exit status 4" in refused
    assert "current test" in refused
    assert "\x1b" not in refused
    told, _ = smartctl(Answer(ending=Ending.TIMED_OUT))
    assert told.begin_test(asked(), extended=False)
