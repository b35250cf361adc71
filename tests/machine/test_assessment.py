import pytest

from diskwatch.machine.assessment import assessment
from diskwatch.machine.held import Family
from diskwatch.machine.text import Sheet

# Wordings of smartctl 7.3, codes of the standard's table of additional sense codes.
SAID = [
    ("FAILURE PREDICTION THRESHOLD EXCEEDED", 0x5D, 0x00, "failed", None),
    ("SERVO IMPENDING FAILURE SEEK ERROR RATE TOO HIGH", 0x5D, 0x43, "failed", None),
    ("FAILURE PREDICTION THRESHOLD EXCEEDED: ascq=0x7f", 0x5D, 0x7F, "failed", None),
    ("FAILURE PREDICTION THRESHOLD EXCEEDED (FALSE)", 0x5D, 0xFF, None, "test"),
    ("WARNING - SPECIFIED TEMPERATURE EXCEEDED", 0x0B, 0x01, None, "temperature"),
    ("WARNING - ENCLOSURE DEGRADED", 0x0B, 0x02, None, "enclosure"),
    ("WARNING - BACKGROUND SELF-TEST FAILED", 0x0B, 0x03, None, "background-self-test"),
    ("WARNING - BACKGROUND MEDIUM SCAN DETECTED MEDIUM ERROR", 0x0B, 0x05, None, "background-scan"),
    ("WARNING - NON-VOLATILE CACHE NOW VOLATILE", 0x0B, 0x06, None, "write-cache"),
    ("WARNING - POWER LOSS EXPECTED", 0x0B, 0x08, None, "power-loss"),
    ("WARNING - DEVICE STATISTICS NOTIFICATION ACTIVE", 0x0B, 0x09, None, "statistics"),
    ("WARNING - LOW OPERATING TEMPERATURE LIMIT EXCEEDED", 0x0B, 0x0D, None, "temperature"),
    ("WARNING - HIGH CRITICAL HUMIDITY LIMIT EXCEEDED", 0x0B, 0x0E, None, "humidity"),
    ("WARNING - MICROCODE SECURITY AT RISK", 0x0B, 0x12, None, "firmware"),
    ("WARNING - PHYSICAL ELEMENT STATUS CHANGE", 0x0B, 0x14, None, "element"),
    ("WARNING", 0x0B, 0x00, None, "unnamed"),
]


def read(document, *lines, family=Family.SCSI):
    values = {value.signal: value for value in assessment(family, document, Sheet.of(lines))}
    assert all((value.value is None) is (value.reason is not None) for value in values.values())
    return {signal: value.value for signal, value in values.items()}


@pytest.mark.parametrize(("words", "code", "qualifier", "verdict", "warning"), SAID)
def test_document_text_and_words_agree_on_what_a_scsi_drive_says(words, code, qualifier, verdict, warning):
    expected = {"self-assessment": verdict} | ({"drive-warning": warning} if warning else {})
    document = {"smart_status": {"passed": False, "scsi": {"asc": code, "ascq": qualifier, "ie_string": words}}}
    line = f"SMART Health Status: {words} [asc={code:x}, ascq={qualifier:x}]"
    assert read(document) == expected
    assert read(None, line) == expected
    assert read(document, line) == expected
    assert read({"smart_status": {"passed": False}}, line) == expected
    assert read(None, f"SMART Health Status: {words}") == expected


def test_a_scsi_drive_that_is_well_has_a_verdict_and_no_warning():
    assert read({"smart_status": {"passed": True}}) == {"self-assessment": "passed"}
    assert read(None, "SMART Health Status: OK") == {"self-assessment": "passed"}


def test_what_no_table_knows_is_no_verdict_and_a_document_without_codes_is_taken_at_its_word():
    assert read(None, "SMART Health Status: RAINY [asc=11, ascq=0]") == {"self-assessment": None}
    assert read({"smart_status": {"passed": False}}) == {"self-assessment": "failed"}
    assert read({"smart_status": {"passed": False, "scsi": {"asc": -1, "ascq": "x"}}}) == {
        "self-assessment": "failed"
    }


def test_an_ata_verdict_that_says_warning_is_no_scsi_warning():
    line = "SMART overall-health self-assessment test result: WARNING (FALSE)"
    assert read(None, line, family=Family.ATA) == {"self-assessment": None}
    assert read(None) == {}
