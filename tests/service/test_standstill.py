from diskwatch.service.standstill import Standstill
from tests.service.machines import counted

AT = 1_800_000_000
BOTH = {7: ("sda",), 8: ("nvme0n1", "nvme0n2")}


def lived(looks, drives, *, every=10.0):
    """What was told at each look."""
    still = Standstill()
    told = []
    for number, totals in enumerate(looks):
        entries = still.look(totals, drives, at=AT + int(number * every), steady=number * every)
        told.append([(entry.drive, entry.text.split(":")[0].split(",")[0]) for entry in entries])
    return still, told


def test_it_is_told_once_when_it_begins_and_once_when_it_is_over():
    stuck = {"sda": counted(5, in_flight=1)}
    _, told = lived(
        [*[stuck] * 7, {"sda": counted(6, in_flight=0)}, {"sda": counted(6, in_flight=0)}], {7: ("sda",)}
    )
    assert told == [
        [],
        [],
        [],
        [(7, "Requests to it have not moved for 30 seconds")],
        [],
        [],
        [],
        [(7, "Requests to it move again")],
        [],
    ]


def test_the_entry_holds_the_numbers_and_the_deed():
    still = Standstill()
    for number in range(4):
        entries = still.look({"sda": counted(5, in_flight=3)}, BOTH, at=AT, steady=number * 13.0)
    (entry,) = entries
    assert entry.data == {"seconds": 39, "in_flight": 3}
    assert "39 seconds: 3 under way, none answered" in entry.text
    assert "cable and power" in entry.text


def test_one_drive_that_stands_still_says_nothing_of_another():
    still, told = lived(
        [
            {
                "sda": counted(number, in_flight=2),
                "nvme0n1": counted(1, in_flight=0),
                "nvme0n2": counted(1, in_flight=4),
            }
            for number in range(5)
        ],
        BOTH,
    )
    assert still.blocks == {"nvme0n2"}
    assert [drive for look in told for drive, _ in look] == [8]


def test_a_drive_that_goes_away_while_it_stands_still_is_said_to_have_gone():
    stuck = {"sda": counted(5, in_flight=1)}
    still, told = lived([stuck, stuck, stuck, stuck, {}, {}], {7: ("sda",)})
    assert told[4:] == [[(7, "It went away while its requests had not moved for about 40 seconds.")], []]
    assert still.blocks == frozenset()


def test_a_drive_that_is_no_longer_watched_leaves_no_standstill_behind():
    still = Standstill()
    stuck = {"sda": counted(5, in_flight=1)}
    for number in range(4):
        still.look(stuck, {7: ("sda",)}, at=AT, steady=number * 10.0)
    (entry,) = still.look(stuck, {}, at=AT, steady=40.0)
    assert entry.drive == 7
    assert still.look(stuck, {}, at=AT, steady=50.0) == ()
