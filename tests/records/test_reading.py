from tests.samples import reading


def test_a_signal_is_found_by_name_and_one_that_is_not_there_is_none():
    found = reading(pending_sectors=0, self_assessment="passed", temperature=None)
    assert found.get("pending-sectors") == 0
    assert found.get("crc-errors") is None
    assert found.get("temperature") is None


def test_a_word_is_no_number():
    found = reading(pending_sectors=3, self_assessment="passed")
    assert found.number("pending-sectors") == 3
    assert found.number("self-assessment") is None
