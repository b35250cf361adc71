"""Probes that the owner asked for: a few timed reads a day of disks that are awake, idle and not in trouble.

A probe is extra work for a disk, so its budget is small and strict: what disturbed probes have used up of it
counts, also over a restart. None is made on battery, of a drive that sleeps or tests itself, or of one whose
data should be copied off: there every read belongs to the data.
"""

from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace

from diskwatch.machine.probe import AT_WORK, THE_END, Brought, Prober, Wanted
from diskwatch.machine.protocol import Found
from diskwatch.records import CallWord, DriveRound, Entry, Kind, Outcome, ProbeDay
from diskwatch.units import DAY, day_number, plain

DISK_MS = 2_000
"""How long a disk may be kept busy a day, milliseconds."""

READS, REQUESTS = 256, 100
"""Small reads, and requests of a slice, that see one retried read in a hundred within a week."""

ENOUGH = 64
"""Undisturbed small reads from which a probe counts as the day's."""

TRIES = 3
"""Probes of a day that may be disturbed."""

FRESH = 120
"""Seconds after an answer during which a disk is taken for awake: far below any usual idle timer (practice)."""

_LEAST_MS = 500  # below that, a probe would bring too little
_NO_PROBE = frozenset({CallWord.COPY, CallWord.RETIRE})


@dataclass(frozen=True, slots=True, kw_only=True)
class _Today:
    """What a drive's probes of one UTC day have used up."""

    day: int
    disk_ms: int = 0
    tries: int = 0
    done: bool = False

    @property
    def left_ms(self) -> int:
        """How long the disk may still be kept busy; 0 where the day's probe is done."""
        left = DISK_MS - self.disk_ms
        return left if not self.done and self.tries < TRIES and left >= _LEAST_MS else 0

    def after(self, probe: ProbeDay) -> "_Today":
        return replace(
            self,
            disk_ms=self.disk_ms + probe.disk_ms,
            tries=self.tries + 1,
            done=self.done or bool(probe.band_us),
        )


class Probing:
    """Belongs to the thread of the rounds."""

    def __init__(
        self,
        prober: Prober,
        *,
        past: Callable[[int, int], Iterable[ProbeDay] | None],
        on_battery: Callable[[], bool],
        ours: Callable[[int, bool], None],
        note: Callable[[Entry], None],
    ) -> None:
        """Begin.

        Args:
            prober: probes disks.
            past: a drive's probes after a time, by its number, UTC seconds since 1970; None while they cannot
                be read, and then none is made, since nobody knows what was used up.
            on_battery: whether the machine runs on its battery.
            ours: told the number of a drive, and whether what it does now, or did just now, is our doing.
            note: takes an entry for the day book: why a disk cannot be probed, once for each reason.
        """
        self._prober = prober
        self._past = past
        self._on_battery = on_battery
        self._ours = ours
        self._note = note
        self._told: dict[int, str] = {}
        self._today: dict[int, _Today] = {}
        self._tried: dict[int, int] = {}
        self._ready: dict[int, ProbeDay] = {}

    def after(
        self,
        parts: Sequence[DriveRound],
        found: Mapping[int, Found],
        *,
        now: Callable[[], int],
        testing: Collection[int] = (),
    ) -> frozenset[int]:
        """Probe one disk where it is due.

        Args:
            parts: what a round brought just now.
            found: the drives of that round as the machine lists them, by number.
            now: UTC seconds since 1970.
            testing: numbers of drives whose self-tests are under way.

        Returns:
            Numbers of the drives of which a probe waits to be taken in with their next pass.
        """
        if self._on_battery():
            return frozenset(self._ready)
        may = [one for one in parts if one.known.number in found and one.known.number not in testing]
        # The one that waits longest first, so that a disk that is always at work keeps no other from its turn.
        for part in sorted(may, key=lambda one: self._tried.get(one.known.number, 0)):
            number, at = part.known.number, now()
            left = self._left(part, at)
            if not left:
                continue
            self._tried[number] = at
            wanted = Wanted(day=day_number(at), reads=READS, requests=REQUESTS, disk_ms=left)
            self._ours(number, True)  # noqa: FBT003 - a callback has no names
            brought = self._prober.probe(found[number], wanted)
            self._ours(number, brought.disk_ms > 0)
            if brought.disk_ms > 0:
                self._keep(number, _probe(brought, now()))
                break
            self._tell(number, brought.dropped, at)
        return frozenset(self._ready)

    def _tell(self, number: int, why: str | None, at: int) -> None:
        if why is None or why in {AT_WORK, THE_END, self._told.get(number)}:
            return
        self._told[number] = why
        self._note(Entry(at=at, drive=number, kind="probe", text=plain(f"It was not probed: {why}")))

    def take(self, number: int) -> ProbeDay | None:
        """The probe of a drive that waits to be taken in, once; None where none does."""
        return self._ready.pop(number, None)

    def _left(self, part: DriveRound, at: int) -> int:
        """How long a disk may be kept busy now; 0 where it must not be probed."""
        drive, number = part.known.drive, part.known.number
        awake = part.pass_.outcome is Outcome.READ and 0 <= at - part.pass_.at <= FRESH
        turns = drive.kind is not Kind.VIRTUAL and drive.rotation_rpm is not None and drive.rotation_rpm > 0
        if not awake or not turns or part.call is None or part.call.word in _NO_PROBE or number in self._ready:
            return 0
        today = self._of(number, day_number(at))
        return 0 if today is None else today.left_ms

    def _of(self, number: int, day: int) -> _Today | None:
        known = self._today.get(number)
        if known is None or known.day != day:
            past = self._past(number, day * DAY - 1)
            if past is None:
                return None
            known = _Today(day=day)
            for probe in past:
                if day_number(probe.at) == day:
                    known = known.after(probe)
            self._today[number] = known
        return known

    def _keep(self, number: int, probe: ProbeDay) -> None:
        known = self._today[number]
        self._today[number] = known.after(probe)
        self._ready[number] = probe


def _probe(brought: Brought, at: int) -> ProbeDay:
    """A probe as it is kept: one that was disturbed too early tells nothing but what it used up."""
    whole = len(brought.band_us) >= ENOUGH or None in brought.band_us
    return ProbeDay(
        at=at,
        place=brought.place,
        band_us=brought.band_us if whole else (),
        slice_us=brought.slice_us if whole else (),
        disk_ms=brought.disk_ms,
    )
