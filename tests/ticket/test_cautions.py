from dataclasses import replace

from diskwatch.records import CallWord, DriveLine, Identity
from diskwatch.ticket.cautions import cautions
from tests.history.examples import a_call
from tests.samples import HDD, HERE, NOON, NVME

LINE = DriveLine(
    number=1, drive=HDD, place=HERE, label=None, first_seen=NOON, last_pass=None, call=a_call(CallWord.LOOK)
)


def test_a_hard_drive_may_fail_without_having_shown_anything():
    assert any("quarter of failed hard drives" in one for one in cautions(LINE))
    assert not any("quarter" in one for one in cautions(replace(LINE, drive=NVME)))


def test_keep_is_said_to_be_no_promise():
    assert any("no promise" in one for one in cautions(replace(LINE, call=a_call(CallWord.KEEP))))
    assert not any("no promise" in one for one in cautions(LINE))


def test_a_drive_that_nothing_tells_from_others_is_said_to_be_one():
    nobody = replace(HDD, identity=Identity(wwn=None, model="x", serial="0000", path="/dev/sda"))
    assert any("another's" in one for one in cautions(replace(LINE, drive=nobody)))
