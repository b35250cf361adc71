"""What an owner asks of a watch that runs: requests left in a folder, taken up within ten seconds.

A command may not write the history while the watch does. It leaves its request beside it, and waits:

    DIR/requests/1796126400-4711.json          {"deed": "import-history", "words": {...}}
    DIR/requests/1796126400-4711.answer.json   {"done": ["..."], "wrong": ["..."]} or {"failed": "..."}

Only a file of the history's owner, or of root, that nobody else may write is believed, and so is only a folder.
"""

import json
import os
import stat
import time
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager, suppress
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from diskwatch.errors import DiskwatchError, HistoryError
from diskwatch.places import HISTORY
from diskwatch.units import plain

FOLDER = "requests"
EVERY = 10
"""Seconds between two looks of the watch at the folder, at most."""

PATIENCE = 120.0
"""Seconds that a command waits for its answer; a long past takes a while to be judged anew."""

_LOOK = 0.1
_LARGEST = 1 << 30
_OLD = 86_400
_ANSWER = ".answer.json"


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """What became of a request.

    Attributes:
        done: what was done, sentences.
        wrong: what was left out, and why, one each.
    """

    done: tuple[str, ...] = ()
    wrong: tuple[str, ...] = ()


Deed = Callable[[Mapping[str, Any]], Answer]


def leave(state: Path, deed: str, words: Mapping[str, Any]) -> Path:
    """Leave a request for the watch.

    Args:
        state: the state folder.
        deed: what to do.
        words: what the deed needs, plain JSON values.

    Returns:
        The request, to wait for.

    Raises:
        HistoryError: this user has no right to ask for it.
    """
    folder = state / FOLDER
    name = f"{int(time.time())}-{os.getpid()}-{time.monotonic_ns()}.json"
    try:
        owner = state.stat()
        with _opened(folder, owner) as inside:
            _write(f".{name}", json.dumps({"deed": deed, "words": words}), inside, owner)
            os.rename(f".{name}", name, src_dir_fd=inside, dst_dir_fd=inside)
    except OSError as error:
        raise HistoryError(
            f"the watch cannot be asked: {plain(str(folder))}: {error.strerror}",
            hint="run as the user that owns the history",
        ) from error
    return folder / name


def wait(request: Path, *, patience: float = PATIENCE) -> Answer:
    """Wait for the answer to a request.

    Raises:
        DiskwatchError: it was refused, or nobody answered.
    """
    answer = request.with_name(request.stem + _ANSWER)
    until = time.monotonic() + patience
    while not answer.exists():
        if time.monotonic() > until:
            with suppress(OSError):
                request.unlink()
            raise HistoryError(
                "the watch has not answered",
                hint="see 'diskwatch daybook' for what it did, or end it and run this command again",
            )
        time.sleep(_LOOK)  # another process answers, and nothing tells us when
    try:
        told = json.loads(answer.read_text(encoding="utf-8"))
        answer.unlink()
    except (OSError, ValueError) as error:
        raise HistoryError(f"the answer of the watch cannot be read: {error}") from error
    if "failed" in told:
        raise HistoryError(str(told["failed"]))
    return Answer(done=tuple(map(str, told["done"])), wrong=tuple(map(str, told["wrong"])))


def waiting(state: Path) -> bool:
    """Whether there is something to take up; as quick as a look at a folder is."""
    try:
        return any(map(_is_request, os.listdir(state / FOLDER)))  # noqa: PTH208  # the quickest way to ask
    except OSError:
        return False


def _is_request(name: str) -> bool:
    return name.endswith(".json") and not name.endswith(_ANSWER) and not name.startswith(".")


def take_up(state: Path, deeds: Mapping[str, Deed]) -> int:
    """Take up all requests that wait, oldest first.

    Args:
        state: the state folder.
        deeds: what can be asked for.

    Returns:
        How many were answered.
    """
    folder = state / FOLDER
    try:
        owners = frozenset({(state / HISTORY).stat().st_uid, 0})
        if not _believed(folder.lstat(), owners, stat.S_ISDIR):
            return 0
        names = sorted(entry.name for entry in folder.iterdir())
    except OSError:
        return 0
    _sweep(folder, names)
    asked = [name for name in names if _is_request(name)]
    for name in asked:
        _answer(folder / name, owners, deeds)
    return len(asked)


def _sweep(folder: Path, names: list[str]) -> None:
    """Take away what nobody came back for."""
    for name in names:
        if name.startswith(".") or name.endswith(_ANSWER):
            with suppress(OSError):
                if time.time() - (folder / name).stat().st_mtime > _OLD:
                    (folder / name).unlink()


def _answer(request: Path, owners: frozenset[int], deeds: Mapping[str, Deed]) -> None:
    told: dict[str, object]
    try:
        asked = _read(request, owners)
        deed = deeds.get(str(asked.get("deed")))
        if deed is None:
            raise HistoryError(
                f"this watch knows no request {plain(str(asked.get('deed')))}",
                hint="it may be of an older version: start it again",
            )
        done = deed(asked["words"])
        told = {"done": done.done, "wrong": done.wrong}
    except DiskwatchError as error:
        told = {"failed": str(error)}
    except (OSError, ValueError, KeyError, TypeError, RecursionError) as error:
        told = {"failed": f"the request cannot be understood: {plain(str(error))}"}
    with suppress(OSError):
        request.unlink()  # first, so that a request that ends the watch is not taken up again by the next one
    making = request.with_name(f".{request.stem}{_ANSWER}")
    with suppress(OSError):
        _write(str(making), json.dumps(told))
        making.rename(request.with_name(request.stem + _ANSWER))


def _read(request: Path, owners: frozenset[int]) -> dict[str, Any]:
    descriptor = os.open(request, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK | os.O_CLOEXEC)
    with os.fdopen(descriptor, "rb") as file:
        about = os.fstat(descriptor)
        if not _believed(about, owners, stat.S_ISREG) or about.st_size > _LARGEST:
            raise HistoryError("the request is not from the history's owner", hint="run as that user")
        asked = json.loads(file.read())
    if not isinstance(asked, dict) or not isinstance(asked.get("words"), dict):
        raise ValueError("it is no request")  # noqa: TRY004  # the file is wrong, not our caller
    return asked


def _believed(about: os.stat_result, owners: frozenset[int], sort: Callable[[int], bool]) -> bool:
    return sort(about.st_mode) and about.st_uid in owners and not about.st_mode & 0o022


@contextmanager
def _opened(folder: Path, owner: os.stat_result) -> Iterator[int]:
    """The folder of requests, made where there is none; a descriptor of it.

    Root asks the watch of another user in a folder where that user may change what lies there at any moment. So
    all is done inside the folder that was opened and looked at, and no link is followed.
    """
    with suppress(FileExistsError):
        folder.mkdir(mode=0o755)
    inside = os.open(folder, os.O_RDONLY | os.O_DIRECTORY | os.O_NOFOLLOW | os.O_CLOEXEC)
    try:
        about = os.fstat(inside)
        if about.st_uid == os.geteuid() != owner.st_uid:
            os.fchown(inside, owner.st_uid, owner.st_gid)
        elif about.st_uid not in {owner.st_uid, 0}:
            raise HistoryError(
                f"{plain(str(folder))} is not the history owner's; nothing is asked for there",
                hint="take it away",
            )
        yield inside
    finally:
        os.close(inside)


def _write(name: str, text: str, inside: int | None = None, owner: os.stat_result | None = None) -> None:
    # A past names drives and folders: nobody but its owner and the watch need read it.
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_NOFOLLOW | os.O_CLOEXEC
    descriptor = os.open(name, flags, 0o600, dir_fd=inside)
    with os.fdopen(descriptor, "w", encoding="utf-8") as file:
        if owner is not None and owner.st_uid != os.geteuid():
            # Else the watch of that user could not read what root asks.
            os.fchown(descriptor, owner.st_uid, owner.st_gid)
        file.write(text)
