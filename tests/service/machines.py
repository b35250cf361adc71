"""A scripted machine: the recorded twin of a computer, for tests of what is done with its answers."""

import threading
from collections.abc import Mapping

from diskwatch.machine.protocol import Address, Counted, Found, Survey
from diskwatch.records import Drive, IoCounts, Pass, Place


def found(
    drive: Drive, *, device: str | None = None, bay: str | None = "bay-1", block: str | None = None
) -> Found:
    """A drive as listed."""
    node = device or drive.identity.path
    return Found(
        address=Address(node=node, type=None),
        blocks=(block or node.removeprefix("/dev/"),),
        place=Place(device=node, bay=bay),
        drive=drive,
    )


class ScriptedMachine:
    """Answers from a script; remembers what it was asked.

    Attributes:
        listed: what the survey lists.
        troubles: what it complains of.
        answers: passes by node, in turn; the last one stays.
        totals: traffic totals, in turn; the last one stays.
        hold: set a node's event to let an answer go that is held back.
        asked: nodes in the order of the questions.
    """

    def __init__(self, *listed: Found) -> None:
        self.listed = list(listed)
        self.troubles: tuple[str, ...] = ()
        self.answers: dict[str, list[Pass]] = {}
        self.totals: list[Mapping[str, Counted]] = [{}]
        self.hold: dict[str, threading.Event] = {}
        self.asked: list[str] = []
        self.stopped = False

    def survey(self) -> Survey:
        return Survey(found=tuple(self.listed), troubles=self.troubles)

    def ask(self, found: Found) -> Pass:
        node = found.address.node
        self.asked.append(node)
        if node in self.hold:
            assert self.hold[node].wait(10)
        turn = self.answers[node]
        return turn.pop(0) if len(turn) > 1 else turn[0]

    def counts(self) -> Mapping[str, Counted]:
        return self.totals.pop(0) if len(self.totals) > 1 else self.totals[0]

    def stop(self) -> None:
        self.stopped = True


def counted(
    reads: int, *, instance: str = "boot 1, disk 1", busy_ms: int = 0, in_flight: int | None = None
) -> Counted:
    """Totals of a block device that has only read."""
    return Counted(
        counts=IoCounts(
            reads=reads,
            writes=0,
            read_bytes=reads * 4096,
            write_bytes=0,
            read_ms=reads * 5,
            write_ms=0,
            busy_ms=busy_ms,
        ),
        instance=instance,
        in_flight=in_flight,
    )
