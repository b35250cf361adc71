"""Take away what `diskwatch install` laid: units, command, environment. The history and the settings stay."""

import argparse
import os
import shutil

from diskwatch.cli import laying
from diskwatch.cli.laying import AGENT, Layout, Steps
from diskwatch.errors import DiskwatchError


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("--user", action="store_true", help="what was laid for this user alone")
    parser.add_argument("--dry-run", action="store_true", help="say what would be done, and do nothing")


def run(args: argparse.Namespace) -> int:
    """Take it away; 0, also where there is nothing, 4 where something cannot be done."""
    if not args.user and not args.dry_run and os.geteuid() != 0:
        raise DiskwatchError(
            "what was laid for the whole machine can be taken away by root alone",
            hint="run this as root, or with --user",
        )
    layout = laying.chosen(own=args.user)
    steps = Steps(print, dry=args.dry_run)
    laid = [name for name, path in layout.units.items() if path.exists()]
    if not laid and not layout.venv.exists():
        steps.note("nothing was laid here, so there is nothing to take away")
    if laid and laying.systemd_runs():
        _stop(layout, steps, laid)
    for name in laid:
        path = layout.units[name]
        steps.do(f"take away the unit {path}", path.unlink)
    if laid and laying.systemd_runs():
        steps.run("let systemd read its units again", [*layout.systemctl, "daemon-reload"])
    if layout.link.is_symlink() and layout.link.readlink() == layout.program:
        steps.do(f"take away the command {layout.link}", layout.link.unlink)
    # Last of all: this very command may be running from it.
    if (layout.venv / "pyvenv.cfg").is_file():
        steps.do(f"take away the environment in {layout.venv}", lambda: shutil.rmtree(layout.venv))
    steps.note(f"the history in {layout.history} and the settings stay")
    return 0


def _stop(layout: Layout, steps: Steps, laid: list[str]) -> None:
    manager = layout.systemctl
    if not layout.own:
        steps.run("disable the agent in desktop sessions", ["systemctl", "--global", "disable", AGENT])
    mine = [name.removeprefix("user/") for name in laid if layout.own or not name.startswith("user/")]
    if mine:
        steps.run(f"stop and disable {' and '.join(mine)}", [*manager, "disable", "--now", *mine])
