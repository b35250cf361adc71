"""One round: list the drives, ask each whose turn it is, recognise it, judge it, keep it."""

import threading
from collections.abc import Callable, Collection, Mapping
from contextlib import AbstractContextManager, nullcontext
from dataclasses import replace

from diskwatch import analyser
from diskwatch.machine import choice, identity
from diskwatch.machine.protocol import Found, Machine
from diskwatch.records import (
    Drive,
    DriveRound,
    Entry,
    Identity,
    Kind,
    KnownDrive,
    Outcome,
    Pass,
    ProbeDay,
    Round,
    Value,
)
from diskwatch.service.asking import Answer, Asking
from diskwatch.service.forecasts import Forecasts
from diskwatch.service.keeper import Keeper
from diskwatch.service.latency import Latency
from diskwatch.service.pace import Why
from diskwatch.service.turns import Turns
from diskwatch.units import plain, say_bytes

AWAY_LIMIT = analyser.UNREAD_LIMIT
"""Rounds in which a drive that is no longer there is still recorded as absent; then its absence is known."""

Told = Callable[[tuple[DriveRound, ...]], None]
Wanted = Callable[[Identity, tuple[str, ...]], bool]
Heard = Callable[[int, tuple[str, ...]], tuple[Value, ...]]


def _nothing_heard(_number: int, _blocks: tuple[str, ...]) -> tuple[Value, ...]:
    return ()


def _never_probed(_number: int) -> ProbeDay | None:
    return None


def _all_wanted(_who: Identity, _devices: tuple[str, ...]) -> bool:
    return True


class Rounds:
    """Runs rounds; remembers between them what each drive came to."""

    def __init__(
        self,
        machine: Machine,
        keeper: Keeper,
        now: Callable[[], int],
        *,
        wanted: Wanted = _all_wanted,
        turns: Turns | None = None,
        asking: type[Asking] = Asking,
        heard: Heard = _nothing_heard,
        probed: Callable[[int], ProbeDay | None] = _never_probed,
    ) -> None:
        """Begin.

        Args:
            machine: whose drives.
            keeper: where rounds are kept.
            now: UTC seconds since 1970.
            wanted: whether a drive that has told who it is, and goes by these devices, is to be watched.
            turns: decides which drives a round leaves out; None to ask all each time.
            asking: how the drives of a round are asked.
            heard: what the machine's other senses count of a drive, by its number and its block devices.
            probed: the probe of a drive that waits to be taken in, by its number; each is given once.
        """
        self._machine = machine
        self._keeper = keeper
        self._now = now
        self._wanted = wanted
        self._turns = turns
        self._asking = asking
        self._heard = heard
        self._probed = probed
        self._latency = Latency(keeper)
        self._forecasts = Forecasts(keeper)
        self._states: dict[int, analyser.DriveState] = {}
        self._here: dict[str, int] = {}
        self._away: dict[int, int] = {}
        self._instances: dict[str, str] = {}
        self._troubles: tuple[str, ...] = ()
        self._epoch = keeper.epoch
        self._ending = threading.Event()
        self._blocks: dict[int, tuple[str, ...]] = {}
        self.found: dict[int, Found] = {}
        """How each drive that has answered was listed, by the drive's number."""
        self.left_out: Mapping[int, Why] = {}
        """Why drives that are here were not asked in the last round, by the drive's number."""

    def run(
        self,
        *,
        told: Told | None = None,
        lock: AbstractContextManager[object] | None = None,
        everyone: bool = False,
        only: Collection[int] | None = None,
    ) -> tuple[DriveRound, ...]:
        """One round over all drives whose turn it is.

        Args:
            told: called with each part of the round as soon as it has been kept.
            lock: held while the keeper is used, where others use it too; None where nobody does.
            everyone: whether no drive is left out, but for those that would be woken or that hang.
            only: numbers of the drives to ask, of those that have answered before, whoever's turn it is; None
                for no such choice.

        Returns:
            One a drive, in the order in which they answered. A drive that was left out gets no pass.
        """
        survey = self._machine.survey()
        entries = self._new_troubles(survey.troubles)
        self._forget_if_void()
        left_out = self.left_out
        asked, taken = self._planned(survey.found, everyone=everyone or only is not None)
        if only is not None:
            # Why the others were left out of the last whole round still holds.
            self.left_out = {number: why for number, why in left_out.items() if number not in only}
            numbers = {id(found): self._here.get(self._instance(found)) for found in asked}
            # Drives that nobody knows yet wait for a whole round, and those that are left out are not gone.
            taken |= {number for number in numbers.values() if number is not None and number not in only}
            asked = tuple(found for found in asked if numbers[id(found)] in only)
        asking = self._asking(self._machine, asked)
        done: list[DriveRound] = []
        while True:
            batch = asking.batch()
            ending = self._ending.is_set()
            if ending:
                # A question that was cut short by the end of the watch says nothing of the drive.
                batch = tuple(one for one in batch if one.pass_.outcome is not Outcome.TIMED_OUT)
            with lock or nullcontext():
                taken = self._in_numbers_of_now(taken)
                part, more = self._judged(batch, taken)
                if asking.waiting == 0 and not survey.troubles and not ending:
                    away, gone = self._gone(taken)
                    part, more = part + away, more + gone
                ways = tuple(one.pass_.way for one in batch if one.pass_.way is not None)
                if part or entries or more or ways:
                    self._keeper.record(
                        Round(at=self._now(), drives=part, entries=(*entries, *more), ways=ways)
                    )
            entries = ()
            done += part
            if told is not None and part:
                told(part)
            if asking.waiting == 0:
                return tuple(done)

    def end(self) -> None:
        """Bring a round under way to its end; call it before the machine is stopped."""
        self._ending.set()

    @property
    def troubles(self) -> tuple[str, ...]:
        """What kept the last listing of the drives from being complete."""
        return self._troubles

    @property
    def blocks(self) -> dict[int, tuple[str, ...]]:
        """Kernel names of the block devices of each drive of the last round, by the drive's number."""
        since = self._epoch
        return {
            self._keeper.called_now(number, since=since): names for number, names in tuple(self._blocks.items())
        }

    def _in_numbers_of_now(self, taken: set[int]) -> set[int]:
        """Numbers under which drives were met in this round, where they got others under way."""
        since, blocks = self._epoch, self.blocks
        self._forget_if_void()
        self._blocks = blocks
        return {self._keeper.called_now(number, since=since) for number in taken}

    def _forget_if_void(self) -> None:
        """Begin from the history again where it came into reach only now."""
        if self._keeper.epoch != self._epoch:
            self._epoch = self._keeper.epoch
            self._states.clear()
            self._here.clear()
            self._away.clear()
            self._blocks.clear()
            self.found.clear()
            self._latency.forget()
            self._forecasts.forget()
            if self._turns is not None:
                self._turns.forget()

    def _planned(self, drives: tuple[Found, ...], *, everyone: bool) -> tuple[tuple[Found, ...], set[int]]:
        """Which drives this round asks, and the numbers of those that it leaves out: they are not gone."""
        totals = self._machine.counts()
        self._instances = {name: one.instance for name, one in totals.items()}
        if self._turns is None:
            return drives, set()
        keyed = {self._instance(found): found for found in drives}
        turns = self._turns.plan(keyed, totals, at=self._now(), everyone=everyone)
        # The machine answers for a drive that the kernel has suspended, without asking it.
        asked = {key: found for key, found in keyed.items() if turns[key].ask or turns[key] is Why.ASLEEP}
        left_out = {self._here[key]: turns[key] for key in keyed.keys() - asked if key in self._here}
        self.left_out = left_out
        return tuple(asked.values()), set(left_out)

    def _new_troubles(self, troubles: tuple[str, ...]) -> tuple[Entry, ...]:
        """Troubles of the machine as a whole, said when they begin and when they are over."""
        at = self._now()
        begun = [
            Entry(at=at, drive=None, kind="trouble", text=one) for one in troubles if one not in self._troubles
        ]
        over = [
            Entry(at=at, drive=None, kind="trouble", text=f"Over: {one}")
            for one in self._troubles
            if one not in troubles
        ]
        self._troubles = troubles
        return (*begun, *over)

    def _judged(
        self, batch: tuple[Answer, ...], taken: set[int]
    ) -> tuple[tuple[DriveRound, ...], tuple[Entry, ...]]:
        drives: list[DriveRound] = []
        entries: list[Entry] = []
        totals = self._machine.counts() if self._turns is not None else {}
        for answer in batch:
            if self._turns is not None:
                self._turns.answered(self._instance(answer.found), answer.pass_.outcome, totals)
            told = answer.pass_.drive or answer.found.drive
            if not self._wanted(told.identity, choice.devices_of(answer.found)):
                continue
            known, more = self._recognised(answer, taken)
            taken.add(known.number)
            self._here[self._instance(answer.found)] = known.number
            self._blocks[known.number] = answer.found.blocks
            self.found[known.number] = answer.found
            self._away.pop(known.number, None)
            heard = self._heard(known.number, answer.found.blocks)
            drive, happened = self._judge(known, replace(answer.pass_, drive=known.drive, heard=heard))
            drives.append(drive)
            entries += [*more, *happened]
        return tuple(drives), tuple(entries)

    def _judge(self, known: KnownDrive, pass_: Pass) -> tuple[DriveRound, list[Entry]]:
        number = known.number
        # Also what is no longer here speaks: a bay keeps the trouble that a drive had in it.
        others = tuple(self._state(one.number) for one in self._keeper.known if one.number != number)
        around = analyser.Around(bay=known.place.bay, others=others)
        taken = self._latency.take_in(known, self._state(number), pass_.at)
        state, probe, told = self._with_probe(known, taken.state)
        measured = (*analyser.measured(state), *analyser.probe_values(state))
        pass_ = replace(pass_, heard=(*pass_.heard, *measured))
        step = analyser.advance(state, pass_, around)
        self._states[number] = step.state
        drive = DriveRound(
            known=known,
            pass_=pass_,
            state=analyser.dump(step.state),
            findings=step.findings,
            evidence=step.evidence,
            call=step.call,
            learnt=taken.learnt,
            probe=probe,
            forecasts=self._forecasts.due(number, step.state, pass_.at),
        )
        return drive, [replace(entry, drive=number) for entry in (*taken.happened, *told, *step.happened)]

    def _with_probe(
        self, known: KnownDrive, state: analyser.DriveState
    ) -> tuple[analyser.DriveState, ProbeDay | None, tuple[Entry, ...]]:
        probe, rpm = self._probed(known.number), known.drive.rotation_rpm
        if probe is None or rpm is None:
            return state, None, ()
        step = analyser.take_in_probe(state, probe, rotation_rpm=rpm)
        return step.state, probe, step.happened

    def _state(self, number: int) -> analyser.DriveState:
        if number not in self._states:
            kept = self._keeper.state(number)
            self._states[number] = analyser.start() if kept is None else analyser.load(kept)
        return self._states[number]

    def _recognised(self, answer: Answer, taken: set[int]) -> tuple[KnownDrive, list[Entry]]:
        """Which drive answered: one that is known, moved or not, or a new one."""
        found, told = answer.found, answer.pass_.drive or answer.found.drive
        at = answer.pass_.at
        free = [one for one in self._keeper.known if one.number not in taken]
        here = self._known_here(found, free)
        silent = answer.pass_.drive is None and found.drive.kind is Kind.USB
        if silent and here is not None and here.place.bay == found.place.bay:
            # Behind a bridge the kernel alone would know it by another name. It did not speak, so nothing of
            # another drive's can be poured into its history.
            known: KnownDrive | None = here
        else:
            known = identity.recognise(told.identity, free, here=here)
        if known is None:
            admitted = self._keeper.admit(told, found.place, at)
            return admitted, [Entry(at=at, drive=admitted.number, kind="first-seen", text=_greeting(admitted))]
        now = replace(known, drive=_fuller(known.drive, told), place=found.place)
        moved = (
            known.place.bay is not None and found.place.bay is not None and known.place.bay != found.place.bay
        )
        if not moved:
            return now, []
        where = f"from {plain(known.place.bay or '')} to {plain(found.place.bay or '')}"
        text = f"Moved {where}; its history moves with it."
        data = {"from": known.place.bay, "to": found.place.bay}
        return now, [Entry(at=at, drive=now.number, kind="moved", text=text, data=data)]

    def _known_here(self, found: Found, free: list[KnownDrive]) -> KnownDrive | None:
        """The drive that answered from the same place before, for one that does not say who it is."""
        number = self._here.get(self._instance(found))
        for one in free:
            if one.number == number or (number is None and one.place.device == found.place.device):
                return one
        return None

    def _instance(self, found: Found) -> str:
        """What stays the same as long as one device stands under a name; behind a controller, its address."""
        if found.blocks:
            return self._instances.get(found.blocks[0], found.blocks[0])
        return f"{found.address.node} {found.address.type or ''}".rstrip()

    def _gone(self, taken: set[int]) -> tuple[tuple[DriveRound, ...], tuple[Entry, ...]]:
        """Drives that were there and are no longer: said, and followed for a few rounds."""
        drives: list[DriveRound] = []
        entries: list[Entry] = []
        for known in self._keeper.known:
            number = known.number
            if not self._wanted(known.drive.identity, (known.place.device,)):
                continue
            times = self._away.get(number, 0)
            seen_now = number in taken
            seen_before = number in self._here.values() or self._state(number).outcome not in {
                None,
                Outcome.ABSENT,
            }
            if seen_now or not seen_before or times >= AWAY_LIMIT:
                continue
            self._away[number] = times + 1
            self._blocks.pop(number, None)
            self.found.pop(number, None)
            pass_ = Pass(
                at=self._now(),
                outcome=Outcome.ABSENT,
                explanation=f"It is no longer where it was ({plain(known.place.device)}).",
                drive=known.drive,
                heard=self._heard(number, ()),
            )
            drive, happened = self._judge(known, pass_)
            drives.append(drive)
            entries += happened
        return tuple(drives), tuple(entries)


def _fuller(known: Drive, told: Drive) -> Drive:
    """What is known of a drive, with what it says of itself now on top; silence takes nothing away."""
    return Drive(
        identity=replace(
            told.identity,
            wwn=told.identity.wwn or known.identity.wwn,
            model=told.identity.model or known.identity.model,
            serial=told.identity.serial or known.identity.serial,
        ),
        kind=told.kind,
        firmware=told.firmware or known.firmware,
        capacity_bytes=told.capacity_bytes if told.capacity_bytes is not None else known.capacity_bytes,
        rotation_rpm=told.rotation_rpm if told.rotation_rpm is not None else known.rotation_rpm,
    )


def _greeting(known: KnownDrive) -> str:
    drive = known.drive
    told = [
        plain(drive.identity.model or "a drive without a model"),
        f"serial {plain(drive.identity.serial)}" if drive.identity.serial else "without a serial",
        say_bytes(drive.capacity_bytes) if drive.capacity_bytes is not None else "of unknown size",
    ]
    return f"First seen: {', '.join(told)}, at {plain(known.place.device)}."
