"""Whether this computer runs on its battery, from the kernel's own list of power supplies.

Source: Linux, Documentation/ABI/testing/sysfs-class-power (``type``, ``scope``, ``online``, ``status``).
"""

from pathlib import Path

from diskwatch.machine.kernel_files import names_in, number_of, text_of

_FROM_OUTSIDE = frozenset({"Mains", "USB", "Wireless"})


def on_battery(sys_root: Path = Path("/sys")) -> bool:
    """Whether it runs on a battery now.

    A computer without a battery of its own never does, whatever else the kernel fails to tell: the battery of a
    mouse is of the device's scope and does not count. An uninterruptible supply is not seen here.

    Args:
        sys_root: where sysfs is mounted.
    """
    folder = sys_root / "class" / "power_supply"
    batteries = []
    for name in names_in(folder):
        supply = folder / name
        kind = text_of(supply / "type")
        if kind in _FROM_OUTSIDE and number_of(supply / "online"):
            return False
        if kind == "Battery" and text_of(supply / "scope") != "Device" and number_of(supply / "present") != 0:
            batteries.append(text_of(supply / "status"))
    return "Discharging" in batteries
