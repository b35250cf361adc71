import json

import pytest

from diskwatch.history import packing
from diskwatch.history.taking import TAKES, Into
from diskwatch.records import Attribute, Failing, Reading
from tests.history.examples import NOON

READING = Reading(
    attributes=(
        Attribute(
            number=5,
            name="Invented",
            value=100,
            worst=99,
            threshold=10,
            prefail=True,
            raw="3",
            failing=Failing.PAST,
        ),
    ),
    warning_celsius=60,
)


def told(reading):
    return {"reading": json.loads(packing.unpacked(packing.reading_packed(reading)))}


@pytest.fixture
def into(history, known):
    return Into(history._db.conn, known.number)


def kept(into):
    found = into.connection.execute("SELECT at, packed FROM last_reading").fetchall()
    return [(at, packing.reading(packed)) for at, packed in found]


def test_the_last_reading_arrives_and_a_later_one_stays(into):
    TAKES["reading"](into, NOON, told(READING))
    assert kept(into) == [(NOON, READING)]
    TAKES["reading"](into, NOON - 9, told(Reading()))
    assert kept(into) == [(NOON, READING)]
    TAKES["reading"](into, NOON + 9, told(Reading()))
    assert kept(into) == [(NOON + 9, Reading())]


@pytest.mark.parametrize("odd", [None, [], {}, {"attributes": [[1]], "self_tests": [], "limits": [1, 2]}])
def test_what_is_no_reading_is_refused(into, odd):
    with pytest.raises((ValueError, KeyError, TypeError)):
        TAKES["reading"](into, NOON, {"reading": odd})
    assert kept(into) == []


def test_what_is_known_here_already_stays(into):
    for device in ("/dev/sda", "/dev/sdz"):
        TAKES["place"](into, NOON + 5, {"device": device, "bay": None})
    found = into.connection.execute("SELECT device FROM plugged WHERE since = ?", (NOON + 5,)).fetchall()
    assert found == [("/dev/sda",)]
