"""Builds /sys and /proc trees as Linux lays them out. All makers, models and serials are invented."""

from collections.abc import Mapping
from pathlib import Path

AHCI = "devices/pci0000:00/0000:00:17.0"


def identify_words(*, model: str, serial: str, firmware: str, wwn: str | None, turns: int) -> list[str]:
    """An ATA IDENTIFY block of 256 words, written from the standard's table apart from the code under test."""
    words = [0] * 256

    def put(first: int, count: int, text: str) -> None:
        padded = text.ljust(2 * count)
        for number in range(count):
            words[first + number] = ord(padded[2 * number]) * 256 + ord(padded[2 * number + 1])

    put(10, 10, serial)
    put(23, 4, firmware)
    put(27, 20, model)
    if wwn is not None:
        words[87] = 0x4100
        for number in range(4):
            words[108 + number] = int(wwn[4 * number : 4 * number + 4], 16)
    words[217] = turns
    return [f"{word:04x}" for word in words]


class Tree:
    """A machine made of files below one folder."""

    def __init__(self, root: Path) -> None:
        self.sys, self.proc, self.dev = root / "sys", root / "proc", root / "dev"
        for folder in (self.sys / "block", self.proc / "1", self.proc / "self", self.dev):
            folder.mkdir(parents=True)
        self.put(self.proc / "sys/kernel/random/boot_id", "11111111-2222-3333-4444-555555555555")
        self._mounts: list[str] = []
        self._sequence = 0

    def put(self, path: Path, content: str | bytes) -> None:
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content if isinstance(content, bytes) else content.encode() + b"\n")

    def block(
        self,
        name: str,
        folder: str,
        *,
        device: str | None,
        number: str,
        files: Mapping[str, str | bytes] | None = None,
        sectors: int = 1000,
    ) -> Path:
        """A block device: its folder in the bus tree, the link in block/, and its ``device`` link."""
        place = self.sys / folder / name
        place.mkdir(parents=True)
        (place / "holders").mkdir()
        self._sequence += 1
        self.put(place / "dev", number)
        self.put(place / "size", str(sectors))
        self.put(place / "removable", "0")
        self.put(place / "hidden", "0")
        self.put(place / "queue/rotational", "0")
        self.put(place / "diskseq", str(self._sequence))
        self.put(place / "queue/iostats", "1")
        self.put(place / "stat", "1 0 2 3 4 0 5 6 0 7 9")
        if device is not None:
            (self.sys / device).mkdir(parents=True, exist_ok=True)
            (place / "device").symlink_to(self.sys / device)
        (self.sys / "block" / name).symlink_to(place)
        for path, content in (files or {}).items():
            self.put(place / path, content)
        return place

    def scsi(
        self,
        name: str,
        above: str,
        address: str,
        number: str,
        *,
        vendor: str,
        model: str,
        serial: str | None = None,
        wwid: str | None = None,
        rotational: bool = True,
        files: Mapping[str, str | bytes] | None = None,
        sectors: int = 1000,
    ) -> Path:
        unit = f"{above}/{address}"
        more: dict[str, str | bytes] = {
            "device/type": "0",
            "device/vendor": vendor.ljust(8),
            "device/model": model.ljust(16),
            "device/rev": "AB12",
            "queue/rotational": str(int(rotational)),
        }
        if serial is not None:
            more["device/vpd_pg80"] = bytes([0, 0x80, 0, len(serial)]) + serial.encode()
        if wwid is not None:
            more["device/wwid"] = wwid
        return self.block(
            name, f"{unit}/block", device=unit, number=number, files={**more, **(files or {})}, sectors=sectors
        )

    def sata(
        self,
        name: str = "sda",
        number: str = "8:0",
        *,
        port: int = 3,
        identify: list[str] | None = None,
        serial: str | None = "INV-A-0001",
        wwid: str | None = "naa.5000f00000000001",
        rotational: bool = True,
        files: Mapping[str, str | bytes] | None = None,
        sectors: int = 1000,
    ) -> Path:
        """A drive on an AHCI port; libata numbers its ports over all controllers, hence port_no."""
        ata = f"{AHCI}/ata{port + 4}"
        self.put(self.sys / f"{ata}/ata_port/ata{port + 4}/port_no", str(port))
        if identify is not None:
            text = "".join(word + ("\n" if index % 8 == 7 else " ") for index, word in enumerate(identify))
            dev = f"dev{port + 4}.0"
            self.put(self.sys / f"{ata}/link{port + 4}/{dev}/ata_device/{dev}/id", text)
        return self.scsi(
            name,
            f"{ata}/host{port}/target{port}:0:0",
            f"{port}:0:0:0",
            number,
            vendor="ATA",
            model="INVENTED DISK 40",
            serial=serial,
            wwid=wwid,
            rotational=rotational,
            files=files,
            sectors=sectors,
        )

    def nvme(self, controller: str = "nvme0", namespaces: int = 2, *, pci: str = "0000:01:00.0") -> list[Path]:
        above = f"devices/pci0000:00/0000:00:1d.0/{pci}/nvme/{controller}"
        for path, content in {
            "model": "INVENTED FLASH 2000".ljust(40),
            "serial": f"INV-N-{controller}".ljust(20),
            "firmware_rev": "FW1.0",
        }.items():
            self.put(self.sys / above / path, content)
        return [
            self.block(
                f"{controller}n{number}",
                above,
                device=above,
                number=f"259:{number}",
                files={"wwid": f"eui.00f0000000000{number}a1", "nsid": str(number)},
                sectors=2000 * number,
            )
            for number in range(1, namespaces + 1)
        ]

    def usb(self, name: str = "sdb", number: str = "8:16", *, port: str = "1-4", **more: str | None) -> Path:
        above = f"devices/pci0000:00/0000:00:14.0/usb1/{port}"
        self.put(self.sys / above / "serial", "INV-BRIDGE-7")
        return self.scsi(
            name,
            f"{above}/{port}:1.0/host6/target6:0:0",
            "6:0:0:0",
            number,
            vendor="InvMaker",
            model="Stick",
            serial=more.get("serial"),
            wwid=more.get("wwid"),
        )

    def sas(
        self,
        name: str = "sdc",
        number: str = "8:32",
        *,
        host: int = 0,
        end: str = "0",
        bay: int | None = None,
        serial: str = "INV-S-0001",
    ) -> Path:
        device = f"end_device-{host}:{end}"
        above = f"devices/pci0000:00/0000:02:00.0/host{host}/port-{host}:{end}/{device}"
        if bay is not None:
            self.put(self.sys / f"{above}/sas_device/{device}/bay_identifier", str(bay))
        target = end.replace(":", "")
        return self.scsi(
            name,
            f"{above}/target{host}:0:{target}",
            f"{host}:0:{target}:0",
            number,
            vendor="INVENTED",
            model="SAS 900",
            serial=serial,
            wwid="naa.5000f00000000c01",
        )

    def virtio(self, name: str = "vda", number: str = "254:0", *, serial: str | None = "overlay") -> Path:
        above = "devices/pci0000:00/0000:00:02.0/virtio1"
        files = {"device/vendor": "0x1af4"}
        if serial is not None:
            files["serial"] = serial
        return self.block(name, f"{above}/block", device=above, number=number, files=files)

    def partition(self, disk: Path, name: str, number: str, *, label: str | None = None) -> Path:
        place = disk / name
        told = "" if label is None else f"\nPARTNAME={label}"
        self.put(place / "uevent", f"DEVNAME={name}\nDEVTYPE=partition\nPARTN=1{told}")
        (place / "holders").mkdir(parents=True)
        self.put(place / "partition", "1")
        self.put(place / "dev", number)
        return place

    def stacked(self, name: str, number: str, *below: Path, dm_name: str | None = None) -> Path:
        """A device made of others: dm, md, bcache."""
        place = self.block(name, "devices/virtual/block", device=None, number=number)
        if dm_name is not None:
            self.put(place / "dm/name", dm_name)
        for part in below:
            (part / "holders" / name).symlink_to(place)
        return place

    def loop(self, name: str, number: str, below: str) -> Path:
        place = self.block(name, "devices/virtual/block", device=None, number=number)
        self.put(place / "loop/backing_file", below)
        return place

    def zfs(self, pool: str, state: str = "ONLINE") -> None:
        self.put(self.proc / "spl/kstat/zfs" / pool / "state", state)

    def swaps(self, *lines: str) -> None:
        head = "Filename\t\t\t\tType\t\tSize\t\tUsed\t\tPriority\n"
        (self.proc / "swaps").write_text(head + "".join(f"{line}\n" for line in lines))

    def btrfs(self, uuid: str, *devices: Path) -> None:
        for device in devices:
            link = self.sys / "fs/btrfs" / uuid / "devices" / device.name
            link.parent.mkdir(parents=True, exist_ok=True)
            link.symlink_to(device)

    def mount(self, number: str, point: str, type_: str, source: str, *, root: str = "/") -> None:
        count = 20 + len(self._mounts)
        self._mounts.append(f"{count} 1 {number} {root} {point} rw,relatime shared:1 - {type_} {source} rw\n")
        (self.proc / "1/mountinfo").write_text("".join(self._mounts))
