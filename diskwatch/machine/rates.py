"""Raw values that hold a rate, and raw values of which only changes can be used.

Errors and operations of a rate start again after a while, together; so neither is a counter that only grows.
"""

import re
from collections.abc import Iterable, Iterator

from diskwatch.machine import meanings, packing
from diskwatch.records import Attribute, SignalKind, Value

OPAQUE = "opaque"


def rates(rows: Iterable[Attribute], model: str | None) -> Iterator[Value]:
    """Errors and operations where the packing is known, else the raw value as it stands.

    Args:
        rows: the attribute table.
        model: the drive's, or None; some makers are known to pack both into one number.
    """
    packs = model is not None and meanings.RATE_MAKERS.match(model) is not None
    for row in rows:
        for number, name, what in meanings.RATES:
            if row.number != number or name.search(row.name) is None:
                continue
            both = packing.rate(row.raw, packs=packs)
            if both is None:
                yield from opaque(row, f"{what}-error-rate")
                continue
            for count, signal in zip(both, (f"{what}-errors", f"{what}-operations"), strict=True):
                yield Value(
                    signal=signal,
                    value=count,
                    unit=signal.removeprefix(f"{what}-"),
                    kind=SignalKind.GAUGE,
                    source=f"attribute {row.number}",
                )


def opaque(row: Attribute, signal: str) -> Iterator[Value]:
    """The raw value of an attribute as it stands, where it is one number of the field's 48 bits.

    Args:
        row: the attribute.
        signal: what it would be if it could be read.
    """
    if re.fullmatch(r"[0-9]{1,15}", row.raw) is None or int(row.raw) >= 2**48:
        return
    yield Value(
        signal=f"raw-{signal}",
        value=int(row.raw),
        unit=OPAQUE,
        kind=SignalKind.GAUGE,
        source=f"attribute {row.number}",
    )
