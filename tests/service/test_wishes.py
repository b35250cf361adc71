from contextlib import contextmanager, nullcontext

import pytest

from diskwatch.errors import DiskwatchError
from diskwatch.service import requests
from diskwatch.service.keeper import Keeper
from diskwatch.service.removal import MOVE
from diskwatch.service.wishes import Wishes
from tests.samples import NOON


@pytest.fixture
def keeper(tmp_path):
    keeper = Keeper(tmp_path, now=lambda: NOON)
    yield keeper
    keeper.close()


def test_what_cannot_be_done_is_answered_between_two_rounds(tmp_path, keeper):
    held = []

    @contextmanager
    def between():
        held.append(True)
        yield

    wishes = Wishes(
        tmp_path,
        keeper,
        between_rounds=between,
        end=lambda: None,
        now=lambda: NOON,
    )
    request = requests.leave(tmp_path, "tell", {"drive": "nobody", "facts": {"label": "x"}})
    wishes.look()
    with pytest.raises(DiskwatchError):
        requests.wait(request, patience=5)
    assert held == [True]
    assert not wishes.moves
    assert wishes.moved() is None


def test_a_move_ends_the_watch_first(tmp_path, keeper):
    ended = []
    wishes = Wishes(
        tmp_path,
        keeper,
        between_rounds=nullcontext,
        end=lambda: ended.append(wishes.moves),
        now=lambda: NOON,
    )
    request = requests.leave(tmp_path, MOVE, {"to": str(tmp_path)})
    wishes.look()
    while not ended:
        pass
    keeper.close()
    assert ended == [True]
    assert wishes.moved() == tmp_path
    with pytest.raises(DiskwatchError, match="goes on where it was"):
        requests.wait(request, patience=5)
