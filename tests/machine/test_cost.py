"""What reading drives costs, and what it survives in bulk; run by hand, apart from the fast tests.

    pytest -m bench -s tests/machine/test_cost.py
    DISKWATCH_MUTATIONS=100000 pytest -m bench -s tests/machine/test_cost.py -k mutated

Measured on two shared virtual cores: see the figures that the tests print; each is beside its floor.
"""

import json
import os
import random
import time
from collections.abc import Callable

import pytest

from diskwatch.machine.command import Answer, Door, Ending
from diskwatch.machine.document import document_of, plain_lines
from diskwatch.machine.held import device_of
from diskwatch.machine.outcomes import of_words
from diskwatch.machine.protocol import Address, Found
from diskwatch.machine.reading import understood
from diskwatch.machine.smartctl import Smartctl
from diskwatch.records import Drive, Identity, Kind, Outcome, Place
from tests.machine import witness
from tests.machine.mutations import mutated
from tests.machine.recordings import FIXTURES, text_of
from tests.machine.test_reading import DOCUMENTS, ORIGINALS

pytestmark = pytest.mark.bench

DRIVES = 24
MUTATIONS = int(os.environ.get("DISKWATCH_MUTATIONS", "2000"))


def recorded() -> list[tuple[str, str]]:
    """The first recorded drives that can be read, as (name, text); invented ones stand aside."""
    found = []
    for path in sorted(FIXTURES.glob("*/all.txt")):
        text = text_of(path)
        what = understood(text.splitlines(), None, type_=None, path="/dev/x")
        if not path.parent.name.startswith("invented") and what.says_something and what.drive is not None:
            found.append((path.parent.name, text))
    return found[:DRIVES]


class Playing(Door):
    """Hands out one recorded answer a drive, wrapped as ``--json=o`` wraps it; runs nothing."""

    def __init__(self, answers: dict[str, str]) -> None:
        super().__init__()
        self.answers = {
            node: json.dumps({"smartctl": {"output": text.splitlines()}}).encode()
            for node, text in answers.items()
        }

    def run(self, argv: object, *, timeout: float, owner: str = "") -> Answer:
        del timeout
        assert isinstance(argv, list)
        return Answer(ending=Ending.ENDED, status=0, out=self.answers[owner])


def drive(node: str) -> Found:
    return Found(
        address=Address(node=node, type="sat"),
        blocks=(),
        place=Place(device=node),
        drive=Drive(identity=Identity(wwn=None, model=None, serial=None, path=node), kind=Kind.HDD),
    )


def least_cpu_seconds(deed: Callable[[], object], times: int = 5) -> float:
    """The processor time of the quickest of some runs: what others on the machine do must not count."""
    least = float("inf")
    for _ in range(times):
        begun = time.process_time()
        deed()
        least = min(least, time.process_time() - begun)
    return least


def test_two_dozen_recorded_drives_cost_less_than_a_second_of_processor_time():
    drives = recorded()
    assert len(drives) == DRIVES
    tool = Smartctl("smartctl", 60, lambda: 0, door=Playing(dict(drives)))
    families = {name: understood(text.splitlines(), None, type_=None, path="x").family for name, text in drives}
    asked = [drive(name) for name, _ in drives]

    def ours() -> None:
        assert all(tool.ask(one).outcome is Outcome.READ for one in asked)

    def floor() -> None:
        for name, text in drives:
            device_of(text.splitlines(), families[name])

    whole, bare = least_cpu_seconds(ours), least_cpu_seconds(floor)
    print(  # noqa: T201 - a measurement is for whoever runs it
        f"\n{DRIVES} drives: {whole * 1000:.0f} ms of processor time, pySMART alone {bare * 1000:.0f} ms"
    )
    assert whole < 1.0


def test_mutated_answers_raise_nothing_and_give_no_number_that_they_do_not_state():
    dice = random.Random(20_261_201)  # noqa: S311 - dice, no secrets
    begun, cpu = time.monotonic(), time.process_time()
    for number in range(MUTATIONS):
        as_document = number % 5 == 4
        text = mutated(dice.choice(DOCUMENTS if as_document else ORIGINALS), dice)
        document = document_of(text) if as_document else None
        lines = plain_lines(document) if document is not None else tuple(text.splitlines())
        what = understood(lines, document, type_=None, path="/dev/x")
        of_words(lines, dice.choice((0, 2, 3, 4, 64)), what, expects_smart=True, kind=Kind.HDD, command="x")
        witness.check(what, lines, document)
    print(  # noqa: T201 - a measurement is for whoever runs it
        f"\n{MUTATIONS} mutated answers in {time.monotonic() - begun:.0f} s, "
        f"{time.process_time() - cpu:.0f} s of processor time: none raised, none invented"
    )
