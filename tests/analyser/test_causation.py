import pytest

from diskwatch import analyser
from diskwatch.analyser.causation import causation
from tests.analyser.lives import lived
from tests.samples import DAY, NOON, read


def rows_of(state):
    """The rows behind a state's call."""
    return causation(state)


def test_the_posterior_of_the_chain_is_the_probability_that_the_call_names():
    state = lived(*(read(NOON + day * DAY, crc_errors=day // 10, pending_sectors=0) for day in range(40)))[
        -1
    ].state
    found = rows_of(state)
    assert next(iter(found.posterior)) == state.call.cause.value == "link"
    assert found.posterior["link"] == pytest.approx(state.call.cause_probability)
    assert sum(found.posterior.values()) == pytest.approx(1)
    assert "sound" not in found.posterior


def test_each_sign_stands_with_whether_it_showed_and_its_cells_with_their_source():
    state = lived(*(read(NOON + day * DAY, crc_errors=day // 10, pending_sectors=0) for day in range(40)))[
        -1
    ].state
    rows = {row.sign: row for row in rows_of(state).rows}
    assert (rows["CRC counter"].showed, rows["media counter"].showed) == (True, False)
    (link,) = [cell for cell in rows["CRC counter"].cells if cell.cause == "link"]
    assert (link.probability, link.source) == (0.9, "proposal")
    assert len(rows["CRC counter"].cells) == 3


def test_where_the_table_was_not_asked_there_are_no_rows():
    assert causation(analyser.start()) is None
    assert causation(lived(read(NOON, pending_sectors=4))[-1].state) is None
    assert causation(lived(read(NOON, percentage_used=120))[-1].state) is None
