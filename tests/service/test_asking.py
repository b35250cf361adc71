import threading

from diskwatch.service.asking import Asking, InTurn
from tests.samples import HDD, NOON, NVME, read
from tests.service.machines import ScriptedMachine, found


def both():
    machine = ScriptedMachine(found(HDD), found(NVME))
    machine.answers = {"/dev/sda": [read(NOON)], "/dev/nvme0": [read(NOON, NVME)]}
    return machine


def nodes(batch):
    return sorted(answer.found.address.node for answer in batch)


def test_quick_answers_come_in_one_batch():
    machine = both()
    asking = Asking(machine, machine.listed)
    assert nodes(asking.batch()) == ["/dev/nvme0", "/dev/sda"]
    assert asking.waiting == 0


def test_what_came_in_is_handed_over_while_a_slow_one_is_waited_for(monkeypatch):
    monkeypatch.setattr("diskwatch.service.asking.PATIENCE", 0.05)
    machine = both()
    machine.hold["/dev/sda"] = threading.Event()
    asking = Asking(machine, machine.listed)
    assert nodes(asking.batch()) == ["/dev/nvme0"]
    assert asking.waiting == 1
    machine.hold["/dev/sda"].set()
    assert nodes(asking.batch()) == ["/dev/sda"]


def test_no_drive_to_ask_is_an_empty_batch():
    asking = Asking(both(), ())
    assert (asking.batch(), asking.waiting) == ((), 0)


def test_in_turn_answers_come_in_the_order_of_the_list():
    machine = both()
    asking = InTurn(machine, machine.listed)
    assert [answer.found.address.node for answer in asking.batch()] == ["/dev/sda", "/dev/nvme0"]
    assert asking.waiting == 0
