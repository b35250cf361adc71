import pytest

from diskwatch.records import Identity


@pytest.mark.parametrize(
    ("wwn", "serial", "weak"),
    [(None, None, True), ("naa.5", None, False), (None, "S", False), ("naa.5", "S", False)],
)
def test_only_a_drive_without_name_and_serial_is_known_weakly(wwn, serial, weak):
    assert Identity(wwn=wwn, model="M", serial=serial, path="/dev/sda").weak is weak
