"""What happens to the drives of an invented machine, one function an event."""

from functools import singledispatch
from typing import TYPE_CHECKING

from diskwatch.rehearsal import happenings as told
from diskwatch.rehearsal.disk import Disk
from diskwatch.rehearsal.heat import Spell
from diskwatch.rehearsal.solid import Solid
from diskwatch.units import DAY

if TYPE_CHECKING:  # the machine applies events, so it cannot be imported here
    from diskwatch.rehearsal.machine import InventedMachine


def apply(machine: "InventedMachine", event: told.Event) -> None:
    """Let an event happen now."""
    _happen(event, machine)


@singledispatch
def _happen(event: object, machine: "InventedMachine") -> None:
    raise TypeError(f"no such event: {type(event).__name__}, in {machine.scenario.title}")


@_happen.register(told.Scratch)
def _(event: told.Scratch, machine: "InventedMachine") -> None:
    drive = machine.drives[event.drive]
    if isinstance(drive, Disk):  # a scenario that says otherwise was refused when it was read
        drive.surface.scratch(drive.rng, event.units, event.growth, event.place)


@_happen.register(told.HeadWeakens)
def _(event: told.HeadWeakens, machine: "InventedMachine") -> None:
    drive = machine.drives[event.drive]
    if isinstance(drive, Disk):
        drive.weaken_head(event.growth)


@_happen.register(told.BlocksFail)
def _(event: told.BlocksFail, machine: "InventedMachine") -> None:
    drive = machine.drives[event.drive]
    if isinstance(drive, Solid):
        drive.cells.losses = event.a_year


@_happen.register(told.CableLoosens)
def _(event: told.CableLoosens, machine: "InventedMachine") -> None:
    machine.bays[event.bay].loosen(bad_days=event.bad_days, burst=event.burst, hangs=event.hangs)


@_happen.register(told.CableChanged)
def _(event: told.CableChanged, machine: "InventedMachine") -> None:
    machine.bays[event.bay].mend()


@_happen.register(told.Moved)
def _(event: told.Moved, machine: "InventedMachine") -> None:
    drive = machine.drives[event.drive]
    drive.bay = machine.bays[event.to]
    drive.power_up()


@_happen.register(told.Fan)
def _(event: told.Fan, machine: "InventedMachine") -> None:
    machine.draught = event.draught


@_happen.register(told.HotSpell)
def _(event: told.HotSpell, machine: "InventedMachine") -> None:
    now = machine.clock.now()
    until = now + int(event.days * DAY)
    machine.room.spells.append(Spell(since=now, until=until, celsius=event.celsius))


@_happen.register(told.StripFails)
def _(event: told.StripFails, machine: "InventedMachine") -> None:
    machine.strips[event.strip].losses_a_year = event.losses_a_year


@_happen.register(told.Vanishes)
def _(event: told.Vanishes, machine: "InventedMachine") -> None:
    machine.take_away(event.drive, event.days)


@_happen.register(told.Dies)
def _(event: told.Dies, machine: "InventedMachine") -> None:
    machine.drives[event.drive].alive = False
    machine.take_away(event.drive, 0)


@_happen.register(told.Busy)
def _(event: told.Busy, machine: "InventedMachine") -> None:
    machine.busy_until, machine.busy_factor = machine.clock.days() + event.days, event.factor


@_happen.register(told.FirmwareUpdate)
def _(event: told.FirmwareUpdate, machine: "InventedMachine") -> None:
    drive = machine.drives[event.drive]
    drive.firmware = event.firmware
    if event.resets:
        drive.crc = drive.timeouts = 0
