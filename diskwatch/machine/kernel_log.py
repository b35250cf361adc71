"""The kernel's log, followed from where it was left; knows how to read it, not what it says.

``/dev/kmsg`` hands out one record a read, from the oldest that the kernel still keeps on. What was overwritten
before it could be read shows as a gap in the sequence numbers. A file in the same format serves as well: for
tests, and for a machine whose log comes from elsewhere.
"""

import errno
import os
import stat
from collections.abc import Callable
from pathlib import Path

from diskwatch.errors import DiskwatchError
from diskwatch.machine.kernel_files import text_of
from diskwatch.machine.kernel_line import Line, line_of
from diskwatch.records.listened import LeftOff
from diskwatch.units import plain

_RECORD = 8_192  # the kernel's own bound of one record
_CHUNK = 262_144
_MOST_FAILURES = 10_000  # of one look; a log that only fails must not be read for ever
_LONGEST = 65_536  # of a line in a file; what is longer is no record


class KernelLog:
    """One log, open for reading; belongs to one thread. `close` it."""

    def __init__(
        self, source: Path, left_off: LeftOff | None = None, *, proc_root: Path = Path("/proc")
    ) -> None:
        """Open it.

        Args:
            source: ``/dev/kmsg`` or a file in its format.
            left_off: how far it was read before; None to read all that is there. Where it is another log by
                now, all of it is read too.
            proc_root: where procfs is mounted.

        Raises:
            DiskwatchError: it cannot be read; says why and what to do.
        """
        self._source = source
        try:
            # Not to wait, also for whoever would write into a pipe that lies there.
            self._file = os.open(source, os.O_RDONLY | os.O_NONBLOCK | os.O_CLOEXEC)
        except OSError as error:
            raise unreadable(source, error) from error
        mode = os.fstat(self._file).st_mode
        if not stat.S_ISCHR(mode) and not stat.S_ISREG(mode):
            os.close(self._file)
            raise DiskwatchError(
                f"{plain(str(source))} is no kernel log", hint="name /dev/kmsg or a file in its format"
            )
        self.live = stat.S_ISCHR(mode)
        """Whether it is the kernel's own, so that its times are those of this boot."""
        self._rest = b""
        self._proc = proc_root
        self._sequence = -1
        self._log = ""
        self._before = left_off
        if self.live:
            self._began(text_of(proc_root / "sys" / "kernel" / "random" / "boot_id") or "unknown")
        self.lost = 0
        """Records that were overwritten before they could be read, since it was opened."""

    @property
    def left_off(self) -> LeftOff:
        """How far it has been read."""
        return LeftOff(log=self._log, sequence=self._sequence)

    def fileno(self) -> int:
        """For ``poll``: ready when the kernel has said something more."""
        return self._file

    def close(self) -> None:
        """Let go of it."""
        os.close(self._file)

    def read(self, most: int = 4_096) -> tuple[Line, ...]:
        """What has been said since, at most so many records; never waits.

        Raises:
            DiskwatchError: it can no longer be read.
        """
        try:
            return self._records(most) if self.live else self._lines()
        except OSError as error:
            raise unreadable(self._source, error) from error

    def _began(self, log: str) -> None:
        self._log = log
        if self._before is not None and self._before.log == log:
            self._sequence = self._before.sequence
        self._before = None

    def _records(self, most: int) -> tuple[Line, ...]:
        found: list[Line] = []
        read, file = os.read, self._file
        failures = 0
        # Those that were read before do not count: whoever gets none takes it that there are no more.
        while len(found) < most:
            try:
                record = read(file, _RECORD)
            except BlockingIOError:
                break
            except OSError as error:
                failures += 1
                if error.errno not in {errno.EPIPE, errno.EINVAL} or failures > _MOST_FAILURES:
                    raise
                continue  # overwritten in the meantime, or longer than a record can be: the next one follows
            if not record:
                break
            self._took(line_of(record), found.append)
        return tuple(found)

    def _lines(self) -> tuple[Line, ...]:
        self._from_the_start_if_shorter()
        found: list[Line] = []
        while not found and (chunk := os.read(self._file, _CHUNK)):
            self._take_apart(chunk, found)
        return tuple(found)

    def _take_apart(self, chunk: bytes, found: list[Line]) -> None:
        whole, mark, self._rest = (self._rest + chunk).rpartition(b"\n")
        if len(self._rest) > _LONGEST:
            self._rest = b""
        for record in whole.split(b"\n") if mark else ():
            line = None if record.startswith(b" ") else line_of(record)
            if line is None:
                continue
            if not self._log:
                self._began(record.partition(b";")[0].decode("ascii", "replace"))
            self._took(line, found.append)

    def _from_the_start_if_shorter(self) -> None:
        if os.fstat(self._file).st_size < os.lseek(self._file, 0, os.SEEK_CUR):
            os.lseek(self._file, 0, os.SEEK_SET)
            self._rest, self._before, self._log, self._sequence = b"", self.left_off, "", -1

    def _took(self, line: Line | None, keep: Callable[[Line], None]) -> None:
        if line is None or line.sequence <= self._sequence:
            return
        # Before the first one nothing is known to be missing: the log may have begun long ago.
        if self.live and self._sequence >= 0:
            self.lost += line.sequence - self._sequence - 1
        self._sequence = line.sequence
        keep(line)


def unreadable(source: Path, error: OSError) -> DiskwatchError:
    """What to say of a log that cannot be read."""
    told = f"the kernel's log {plain(str(source))} cannot be read: {error.strerror}"
    if isinstance(error, PermissionError):
        return DiskwatchError(told, hint="watch as root, as the service does")
    return DiskwatchError(told, hint="name another file under [kernel_log] source")
