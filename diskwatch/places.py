"""Every path that the program uses of its own accord."""

import contextlib
import os
import stat
from pathlib import Path

from diskwatch.errors import UsageError

SYSTEM_STATE = Path("/var/lib/diskwatch")
SYSTEM_SETTINGS = Path("/etc/diskwatch/settings.toml")
SYSTEM_RUN = Path("/run/diskwatch")
HISTORY = "history.db"
WATCH_LOCK = "watch.lock"
WRITE_LOCK = "write.lock"
POINTER = "moved-to"
"""A file that lies where a history lay, and holds the folder that it was moved to."""

_LONGEST_PATH = 4096
_MOST_MOVES = 16


def _xdg(variable: str, fallback: str) -> Path:
    """An XDG base directory; a relative path there is invalid and ignored, as the specification says.

    Raises:
        UsageError: neither the variable nor the user's home is known.
    """
    named = os.environ.get(variable, "")
    if named.startswith("/"):
        return Path(named)
    try:
        return Path.home() / fallback
    except RuntimeError as error:
        raise UsageError(
            "this user has no home folder", hint="name a folder with --state, or set HOME"
        ) from error


def is_there(path: Path) -> bool:
    """Whether something lies there, as far as this user may see."""
    try:
        path.stat()
    except OSError:
        return False
    return True


def user_state() -> Path:
    """This user's own state folder."""
    return _xdg("XDG_STATE_HOME", ".local/state") / "diskwatch"


def state_folder(named: str | None) -> Path:
    """Where the history lies: the folder named, else the system's where it can be read, else this user's.

    Where a history was moved away from there, it is the folder that it was moved to; but where nothing is found
    behind the last of such pointers, say because a drive is not mounted, it is the folder that it was moved
    from: whoever opens that says so, and no new history is begun in the other's place.

    Raises:
        UsageError: the name is empty, or this user has no home folder.
    """
    if named == "":
        raise UsageError("--state names no folder", hint="leave it out for the default")
    if named is not None:
        return _followed(Path(named))
    begun = is_there(SYSTEM_STATE / HISTORY) or moved_to(SYSTEM_STATE) is not None
    if os.geteuid() == 0 or (begun and os.access(SYSTEM_STATE, os.R_OK | os.X_OK)):
        return _followed(SYSTEM_STATE)
    return _followed(user_state())


def _followed(folder: Path) -> Path:
    here = folder
    for _ in range(_MOST_MOVES):
        if is_there(here / HISTORY):
            return here
        there = moved_to(here)
        if there is None:
            break
        here = there
    return folder


def moved_to(folder: Path) -> Path | None:
    """The folder that a history was moved to from here, or None.

    Only a plain file is believed, of this user or root. An ordinary user, who can harm nobody but themselves,
    also believes the owner of the folder.
    """
    try:
        descriptor = os.open(folder / POINTER, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK | os.O_CLOEXEC)
    except OSError:
        return None
    with os.fdopen(descriptor, "rb") as file:
        about = os.fstat(descriptor)
        if not stat.S_ISREG(about.st_mode) or about.st_uid not in _believed(folder):
            return None
        written = file.read(_LONGEST_PATH + 1)
    path = written.removesuffix(b"\n")
    if not path.startswith(b"/") or len(path) > _LONGEST_PATH or b"\0" in path or b"\n" in path:
        return None
    return Path(os.fsdecode(path))


def _believed(folder: Path) -> set[int]:
    owners = {0, os.geteuid()}
    if os.geteuid() != 0:
        with contextlib.suppress(OSError):
            owners.add(folder.stat().st_uid)
    return owners


def settings_file(named: str | None) -> Path | None:
    """The settings file: the one named, else this user's, else the system's, else None.

    Root reads the system's only: settings name a program to run, and under ``su`` or ``sudo`` the home may be
    another user's.

    Raises:
        UsageError: this user has no home folder.
    """
    if named is not None:
        return Path(named)
    root = os.geteuid() == 0
    own = () if root else (_xdg("XDG_CONFIG_HOME", ".config") / "diskwatch" / "settings.toml",)
    return next((candidate for candidate in (*own, SYSTEM_SETTINGS) if is_there(candidate)), None)


def live_folders(state: Path) -> tuple[Path, ...]:
    """Where figures of the last seconds may be shared, best first: memory, so that no drive is written to."""
    runtime = os.environ.get("XDG_RUNTIME_DIR", "")
    runtimes = [Path(runtime)] if runtime.startswith("/") else []
    with contextlib.suppress(OSError):
        # Where root looks at a user's own watch, the figures lie in that user's folder.
        runtimes.append(Path("/run/user") / str(state.stat().st_uid))
    own = [folder / "diskwatch" for folder in dict.fromkeys(runtimes)]
    return (SYSTEM_RUN, *own, state)
