import threading
from dataclasses import replace

import pytest

from diskwatch.history.reader import Past
from diskwatch.records import CallWord, Identity, Kind, Outcome, Place, ProbeDay, Way
from diskwatch.service.keeper import Keeper
from diskwatch.service.pace import Why
from diskwatch.service.rounds import Rounds
from diskwatch.service.turns import Turns
from tests.samples import DAY, HDD, NOON, NVME, missed, read, value, with_serial
from tests.service.machines import ScriptedMachine, counted, found


@pytest.fixture
def keeper(tmp_path):
    kept = Keeper(tmp_path)
    yield kept
    kept.close()


def rounds(machine, keeper, at=NOON, **more):
    return Rounds(machine, keeper, lambda: at, **more)


def book(tmp_path):
    with Past.open(tmp_path) as past:
        return [(entry.kind, entry.drive, entry.text) for entry in past.day_book()]


def test_a_round_asks_every_drive_once_and_keeps_what_it_brought(tmp_path, keeper):
    machine = ScriptedMachine(found(HDD), found(NVME))
    machine.answers = {
        "/dev/sda": [read(NOON, pending_sectors=3)],
        "/dev/nvme0": [read(NOON, NVME, media_errors=0)],
    }
    done = rounds(machine, keeper).run()
    assert sorted(machine.asked) == ["/dev/nvme0", "/dev/sda"]
    assert len(done) == 2
    with Past.open(tmp_path) as past:
        lines = {line.drive.identity.serial: line for line in past.bays(NOON).drives}
    assert {signal.name: signal.value for signal in lines["INV0001"].signals}["pending-sectors"] == 3
    call = lines["INV0003"].call
    assert call is not None
    assert call.word is CallWord.KEEP


def test_a_drive_that_hangs_delays_the_keeping_of_no_other(keeper, monkeypatch):
    monkeypatch.setattr("diskwatch.service.asking.PATIENCE", 0.05)
    machine = ScriptedMachine(found(HDD), found(NVME))
    machine.answers = {"/dev/sda": [missed(NOON, Outcome.TIMED_OUT)], "/dev/nvme0": [read(NOON, NVME)]}
    machine.hold["/dev/sda"] = threading.Event()
    parts = []

    def told(part):
        parts.append([one.known.drive.identity.serial for one in part])
        machine.hold["/dev/sda"].set()  # it answers only once the other has been kept

    rounds(machine, keeper).run(told=told)
    assert parts == [["INV0003"], ["INV0001"]]


def test_a_restart_between_two_rounds_changes_nothing(tmp_path):
    first, second = read(NOON, pending_sectors=0), read(NOON + DAY, pending_sectors=16)

    def lived(folder, *, restart):
        machine = ScriptedMachine(found(HDD))
        machine.answers = {"/dev/sda": [first, second]}
        kept = Keeper(folder)
        running = rounds(machine, kept)
        running.run()
        if restart:
            kept.close()
            kept = Keeper(folder)
            running = rounds(machine, kept)
        (done,) = running.run()
        kept.close()
        return done.state, done.call, done.evidence

    assert lived(tmp_path / "a", restart=False) == lived(tmp_path / "b", restart=True)


def test_a_drive_that_moved_keeps_its_history_and_the_day_book_tells(tmp_path, keeper):
    machine = ScriptedMachine(found(HDD, bay="ata-1"))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/sdc": [read(NOON + 60)]}
    running = rounds(machine, keeper)
    (before,) = running.run()
    machine.listed = [found(HDD, device="/dev/sdc", bay="ata-4")]
    (after,) = running.run()
    assert after.known.number == before.known.number
    assert after.known.place == Place(device="/dev/sdc", bay="ata-4")
    assert ("moved", before.known.number, "Moved from ata-1 to ata-4; its history moves with it.") in book(
        tmp_path
    )


def test_a_new_letter_in_the_same_bay_is_no_move(tmp_path, keeper):
    machine = ScriptedMachine(found(HDD, bay="ata-1"))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/sdb": [read(NOON + 60)]}
    running = rounds(machine, keeper)
    running.run()
    machine.listed = [found(HDD, device="/dev/sdb", bay="ata-1")]
    running.run()
    assert "moved" not in [kind for kind, *_ in book(tmp_path)]


def test_two_drives_that_tell_the_same_names_stay_two(keeper):
    twin = replace(HDD, identity=replace(HDD.identity, path="/dev/sdb"))
    machine = ScriptedMachine(found(HDD, bay="ata-1"), found(twin, bay="ata-2"))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/sdb": [read(NOON, twin)]}
    running = rounds(machine, keeper)
    first = {one.known.place.device: one.known.number for one in running.run()}
    second = {one.known.place.device: one.known.number for one in running.run()}
    assert len(set(first.values())) == 2
    assert first == second


def test_a_drive_that_falls_silent_is_still_the_same_drive(tmp_path, keeper):
    bare = replace(HDD, identity=Identity(wwn=None, model=None, serial=None, path="/dev/sda"))
    machine = ScriptedMachine(found(bare))
    machine.answers = {"/dev/sda": [read(NOON), replace(missed(NOON, Outcome.TIMED_OUT), drive=None)]}
    running = rounds(machine, keeper)
    numbers = [running.run()[0].known.number for _ in range(2)]
    again = Rounds(machine, keeper, lambda: NOON)  # as after a restart
    numbers.append(again.run()[0].known.number)
    assert len(set(numbers)) == 1
    with Past.open(tmp_path) as past:
        (line,) = past.bays(NOON).drives
    assert line.drive.identity.serial == "INV0001"


def test_another_device_under_the_same_name_does_not_inherit_a_silent_drives_history(keeper):
    """Two sticks without names of their own: only the kernel's number of the device tells them apart."""
    bare = replace(HDD, identity=Identity(wwn=None, model="stick", serial=None, path="/dev/sda"))
    machine = ScriptedMachine(found(bare))
    machine.answers = {"/dev/sda": [read(NOON, HDD), read(NOON, NVME)]}
    machine.totals = [{"sda": counted(0, instance="disk 1")}, {"sda": counted(0, instance="disk 2")}]
    running = rounds(machine, keeper)
    numbers = [running.run()[0].known.number for _ in range(2)]
    assert len(set(numbers)) == 2


def test_a_usb_drive_that_is_silent_after_a_restart_is_no_new_drive(keeper):
    """The kernel knows the bridge's serial only; the drive behind it told another."""
    bridge = replace(
        HDD, kind=Kind.USB, identity=Identity(wwn=None, model="Bridge", serial="B1", path="/dev/sda")
    )
    machine = ScriptedMachine(found(bridge))
    machine.answers = {"/dev/sda": [read(NOON), replace(missed(NOON, Outcome.ASLEEP), drive=None)]}
    numbers = [Rounds(machine, keeper, lambda: NOON).run()[0].known.number for _ in range(2)]
    assert len(set(numbers)) == 1


def test_a_drive_that_is_gone_is_followed_for_three_rounds_and_then_known_to_be_away(tmp_path, keeper):
    machine = ScriptedMachine(found(HDD))
    machine.answers = {"/dev/sda": [read(NOON)]}
    running = rounds(machine, keeper)
    running.run()
    machine.listed = []
    outcomes = [[one.pass_.outcome.value for one in running.run()] for _ in range(5)]
    assert outcomes == [["absent"], ["absent"], ["absent"], [], []]
    with Past.open(tmp_path) as past:
        call = past.bays(NOON).drives[0].call
    assert call is not None
    assert call.word is CallWord.LOOK


def test_an_incomplete_listing_accuses_no_drive_of_being_gone(keeper):
    machine = ScriptedMachine(found(HDD))
    machine.answers = {"/dev/sda": [read(NOON)]}
    running = rounds(machine, keeper)
    running.run()
    machine.listed, machine.troubles = [], ("smartctl was not found.",)
    assert running.run() == ()


def test_a_trouble_of_the_machine_is_told_when_it_begins_and_when_it_is_over(tmp_path, keeper):
    machine = ScriptedMachine()
    running = rounds(machine, keeper)
    machine.troubles = ("smartctl was not found.",)
    running.run()
    running.run()
    machine.troubles = ()
    running.run()
    assert book(tmp_path) == [
        ("trouble", None, "smartctl was not found."),
        ("trouble", None, "Over: smartctl was not found."),
    ]


def test_a_drive_that_the_owner_wants_left_alone_is_not_kept(keeper):
    other = with_serial(HDD, "INV0099", "/dev/sdz")
    machine = ScriptedMachine(found(HDD), found(other))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/sdz": [read(NOON, other)]}
    done = rounds(machine, keeper, wanted=lambda who, _devices: who.serial != "INV0099").run()
    assert [one.known.drive.identity.serial for one in done] == ["INV0001"]


def test_a_machine_without_any_drive_gives_an_empty_round(keeper):
    assert rounds(ScriptedMachine(), keeper).run() == ()


def test_a_round_asks_a_bounded_number_at_once_and_slow_ones_do_not_keep_the_rest_waiting(keeper, monkeypatch):
    monkeypatch.setattr("diskwatch.service.asking.AT_ONCE", 2)
    monkeypatch.setattr("diskwatch.service.asking.SLOW", 0.02)
    many = [with_serial(HDD, f"INV1{number:03}", f"/dev/sd{number}") for number in range(8)]
    machine = ScriptedMachine(*(found(one, bay=one.identity.path) for one in many))
    machine.answers = {one.identity.path: [read(NOON, one)] for one in many}
    slow = {one.identity.path: threading.Event() for one in many[:2]}
    machine.hold = dict(slow)
    for event in slow.values():
        threading.Timer(1.0, event.set).start()
    assert len(rounds(machine, keeper).run()) == 8


def test_a_history_that_comes_into_reach_late_is_taken_up_with_its_past(tmp_path):
    state = tmp_path / "state"
    first = Keeper(state)
    machine = ScriptedMachine(found(HDD))
    machine.answers = {"/dev/sda": [read(NOON, pending_sectors=0)]}
    rounds(machine, first).run()
    first.close()
    away = tmp_path / "away"
    state.rename(away)
    state.write_text("in the way")
    keeper = Keeper(state)
    running = rounds(machine, keeper)
    machine.answers = {"/dev/sda": [read(NOON + DAY, pending_sectors=16)]}
    running.run()  # blind: a first reading, so a level
    state.unlink()
    away.rename(state)
    (done,) = running.run()  # the history is in reach again as this round is kept
    (done,) = running.run()
    keeper.close()
    assert done.call is not None
    assert done.call.word is CallWord.LOOK
    assert any("came into reach late" in text for _, _, text in book(state))


def test_a_drive_that_is_left_out_of_a_round_gets_no_pass_and_is_not_gone(tmp_path, keeper):
    machine = ScriptedMachine(found(HDD), found(NVME))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/nvme0": [read(NOON, NVME)]}
    machine.totals = [{"sda": counted(5), "nvme0": counted(7, instance="disk 2")}]
    running = rounds(machine, keeper, turns=Turns(every=1800))
    passes = [[one.known.drive.identity.serial for one in running.run()] for _ in range(3)]
    assert sorted(passes[0]) == ["INV0001", "INV0003"]
    assert passes[1:] == [["INV0003"], ["INV0003"]]
    assert list(running.left_out.values()) == [Why.IDLE]
    assert sorted(one.known.drive.identity.serial for one in running.run(everyone=True)) == sorted(passes[0])
    assert running.left_out == {}
    assert {kind for kind, *_ in book(tmp_path)} == {"first-seen"}


def test_a_drive_that_hangs_is_not_asked_while_another_goes_on(keeper):
    machine = ScriptedMachine(found(HDD), found(NVME))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/nvme0": [read(NOON, NVME)]}
    hung: set[str] = set()
    running = rounds(machine, keeper, turns=Turns(hung=lambda: frozenset(hung)))
    running.run()
    hung.add("sda")
    machine.asked.clear()
    running.run()
    assert machine.asked == ["/dev/nvme0"]
    hung.clear()
    running.run()
    assert sorted(machine.asked) == ["/dev/nvme0", "/dev/nvme0", "/dev/sda"]


def test_a_twin_of_a_drive_that_is_left_out_does_not_take_its_history(keeper):
    twin = replace(HDD, identity=replace(HDD.identity, path="/dev/sdb"))
    machine = ScriptedMachine(found(HDD, bay="ata-1"), found(twin, bay="ata-2"))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/sdb": [read(NOON, twin)]}
    hung: set[str] = set()
    running = rounds(machine, keeper, turns=Turns(hung=lambda: frozenset(hung)))
    numbers = {one.known.place.device: one.known.number for one in running.run()}
    hung.add("sda")
    (done,) = running.run()
    assert done.known.number == numbers["/dev/sdb"]


def test_no_drive_that_was_left_out_is_taken_for_gone_when_a_history_comes_into_reach_late(tmp_path):
    state, away = tmp_path / "state", tmp_path / "away"
    machine = ScriptedMachine(found(HDD))
    machine.answers = {"/dev/sda": [read(NOON)]}
    machine.totals = [{"sda": counted(5)}]
    first = Keeper(state)
    rounds(machine, first).run()
    first.close()
    state.rename(away)
    state.write_text("in the way")
    keeper = Keeper(state)
    running = rounds(machine, keeper, turns=Turns(every=1800))
    running.run()  # blind
    state.unlink()
    away.rename(state)
    keeper.try_again()
    outcomes = [one.pass_.outcome for _ in range(3) for one in running.run()]
    keeper.close()
    assert outcomes == [Outcome.READ]


def test_what_asking_found_out_of_an_adapter_is_kept_also_where_its_drive_is_not_watched(tmp_path, keeper):
    way = Way(adapter="1f75:0621", instance="boot 1, disk 7", type="sat")
    machine = ScriptedMachine(found(HDD))
    machine.answers = {"/dev/sda": [replace(read(NOON), way=way)]}
    assert rounds(machine, keeper, wanted=lambda *_: False).run() == ()
    with Past.open(tmp_path) as past:
        assert past.ways() == (way,)
        assert past.bays(NOON).drives == ()


def test_a_pass_carries_what_was_heard_of_its_drive_whatever_became_of_it(keeper):
    machine = ScriptedMachine(found(HDD), found(NVME))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/nvme0": [missed(NOON, Outcome.TIMED_OUT, NVME)]}
    asked = []

    def heard(number, blocks):
        asked.append((number, blocks))
        return (value("link-resets", number),)

    done = rounds(machine, keeper, heard=heard).run()
    assert sorted(blocks for _, blocks in asked) == [("nvme0",), ("sda",)]
    assert {one.pass_.heard[0].value for one in done} == {1, 2}


def test_a_probe_is_taken_in_with_the_next_pass_and_kept_with_it(tmp_path, keeper):
    machine = ScriptedMachine(found(HDD), found(NVME))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/nvme0": [read(NOON, NVME)]}
    day = ProbeDay(at=NOON - 5, place=0, band_us=(5_500,) * 256, slice_us=(2_000,) * 100, disk_ms=1_650)
    waits = {1: day, 2: day}
    here = rounds(machine, keeper, probed=lambda number: waits.pop(number, None))
    done = {one.known.drive.kind: one for one in here.run()}
    assert done[Kind.HDD].probe == day
    assert {one.signal for one in done[Kind.HDD].pass_.heard} == {"late-reads", "probe-latency"}
    assert done[Kind.NVME].probe is None, "it has no turns"
    number = done[Kind.HDD].known.number
    assert keeper.ask(lambda history: history.probes(number, after=0)) == (day,)
    assert [one.probe for one in here.run()] == [None, None]
    with Past.open(tmp_path) as past:
        (line,) = [one for one in past.bays(NOON).drives if one.number == number]
        assert {one.name: one.value for one in line.signals}["probe-latency"] == 5_500


def test_only_the_drives_that_something_was_heard_of_are_asked_and_none_is_taken_for_gone(keeper):
    machine = ScriptedMachine(found(HDD), found(NVME))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/nvme0": [read(NOON, NVME)]}
    here = rounds(machine, keeper)
    first = here.run()
    number = next(one.known.number for one in first if one.known.place.device == "/dev/sda")
    machine.asked.clear()
    done = here.run(only={number})
    assert machine.asked == ["/dev/sda"]
    assert [one.pass_.outcome for one in done] == [Outcome.READ]
    machine.asked.clear()
    assert here.run(only={99}) == ()
    assert machine.asked == []


def test_a_history_that_comes_into_reach_within_a_round_gets_each_answer_for_its_drive(tmp_path, monkeypatch):
    monkeypatch.setattr("diskwatch.service.asking.PATIENCE", 0.05)
    state, away = tmp_path / "state", tmp_path / "away"
    machine = ScriptedMachine(found(NVME), found(HDD))
    machine.answers = {"/dev/sda": [read(NOON, pending_sectors=0)], "/dev/nvme0": [read(NOON, NVME)]}
    machine.hold["/dev/sda"] = threading.Event()
    before = Keeper(state)
    # The slow one answers last, so that it is the second drive of this history.
    rounds(machine, before).run(told=lambda _: machine.hold["/dev/sda"].set())
    before.close()
    state.rename(away)
    state.write_text("in the way")
    machine.answers = {
        "/dev/sda": [read(NOON + DAY, pending_sectors=7)],
        "/dev/nvme0": [read(NOON + DAY, NVME)],
    }
    machine.hold = {"/dev/nvme0": threading.Event()}
    keeper = Keeper(state)

    def back(_part):
        if state.is_file():
            state.unlink()
            away.rename(state)
            keeper.try_again()
        machine.hold["/dev/nvme0"].set()

    running = rounds(machine, keeper, at=NOON + DAY)
    running.run(told=back)
    assert running.blocks == {1: ("nvme0",), 2: ("sda",)}
    assert keeper.trouble is None
    keeper.close()
    with Past.open(state) as past:
        assert {line.number: line.drive.identity.serial for line in past.bays(NOON).every} == {
            1: "INV0003",
            2: "INV0001",
        }
        assert [len(past.passes(number)) for number in (1, 2)] == [2, 2]
        assert past.series(2, "pending-sectors")[-1] == (NOON + DAY, 7)
        assert past.series(1, "pending-sectors") == ()
