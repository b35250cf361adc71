import logging
import os
import subprocess
import sys

import pytest

from diskwatch.machine import held
from diskwatch.machine.held import Family, device_of
from tests.machine.recordings import FIXTURES, text_of

SAS = text_of(FIXTURES / "invented_sas_megaraid_failing" / "all.txt").splitlines()
ATA = text_of(FIXTURES / "invented_hdd_failing" / "all.txt").splitlines()


def test_a_sas_drive_is_read_by_the_library_without_any_process(monkeypatch: pytest.MonkeyPatch):
    def forbidden(*_args: object, **_more: object) -> None:
        raise AssertionError("a process was started")

    device_of(SAS, Family.SCSI)  # the import itself may look for the command
    monkeypatch.setattr(subprocess, "Popen", forbidden)
    monkeypatch.setattr("pySMART.smartctl.Popen", forbidden)
    device = device_of(SAS, Family.SCSI)
    assert device is not None
    assert device.diagnostics.Uncorrected_Reads == 14
    assert len(device.tests) == 2


def test_a_short_headline_loses_no_line_and_a_table_cut_off_is_read_to_its_end():
    cut = ATA[3 : ATA.index(next(line for line in ATA if line.startswith("  9 Power_On")))]
    device = device_of(cut, Family.ATA)
    assert device is not None
    assert device.model == "Borealis Tundra BT4000"
    assert [row.num for row in device.attributes if row is not None] == [1, 3, 4, 5, 7]


def test_a_text_on_which_the_library_gives_up_is_none():
    broken = [
        line.replace("Elements in grown defect list: 873", "Elements in grown defect list: many")
        for line in SAS
    ]
    assert device_of(broken, Family.SCSI) is None
    assert device_of([], Family.ATA) is None


def test_importing_the_library_leaves_the_process_as_it_was():
    # A process of its own: here the library was imported long ago.
    program = (
        "import logging, os\n"
        "from diskwatch.machine.held import Family, device_of\n"
        "before = logging.getLoggerClass(), os.environ.get('LANG')\n"
        "assert device_of(['Device Model: X'], Family.ATA).model == 'X'\n"
        "assert (logging.getLoggerClass(), os.environ.get('LANG')) == before, 'changed'\n"
        "assert type(logging.getLogger('later')) is logging.Logger\n"
    )
    for language in (None, "de_DE.UTF-8"):
        surroundings = {key: value for key, value in os.environ.items() if key != "LANG"}
        if language is not None:
            surroundings["LANG"] = language
        done = subprocess.run(
            [sys.executable, "-W", "error", "-c", program], env=surroundings, capture_output=True, check=False
        )
        assert done.returncode == 0, done.stderr.decode()


def test_the_library_is_not_imported_with_the_module():
    program = "import sys, diskwatch.machine.smartctl; sys.exit('pySMART' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", program], check=False).returncode == 0


def test_nothing_can_be_set_on_the_wrapper():
    _device, wrapper = held._library()
    with pytest.raises(TypeError, match="standby"):
        wrapper(ATA).add_options(["-n", "standby"])


def test_the_family_is_told_to_the_library_so_that_it_does_not_ask_for_it():
    assert [family.value for family in Family] == ["sat", "nvme", "scsi"]
    assert logging.getLoggerClass() is logging.Logger
