"""How to find out which file a failing sector belongs to: a command to be run by a person, which only reads."""

from diskwatch.judge.language import _
from diskwatch.units import plain, say_count


def which_file(*, sector: int, block: int, size: int, node: str, point: str) -> tuple[str, ...]:
    """The way from a sector to its file, a line each.

    Args:
        sector: counted in 512 bytes from the start of the disk.
        block: of the ext4 file system that it lies in.
        size: bytes of one block.
        node: the device node of the file system.
        point: where it is mounted.
    """
    return (
        _(
            "Sector {sector} is block {block} (of {size} bytes) of the ext4 file system at {point}. These tell "
            "its file, run as root; they only read:"
        ).format(sector=say_count(sector), block=say_count(block), size=say_count(size), point=plain(point)),
        f"debugfs -R 'icheck {block}' {plain(node)}",
        _("{command} (with the inode that the first one names)").format(
            command=f"debugfs -R 'ncheck INODE' {plain(node)}"
        ),
    )
