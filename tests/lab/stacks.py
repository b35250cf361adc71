"""Arrays, locks, volumes, caches: what lives on each disk below, held against lsblk and findmnt."""

import json
from pathlib import Path

from diskwatch.machine.mounts import living_on, measured, mount_lines
from diskwatch.machine.stacks import stack_on
from diskwatch.machine.swaps import swap_on
from diskwatch.records import Mount
from tests.lab.bench import check, end, lab, say, sh

AT = "/run/lab"


def build() -> dict[str, set[str]]:
    """Make the stacks; what lives on each disk then, by the disk's name."""
    node = {name: lab("dev", name) for name in ("hdd", "ssd", "nvme", "vblk", "scsi", "usb")}
    for module in ("raid1", "dm-crypt", "btrfs", "bcache", "loop"):
        sh(f"modprobe {module}")
    sh("udevadm control --reload", check=False)
    sh(f"mkdir -p {AT}/data {AT}/pool {AT}/cached {AT}/looped")
    # LVM on LUKS on md, with a file system and swap in it.
    sh(f"mdadm --create /dev/md0 --run --level=1 --raid-devices=2 --metadata=1.2 {node['hdd']} {node['ssd']}")
    sh("echo -n secret | cryptsetup -q luksFormat --type luks1 --pbkdf-force-iterations 1000 /dev/md0 -")
    sh("echo -n secret | cryptsetup open /dev/md0 vault --key-file -")
    sh("pvcreate -q /dev/mapper/vault && vgcreate -q lab /dev/mapper/vault")
    sh("lvcreate -q -L 100M -n data lab && lvcreate -q -L 40M -n swap lab")
    sh(f"mkfs.ext4 -q /dev/lab/data && mount /dev/lab/data {AT}/data")
    sh("mkswap -q /dev/lab/swap && swapon /dev/lab/swap")
    # One btrfs over two disks.
    sh(f"mkfs.btrfs -q -f -d raid1 -m raid1 {node['nvme']} {node['vblk']}")
    sh(f"btrfs device scan; mount {node['nvme']} {AT}/pool")
    # A disk with a cache before it.
    sh(f"make-bcache --bucket 64k -B {node['scsi']} -C {node['usb']}")
    for disk in ("scsi", "usb"):
        sh(f"echo {node[disk]} >/sys/fs/bcache/register", check=False)
    sh(f"udevadm settle; mkfs.ext4 -q /dev/bcache0 && mount /dev/bcache0 {AT}/cached")
    state = sh("cat /sys/block/bcache0/bcache/state")
    check(state != "no cache", f"the cache is in use: {state}")
    # A file of a file system mounted again: counted in the file system already.
    sh(f"truncate -s 20M {AT}/data/image && mkfs.ext4 -q {AT}/data/image")
    sh(f"mount -o loop {AT}/data/image {AT}/looped")
    for place in ("data", "pool", "cached"):
        sh(f"dd if=/dev/urandom of={AT}/{place}/file bs=1M count=15 status=none; sync")
    mirror, pool, cached = {f"{AT}/data", "swap"}, {f"{AT}/pool"}, {f"{AT}/cached"}
    return {"hdd": mirror, "ssd": mirror, "nvme": pool, "vblk": pool, "scsi": cached, "usb": cached}


def below(device: dict[str, object]) -> set[str]:
    """Where lsblk says that a device and all on it is mounted."""
    points = device.get("mountpoints")
    found = (
        {str(point).replace("[SWAP]", "swap") for point in points if point}
        if isinstance(points, list)
        else set()
    )
    children = device.get("children")
    for child in children if isinstance(children, list) else ():
        found |= below(child)
    return found


def ours(block: str) -> tuple[Mount, ...]:
    """What our resolver says lives on a disk."""
    stack = stack_on(Path("/sys"), [block])
    return (*living_on(stack, mount_lines(), measure=measured), *swap_on(stack))


def main() -> None:
    """Build them, look at them from each disk, and hold that against the other tools."""
    expected = build()
    say(sh("lsblk -o NAME,TYPE,SIZE,MOUNTPOINTS"))
    for name, points in expected.items():
        node = lab("dev", name)
        mounts = ours(node.removeprefix("/dev/"))
        say(f"       {name} {node}: {mounts}")
        check(
            {mount.point for mount in mounts} == points,
            f"{name}: {sorted(points)} and nothing else lives there",
        )
        told = below(json.loads(sh(f"lsblk -J -o NAME,MOUNTPOINTS {node}"))["blockdevices"][0])
        check(told <= points, f"{name}: lsblk names no other point ({sorted(told)})")
        for mount in mounts:
            if mount.point == "swap":
                size, used = sh("swapon --show=SIZE,USED --bytes --noheadings").split()
            else:
                size, used = sh(f"findmnt -bno SIZE,USED {mount.point}").split()
            same = (mount.total_bytes, mount.used_bytes) == (int(size), int(used))
            check(same, f"{mount.point}: {used} of {size} bytes")
    once = [mount.point for mount in ours(lab("dev", "hdd")[5:])]
    check(len(once) == len(set(once)), "nothing is listed twice")
    end()


main()
