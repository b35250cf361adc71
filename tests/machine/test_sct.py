from diskwatch.machine.sct import limits, may_be_asked
from diskwatch.machine.text import Sheet

SAYS_SO = Sheet.of(["SCT capabilities:              (0x003d) SCT Status supported."])
STATUS = (
    "SCT Status Version:                  3",
    "Current Temperature:                    37 Celsius",
    "Specified Max Operating Temperature:    60 Celsius",
)
MADE_FOR_70 = (
    "Device Statistics (GP Log 0x04)",
    "0x05  0x058  1              70  ---  Specified Maximum Operating Temperature",
)


def test_a_drive_that_says_it_has_sct_status_may_be_asked():
    assert may_be_asked(None, SAYS_SO, "Borealis Tundra BT4000")
    assert may_be_asked({"ata_sct_capabilities": {"value": 61}}, Sheet.of([]), "Borealis Tundra BT4000")
    assert not may_be_asked(None, Sheet.of([]), "Borealis Tundra BT4000")


def test_the_family_that_it_can_freeze_is_never_asked_nor_a_drive_whose_model_is_not_known():
    assert not may_be_asked(None, SAYS_SO, "TOSHIBA DT01ACA300")
    assert not may_be_asked(None, SAYS_SO, "toshiba  dt01aca050")
    assert not may_be_asked(None, SAYS_SO, None)


def test_the_limit_of_the_sct_status_comes_before_the_one_of_log_04h():
    assert limits(None, Sheet.of([*STATUS, *MADE_FOR_70])) == (60, None)
    assert limits(None, Sheet.of(MADE_FOR_70)) == (70, None)
    told = {"ata_sct_status": {"temperature": {"op_limit_max": 55, "limit_max": 65}}}
    assert limits(told, Sheet.of(STATUS)) == (55, 65)


def test_limits_that_no_drive_has_are_none():
    assert limits({"temperature": {"op_limit_max": 0, "limit_max": 999}}, Sheet.of([])) == (None, None)
