"""The command line as a person or a script meets it: a process of its own, its output, its exit code."""

import json
import os
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import Any

ROOT = Path(__file__).resolve().parents[2]
COMMAND = [sys.executable, "-W", "error", "-m", "diskwatch"]


@dataclass(frozen=True)
class Ended:
    """How a command ended."""

    code: int
    out: str
    err: str

    @property
    def json(self) -> Any:
        return json.loads(self.out)


def run(*words: object, timeout: float = 60, env: dict[str, str] | None = None) -> Ended:
    """Run a command to its end; its standard error never holds a traceback."""
    done = subprocess.run(
        [*COMMAND, *map(str, words)],
        capture_output=True,
        text=True,
        timeout=timeout,
        check=False,
        cwd=ROOT,
        env={**os.environ, **(env or {})},
        stdin=subprocess.DEVNULL,
    )
    assert "Traceback" not in done.stderr, done.stderr
    return Ended(done.returncode, done.stdout, done.stderr)


def settings_for(command: object, folder: Path, *, timeout: str = "20s", more: str = "") -> Path:
    """A settings file that names a smartctl command."""
    path = folder / "settings.toml"
    path.write_text(f'[smart]\ncommand = "{command}"\ntimeout = "{timeout}"\n{more}', encoding="utf-8")
    return path
