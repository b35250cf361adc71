import pytest

from diskwatch.rehearsal import events, happenings as told
from diskwatch.rehearsal.disk import Disk
from diskwatch.rehearsal.solid import Solid
from tests.rehearsal.examples import HDD, NVME, machine


def test_each_event_changes_what_it_is_about_and_nothing_else():
    one = machine()
    disk, card = one.drives[HDD], one.drives[NVME]
    assert isinstance(disk, Disk)
    assert isinstance(card, Solid)
    events.apply(one, told.Scratch(day=0, drive=HDD, units=5))
    assert disk.surface.latent == 5
    events.apply(one, told.HeadWeakens(day=0, drive=HDD, growth=0.1))
    assert (disk.head.growth, disk.head.weakness) == (0.1, 0.05)
    events.apply(one, told.BlocksFail(day=0, drive=NVME, a_year=100))
    assert card.cells.losses == 100
    events.apply(one, told.Fan(day=0, draught=0.4))
    assert one.draught == 0.4
    events.apply(one, told.HotSpell(day=0, days=2, celsius=9))
    assert one.room.at(one.clock.now()) > one.room.at(one.clock.now() + 3 * 86_400) + 8
    events.apply(one, told.StripFails(day=0, strip="wall", losses_a_year=99))
    assert one.strips["wall"].losses_a_year == 99


def test_a_cable_belongs_to_its_bay_whatever_drive_is_in_it():
    one = machine()
    events.apply(one, told.CableLoosens(day=0, bay="one", bad_days=1.0, burst=9.0))
    assert one.drives[HDD].bay.burst == 9
    events.apply(one, told.Moved(day=0, drive=HDD, to="two"))
    assert one.drives[HDD].bay.burst == 0
    events.apply(one, told.Moved(day=0, drive=NVME, to="one"))
    assert one.drives[NVME].bay.burst == 9
    events.apply(one, told.CableChanged(day=0, bay="one"))
    assert one.drives[NVME].bay.burst == 0


@pytest.mark.parametrize("resets", [True, False])
def test_a_new_firmware_begins_counters_anew_only_where_it_is_said(resets):
    one = machine()
    one.drives[HDD].crc = 37
    events.apply(one, told.FirmwareUpdate(day=0, drive=HDD, firmware="I2", resets=resets))
    assert one.drives[HDD].drive.firmware == "I2"
    assert one.drives[HDD].crc == (0 if resets else 37)


def test_a_dead_drive_never_comes_back_and_one_that_vanished_does():
    one = machine()
    events.apply(one, told.Dies(day=0, drive=HDD))
    events.apply(one, told.Vanishes(day=0, drive=NVME, days=0.5))
    assert not one.survey().found
    for _ in range(13):
        one.live()
    assert [found.place.device for found in one.survey().found] == ["/dev/nvme0"]


def test_an_unknown_event_is_a_fault_of_ours():
    with pytest.raises(TypeError):
        events.apply(machine(), "rain")  # type: ignore[arg-type] # on purpose
