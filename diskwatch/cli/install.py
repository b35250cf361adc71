"""Lay diskwatch on this machine for good: an environment of its own, the command, and the units for systemd.

It may be run again at any time: what is there stays or is brought up to date, and the watch starts anew.
With --user it is laid for this user alone, without root's rights: the agent, and where nobody watches for the
whole machine a watch of this user's own.
"""

import argparse
import os
import sys
from pathlib import Path

from diskwatch.cli import laying
from diskwatch.cli.laying import AGENT, WATCH, Layout, Steps
from diskwatch.errors import DiskwatchError, UsageError

_ROOT = Path(__file__).parents[2]


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("--user", action="store_true", help="for this user alone")
    parser.add_argument("--dry-run", action="store_true", help="say what would be done, and do nothing")
    parser.add_argument(
        "--wheels",
        metavar="DIR",
        help="folder of wheels to install from; nothing is fetched from a network then",
    )


def run(args: argparse.Namespace) -> int:
    """Lay it; 0, 2 where it is not known from what, 4 where something cannot be done."""
    if not args.user and not args.dry_run and os.geteuid() != 0:
        raise DiskwatchError(
            "the service of the whole machine can be laid by root alone",
            hint="run this as root, or with --user",
        )
    layout = laying.chosen(own=args.user)
    steps = Steps(print, dry=args.dry_run)
    _environment(layout, steps, _source(args.wheels))
    _link(layout, steps)
    wanted = _units(layout)
    for name in wanted:
        _unit(name, layout, steps)
    if laying.systemd_runs():
        _start(layout, steps, own_watch=f"user/{WATCH}" in wanted)
    else:
        steps.note("systemd does not run here, so nothing was started; the units wait for it")
    steps.note(f"the history lies in {layout.history}; 'diskwatch uninstall' takes all away but that")
    return 0


def _source(wheels: str | None) -> list[str | Path]:
    """What pip installs from."""
    if wheels is not None:
        folder = Path(wheels).absolute()
        if not any(folder.glob("diskwatch-*.whl")):
            raise UsageError(f"--wheels {wheels} holds no wheel of diskwatch", hint="name the folder that does")
        return ["--no-index", "--find-links", folder, "diskwatch"]
    if (_ROOT / "pyproject.toml").is_file():
        return [_ROOT]
    raise UsageError(
        "it is not known from what to install", hint="run this from a clone, or name a folder with --wheels"
    )


def _environment(layout: Layout, steps: Steps, source: list[str | Path]) -> None:
    python = layout.venv / "bin" / "python"
    if python.exists():
        steps.note(f"the environment in {layout.venv} is there already")
    else:
        steps.run(f"make an environment in {layout.venv}", [sys.executable, "-m", "venv", layout.venv])
    pip: list[str | Path] = [python, "-m", "pip", "install", "--quiet", "--disable-pip-version-check"]
    steps.run("install diskwatch and its libraries into it", [*pip, "--upgrade", *source])
    # The same version number may stand for other code, say from a clone that has moved on.
    steps.run("bring diskwatch itself up to date", [*pip, "--force-reinstall", "--no-deps", *source])


def _link(layout: Layout, steps: Steps) -> None:
    link = layout.link
    if link.is_symlink() and link.readlink() == layout.program:
        steps.note(f"the command {link} is there already")
    elif link.is_symlink() or link.exists():
        steps.note(f"{link} is somebody else's and stays; the command is {layout.program}")
    else:

        def lay() -> None:
            link.parent.mkdir(parents=True, exist_ok=True)
            link.symlink_to(layout.program)

        steps.do(f"lay the command {link}", lay)


def _units(layout: Layout) -> tuple[str, ...]:
    """Which units are wanted; a watch of the user's own only where nobody watches for all."""
    shared = laying.system().units[WATCH].exists()
    return tuple(name for name in layout.units if not (shared and name == f"user/{WATCH}"))


def _unit(name: str, layout: Layout, steps: Steps) -> None:
    path, text = layout.units[name], laying.unit(name, layout)
    if path.is_file() and path.read_text(encoding="utf-8", errors="replace") == text:
        steps.note(f"the unit {path} is there already")
    else:
        steps.do(f"lay the unit {path}", lambda: laying.write(path, text))


def _start(layout: Layout, steps: Steps, *, own_watch: bool) -> None:
    manager = layout.systemctl
    steps.run("let systemd read the units", [*manager, "daemon-reload"])
    if layout.own:
        wanted = [WATCH, AGENT] if own_watch else [AGENT]
    else:
        wanted = [WATCH, AGENT]
        steps.run("enable the agent in every desktop session", ["systemctl", "--global", "enable", AGENT])
    steps.run(f"enable {' and '.join(wanted)}", [*manager, "enable", *wanted])
    steps.run(f"start {' and '.join(wanted)} anew", [*manager, "restart", *wanted])
