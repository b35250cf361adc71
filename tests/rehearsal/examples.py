"""Small invented machines for the tests of the rehearsal."""

from typing import Any

from diskwatch.rehearsal.clock import START, Clock
from diskwatch.rehearsal.disk import Disk
from diskwatch.rehearsal.drive import InventedDrive, Span
from diskwatch.rehearsal.machine import InventedMachine
from diskwatch.rehearsal.scenario import DriveSpec, Scenario
from diskwatch.rehearsal.solid import Solid

HDD = "INVENTED-T-0001"
NVME = "INVENTED-T-0002"
SSD = "INVENTED-T-0003"


def hdd(**more: Any) -> DriveSpec:
    return DriveSpec(
        **{
            "serial": HDD,
            "model": "Nordwall Test INVENTED",
            "kind": "hdd",
            "device": "/dev/sda",
            "bay": "one",
            "capacity_gb": 1000,
            "age_hours": 1000,
            **more,
        }
    )


def nvme(**more: Any) -> DriveSpec:
    return DriveSpec(
        **{
            "serial": NVME,
            "model": "Borealis Test INVENTED",
            "kind": "nvme",
            "device": "/dev/nvme0",
            "bay": "two",
            "capacity_gb": 500,
            **more,
        }
    )


def ssd(**more: Any) -> DriveSpec:
    return DriveSpec(
        **{
            "serial": SSD,
            "model": "Kestrel Test INVENTED",
            "kind": "ssd",
            "device": "/dev/sdb",
            "bay": "three",
            "capacity_gb": 250,
            **more,
        }
    )


def scenario(*drives: DriveSpec, **more: Any) -> Scenario:
    return Scenario(**{"title": "a test", "about": "", "days": 30, "drive": drives or (hdd(), nvme()), **more})


def machine(*drives: DriveSpec, seed: int = 1, **more: Any) -> InventedMachine:
    return InventedMachine(scenario(*drives, **more), seed, Clock(START))


def alone(spec: DriveSpec, *, seed: int = 1) -> InventedDrive:
    """A drive by itself, in a machine of its own."""
    return machine(spec, seed=seed).drives[spec.serial]


def disk(spec: DriveSpec, *, seed: int = 1) -> Disk:
    """A hard disk by itself."""
    one = alone(spec, seed=seed)
    assert isinstance(one, Disk)
    return one


def solid(spec: DriveSpec, *, seed: int = 1) -> Solid:
    """A solid-state drive by itself."""
    one = alone(spec, seed=seed)
    assert isinstance(one, Solid)
    return one


def live(one: InventedMachine, days: float) -> None:
    """Let days pass."""
    while one.clock.days() < days:
        one.live()


def hour(at: int = START + 3600, *, air: float = 21.0, draught: float = 1.0) -> Span:
    return Span(at=at, seconds=3600, air=air, draught=draught)
