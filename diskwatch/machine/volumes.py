"""How much data an ATA drive wrote and read, by attributes whose name states their unit.

Many solid-state drives count in 32 MiB or GiB under a default name of smartctl that says blocks. So on these,
blocks are believed only where the same figure in the larger unit is more than the link can have moved in the
hours that the drive was powered. That is a proof; to hold "so little cannot be" against the larger unit becomes
wrong as such a figure grows. Where nothing is proved the figure is kept as it stands, and only its changes mean
anything.
"""

import re
from collections.abc import Iterator, Sequence

from diskwatch.machine import meanings, packing, rates
from diskwatch.machine.document import Document, number_at
from diskwatch.machine.text import Sheet
from diskwatch.records import Attribute, SignalKind, Value

_NO_UNIT = "the unit in which this drive counts is not known"

_OTHER_UNIT = 32 * 2**20
"""Bytes: the smallest unit beside blocks and MiB in which drives count (practice). A figure in MiB would need
64 GiB in every powered hour to pass for blocks."""

_LINK = 600_000_000
"""Bytes a second that the fastest SATA link moves (6 Gbit/s with ten bits a byte)."""

_SECTORS = frozenset({512, 520, 524, 528, 4_096, 4_104, 4_112, 4_160, 4_224})
"""Bytes that logical blocks have, with and without room for checks (practice)."""


def volumes(
    rows: Sequence[Attribute], *, sector: int | None, flash: bool, hours: int | None
) -> Iterator[Value]:
    """Data written and read.

    Args:
        rows: the attribute table.
        sector: bytes in a logical block, or None.
        flash: whether it is a solid-state drive; on others blocks are blocks (practice).
        hours: powered hours, or None.
    """
    named: dict[str, tuple[Attribute, int | None]] = {}
    for number in meanings.VOLUME_NUMBERS:
        for row in rows:
            signal, step = meanings.VOLUMES.get(row.name.lower(), ("", None))
            if signal and row.number == number:
                named.setdefault(signal, (row, step))
    counted = {signal: packing.volume(row.raw) for signal, (row, _) in named.items()}
    # The two directions have one unit, so that one proof holds for both.
    blocks = not flash or any(
        named[signal][1] is None and steps is not None and _beyond_the_link(steps, hours)
        for signal, (steps, _) in counted.items()
    )
    for signal, (row, step) in named.items():
        steps, reason = counted[signal]
        size = step if step is not None else (sector if blocks else None)
        if steps is not None and size is None:
            reason = _NO_UNIT
            yield from rates.opaque(row, signal)
        yield Value(
            signal=signal,
            value=steps * size if steps is not None and size is not None else None,
            unit="bytes",
            kind=SignalKind.COUNT,
            source=f"attribute {row.number}",
            reason=reason,
        )


def _beyond_the_link(steps: int, hours: int | None) -> bool:
    return hours is not None and steps * _OTHER_UNIT > (hours + 1) * 3_600 * _LINK


def sector_of(document: Document | None, sheet: Sheet) -> int | None:
    """Bytes in a logical block, where a size is stated that blocks have.

    Args:
        document: smartctl's document, or None.
        sheet: the plain text.
    """
    told = number_at(document, "logical_block_size")
    if told is None:
        found = re.match(r"([0-9]{3,6}) bytes logical", sheet.get("Sector Size", "Sector Sizes") or "")
        told = int(found[1]) if found is not None else None
    return told if told in _SECTORS else None
