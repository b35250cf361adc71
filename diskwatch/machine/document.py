"""The JSON document of smartctl, read with distrust: anything may be missing or of another sort."""

import json
from collections.abc import Mapping
from typing import cast

Document = Mapping[str, object]

_SORTS: tuple[tuple[type, tuple[tuple[str, ...], ...]], ...] = (
    (list, (("smartctl", "version"), ("smartctl", "output"), ("smartctl", "messages"))),
    (str, (("serial_number",), ("model_name",))),
    (
        dict,
        (
            ("smartctl",),
            ("device",),
            ("wwn",),
            ("user_capacity",),
            ("smart_status",),
            ("temperature",),
            ("power_on_time",),
            ("ata_smart_attributes",),
            ("nvme_smart_health_information_log",),
        ),
    ),
)
"""Of which sort smartctl 7.3 writes some members, where it writes them."""


def document_of(text: str) -> Document | None:
    """The document in a command's output, or None where the output is no JSON object.

    The standard library's reader is used on purpose: it keeps integers of any size exact, and NVMe counters
    have 128 bits.
    """
    if not text.lstrip().startswith("{"):
        return None
    try:
        found = json.loads(text)
    except (ValueError, RecursionError):
        return None
    return cast("Document", found) if isinstance(found, dict) else None


def dig(document: object, *path: str) -> object:
    """What stands at a path of keys, or None."""
    for key in path:
        if not isinstance(document, dict):
            return None
        document = document.get(key)
    return document


def number_at(document: object, *path: str) -> int | None:
    """A whole number at a path, or None.

    Where smartctl could not be sure that a reader keeps a large number exact it adds the same as text under the
    key with ``_s`` behind it; that one is taken.
    """
    *way, name = path
    around = dig(document, *way)
    exact = text_at(around, f"{name}_s")
    if exact is not None and exact.isascii() and exact.isdigit() and len(exact) <= 40:
        return int(exact)
    found = dig(around, name)
    return found if isinstance(found, int) and not isinstance(found, bool) else None


def natural_at(document: object, *path: str, most: int | None = None) -> int | None:
    """A whole number from zero up to ``most`` at a path, or None; for fields that can hold no other."""
    found = number_at(document, *path)
    return found if found is not None and found >= 0 and (most is None or found <= most) else None


def text_at(document: object, *path: str) -> str | None:
    """Text at a path, or None."""
    found = dig(document, *path)
    return found if isinstance(found, str) else None


def flag_at(document: object, *path: str) -> bool | None:
    """True or false at a path, or None."""
    found = dig(document, *path)
    return found if isinstance(found, bool) else None


def rows_at(document: object, *path: str) -> tuple[Document, ...]:
    """The objects in a list at a path; empty where there is no such list."""
    found = dig(document, *path)
    if not isinstance(found, list):
        return ()
    return tuple(cast("Document", row) for row in found if isinstance(row, dict))


def in_shape(document: Document) -> bool:
    """Whether the members of a document are of the sort that smartctl writes."""
    return all(
        found is None or isinstance(found, sort)
        for sort, paths in _SORTS
        for path in paths
        for found in (dig(document, *path),)
    )


def plain_lines(document: Document) -> tuple[str, ...]:
    """The plain text that ``--json=o`` carries along, line by line."""
    found = dig(document, "smartctl", "output")
    return tuple(line for line in found if isinstance(line, str)) if isinstance(found, list) else ()


def messages(document: Document) -> tuple[str, ...]:
    """What smartctl complains of in the document."""
    rows = rows_at(document, "smartctl", "messages")
    return tuple(said for row in rows if (said := text_at(row, "string")) is not None)
