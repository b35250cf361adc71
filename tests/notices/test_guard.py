import pytest

from diskwatch.errors import DiskwatchError
from diskwatch.notices.guard import alone


def test_a_second_agent_of_the_same_user_is_refused_and_another_may_follow(tmp_path):
    with (
        alone(tmp_path / "own"),
        pytest.raises(DiskwatchError, match="another agent of yours"),
        alone(tmp_path / "own"),
    ):
        pass
    with alone(tmp_path / "own"):
        pass


def test_a_folder_that_cannot_be_written_is_told(tmp_path):
    (tmp_path / "own").write_text("in the way")
    with pytest.raises(DiskwatchError, match="cannot be written"), alone(tmp_path / "own"):
        pass
