"""What the drive states of itself besides its signals: attribute table, self-tests, its own words."""

from diskwatch.history.proof import Printed
from diskwatch.records import Attribute, Reading, SelfTest
from diskwatch.ticket.part import Json, Part, at, short

_MOST_ROWS = 256
_NEVER = "The drive has not been read yet."


def attributes_part(reading: Reading | None) -> Part:
    """An ATA drive's attribute table as last read."""
    if reading is None:
        return Part(value=None, reason=_NEVER)
    return Part(value=[_attribute(one) for one in reading.attributes[:_MOST_ROWS]])


def _attribute(one: Attribute) -> Json:
    return {
        "number": one.number,
        "name": short(one.name),
        "value": one.value,
        "worst": one.worst,
        "threshold": one.threshold,
        "prefail": one.prefail,
        "raw": short(one.raw),
        "failing": one.failing.value if one.failing else None,
    }


def self_tests_part(reading: Reading | None) -> Part:
    """The self-test log as last read, newest first."""
    if reading is None:
        return Part(value=None, reason=_NEVER)
    return Part(value=[_self_test(one) for one in reading.self_tests[:_MOST_ROWS]])


def _self_test(one: SelfTest) -> Json:
    return {
        "name": short(one.name),
        "result": short(one.result),
        "extended": one.extended,
        "passed": one.passed,
        "unreadable": one.unreadable,
        "hours": one.hours,
        "lba": one.lba,
    }


def answer_part(printed: Printed | None, most: int) -> Part:
    """What smartctl last printed of the drive, word for word.

    Args:
        printed: what was kept of it.
        most: letters at most.
    """
    if printed is None:
        return Part(
            value=None,
            reason="No answer of this drive was kept; one is kept a day, and one whenever its call changes.",
        )
    text = printed.text
    return Part(value={"at": at(printed.at), "text": text[:most], "left_out": max(0, len(text) - most)})
