import pytest

from diskwatch.history.later import read
from tests.cli.run import run
from tests.cli.test_watch import GOOD, once


@pytest.fixture
def own(tmp_path):
    """The user's own state folder, apart from the history."""
    once(tmp_path, [GOOD])
    return tmp_path / "own"


def later(tmp_path, *words):
    return run("later", *words, "--state", tmp_path / "state", env={"XDG_STATE_HOME": str(tmp_path / "own")})


def test_it_is_kept_in_the_users_own_folder_and_the_history_is_left_alone(tmp_path, own):
    before = (tmp_path / "state" / "history.db").read_bytes()
    ended = later(tmp_path, "inv1", "--days", "3")
    assert (ended.code, ended.err) == (0, "")
    assert "are put off for you until" in ended.out
    assert len(read(own / "diskwatch", 0)) == 1
    assert (tmp_path / "state" / "history.db").read_bytes() == before


@pytest.mark.parametrize("days", ["0", "-1", "91", "soon", "1e3"])
def test_a_number_of_days_that_is_not_possible_is_wrong_usage(tmp_path, own, days):
    assert later(tmp_path, "inv1", f"--days={days}").code == 2
    assert not own.exists()


def test_a_drive_that_nobody_knows_is_wrong_usage_and_no_history_nothing_to_work_on(tmp_path, own):
    ended = later(tmp_path, "nobody")
    assert ended.code == 2
    assert "no drive is called nobody" in ended.err
    assert run("later", "inv1", "--state", tmp_path / "none").code == 3
    assert not own.exists()


def test_a_folder_that_cannot_be_written_ends_with_4_and_names_it(tmp_path, own):
    own.write_text("no folder")
    ended = later(tmp_path, "inv1")
    assert ended.code == 4
    assert "later.json cannot be written" in ended.err
