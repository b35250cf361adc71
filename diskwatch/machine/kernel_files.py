"""Small files of /sys and /proc: a fact that cannot be read is just not known."""

from pathlib import Path

_MOST = 65_536  # sysfs text files end at one page; the rest is room for /proc


def bytes_of(path: Path) -> bytes | None:
    """The content of a kernel file, at most 64 KiB of it.

    Returns:
        None where there is no such file or it cannot be read: attributes come and go with kernel versions, and
        the kernel answers a device that is just going away with all sorts of error numbers.
    """
    try:
        with path.open("rb", buffering=0) as file:
            return file.read(_MOST)
    except OSError:
        return None


def text_of(path: Path) -> str | None:
    """The content of a kernel file as text, outer blanks and NULs removed; None where empty or unreadable."""
    found = bytes_of(path)
    return tidy(found) if found is not None else None


def number_of(path: Path) -> int | None:
    """A decimal whole number, zero or more, from a kernel file; None where it holds anything else."""
    found = text_of(path)
    return int(found) if found is not None and found.isascii() and found.isdigit() else None


def tidy(raw: bytes) -> str | None:
    """Bytes from a drive or the kernel as text without outer blanks and NULs; None where nothing is left.

    Bytes that are no UTF-8 become the replacement letter, so that one odd byte does not hide the rest.
    """
    return raw.decode("utf-8", "replace").replace("\0", " ").strip() or None


def names_in(folder: Path) -> tuple[str, ...]:
    """Names of what a folder holds, sorted; none where it cannot be listed."""
    try:
        return tuple(sorted(entry.name for entry in folder.iterdir()))
    except OSError:
        return ()


def whole_of(path: Path) -> str | None:
    """A long file of /proc as text; these come in pieces, unlike sysfs attributes. None where unreadable."""
    try:
        return path.read_bytes().decode("utf-8", "surrogateescape")  # names of folders are bytes to the kernel
    except OSError:
        return None
