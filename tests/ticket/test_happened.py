from diskwatch.records import Entry
from diskwatch.ticket.happened import events_part

ENTRIES = tuple(
    Entry(at=number * 60, drive=1, kind="rise", text=f"entry {number}", data={"n": number})
    for number in range(10)
)


def test_events_are_told_in_order_with_their_numbers():
    part, left_out = events_part(ENTRIES, None, 100)
    assert left_out == 0
    assert isinstance(part.value, list)
    assert part.value[3] == {"at": "1970-01-01T00:03:00Z", "kind": "rise", "text": "entry 3", "data": {"n": 3}}


def test_what_is_left_out_is_the_oldest_and_is_counted():
    part, left_out = events_part(ENTRIES, 240, 4)
    assert isinstance(part.value, list)
    assert [one["text"] for one in part.value] == [f"entry {number}" for number in (6, 7, 8, 9)]
    assert left_out == 6
    assert events_part(ENTRIES, None, 0)[1] == 10
