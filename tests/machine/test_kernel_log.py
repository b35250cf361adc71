import os
from pathlib import Path

import pytest

from diskwatch.errors import DiskwatchError
from diskwatch.machine.kernel_log import KernelLog
from diskwatch.records.listened import LeftOff


def record(sequence, text="said"):
    return f"3,{sequence},{sequence * 1000},-;{text}\n SUBSYSTEM=block\n"


def texts(lines):
    return [line.text for line in lines]


@pytest.fixture
def source(tmp_path):
    path = tmp_path / "kmsg"
    path.write_text(record(1, "one") + record(2, "two"))
    return path


def test_a_file_is_read_from_its_start_and_then_followed(source):
    log = KernelLog(source)
    assert texts(log.read()) == ["one", "two"]
    assert log.read() == ()
    with source.open("a") as file:
        file.write(record(3, "three"))
    assert texts(log.read()) == ["three"]
    log.close()


def test_half_a_record_waits_for_its_other_half(source):
    log = KernelLog(source)
    with source.open("a") as file:
        file.write("3,3,3000,-;thr")
    assert len(log.read()) == 2
    with source.open("a") as file:
        file.write("ee\n")
    assert texts(log.read()) == ["three"]
    log.close()


def test_what_was_read_before_a_restart_is_not_read_again(source):
    log = KernelLog(source)
    log.read()
    left_off = log.left_off
    log.close()
    source.write_text(record(1, "one") + record(2, "two") + record(3, "three"))
    again = KernelLog(source, left_off)
    assert texts(again.read()) == ["three"]
    assert again.left_off.sequence == 3
    again.close()


def test_the_log_of_another_boot_is_read_whole(source):
    log = KernelLog(source, LeftOff(log="another boot", sequence=900))
    assert len(log.read()) == 2
    log.close()


def test_a_file_that_was_begun_anew_is_read_from_its_start(source):
    log = KernelLog(source)
    log.read()
    source.write_text("3,1,77,-;new\n")
    assert texts(log.read()) == ["new"]
    log.close()


def test_a_file_without_an_end_costs_no_memory(source):
    source.write_bytes(b"x" * 300_000)
    log = KernelLog(source)
    assert log.read() == ()
    assert len(log._rest) <= 65_536
    log.close()


def test_a_log_that_is_not_there_or_is_something_else_is_told_with_a_cure(tmp_path):
    with pytest.raises(DiskwatchError, match=r"cannot be read: No such file.*\[kernel_log\] source"):
        KernelLog(tmp_path / "none")
    with pytest.raises(DiskwatchError, match="is no kernel log"):
        KernelLog(tmp_path)
    os.mkfifo(tmp_path / "pipe")
    with pytest.raises(DiskwatchError, match="is no kernel log"):
        KernelLog(tmp_path / "pipe")


def test_a_log_that_may_not_be_read_is_told_with_a_cure(source, monkeypatch):
    def refuse(*_, **__):
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr("diskwatch.machine.kernel_log.os.open", refuse)
    with pytest.raises(DiskwatchError, match="watch as root"):
        KernelLog(source)


class Ring:
    """The kernel's own log, one record a read."""

    def __init__(self, *records):
        self.records = list(records)

    def read(self, _file, _most):
        if not self.records:
            raise BlockingIOError
        one = self.records.pop(0)
        if isinstance(one, OSError):
            raise one
        return one.encode()


@pytest.fixture
def ring(monkeypatch):
    made = Ring()
    monkeypatch.setattr("diskwatch.machine.kernel_log.os.read", made.read)
    monkeypatch.setattr("diskwatch.machine.kernel_log.stat.S_ISCHR", lambda _mode: True)
    return made


def test_the_kernels_own_log_belongs_to_a_boot(source, ring, tmp_path):
    boot = tmp_path / "sys/kernel/random"
    boot.mkdir(parents=True)
    (boot / "boot_id").write_text("11111111-2222-3333-4444-555555555555\n")
    ring.records = [record(4), record(5)]
    log = KernelLog(source, LeftOff(log="11111111-2222-3333-4444-555555555555", sequence=4), proc_root=tmp_path)
    assert [line.sequence for line in log.read()] == [5]
    assert log.left_off == LeftOff(log="11111111-2222-3333-4444-555555555555", sequence=5)
    log.close()


def test_records_that_were_overwritten_are_counted_and_the_rest_is_read(source, ring):
    ring.records = [
        record(4),
        BrokenPipeError(32, "Broken pipe"),
        record(9),
        OSError(22, "Invalid"),
        record(10),
    ]
    log = KernelLog(source)
    assert [line.sequence for line in log.read()] == [4, 9, 10]
    assert log.lost == 4
    log.close()


def test_what_was_lost_while_nobody_listened_is_counted_too(source, ring, tmp_path):
    ring.records = [record(9)]
    log = KernelLog(source, LeftOff(log="unknown", sequence=4), proc_root=tmp_path)
    log.read()
    assert log.lost == 4
    log.close()


def test_no_more_is_read_at_once_than_was_asked_for(source, ring):
    ring.records = [record(number) for number in range(10)]
    log = KernelLog(source)
    assert len(log.read(3)) == 3
    assert len(log.read()) == 7
    log.close()


def test_the_log_of_this_machine_can_be_followed_where_it_may_be_read():
    try:
        log = KernelLog(Path("/dev/kmsg"))
    except DiskwatchError:
        pytest.skip("this user may not read the kernel's log, or there is none")
    assert log.live
    log.read()
    assert log.left_off.log
    log.close()


def test_any_number_of_records_that_were_read_before_hide_no_new_one(source, ring, tmp_path):
    ring.records = [record(number) for number in range(10_000)]
    log = KernelLog(source, LeftOff(log="unknown", sequence=9_990), proc_root=tmp_path)
    assert [line.sequence for line in log.read()] == list(range(9_991, 10_000))
    log.close()


def test_a_long_file_that_was_read_before_hides_no_new_line(source):
    text = "".join(record(number, "x" * 60) for number in range(6_000))
    source.write_text(text)
    log = KernelLog(source, LeftOff(log="3,0,0,-", sequence=5_998))
    assert [line.sequence for line in log.read()] == [5_999]
    log.close()


@pytest.mark.usefixtures("ring")
def test_a_log_that_only_fails_is_given_up(source, monkeypatch):
    def fail(*_):
        raise BrokenPipeError(32, "Broken pipe")

    monkeypatch.setattr("diskwatch.machine.kernel_log.os.read", fail)
    log = KernelLog(source)
    with pytest.raises(DiskwatchError, match="Broken pipe"):
        log.read()
    log.close()
