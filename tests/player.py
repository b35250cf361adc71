"""Machines that tests make up: a command that answers as smartctl would, for the drives that a test names."""

import json
import runpy
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

FIXTURES = Path(__file__).parents[1] / "fixtures"
ANSWERS = FIXTURES / "smartctl"
WORKSHOP = FIXTURES / "machines" / "workshop.toml"


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """One call of the command.

    Attributes:
        at: when, seconds since 1970.
        pid: process number.
        argv: arguments, the command's own name left out.
        woke: whether it would have woken a sleeping drive.
    """

    at: float
    pid: int
    argv: tuple[str, ...]
    woke: bool


def lay(folder: Path, drives: Sequence[Mapping[str, Any]], **machine: Any) -> Path:
    """Lay a machine out in a folder.

    Args:
        folder: where; made where it is missing.
        drives: one a drive, keys as the player's first lines tell; ``folder`` may be the bare name of a folder
            of fixtures/smartctl.
        machine: keys of the machine itself: ``json``, ``standby_status``, ``version``.

    Returns:
        The command to name as ``[smart] command``.
    """
    lines = [f"{key} = {_toml(value)}" for key, value in machine.items()]
    for drive in drives:
        lines += ["", "[[drive]]"]
        lines += [f"{key} = {_toml(_whole(key, value))}" for key, value in drive.items()]
    folder.mkdir(parents=True, exist_ok=True)
    plan = folder / "plan.toml"
    plan.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return lay_plan(folder, plan)


def lay_plan(folder: Path, plan: Path = WORKSHOP) -> Path:
    """Lay a described machine out in a folder; the command comes back."""
    made = runpy.run_path(str(FIXTURES / "player" / "smartctl"))["make"](folder, plan)
    return Path(made)


def calls(command: Path) -> list[Asked]:
    """Every call that the command got so far, oldest first."""
    log = command.parent / "calls.jsonl"
    if not log.exists():
        return []
    told = (json.loads(line) for line in log.read_text(encoding="utf-8").splitlines())
    return [Asked(at=one["at"], pid=one["pid"], argv=tuple(one["argv"]), woke=one["woke"]) for one in told]


def set_day(command: Path, number: int) -> None:
    """Choose the answers of every drive by number, 1 is the first, instead of by calls."""
    new = command.parent / "now.new"
    new.write_text(str(number), encoding="utf-8")
    new.replace(command.parent / "now")  # whole at every moment, since calls may be under way


def _whole(key: str, value: Any) -> Any:
    """A bare folder name as the path of the folder of answers."""
    return str(ANSWERS / value) if key == "folder" and "/" not in str(value) else value


def _toml(value: Any) -> str:
    """A value as TOML writes it; its strings, numbers and truth values are those of JSON."""
    if isinstance(value, Mapping):
        return "{" + ", ".join(f"{key} = {_toml(_whole(key, one))}" for key, one in value.items()) + "}"
    if isinstance(value, list | tuple):
        return "[" + ", ".join(_toml(one) for one in value) + "]"
    return json.dumps(str(value) if isinstance(value, Path) else value)
