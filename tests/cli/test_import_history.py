import os
import signal
import subprocess

import pytest

from diskwatch.history.reader import Past
from tests.cli.run import COMMAND, ROOT, run, settings_for
from tests.cli.test_watch import GOOD, drives, once


@pytest.fixture
def past(tmp_path):
    """A file with one drive's past."""
    once(tmp_path, [GOOD])
    file = tmp_path / "past.json"
    run("export-history", "--drive", "inv1", "-o", file, "--state", tmp_path / "state")
    return file


def test_a_drive_keeps_its_past_on_another_machine(tmp_path, past):
    ended = run("import-history", past, "--state", tmp_path / "other")
    assert ended.code == 0
    assert "new here" in ended.out
    here, there = drives(tmp_path)["/dev/inv1"], drives(tmp_path, "other")["/dev/inv1"]
    assert {**there, "lives_here": None} == {**here, "lives_here": None}
    again = run("import-history", past, "--state", tmp_path / "other")
    assert "added to what is known of it" in again.out


def test_rows_that_cannot_be_right_are_named_and_the_rest_is_taken_in(tmp_path, past):
    past.write_text(past.read_text().replace('"record":"call"', '"record":"wonder"'))
    ended = run("import-history", past, "--state", tmp_path / "other")
    assert ended.code == 0
    assert "there is no such record: wonder" in ended.err
    assert "/dev/inv1" in drives(tmp_path, "other")


def test_a_file_of_another_sort_is_wrong_usage_and_one_that_cannot_be_read_is_told(tmp_path):
    other = tmp_path / "other.json"
    other.write_text("{}")
    assert run("import-history", other, "--state", tmp_path / "x").code == 2
    other.write_bytes(b"\xff\xfe")
    assert run("import-history", other, "--state", tmp_path / "x").code == 4
    assert run("import-history", tmp_path / "none", "--state", tmp_path / "x").code == 4
    assert not (tmp_path / "x").exists()


def test_while_a_watch_runs_that_watch_takes_it_in_and_goes_on(tmp_path, past):
    settings = settings_for(tmp_path / "player" / "smartctl", tmp_path, more='[io]\nevery = "1s"\n')
    state = tmp_path / "other"
    with subprocess.Popen(
        [*COMMAND, "watch", "--state", str(state), "--settings", str(settings)],
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        cwd=ROOT,
    ) as watch:
        try:
            assert watch.stdout is not None
            assert watch.stdout.readline()
            ended = run("import-history", past, "--state", state)
            assert (ended.code, ended.err) == (0, "")
            assert "rows" in ended.out
            with Past.open(state) as there:
                assert there.find("inv1").call is not None
                texts = [entry.text for entry in there.day_book(kinds=["watch"])]
            assert any("was taken in" in text for text in texts)
        finally:
            watch.send_signal(signal.SIGTERM)
            assert watch.wait(20) == 0


@pytest.mark.skipif(os.geteuid() != 0, reason="needs root to become another user")
def test_without_the_right_to_write_it_ends_with_4_and_says_why(tmp_path, past):
    run("import-history", past, "--state", tmp_path / "other")
    from diskwatch.cli import main  # noqa: PLC0415 - in a child with another user's rights

    child = os.fork()
    if child == 0:
        for folder in tmp_path.parents:
            if str(folder) != "/" and folder.owner() == "root" and folder.name.startswith("pytest"):
                folder.chmod(0o755)
        tmp_path.chmod(0o755)
        os.seteuid(65534)
        os._exit(main(["import-history", str(past), "--state", str(tmp_path / "other")]))
    assert os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]) == 4
