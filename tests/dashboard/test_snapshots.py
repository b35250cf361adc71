import time

import pytest

from tests.dashboard.snapshots import FOLDER, TAKEN, kept, taken


@pytest.fixture
def in_utc(monkeypatch):
    monkeypatch.setenv("TZ", "UTC")
    time.tzset()
    yield
    monkeypatch.undo()
    time.tzset()


@pytest.mark.usefixtures("in_utc")
@pytest.mark.parametrize("name", TAKEN)
async def test_a_screen_is_as_it_was_when_it_was_last_looked_at(name):
    assert await taken(name) == kept(name).read_text(encoding="utf-8"), (
        "run: python -m tests.dashboard.snapshots"
    )


def test_no_screen_is_kept_that_nobody_takes():
    assert {path.stem for path in FOLDER.iterdir()} == set(TAKEN)
