import pytest

from diskwatch import analyser
from diskwatch.errors import HistoryTooNew
from tests.samples import DAY, NOON, read


def test_a_state_comes_back_to_the_same_bits():
    state = analyser.start()
    for day in range(30):
        state = analyser.advance(state, read(NOON + day * DAY, crc_errors=day, pending_sectors=day // 9)).state
    assert analyser.load(analyser.dump(state)) == state


def test_a_state_of_a_newer_version_is_refused():
    text = analyser.dump(analyser.start()).replace('"parameters":1', '"parameters":99')
    with pytest.raises(HistoryTooNew, match="99"):
        analyser.load(text)


def test_a_garbled_state_is_an_error_and_no_empty_one():
    with pytest.raises(ValueError, match="truncated"):
        analyser.load("{")
