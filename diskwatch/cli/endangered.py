"""Says where the history itself lies on a drive that is to be copied off or retired."""

from dataclasses import replace
from pathlib import Path

from diskwatch.records import Bays, CallWord
from diskwatch.units import plain

_IN_TROUBLE = frozenset({CallWord.COPY, CallWord.RETIRE})


def endangered(bays: Bays, folder: Path) -> str | None:
    """What to do about a history that lies on a drive in trouble, one sentence; None where it does not.

    Args:
        bays: all drives.
        folder: where the history lies.
    """
    in_trouble = [line for line in bays.drives if line.call is not None and line.call.word in _IN_TROUBLE]
    if not in_trouble:
        return None
    # Only then is the kernel asked: the usual answer is to come at once.
    from diskwatch.machine.blocks import physical_drives  # noqa: PLC0415
    from diskwatch.machine.here import found_of, lies_on  # noqa: PLC0415

    here = physical_drives()
    for line in in_trouble:
        found = found_of(line.drive, line.place, here)
        if found is not None and line.call is not None and lies_on(folder, found):
            return plain(
                f"The history of diskwatch itself lies on {line.name} ({line.place.device}), which is called "
                f"{line.call.word.value}: move it with 'diskwatch move-history DIR' to a folder on another "
                f"drive."
            )
    return None


class Warner:
    """Adds that warning to one look after another; the kernel is asked anew only when a call has changed."""

    def __init__(self, folder: Path) -> None:
        """Nothing is known yet of the history in that folder."""
        self._folder = folder
        self._calls: object = None
        self._warning: str | None = None

    def __call__(self, bays: Bays) -> Bays:
        """All drives, with the warning among the troubles where there is one."""
        calls = [(line.number, line.call and line.call.word, line.place) for line in bays.drives]
        if calls != self._calls:
            self._calls, self._warning = calls, endangered(bays, self._folder)
        return bays if self._warning is None else replace(bays, trouble=(*bays.trouble, self._warning))
