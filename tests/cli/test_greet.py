import pytest

from diskwatch.cli.greet import greeting
from diskwatch.records import Bays
from tests.cli.run import run
from tests.cli.test_watch import GOOD, once
from tests.notices.samples import line
from tests.samples import NOON, NVME


def bays(*lines, watcher=7, trouble=()):
    return Bays(at=NOON, watcher=watcher, drives=lines, trouble=trouble)


def test_it_is_silent_only_when_all_is_keep_and_somebody_is_watching():
    assert greeting(bays(line("keep"), line("keep"))) is None
    for asking in (
        bays(line("keep"), watcher=None),
        bays(line("keep"), line("look")),
        bays(line("keep"), line(None)),
        bays(line("keep"), trouble=("The history is full.",)),
    ):
        assert greeting(asking)


def test_one_drive_is_named_with_its_reason_and_of_several_the_worst_with_how_many_more():
    one = greeting(bays(line("copy", label="archive")))
    assert one == "diskwatch: copy archive (/dev/sda): 16 new sectors wait (pending). See 'diskwatch bays'."
    many = greeting(bays(line("retire", label="archive"), line("look", drive=NVME), line("keep")))
    assert many == "diskwatch: retire archive (/dev/sda). 1 more asks for a hand. See 'diskwatch bays'."


@pytest.mark.parametrize("reason", ["x" * 900, "a\nb\x1b[31m" * 40])
def test_it_is_one_harmless_line_whatever_a_drive_says(reason):
    told = greeting(bays(line("copy", reason=reason))) or ""
    assert len(told) <= 160
    assert told.isprintable()
    assert told.endswith("See 'diskwatch bays'.")


def test_a_login_is_told_that_nobody_watches_and_no_history_is_nothing_to_work_on(tmp_path):
    ended = run("greet", "--state", tmp_path / "none")
    assert (ended.code, ended.err) == (3, "")
    assert ended.out.startswith("diskwatch: nobody is watching")
    once(tmp_path, [GOOD])
    ended = run("greet", "--state", tmp_path / "state")
    assert ended.code == 0
    assert ended.out.startswith("diskwatch: Nobody is watching the drives!")
    assert ended.out.count("\n") == 1
