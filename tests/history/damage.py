"""Damage done on purpose: every sort of page of a history, and one byte of it turned."""

from pathlib import Path

PAGE = 4096
_SORTS = {2: "index, inner", 5: "table, inner", 10: "index, leaf", 13: "table, leaf"}


def pages(path: Path) -> dict[str, list[int]]:
    """Page numbers by sort; the first page is its own (SQLite, Database File Format, 1.6)."""
    whole = path.read_bytes()
    found: dict[str, list[int]] = {"first": [1]}
    for number in range(2, len(whole) // PAGE + 1):
        sort = _SORTS.get(whole[(number - 1) * PAGE], "overflow or free")
        found.setdefault(sort, []).append(number)
    return found


def turn(path: Path, page: int, offset: int, mask: int = 0xFF) -> None:
    """Turn bits of one byte."""
    with path.open("r+b") as file:
        file.seek((page - 1) * PAGE + offset)
        byte = file.read(1)[0]
        file.seek(-1, 1)
        file.write(bytes([byte ^ mask]))
