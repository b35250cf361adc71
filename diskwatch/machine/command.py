"""The one door through which this program runs another one, and gets its answer in bounded time.

A drive that is dying can hold whoever asks it for minutes, in a state in which not even SIGKILL is obeyed. So
nothing here waits without a limit: a child that does not die is left behind, counted, and reaped when the
kernel lets go of it. Until then no other is run for the same owner, so that they do not pile up. Even starting
one may take for ever, where the command itself lies on the disk that hangs.
"""

import contextlib
import errno
import os
import queue
import selectors
import signal
import subprocess
import threading
import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from enum import Enum, auto
from typing import IO

MOST_OUTPUT = 4 * 1024 * 1024
"""Bytes of output after which a child is cut off: a full answer of smartctl is some 100 kB."""

_GRACE = 1.0
"""Seconds that a killed child gets to disappear before it is left behind."""

_LINGER = 0.5
"""Seconds in which output may still come after the command itself has ended; who holds its pipes longer is some
helper of it, and must not cost the answer that it gave."""

_LOOK = 0.25
"""Seconds between looks at whether the command itself has ended, while its pipes stay open."""

_SBIN = "/usr/local/sbin:/usr/sbin:/sbin"


class Ending(Enum):
    """How running a command ended."""

    ENDED = auto()
    MISSING = auto()
    NOT_EXECUTABLE = auto()
    NOT_STARTED = auto()
    TIMED_OUT = auto()
    HELD = auto()
    TOO_MUCH = auto()
    STOPPED = auto()


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """What a command left behind.

    Attributes:
        ending: how it ended.
        status: its exit status, negative for a signal; None unless it ended by itself.
        out: standard output; what came before the end where it was cut off.
        err: standard error likewise.
        trouble: the system's own words where it could not be started, else empty.
    """

    ending: Ending
    status: int | None = None
    out: bytes = b""
    err: bytes = b""
    trouble: str = ""


class Door:
    """Runs commands; any number at a time, from any thread."""

    def __init__(self, *, limit: int = MOST_OUTPUT, grace: float = _GRACE) -> None:
        """Build a door.

        Args:
            limit: most bytes of output that a child may write.
            grace: seconds that a killed child gets to disappear.
        """
        self._limit = limit
        self._grace = grace
        self._lock = threading.Lock()
        self._running: set[subprocess.Popen[bytes]] = set()
        self._left_behind: list[tuple[str, subprocess.Popen[bytes]]] = []
        self._late: list[tuple[str, _Start]] = []
        self._stopped = False

    @property
    def abandoned(self) -> int:
        """How many children were killed but are still held by the kernel."""
        with self._lock:
            self._reap()
            return len(self._left_behind) + len(self._late)

    def run(self, argv: Sequence[str], *, timeout: float, owner: str = "") -> Answer:
        """Run a command without a shell, in the C locale, with nothing on its standard input.

        Args:
            argv: the command, a path or a name on PATH, and its arguments.
            timeout: seconds after which it is killed with all that it started.
            owner: for whom it runs, say the drive; where a child of this owner is still held by the kernel,
                nothing is run.

        Returns:
            What became of it; this never raises for the command's sake and returns within the time-out, the
            grace and a little.
        """
        deadline = time.monotonic() + timeout
        with self._lock:
            if self._stopped:
                return Answer(ending=Ending.STOPPED)
            self._reap()
            if owner and owner in {held for held, _ in (*self._left_behind, *self._late)}:
                return Answer(ending=Ending.HELD)
        child = self._begun(argv, deadline, owner)
        if isinstance(child, Answer):
            return child
        self._enter(child)
        try:
            return self._hear(child, deadline, owner)
        finally:
            with self._lock:
                self._running.discard(child)

    def stop(self) -> None:
        """Kill all that runs, at once; whatever is asked later is answered as stopped without running."""
        with self._lock:
            self._stopped = True
            for child in self._running:
                if child.poll() is None:
                    _kill(child)
            self._reap()

    def _enter(self, child: subprocess.Popen[bytes]) -> None:
        """Let a child be stopped; it may have been started while all was being stopped."""
        with self._lock:
            self._running.add(child)
            if self._stopped:
                _kill(child)

    def _begun(self, argv: Sequence[str], deadline: float, owner: str) -> subprocess.Popen[bytes] | Answer:
        """Start a child in a thread of its own, and do without it where that does not come to an end."""
        start: _Start = queue.SimpleQueue()

        def begin() -> None:
            try:
                child = _child(argv)
            except (OSError, ValueError) as error:
                start.put(error)
                return
            start.put(child)
            with self._lock:
                waited_for = (owner, start) not in self._late
                self._reap()
            if not waited_for:
                with contextlib.suppress(subprocess.TimeoutExpired):
                    child.wait(self._grace)

        threading.Thread(target=begin, name="starts a command", daemon=True).start()
        try:
            begun = start.get(timeout=max(0.0, deadline - time.monotonic()))
        except queue.Empty:
            with self._lock:
                self._late.append((owner, start))
                self._reap()  # it may have begun at the last moment
            return Answer(ending=Ending.TIMED_OUT)
        return begun if isinstance(begun, subprocess.Popen) else _not_started(begun)

    def _reap(self) -> None:
        """Take up those whom the kernel has let go of; the lock is held."""
        waiting, self._late = self._late, []
        for owner, start in waiting:
            if start.empty():
                self._late.append((owner, start))
            elif isinstance(child := start.get(), subprocess.Popen):
                _kill(child)
                for pipe in (child.stdout, child.stderr):
                    if pipe is not None:
                        pipe.close()
                self._left_behind.append((owner, child))
        self._left_behind = [(owner, child) for owner, child in self._left_behind if child.poll() is None]

    def _hear(self, child: subprocess.Popen[bytes], deadline: float, owner: str) -> Answer:
        """Take up a child's output and its end, and see to it that there is one."""
        pipes = [pipe for pipe in (child.stdout, child.stderr) if pipe is not None]
        out, err = heard = (bytearray(), bytearray())
        ending = _listen(child, pipes, heard, deadline, self._limit)
        status: int | None = None
        if ending is Ending.ENDED:
            try:
                status = child.wait(max(0.0, deadline - time.monotonic()))
            except subprocess.TimeoutExpired:
                ending = Ending.TIMED_OUT
        if ending is not Ending.ENDED:
            self._put_down(child, owner)
        for pipe in pipes:
            pipe.close()
        if self._stopped and (status is None or status < 0):
            ending, status = Ending.STOPPED, None
        return Answer(ending=ending, status=status, out=bytes(out), err=bytes(err))

    def _put_down(self, child: subprocess.Popen[bytes], owner: str) -> None:
        """Kill a child and all that it started; leave it behind where even that does not end it."""
        _kill(child)
        try:
            child.wait(self._grace)
        except subprocess.TimeoutExpired:
            with self._lock:
                self._left_behind.append((owner, child))


_Start = queue.SimpleQueue[subprocess.Popen[bytes] | OSError | ValueError]
"""What starting a child comes to, once it does."""


def _child(argv: Sequence[str]) -> subprocess.Popen[bytes]:
    return subprocess.Popen(
        list(argv),
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        env=_environment(os.environ),
        start_new_session=True,  # its own group, so that it can be killed with its children
    )


def _listen(
    child: subprocess.Popen[bytes],
    pipes: Sequence[IO[bytes]],
    heard: Sequence[bytearray],
    deadline: float,
    limit: int,
) -> Ending:
    """Read pipes to their ends, or until the time is over or too much was said.

    A child that has ended is not waited for long, though what it started may hold its pipes open for ever.
    """
    last: float | None = None
    with selectors.DefaultSelector() as selector:
        for pipe, into in zip(pipes, heard, strict=True):
            selector.register(pipe, selectors.EVENT_READ, into)
        while selector.get_map():
            now = time.monotonic()
            if last is None and _has_ended(child):
                last = now + _LINGER
            if last is not None and now >= min(last, deadline):
                _kill(child)  # what is left of its group; whoever left that group only loses its pipe
                return Ending.ENDED
            left = (deadline if last is None else min(last, deadline)) - now
            if left <= 0:
                return Ending.TIMED_OUT
            for key, _events in selector.select(min(left, _LOOK)):
                piece = os.read(key.fd, 65_536)
                if piece:
                    key.data.extend(piece)
                else:
                    selector.unregister(key.fileobj)
            if sum(map(len, heard)) > limit:
                return Ending.TOO_MUCH
    return Ending.ENDED


def _has_ended(child: subprocess.Popen[bytes]) -> bool:
    """Whether a child has ended; it is not taken up yet, so that its number stays its group's alone."""
    try:
        return os.waitid(os.P_PID, child.pid, os.WEXITED | os.WNOHANG | os.WNOWAIT) is not None
    except ChildProcessError:
        return True  # taken up by whoever stopped it


def _kill(child: subprocess.Popen[bytes]) -> None:
    # A child may be gone already, or have become another user's.
    with contextlib.suppress(ProcessLookupError, PermissionError):
        os.killpg(child.pid, signal.SIGKILL)


def _environment(outer: Mapping[str, str]) -> dict[str, str]:
    """The caller's environment, in the C locale and with the folders of system commands on PATH.

    An ordinary user's PATH lacks them on some systems, though the commands there can be run.
    """
    path = outer.get("PATH", "/usr/local/bin:/usr/bin:/bin")
    return {**outer, "LC_ALL": "C", "PATH": f"{path}:{_SBIN}"}


def _not_started(error: OSError | ValueError) -> Answer:
    trouble = (error.strerror or str(error)) if isinstance(error, OSError) else str(error)
    if isinstance(error, (FileNotFoundError, NotADirectoryError)):
        return Answer(ending=Ending.MISSING, trouble=trouble)
    if isinstance(error, (PermissionError, IsADirectoryError)) or (
        isinstance(error, OSError) and error.errno == errno.ENOEXEC
    ):
        return Answer(ending=Ending.NOT_EXECUTABLE, trouble=trouble)
    return Answer(ending=Ending.NOT_STARTED, trouble=trouble)
