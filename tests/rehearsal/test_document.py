from diskwatch.machine.reading import understood
from diskwatch.records import Failing, Kind
from diskwatch.rehearsal.document import document
from tests.rehearsal.examples import alone, disk, hdd, nvme, ssd


def read(one):
    return understood((), document(one.told()), type_=None, path=one.spec.device)


def test_the_real_reader_knows_each_sort_of_drive_by_its_answer():
    for spec, kind in ((hdd(), Kind.HDD), (ssd(), Kind.SSD), (nvme(), Kind.NVME)):
        one = alone(spec)
        drive = read(one).drive
        assert drive == one.drive
        assert drive is not None
        assert drive.kind is kind


def test_counters_come_through_the_real_reader():
    one = alone(hdd(reallocated=24, pending=8, crc=3))
    reading = read(one).reading
    signals = ("reallocated-sectors", "pending-sectors", "crc-errors", "power-on-hours", "self-assessment")
    assert [reading.get(signal) for signal in signals] == [24, 8, 3, 1000, "passed"]
    assert reading.warning_celsius == 60


def test_an_nvme_drive_counts_data_units_of_512000_bytes_rounded_up():
    # A unit is 1000 times 512 bytes, rounded up (NVM Express, SMART / Health log 02h, bytes 32 to 63).
    one = alone(nvme())
    one.drive_written, one.drive_read = 512_001, 1_024_000
    log = one.told().log
    assert (log["data_units_written"], log["data_units_read"]) == (2, 2)
    reading = read(one).reading
    assert reading.get("data-written") == 1_024_000


def test_a_failed_test_and_a_failing_attribute_come_through_as_such():
    one = disk(hdd(pending=8))
    one.surface.spares = 0
    one.surface.reallocated = 40_000
    one.test(extended=True)
    reading = read(one).reading
    assert reading.get("self-assessment") == "failed"
    assert reading.self_tests[0].unreadable
    assert {row.number for row in reading.attributes if row.failing is Failing.NOW} == {5}
