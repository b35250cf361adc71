"""The player behaves as smartctl does, as far as the product can tell."""

import csv
import json
import os
import re
import shutil
import subprocess
import tomllib
from collections.abc import Mapping
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import pytest

from tests.player import ANSWERS, WORKSHOP, calls, lay, lay_plan, set_day

READ = ("-n", "standby,3", "-d", "sat", "--all", "/dev/sda")
SISTER = {"node": "/dev/sda", "type": "sat", "folder": "invented_hdd_sister"}
SERIES = {"node": "/dev/sda", "type": "sat", "folder": "invented_hdd_series"}


def run(command: Path | str, *argv: str, timeout: float = 20) -> subprocess.CompletedProcess[str]:
    return subprocess.run([command, *argv], capture_output=True, text=True, timeout=timeout, check=False)


def pending(done: subprocess.CompletedProcess[str]) -> int:
    found = re.search(r"^197 .* (\d+)$", done.stdout, re.MULTILINE)
    assert found is not None
    return int(found[1])


def test_an_answer_is_the_recorded_text_byte_for_byte(tmp_path):
    command = lay(tmp_path, [SISTER])
    done = subprocess.run([command, *READ], capture_output=True, timeout=20, check=False)
    assert done.stdout == (ANSWERS / "invented_hdd_sister" / "all.txt").read_bytes()
    assert done.returncode == 0


@pytest.mark.parametrize(
    ("folder", "type_", "status"),
    [
        ("invented_hdd_failing", "sat", 8 + 16),
        ("invented_hdd_unreadable", "sat", 64 + 128),
        ("invented_sas_megaraid_failing", "megaraid,7", 8 + 128),
        ("invented_usb_bridge_unknown", "", 1),
        ("invented_virtual_no_smart", "sat", 4),
        ("invented_scsi_short_inquiry", "scsi", 2),
        ("invented_nvme_hot", "nvme", 8),
    ],
)
def test_the_exit_status_is_what_the_manual_gives_for_the_text(tmp_path, folder, type_, status):
    command = lay(tmp_path, [{"node": "/dev/x", "type": type_, "folder": folder}])
    kind = ["-d", type_] if type_ else []
    done = run(command, *kind, "--all", "/dev/x")
    assert done.returncode == status
    assert str(status) in (ANSWERS / folder / "origin.txt").read_text()


def test_a_json_answer_carries_the_text_and_the_status(tmp_path):
    command = lay(tmp_path, [{"node": "/dev/sda", "type": "sat", "folder": "invented_hdd_failing"}])
    done = run(command, "--json=o", *READ)
    told = json.loads(done.stdout)
    assert told["smartctl"]["output"] == (ANSWERS / "invented_hdd_failing/all.txt").read_text().splitlines()
    assert told["smartctl"]["exit_status"] == done.returncode == 24
    assert told["smartctl"]["argv"][1:] == ["--json=o", *READ]
    assert told["device"] == {
        "name": "/dev/sda",
        "info_name": "/dev/sda [SAT]",
        "type": "sat",
        "protocol": "ATA",
    }


def test_a_recorded_document_is_given_with_the_text_in_it(tmp_path):
    command = lay(tmp_path, [{"node": "/dev/nvme7", "type": "nvme", "folder": "invented_nvme_json"}])
    told = json.loads(run(command, "--json=o", "-d", "nvme", "--all", "/dev/nvme7").stdout)
    text = (ANSWERS / "invented_nvme_json" / "all.txt").read_text()
    assert told["nvme_smart_health_information_log"]["data_units_written"] == 66_018_442
    assert told["smartctl"]["output"] == text.splitlines()
    assert told["device"]["name"] == "/dev/nvme7"


def test_an_old_tool_refuses_json_in_its_own_words(tmp_path):
    command = lay(tmp_path, [SISTER], json=False)
    done = run(command, "--json=o", *READ)
    assert done.returncode == 1
    assert "=======> UNRECOGNIZED OPTION: json\n" in done.stdout
    assert run(command, *READ).returncode == 0


def test_an_older_tool_refuses_a_status_for_standby(tmp_path):
    command = lay(tmp_path, [SISTER], json=False, standby_status=False)
    done = run(command, *READ)
    assert done.returncode == 1
    assert "INVALID ARGUMENT TO -n: standby,3" in done.stdout
    assert run(command, "-n", "standby", *READ[2:]).returncode == 0


@pytest.mark.skipif(shutil.which("smartctl") is None, reason="smartctl is not installed here")
@pytest.mark.parametrize(
    "argv",
    [
        ("--bogus", "/dev/no-such"),
        ("--all",),
        ("--all", "/dev/no-such"),
        ("-d", "sat", "--all", "/dev/no-such"),
        ("-d", "nvme", "--all", "/dev/no-such"),
        ("-n", "nonsense", "-d", "sat", "--all", "/dev/no-such"),
        ("--all", "/dev/no-such", "/dev/nor-this"),
    ],
)
def test_refusals_are_worded_as_the_real_tool_words_them(tmp_path, argv):
    real = run("smartctl", *argv)
    if "smartctl 7.3 " not in real.stdout:
        pytest.skip("the words are those of smartctl 7.3, and another one is installed here")
    played = run(lay(tmp_path, [SISTER]), *argv)
    assert played.stdout.splitlines()[3:] == real.stdout.splitlines()[3:]
    assert played.returncode == real.returncode


def test_a_sleeping_drive_is_woken_only_by_a_call_without_standby(tmp_path):
    command = lay(tmp_path, [SISTER | {"asleep": True}])
    done = run(command, *READ)
    assert (done.returncode, "STANDBY" in done.stdout) == (3, True)
    assert run(command, "-d", "sat", "--all", "/dev/sda").returncode == 0
    assert [call.woke for call in calls(command)] == [False, True]


def test_a_refused_and_an_absent_drive_say_so_with_status_2(tmp_path):
    command = lay(tmp_path, [SISTER | {"refused": True}, SISTER | {"node": "/dev/sdb", "absent": True}])
    refused, absent = run(command, *READ), run(command, *READ[:-1], "/dev/sdb")
    assert (refused.returncode, absent.returncode) == (2, 2)
    assert "Smartctl open device: /dev/sda [SAT] failed: Permission denied" in refused.stdout
    assert "Smartctl open device: /dev/sdb [SAT] failed: No such device" in absent.stdout
    assert "/dev/sdb" not in run(command, "--scan").stdout


def test_a_hanging_drive_is_logged_before_it_hangs(tmp_path):
    command = lay(tmp_path, [SISTER | {"hang": 60.0}])
    with pytest.raises(subprocess.TimeoutExpired):
        run(command, *READ, timeout=0.5)
    assert [call.argv for call in calls(command)] == [READ]


def test_noise_is_no_text_and_a_cut_answer_ends_early(tmp_path):
    command = lay(tmp_path, [SISTER | {"garbage": True}, SISTER | {"node": "/dev/sdb", "cut": 700}])
    noise = subprocess.run([command, *READ], capture_output=True, timeout=20, check=False)
    with pytest.raises(UnicodeDecodeError):
        noise.stdout.decode()
    assert len(run(command, *READ[:-1], "/dev/sdb").stdout) == 700


def test_days_follow_each_other_by_calls_and_the_last_one_stays(tmp_path):
    command = lay(tmp_path, [SERIES])
    assert [pending(run(command, *READ)) for _ in range(4)] == [0, 24, 16, 16]


def test_a_day_chosen_for_the_machine_goes_before_the_count_of_calls(tmp_path):
    command = lay(tmp_path, [SERIES])
    set_day(command, 2)
    assert [pending(run(command, *READ)) for _ in range(2)] == [24, 24]


def test_scanning_moves_no_drive_on(tmp_path):
    command = lay(tmp_path, [SERIES])
    run(command, "--scan")
    assert pending(run(command, *READ)) == 0


def test_steps_are_laid_over_a_drive_in_turn(tmp_path):
    command = lay(tmp_path, [SISTER | {"steps": [{}, {"asleep": True}, {"refused": True}]}])
    assert [run(command, *READ).returncode for _ in range(4)] == [0, 3, 2, 2]


def test_drives_behind_one_node_are_told_apart_by_type(tmp_path):
    bus = {"node": "/dev/bus/0", "folder": "invented_sas_megaraid_failing", "type": "megaraid,7"}
    other = {"node": "/dev/bus/0", "folder": "megaraid_ph_sata_hdd_0", "type": "megaraid,16"}
    command = lay(tmp_path, [bus, other])
    assert "INVENTED-NW-0041" in run(command, "-d", "megaraid,7", "--all", "/dev/bus/0").stdout
    assert "INVENTED-NW-0041" not in run(command, "-d", "megaraid,16", "--all", "/dev/bus/0").stdout
    assert run(command, "-d", "megaraid,8", "--all", "/dev/bus/0").returncode == 2


def test_a_sata_disk_asked_as_scsi_gives_itself_away_and_no_more(tmp_path):
    command = lay(tmp_path, [SISTER | {"listed_as": "scsi"}])
    assert run(command, "--scan").stdout == "/dev/sda -d scsi # /dev/sda, SCSI device\n"
    done = run(command, "-d", "scsi", "--all", "/dev/sda")
    assert done.returncode == 2
    assert "Probable ATA device behind a SAT layer" in done.stdout


def test_a_log_asked_for_besides_stands_behind_the_answer_and_one_that_is_lacking_sets_bit_2(tmp_path):
    command = lay(tmp_path, [{**SISTER, "folder": "invented_hdd_statistics"}])
    with_log = run(command, "-d", "sat", "--all", "-l", "devstat", "/dev/sda")
    assert with_log.returncode == 0
    assert "Number of Reallocated Logical Sectors" in with_log.stdout
    assert with_log.stdout.count("=== START OF READ SMART DATA SECTION ===") == 1
    assert run(command, "-d", "sat", "--all", "-l", "scttempsts", "/dev/sda").returncode == 4


def test_calls_at_the_same_moment_are_all_logged_and_each_gets_its_turn(tmp_path):
    command = lay(tmp_path, [SISTER | {"steps": [{"status": number} for number in range(8)]}])
    with ThreadPoolExecutor(4) as pool:
        found = [done.returncode for done in pool.map(lambda _: run(command, *READ), range(8))]
    assert sorted(found) == list(range(8))
    assert len(calls(command)) == len({call.pid for call in calls(command)}) == 8


def test_the_command_works_through_a_link_and_through_the_environment(tmp_path):
    laid = lay(tmp_path / "laid", [SISTER])
    other = tmp_path / "elsewhere"
    other.mkdir()
    (other / "smartctl").symlink_to(laid)
    shutil.copyfile(laid.parent / "machine.toml", other / "machine.toml")
    assert run(other / "smartctl", *READ).returncode == 0
    assert len(calls(other / "smartctl")) == 1
    named = os.environ | {"DISKWATCH_PLAYER": str(laid.parent / "machine.toml")}
    source = ANSWERS.parent / "player" / "smartctl"
    done = subprocess.run([source, *READ], env=named, capture_output=True, timeout=20, check=False)
    assert done.returncode == 0
    assert len(calls(laid)) == 1


def test_the_workshop_lists_every_drive_that_it_should(tmp_path):
    command = lay_plan(tmp_path)
    drives = tomllib.loads(WORKSHOP.read_text())["drive"]
    places = [(drive["node"], drive["type"]) for drive in drives]
    assert len(places) == len(set(places)) >= 30
    listed = [line.split(" ")[0] for line in run(command, "--scan").stdout.splitlines()]
    hidden = {drive["node"] for drive in drives if drive.get("absent") or drive.get("listed") is False}
    assert listed == [drive["node"] for drive in drives if drive["node"] not in hidden]
    told = json.loads(run(command, "--scan", "--json=o").stdout)
    assert [device["name"] for device in told["devices"]] == listed


def test_the_workshop_answers_for_every_drive_in_text_and_json(tmp_path):
    command = lay_plan(tmp_path)
    drives = [
        drive
        for drive in tomllib.loads(WORKSHOP.read_text())["drive"]
        if not {"hang", "garbage"} & drive.keys()
    ]
    with ThreadPoolExecutor(2) as pool:
        answers = pool.map(lambda drive: run(command, "--json=o", *asking(drive)), drives)
    for drive, done in zip(drives, answers, strict=True):
        assert json.loads(done.stdout)["smartctl"]["output"], drive["node"]


def asking(drive: Mapping[str, str]) -> tuple[str, ...]:
    return ("-n", "standby,3", *(("-d", drive["type"]) if drive["type"] else ()), "--all", drive["node"])


def test_the_index_names_every_folder_once_with_origin_and_licence():
    with (ANSWERS / "INDEX.csv").open(newline="") as index:
        rows = list(csv.DictReader(index))
    assert sorted(row["folder"] for row in rows) == sorted(
        folder.name for folder in ANSWERS.iterdir() if folder.is_dir()
    )
    assert {row["licence"] for row in rows} == {"LGPL-2.1-or-later", "Apache-2.0"}
    for row in rows:
        assert row["origin"], row["folder"]
        assert row["what"], row["folder"]


def test_invented_answers_say_so_and_the_others_do_not():
    for folder in (folder for folder in ANSWERS.iterdir() if folder.is_dir()):
        says = (folder / "origin.txt").exists()
        assert says == folder.name.startswith("invented_"), folder.name
        for answer in folder.glob("*.txt") if says else ():
            serial = re.search(r"^Serial [Nn]umber:\s+(\S+)", answer.read_text(), re.MULTILINE)
            assert serial is None or serial[1].startswith("INVENTED-"), answer
