import pytest

from diskwatch.machine.reading import understood
from diskwatch.rehearsal.document import document
from diskwatch.rehearsal.printed import lines
from diskwatch.rehearsal.workload import NOTHING
from tests.rehearsal.examples import alone, disk, hdd, hour, nvme, solid, ssd


def lived(spec):
    one = alone(spec)
    for step in range(40):
        span = hour(1_735_693_200 + step * 3600)
        one.live(span, one.workload.span(span.at, span.seconds, away=False))
    return one


SPECS = [hdd(reallocated=16, pending=8, crc=2), ssd(written_tb=20), nvme(written_tb=40)]


@pytest.mark.parametrize("spec", SPECS, ids=lambda one: one.kind)
def test_the_text_and_the_document_are_read_as_the_same_drive_and_values(spec):
    one = lived(spec)
    by_text = understood(lines(one.told()), None, type_=None, path=spec.device)
    by_document = understood((), document(one.told()), type_=None, path=spec.device)
    assert by_text.drive == by_document.drive == one.drive
    values = [{value.signal: value.value for value in two.reading.values} for two in (by_text, by_document)]
    assert values[0] == values[1]
    assert len(values[0]) > 8
    assert by_text.reading.warning_celsius == by_document.reading.warning_celsius == one.limit


def test_failing_attributes_and_failed_tests_are_printed_as_such():
    one = disk(hdd(pending=8))
    one.surface.spares, one.surface.reallocated = 0, 40_000
    one.test(extended=True)
    one.test(extended=False)
    by_text = understood(lines(one.told()), None, type_=None, path="/dev/sda").reading
    by_document = understood((), document(one.told()), type_=None, path="/dev/sda").reading
    assert by_text.self_tests == by_document.self_tests
    assert by_text.attributes == by_document.attributes
    assert by_text.get("self-assessment") == "failed"


def test_an_nvme_drives_errors_and_self_tests_come_through_both_ways():
    one = solid(nvme(cycles=5))
    one.cells.losses = 20_000.0
    for step in range(24 * 8):
        one.live(hour(1_735_693_200 + step * 3600), NOTHING)
    one.test(extended=True)
    one.test(extended=False)
    by_text = understood(lines(one.told()), None, type_=None, path="/dev/nvme0").reading
    by_document = understood((), document(one.told()), type_=None, path="/dev/nvme0").reading
    assert by_text.self_tests == by_document.self_tests == one.tests
    assert by_text.self_tests[1].unreadable
    entries = [reading.get("media-error-entries") for reading in (by_text, by_document)]
    assert entries == [min(16, one.cells.media_errors)] * 2
    assert by_text.get("error-log-entries") == 5 + one.cells.media_errors


def test_every_answer_says_that_it_is_invented():
    assert sum("INVENTED" in line for line in lines(lived(nvme()).told())) >= 3
