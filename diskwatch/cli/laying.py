"""What `install` lays and `uninstall` takes away: places, units, and the commands that do it.

Every change is a step that first says what it does; with ``--dry-run`` saying is all.
"""

import os
import shutil
import subprocess
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path

from diskwatch.errors import DiskwatchError
from diskwatch.units import plain

_PACKAGED = Path(__file__).parent / "systemd"
_IN_REPOSITORY = Path(__file__).parents[2] / "systemd"

PROGRAM = "/opt/diskwatch/bin/diskwatch"
"""The program as the unit files name it."""

WATCH = "diskwatch.service"
AGENT = "diskwatch-notify.service"

_PATIENCE = 600.0
"""Seconds that one command gets; libraries may come over a slow line."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """Where everything lies.

    Attributes:
        own: whether it is one user's alone.
        venv: the environment of its own.
        link: where the command is found on PATH.
        units: where each unit lies, by its name beside the others in the repository.
        history: where the history lies, which stays whatever is taken away.
    """

    own: bool
    venv: Path
    link: Path
    units: dict[str, Path]
    history: Path

    @property
    def program(self) -> Path:
        """The command in the environment."""
        return self.venv / "bin" / "diskwatch"

    @property
    def systemctl(self) -> tuple[str, ...]:
        """The manager that runs the units."""
        return ("systemctl", "--user") if self.own else ("systemctl",)


def system(root: Path = Path("/")) -> Layout:
    """The whole machine's; ``root`` is another folder for tests alone."""
    etc = root / "etc/systemd"
    return Layout(
        own=False,
        venv=root / "opt/diskwatch",
        link=root / "usr/local/bin/diskwatch",
        units={
            WATCH: etc / "system" / WATCH,
            AGENT: etc / "system" / AGENT,
            f"user/{AGENT}": etc / "user" / AGENT,
        },
        history=root / "var/lib/diskwatch",
    )


def user(home: Path) -> Layout:
    """One user's own."""
    units = home / ".config/systemd/user"
    return Layout(
        own=True,
        venv=home / ".local/share/diskwatch/venv",
        link=home / ".local/bin/diskwatch",
        units={f"user/{WATCH}": units / WATCH, f"user/{AGENT}": units / AGENT},
        history=home / ".local/state/diskwatch",
    )


def chosen(*, own: bool) -> Layout:
    """The layout that is meant: this user's own, or the machine's."""
    return user(Path.home()) if own else system()


def unit(name: str, layout: Layout) -> str:
    """A unit's text, with the program where this layout has it."""
    folder = _PACKAGED if _PACKAGED.is_dir() else _IN_REPOSITORY
    return (folder / name).read_text(encoding="utf-8").replace(PROGRAM, str(layout.program))


def systemd_runs() -> bool:
    """Whether systemd runs this machine (sd_booted(3))."""
    return Path("/run/systemd/system").is_dir()


class Steps:
    """Does one thing after the other, and says of each what it is."""

    def __init__(self, say: Callable[[str], None], *, dry: bool) -> None:
        """Begin.

        Args:
            say: writes one line.
            dry: whether saying is all.
        """
        self._say, self._dry = say, dry

    def note(self, text: str) -> None:
        """Say something that changes nothing."""
        self._say(plain(text))

    def do(self, text: str, deed: Callable[[], object]) -> None:
        """Say what is done, and do it.

        Raises:
            DiskwatchError: it cannot be done.
        """
        self._say(plain(f"{'would ' if self._dry else ''}{text}"))
        if self._dry:
            return
        try:
            deed()
        except OSError as error:
            raise DiskwatchError(
                f"could not {text}: {error.strerror}", hint="see to that, then run this again"
            ) from error

    def run(self, text: str, command: Sequence[str | Path]) -> None:
        """Say what is done, and do it by a command.

        Raises:
            DiskwatchError: the command cannot be run or fails; with its last line.
        """
        self.do(text, lambda: _run(text, command))


def write(path: Path, text: str) -> None:
    """Lay a file that everybody may read, whole or not at all."""
    path.parent.mkdir(parents=True, exist_ok=True)
    making = path.with_name(f".{path.name}.{os.getpid()}")
    making.write_text(text, encoding="utf-8")
    making.chmod(0o644)
    making.replace(path)


def _run(text: str, command: Sequence[str | Path]) -> None:
    words = [str(one) for one in command]
    if shutil.which(words[0]) is None:
        raise DiskwatchError(f"could not {text}: there is no {words[0]} here")
    try:
        done = subprocess.run(
            words, capture_output=True, text=True, errors="replace", timeout=_PATIENCE, check=False,
            stdin=subprocess.DEVNULL,
        )  # fmt: skip
    except subprocess.TimeoutExpired as error:
        raise DiskwatchError(f"could not {text}: {words[0]} took more than {_PATIENCE:.0f} seconds") from error
    if done.returncode:
        last = next((one for one in reversed((done.stdout + done.stderr).splitlines()) if one.strip()), "")
        raise DiskwatchError(f"could not {text}: {plain(last.strip()) or f'it ended with {done.returncode}'}")
