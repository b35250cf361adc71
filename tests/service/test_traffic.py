from diskwatch.service.traffic import Traffic
from tests.service.machines import ScriptedMachine, counted

BLOCKS = {7: ("sda",)}


class Clocks:
    """A wall clock and a steady one, moved by hand."""

    def __init__(self):
        self.wall, self.steady = 1_000_000, 50.0

    def move(self, seconds, *, asleep=0):
        self.wall += seconds + asleep
        self.steady += seconds


def traffic(*totals):
    machine, clocks = ScriptedMachine(), Clocks()
    machine.totals = [{"sda": one} for one in totals]
    return Traffic(machine, lambda: clocks.wall, lambda: clocks.steady), clocks


def test_the_first_look_gives_nothing_and_the_second_the_difference():
    looks, clocks = traffic(counted(100), counted(130))
    assert looks.look(BLOCKS).spans == ()
    clocks.move(10)
    (span,) = looks.look(BLOCKS).spans
    assert (span.drive, span.at, span.seconds, span.counts.reads) == (7, clocks.wall, 10.0, 30)


def test_counters_of_another_device_under_the_same_name_are_never_subtracted():
    looks, clocks = traffic(
        counted(100), counted(130, instance="boot 1, disk 2"), counted(140, instance="boot 1, disk 2")
    )
    looks.look(BLOCKS)
    clocks.move(10)
    assert looks.look(BLOCKS).spans == ()
    clocks.move(10)
    assert looks.look(BLOCKS).spans[0].counts.reads == 10


def test_a_span_over_a_sleep_or_a_set_clock_is_dropped():
    looks, clocks = traffic(counted(100), counted(130), counted(140), counted(150))
    looks.look(BLOCKS)
    clocks.move(10, asleep=3600)
    assert looks.look(BLOCKS).spans == ()
    clocks.move(10, asleep=-7200)
    assert looks.look(BLOCKS).spans == ()
    clocks.move(10)
    assert looks.look(BLOCKS).spans[0].counts.reads == 10


def test_a_drive_without_block_devices_has_no_traffic_of_its_own():
    looks, clocks = traffic(counted(100), counted(130))
    looks.look({7: ()})
    clocks.move(10)
    assert looks.look({7: ()}).spans == ()


def test_a_drive_that_stands_still_is_told_within_a_minute_and_named_to_whoever_asks():
    stuck = counted(100, in_flight=2)
    looks, clocks = traffic(counted(90, in_flight=2), stuck, stuck, stuck, stuck, counted(101, in_flight=1))
    told = []
    for _ in range(5):
        told += [(clocks.wall, entry) for entry in looks.look(BLOCKS).entries]
        clocks.move(10)
    ((at, entry),) = told
    assert at - 1_000_000 <= 60
    assert (entry.drive, entry.kind, entry.at) == (7, "trouble", at)
    assert looks.hung == {"sda"}
    assert looks.troubles == (
        "Requests to sda have not moved for 30 seconds; its drive is not asked until they do",
    )
    (over,) = looks.look(BLOCKS).entries
    assert (over.drive, over.kind) == (7, "trouble")
    assert (looks.hung, looks.troubles) == (frozenset(), ())


def test_a_standstill_over_a_sleep_of_the_machine_counts_only_the_time_awake():
    stuck = counted(100, in_flight=2)
    looks, clocks = traffic(stuck, stuck, stuck)
    looks.look(BLOCKS)
    clocks.move(10, asleep=3600)
    assert looks.look(BLOCKS).entries == ()
    assert looks.hung == frozenset()


def test_the_span_after_counters_began_anew_says_so_and_no_other():
    looks, clocks = traffic(
        counted(100), *(counted(number, instance="boot 1, disk 2") for number in (130, 140, 150))
    )
    looks.look(BLOCKS)
    clocks.move(10)
    looks.look(BLOCKS)
    resets = []
    for _ in range(2):
        clocks.move(10)
        resets += [span.reset for span in looks.look(BLOCKS).spans]
    assert resets == [True, False]


def test_what_a_drive_does_for_us_is_no_traffic_of_its_own():
    looks, clocks = traffic(counted(100), counted(400), counted(410), counted(415))
    looks.look(BLOCKS)
    clocks.move(10)
    looks.leave_out(7, ours=True)
    assert looks.look(BLOCKS).spans == ()
    clocks.move(10)
    assert looks.look(BLOCKS).spans[0].counts.reads == 10
    clocks.move(10)
    looks.leave_out(7, ours=True)
    looks.leave_out(7, ours=False)
    assert looks.look(BLOCKS).spans[0].counts.reads == 5
