"""The invented machine behind the protocol of the real one."""

import json
from collections.abc import Mapping

from diskwatch.machine.protocol import Address, Counted, Found, Survey
from diskwatch.machine.reading import understood
from diskwatch.records import Mount, Outcome, Pass, Place
from diskwatch.rehearsal import events
from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.clock import Clock
from diskwatch.rehearsal.disk import Disk
from diskwatch.rehearsal.document import document
from diskwatch.rehearsal.drive import InventedDrive, Span
from diskwatch.rehearsal.heat import Room
from diskwatch.rehearsal.hours import begins
from diskwatch.rehearsal.link import Bay
from diskwatch.rehearsal.power import Strip
from diskwatch.rehearsal.printed import lines
from diskwatch.rehearsal.scenario import DriveSpec, Scenario
from diskwatch.rehearsal.solid import Solid
from diskwatch.rehearsal.workload import Workload, is_on
from diskwatch.units import DAY

_SATURDAY = 2
"""1970 began on a Thursday: the day number of a Saturday leaves 2 when divided by 7."""


class InventedMachine:
    """A machine whose drives live by a scenario; see `diskwatch.machine.protocol.Machine`."""

    def __init__(self, scenario: Scenario, seed: int, clock: Clock) -> None:
        """Build it.

        Args:
            scenario: its drives and what befalls them.
            seed: of chance; the same one always gives the same life.
            clock: its time, which `live` moves.
        """
        self.scenario, self.clock = scenario, clock
        self._start = clock.now()
        room = scenario.room
        self.room = Room(celsius=room.celsius, season=room.season, daily=room.daily, spells=[])
        self.draught = 1.0
        self.busy_until, self.busy_factor = 0.0, 1.0
        strips = {"wall", scenario.strip, *(bay.strip for bay in scenario.bay)}
        self.strips = {name: Strip(name=name) for name in sorted(strips)}
        self._mains = stream(seed, "mains")
        self.bays = {bay.name: Bay(name=bay.name, strip=bay.strip) for bay in scenario.bay}
        self.drives = {
            spec.serial: self._drive(spec, number, seed) for number, spec in enumerate(scenario.drive, 1)
        }
        self._returns = {spec.serial: spec.joins_day for spec in scenario.drive if spec.joins_day > 0}
        self._waiting = sorted(scenario.event, key=lambda one: one.day)
        self._printed: dict[str, int] = {}
        self.on = False
        self.boots = 0

    def _drive(self, spec: DriveSpec, number: int, seed: int) -> InventedDrive:
        bay = self.bays.setdefault(spec.bay, Bay(name=spec.bay))
        workload = Workload(
            stream(seed, spec.serial, "work"), self.scenario.habit, load=spec.load, surface=spec.capacity
        )
        make = Disk if spec.kind == "hdd" else Solid
        drive = make(spec, number, seed, bay, workload)
        drive.reachable = spec.joins_day == 0
        return drive

    def live(self) -> None:
        """Let one step of time pass for everything."""
        seconds = self.scenario.step_minutes * 60
        away = any(one.day <= self.clock.days() < one.day + one.days for one in self.scenario.holiday)
        on = is_on(self.scenario.habit, self.clock.now(), away=away)
        starts = on and not self.on
        if starts:
            self._boot()
        self.clock.forward(seconds, on=on)
        self._happen(self.clock.days())
        span = Span(
            at=self.clock.now(), seconds=seconds, air=self.room.at(self.clock.now()), draught=self.draught
        )
        if starts:
            for drive in self._there():
                drive.power_up()
        self.on = on
        if on:
            self._use(span, away=away)
        else:
            for drive in self.drives.values():
                drive.warmth.rest(span.air, seconds=seconds)

    def _boot(self) -> None:
        self.boots += 1
        self.clock.boot()

    def _there(self) -> list[InventedDrive]:
        return [drive for drive in self.drives.values() if drive.reachable]

    def _lose_power(self, losses: Mapping[str, int]) -> None:
        """Drives on a strip lose power together; where the machine itself does, all of it starts anew."""
        whole = losses[self.scenario.strip] > 0
        if whole:
            self._boot()
        for drive in self._there():
            if lost := losses[drive.bay.strip]:
                drive.lose_power(lost)
            elif whole:
                drive.appear()

    def _happen(self, days: float) -> None:
        while self._waiting and self._waiting[0].day <= days:
            events.apply(self, self._waiting.pop(0))
        for serial, until in list(self._returns.items()):
            if until <= days:
                del self._returns[serial]
                self._plug_in(serial)
        factor = self.busy_factor if days < self.busy_until else 1.0
        for drive in self.drives.values():
            drive.workload.factor = factor

    def take_away(self, serial: str, days: float) -> None:
        """A drive is no longer there, for so many days or, with 0, for ever."""
        self.drives[serial].reachable = False
        self._returns.pop(serial, None)
        if days > 0:
            self._returns[serial] = self.clock.days() + days

    def _plug_in(self, serial: str) -> None:
        drive = self.drives[serial]
        drive.reachable = drive.alive
        drive.power_up()

    def _use(self, span: Span, *, away: bool) -> None:
        self._lose_power({name: strip.losses(self._mains, span.days) for name, strip in self.strips.items()})
        starts = begins(self.scenario.backup_hour, span.at, span.seconds)
        for drive in self._there():
            spec = drive.spec
            if starts and spec.backup != "none":
                saturday = span.at // DAY % 7 == _SATURDAY
                drive.workload.plan_backup(whole=saturday, target=spec.backup == "target")
            work = drive.workload.span(span.at, span.seconds, away=away)
            drive.live(span, work)
            every = spec.self_tests_days
            if every and starts and (span.at - self._start) // DAY % every == every - 1:
                drive.test(extended=True)

    def survey(self) -> Survey:
        """List the drives that are there."""
        return Survey(found=tuple(self._found(drive) for drive in self._there()))

    def _found(self, drive: InventedDrive) -> Found:
        spec = drive.spec
        return Found(
            address=Address(node=spec.device, type="nvme" if spec.kind == "nvme" else "sat"),
            blocks=(_block(spec),),
            place=Place(
                device=spec.device,
                bay=drive.bay.name,
                lives_here=tuple(Mount(point=point) for point in spec.lives_here),
            ),
            drive=drive.drive,
            asleep=drive.asleep,
            instance=self._instance(drive),
        )

    def _instance(self, drive: InventedDrive) -> str:
        return f"boot {self.boots}, disk {drive.number}.{drive.appearances}"

    def ask(self, found: Found) -> Pass:
        """Ask one drive: its answer goes the same way as a real one's, from smartctl's words to a reading."""
        drive = next(one for one in self.drives.values() if one.spec.device == found.address.node)
        at = self.clock.now()
        if not drive.reachable:
            return Pass(at=at, outcome=Outcome.ABSENT, explanation="It is not there.")
        if drive.asleep:
            told = "It is asleep and was not asked, since that would wake it."
            return Pass(at=at, outcome=Outcome.ASLEEP, explanation=told, drive=drive.drive)
        told_now = drive.told()
        text = lines(told_now) if drive.spec.as_text else ()
        stated = None if text else document(told_now)
        what = understood(text, stated, type_=found.address.type, path=found.drive.identity.path)
        answer = None
        if self._printed.get(drive.spec.serial) != at // DAY:
            # One a day is kept, and writing them out for every pass would take longer than all the rest.
            self._printed[drive.spec.serial] = at // DAY
            answer = json.dumps(stated, indent=2) if stated is not None else "\n".join(text)
        return Pass(
            at=at, outcome=Outcome.READ, drive=drive.drive, reading=what.reading, exit_bits=0, answer=answer
        )

    def counts(self) -> Mapping[str, Counted]:
        """Traffic totals by kernel name."""
        return {
            _block(drive.spec): Counted(counts=drive.counts, instance=self._instance(drive))
            for drive in self._there()
        }

    def stop(self) -> None:
        """Nothing is ever under way."""


def _block(spec: DriveSpec) -> str:
    name = spec.device.removeprefix("/dev/")
    return f"{name}n1" if spec.kind == "nvme" else name
