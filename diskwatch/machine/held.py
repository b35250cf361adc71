"""pySMART fed from one answer that is already there, so that it never runs anything itself.

Left alone, the library runs up to eight processes for one SAS drive, none of them bounded in time, and hides
their exit statuses. Here it gets the text of the one run that was made; whatever else it asks for is answered
with nothing. Its import sets ``LANG`` for the whole process and replaces the class of all later loggers; both
are put back.
"""

import functools
import logging
import os
import threading
from collections.abc import Callable, Sequence
from enum import StrEnum
from typing import Any

from diskwatch.stand_in import without

_log = logging.getLogger(__name__)
_importing = threading.Lock()


class Family(StrEnum):
    """The three languages that drives speak; values are what pySMART calls them."""

    ATA = "sat"  # its "ata" makes the library ask for a log of its own
    NVME = "nvme"
    SCSI = "scsi"


def device_of(lines: Sequence[str], family: Family) -> Any | None:
    """Have pySMART read an answer.

    Args:
        lines: the plain text of ``smartctl --all``.
        family: which language the drive speaks.

    Returns:
        A ``pySMART.Device``, or None where the library gave up on this text; our own readers go on then.
    """
    if not lines:
        return None
    device, wrapper = _library()
    try:
        return device("/dev/held", interface=family.value, smartctl=wrapper(lines))
    except Exception as error:  # noqa: BLE001 - it raises what its parsing happens to meet, of any class
        _log.debug("the library could not read an answer: %r", error)
        return None


@functools.cache
def _library() -> tuple[Callable[..., Any], Callable[[Sequence[str]], Any]]:
    """Import pySMART, which takes a while, and leave the process as it was."""
    with _importing:
        loggers, language = logging.getLoggerClass(), os.environ.get("LANG")
        try:
            # It guesses the encoding of what it reads itself, and nothing here lets it read anything.
            without("pySMART", "chardet", {})
            from pySMART import Device  # noqa: PLC0415 - half a second that commands without drives need not pay
            from pySMART.smartctl import Smartctl  # noqa: PLC0415 - as above
        finally:
            logging.setLoggerClass(loggers)
            if language is None:
                os.environ.pop("LANG", None)
            else:
                os.environ["LANG"] = language

    class HeldAnswer(Smartctl):  # type: ignore[misc] # the library has no types
        """A wrapper that runs nothing."""

        def __init__(self, lines: Sequence[str]) -> None:
            super().__init__(smartctl_path="held", options=[])
            # It skips four lines unseen, though the headline may be shorter, and runs over the end of a table
            # that was cut off; blank lines before and behind keep all of the text in its sight.
            self._lines = ["", "", "", "", *lines, "", ""]

        def add_options(self, new_options: Any) -> None:
            raise TypeError(f"nothing is run, so nothing can be set: {new_options!r}")

        def generic_call(self, params: list[str], pass_options: bool = False) -> tuple[list[str], int]:
            del pass_options
            return (list(self._lines), 0) if "--all" in params else ([], 1)

    return Device, HeldAnswer
