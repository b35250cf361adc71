"""What every test stands on: no settings, folders or environment of whoever runs them."""

import os
from pathlib import Path

import pytest
from hypothesis import settings

# A busy machine must not fail a law, and what failed once must fail again.
settings.register_profile("house", deadline=None, derandomize=True)
settings.load_profile("house")

ROOT = Path(__file__).resolve().parent.parent


@pytest.fixture(autouse=True)
def _nobodys_machine(monkeypatch: pytest.MonkeyPatch, tmp_path_factory: pytest.TempPathFactory) -> None:
    """Shut out the developer's own home, settings, state and colours."""
    home = tmp_path_factory.mktemp("home")
    monkeypatch.setenv("HOME", str(home))
    for name in ("XDG_STATE_HOME", "XDG_CONFIG_HOME", "XDG_RUNTIME_DIR", "NO_COLOR", "DISKWATCH_PLAYER"):
        monkeypatch.delenv(name, raising=False)


@pytest.fixture
def shared() -> Path:
    """The folder of recorded data that is not part of the repository; the test is skipped without it."""
    folder = Path(os.environ.get("DISKWATCH_SHARED", ROOT.parent / "shared")) / "data"
    if not folder.is_dir():
        pytest.skip("the recorded drive data are not part of the repository (set DISKWATCH_SHARED)")
    return folder
