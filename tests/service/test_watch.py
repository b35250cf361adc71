import os
import signal
import threading
import time
from types import SimpleNamespace

import pytest
from msgspec.structs import replace

from diskwatch.errors import SettingsError
from diskwatch.history.reader import Past
from diskwatch.records import Entry
from diskwatch.service.manager import Manager
from diskwatch.service.probing import DISK_MS
from diskwatch.service.watch import Watch
from diskwatch.settings import (
    Duration,
    HistoryKeeping,
    Io,
    Probe,
    SelfTests,
    Settings,
    Smart,
    Watch as WatchSettings,
)
from tests.samples import HDD, NOON, read, value, with_serial
from tests.service.machines import ScriptedMachine, counted, found
from tests.service.senses import ScriptedSenses
from tests.service.test_probing import AT_WORK, ScriptedProber

QUICK = Settings(
    smart=Smart(every=Duration(1)), io=Io(every=Duration(1)), history=HistoryKeeping(commit=Duration(1))
)


@pytest.fixture
def machine():
    made = ScriptedMachine(found(HDD))
    made.answers = {"/dev/sda": [read(NOON, pending_sectors=0)]}
    made.totals = [{"sda": counted(number * 100)} for number in range(60)]
    return made


@pytest.fixture
def _signals():
    heard = (signal.SIGTERM, signal.SIGINT, signal.SIGHUP, signal.SIGUSR1)
    kept = {number: signal.getsignal(number) for number in heard}
    yield
    for number, handler in kept.items():
        signal.signal(number, handler)


def test_once_makes_one_round_and_lets_go(machine, tmp_path):
    told: list[object] = []
    watch = Watch(machine, QUICK, tmp_path, told=told.append)
    (done,) = watch.once()
    assert told == [(done,)]
    assert machine.stopped
    with Past.open(tmp_path) as past:
        assert past.bays(NOON).watcher is None
        assert len(past.bays(NOON).drives) == 1


@pytest.mark.usefixtures("_signals")
def test_a_watch_counts_traffic_reads_drives_and_stores_all_of_it_by_its_end(machine, tmp_path):
    watch = Watch(machine, QUICK, tmp_path)
    seen = []

    def look():
        with Past.open(tmp_path) as past:
            for _ in range(80):
                bays = past.bays(int(time.time()))
                if bays.drives and bays.drives[0].traffic is not None:
                    seen.append(bays)
                    break
                time.sleep(0.05)
        os.kill(os.getpid(), signal.SIGTERM)

    threading.Timer(0.3, look).start()
    watch.run()
    (bays,) = seen
    assert bays.watcher is not None
    assert bays.drives[0].traffic is not None
    assert bays.drives[0].traffic.counts.reads in {100, 200, 300}  # a round looks before and after it asks
    with Past.open(tmp_path) as past:
        entries = [entry.text for entry in past.day_book() if entry.kind == "watch"]
        assert past.traffic(1, 0, 2**40)
    assert entries == ["Watching began.", "Watching ended."]
    assert machine.stopped


def test_a_drive_that_tells_only_by_itself_who_it_is_can_still_be_left_alone(machine, tmp_path):
    other = with_serial(HDD, "INV0099", "/dev/sdz")
    machine.listed.append(found(other))
    machine.answers["/dev/sdz"] = [read(NOON, other)]
    settings = Settings(watch=WatchSettings(ignore=("INV0099",)))
    done = Watch(machine, settings, tmp_path).once()
    assert [one.known.drive.identity.serial for one in done] == ["INV0001"]


@pytest.mark.usefixtures("_signals")
def test_a_history_that_cannot_be_written_is_said_to_whoever_looks(machine, tmp_path):
    blocked = tmp_path / "state"
    blocked.write_text("in the way")
    watch = Watch(machine, QUICK, blocked)
    assert watch.trouble
    threading.Timer(0.5, watch.end).start()
    watch.run()
    assert watch.trouble


@pytest.mark.usefixtures("_signals")
def test_a_drive_that_hangs_is_written_in_the_day_book_and_said_to_whoever_looks(
    machine, tmp_path, monkeypatch
):
    monkeypatch.setattr("diskwatch.machine.standstill.HUNG", 1.0)
    machine.totals = [{"sda": counted(100, in_flight=2)}]
    watch = Watch(machine, QUICK, tmp_path)
    seen: list[Entry] = []

    def look():
        for _ in range(100):
            with Past.open(tmp_path) as past:
                seen[:] = [entry for entry in past.day_book() if entry.kind == "trouble"]
                if seen and past.bays(int(time.time())).trouble:
                    break
            time.sleep(0.05)
        watch.end()

    threading.Timer(0.3, look).start()
    watch.run()
    (entry,) = seen
    assert entry.drive == 1
    assert entry.text.startswith("Requests to it have not moved for ")


READ = "I/O error, dev sda, sector 2048 op 0x0:(READ) flags 0x0 phys_seg 1 prio class 2"


def test_once_takes_in_what_the_kernel_said_and_asks_that_drive_once_more(machine, tmp_path):
    senses = ScriptedSenses()
    senses.say(READ)
    *_, last = Watch(machine, QUICK, tmp_path, senses=senses).once()
    assert last.call is not None
    assert (last.call.word.value, last.call.rule) == ("look", "fact:unreadable-sector")
    assert machine.asked == ["/dev/sda", "/dev/sda"]
    again = Watch(machine, QUICK, tmp_path, senses=senses).once()
    assert len(again) == 1, "nothing is heard twice"
    with Past.open(tmp_path) as past:
        assert [entry.text for entry in past.day_book() if entry.kind == "kernel"] == [
            "A read of sda failed at sector 2,048 (I/O)."
        ]
        (line,) = past.bays(NOON).drives
    assert {signal.name: signal.value for signal in line.signals}["kernel-io-errors"] == 1


def test_what_file_systems_count_comes_with_every_pass(machine, tmp_path):
    senses = ScriptedSenses()
    senses.counted = {"sda": (value("ext4-errors", 3),)}
    (done,) = Watch(machine, QUICK, tmp_path, senses=senses).once()
    assert {one.signal: one.value for one in done.pass_.heard}["ext4-errors"] == 3


def test_a_kernel_that_cannot_be_heard_is_said_once_and_nothing_else_breaks(machine, tmp_path):
    senses = ScriptedSenses()
    senses.refusal = "the kernel's log cannot be read"
    (done,) = Watch(machine, QUICK, tmp_path, senses=senses).once()
    assert done.call is not None
    with Past.open(tmp_path) as past:
        assert [entry.text for entry in past.day_book() if entry.kind == "trouble"] == [senses.refusal]


def test_on_battery_one_round_of_four_takes_place(machine, tmp_path, monkeypatch):
    senses = ScriptedSenses()
    watch = Watch(machine, QUICK, tmp_path, senses=senses)
    rounds = []

    def counted(**_more):
        rounds.append(senses.battery)
        return ()

    monkeypatch.setattr(watch._rounds, "run", counted)
    watch._round()
    senses.battery = True
    for _ in range(8):
        watch._round()
    senses.battery = False
    watch._round()
    assert rounds == [False, True, True, False]
    watch._end()


def test_a_disk_is_probed_only_where_the_owner_asks_and_its_probe_taken_in_at_once(machine, tmp_path):
    prober = ScriptedProber()
    machine.answers = {"/dev/sda": [read(int(time.time()), pending_sectors=0)]}
    silent = Watch(machine, QUICK, tmp_path, prober=prober)
    silent._round()
    silent._end()
    assert prober.asked == []
    prober, asked = ScriptedProber(), replace(QUICK, probe=Probe(enabled=True))
    watch = Watch(machine, asked, tmp_path, prober=prober)
    machine.asked.clear()
    watch._round()
    assert machine.asked == ["/dev/sda"] * 2, "one pass more, which takes the probe in"
    watch._round()
    assert prober.asked == [("/dev/sda", DISK_MS)]
    watch._end()
    assert prober.brings == [AT_WORK], "the end of the watch ends a probe"
    with Past.open(tmp_path) as past:
        (line,) = past.bays(NOON).drives
        assert {one.name: one.value for one in line.signals}["probe-latency"] == 5_500


class ScriptedTester:
    def __init__(self):
        self.begun = []

    def begin_test(self, found, *, extended):
        self.begun.append((found.place.device, extended))


def test_a_self_test_is_begun_where_the_owner_asks_and_the_day_book_remembers_it(
    machine, tmp_path, monkeypatch
):
    hours = iter([12, 3, 3, 3])
    monkeypatch.setattr("diskwatch.service.watch.time.localtime", lambda: SimpleNamespace(tm_hour=next(hours)))
    asked = replace(QUICK, selftest=SelfTests(short=Duration(86_400)))
    tester = ScriptedTester()
    watch = Watch(machine, asked, tmp_path, tester=tester)
    watch._round()
    assert tester.begun == []
    watch._round()
    assert tester.begun == [("/dev/sda", False)]
    asked_before = len(machine.asked)
    watch._round()
    assert len(machine.asked) == asked_before + 1, "a test under way is followed though the drive is idle"
    watch._end()
    again = Watch(machine, asked, tmp_path, tester=tester)
    again._round()
    assert len(tester.begun) == 1
    again._end()
    with Past.open(tmp_path) as past:
        assert [entry.text for entry in past.day_book(kinds={"self-test"})] == [
            "A short self-test of it began."
        ]


class Told(Manager):
    """A service manager that remembers what it was told."""

    def __init__(self):
        super().__init__("")
        self.said: list[str] = []

    def _tell(self, fields):
        self.said += [f"{name}={value}" for name, value in fields.items()]


SLOW = Settings(smart=Smart(every=Duration(3600)), io=Io(every=Duration(1)))


def until(what):
    over = time.monotonic() + 10
    while not what() and time.monotonic() < over:
        time.sleep(0.02)


@pytest.mark.usefixtures("_signals")
def test_a_signal_makes_a_round_at_once_and_the_manager_is_told_what_goes_on(machine, tmp_path):
    manager = Told()
    watch = Watch(machine, SLOW, tmp_path, manager=manager)

    def ask():
        until(lambda: len(machine.asked) == 1 and any(one.startswith("STATUS=") for one in manager.said))
        os.kill(os.getpid(), signal.SIGUSR1)
        until(lambda: len(machine.asked) == 2)
        os.kill(os.getpid(), signal.SIGTERM)

    threading.Timer(0.1, ask).start()
    assert watch.run() is None
    assert len(machine.asked) == 2
    assert manager.said[0] == "READY=1"
    assert manager.said[-1] == "STOPPING=1"
    assert any(
        one.startswith("STATUS=Watching 1 drive, worst call keep; last round 20") for one in manager.said
    )
    assert "WATCHDOG=1" in manager.said


@pytest.mark.usefixtures("_signals")
def test_a_signal_lets_another_watch_go_on_with_other_settings(machine, tmp_path):
    read_again: list[int] = []
    watch = Watch(machine, SLOW, tmp_path, manager=Told(), reread=lambda: read_again.append(1))
    threading.Timer(0.3, os.kill, (os.getpid(), signal.SIGHUP)).start()
    assert watch.run() == tmp_path
    assert (read_again, watch.ended) == ([1], False)
    with Past.open(tmp_path) as past:
        assert past.day_book()[-1].text == "Watching ended, to go on with other settings."


@pytest.mark.usefixtures("_signals")
def test_wrong_settings_are_a_line_in_the_day_book_and_the_watch_goes_on(machine, tmp_path):
    def refuse():
        raise SettingsError("settings.toml: [smart] every: expected a duration")

    watch = Watch(machine, SLOW, tmp_path, manager=Told(), reread=refuse)

    def ask():
        os.kill(os.getpid(), signal.SIGHUP)
        time.sleep(0.3)
        os.kill(os.getpid(), signal.SIGTERM)

    threading.Timer(0.3, ask).start()
    assert watch.run() is None
    with Past.open(tmp_path) as past:
        (entry,) = [entry for entry in past.day_book() if entry.kind == "trouble"]
    assert entry.text.endswith("expected a duration; the settings that held before go on.")


@pytest.mark.usefixtures("_signals")
def test_the_watchdog_is_fed_only_while_the_work_gets_on(machine, tmp_path, monkeypatch):
    monkeypatch.setattr("diskwatch.service.watch.GUARD", 0.1)
    monkeypatch.setattr("diskwatch.service.watch.COUNT_PATIENCE", 0.5)
    held = threading.Event()
    seen: list[int] = []
    manager = Told()
    settings = Settings(smart=Smart(every=Duration(3600)), io=Io(every=Duration(1)))
    watch = Watch(machine, settings, tmp_path, manager=manager)
    counts = machine.counts
    monkeypatch.setattr(machine, "counts", lambda: held.wait(20) and counts())
    monkeypatch.setattr("diskwatch.service.watch.now_steady", time.monotonic)

    def look():
        time.sleep(4.0)  # three intervals of a second, and some more
        seen.append(manager.said.count("WATCHDOG=1"))
        time.sleep(0.5)
        seen.append(manager.said.count("WATCHDOG=1"))
        held.set()
        watch.end()

    threading.Timer(0.1, look).start()
    watch.run()
    assert seen[0] > 0
    assert seen[0] == seen[1], "a watch that stands still feeds nobody"
    with Past.open(tmp_path) as past:
        told = [entry.text for entry in past.day_book() if entry.kind == "trouble"]
    assert "The watch does not get on with the counting of traffic." in told
