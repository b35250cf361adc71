import pytest

from diskwatch.records import Identity


@pytest.mark.parametrize(
    ("wwn", "serial", "weak"),
    [
        (None, None, True),
        (None, "XXXXXXXX", True),
        ("naa.5000000000000000", "0000", True),
        ("naa.5f00d00000000001", None, False),
        (None, "S", False),
        ("naa.5f00d00000000001", "S", False),
    ],
)
def test_only_a_drive_without_name_and_serial_is_known_weakly(wwn, serial, weak):
    assert Identity(wwn=wwn, model="M", serial=serial, path="/dev/sda").weak is weak
