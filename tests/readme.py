"""The picture in the README: the real screen's lines over invented drives, read through the whole chain.

python -m tests.readme      puts the present picture into README.md
"""

import os
import tempfile
import time
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path

from diskwatch.dashboard.band import band
from diskwatch.dashboard.feed import Snapshot
from diskwatch.dashboard.head import top_line
from diskwatch.dashboard.weight import Face
from diskwatch.history.reader import Past
from diskwatch.machine.protocol import Address, Counted, Found, Survey
from diskwatch.machine.smartctl import Smartctl
from diskwatch.records import Bays, Drive, DriveLine, Identity, IoCounts, IoSpan, Kind, Mount, Pass, Place
from diskwatch.service.keeper import Keeper
from diskwatch.service.rounds import Rounds
from tests.player import lay, set_day

README = Path(__file__).parents[1] / "README.md"
BEGIN, END = "<!-- picture: begin -->\n", "<!-- picture: end -->\n"
WIDTH = 79
MORNING = 1_780_300_000
"""A morning in June 2026, UTC."""

_DRIVES = (
    ("/dev/sda", "sat", "invented_hdd_series", ("/home",)),
    ("/dev/sdb", "sat", "invented_hdd_failing", ("/srv/archive",)),
    ("/dev/sdc", "sat", "invented_ssd_sata", ("/",)),
    ("/dev/nvme0", "nvme", "invented_nvme_worn", ("/srv/photos",)),
)
_TRAFFIC = {
    "/dev/sda": IoCounts(
        reads=412,
        writes=96,
        read_bytes=9_800_000,
        write_bytes=700_000,
        read_ms=3461,
        write_ms=420,
        busy_ms=3700,
    ),
    "/dev/sdb": IoCounts(
        reads=18, writes=0, read_bytes=74_000, write_bytes=0, read_ms=1640, write_ms=0, busy_ms=1600
    ),
    "/dev/sdc": IoCounts(
        reads=35, writes=61, read_bytes=900_000, write_bytes=1_200_000, read_ms=7, write_ms=30, busy_ms=40
    ),
    "/dev/nvme0": IoCounts(reads=0, writes=0, read_bytes=0, write_bytes=0, read_ms=0, write_ms=0, busy_ms=0),
}


class _Workshop:
    """An invented machine: its drives answer through the player, as smartctl would."""

    def __init__(self, command: Path, now: list[int]) -> None:
        self._smartctl = Smartctl(str(command), 20, lambda: now[0])

    def survey(self) -> Survey:
        return Survey(found=tuple(_found(node, type_, points) for node, type_, _, points in _DRIVES))

    def ask(self, found: Found) -> Pass:
        return self._smartctl.ask(found)

    def counts(self) -> Mapping[str, Counted]:
        return {}

    def stop(self) -> None:
        self._smartctl.stop()


def _found(node: str, type_: str, points: tuple[str, ...]) -> Found:
    lives_here = tuple(Mount(point=point) for point in points)
    return Found(
        address=Address(node=node, type=type_),
        blocks=(node.removeprefix("/dev/"),),
        place=Place(device=node, bay=None, lives_here=lives_here),
        drive=Drive(
            identity=Identity(wwn=None, model=None, serial=None, path=node),
            kind=Kind.NVME if type_ == "nvme" else Kind.HDD,
        ),
    )


def picture() -> str:
    """What the first screen shows of four invented drives after three days."""
    with tempfile.TemporaryDirectory() as folder:
        now = [MORNING]
        drives = [{"node": node, "type": type_, "folder": name} for node, type_, name, _ in _DRIVES]
        command = lay(Path(folder) / "player", drives)
        keeper = Keeper(Path(folder) / "state")
        rounds = Rounds(_Workshop(command, now), keeper, lambda: now[0])
        for day in (1, 2, 3):
            set_day(command, day)
            rounds.run()
            now[0] += 86_400
        keeper.close()
        with Past.open(Path(folder) / "state") as past:
            bays = past.bays(now[0] - 86_400 + 240)
    return _drawn(bays)


def _drawn(bays: Bays) -> str:
    zone, os.environ["TZ"] = os.environ.get("TZ"), "UTC"
    time.tzset()
    try:
        lines = [_measured(line, bays.at) for line in bays.drives]
        bays = Bays(at=bays.at, watcher=1207, drives=tuple(lines))
        drawn: list[object] = [top_line(Snapshot(bays=bays, error=None), "", bays.at, WIDTH, 1800)]
        for line in lines:
            drawn += ["", *band(line, bays.at, WIDTH, Face(ascii_only=False, colours=False))]
    finally:
        if zone is None:
            del os.environ["TZ"]
        else:
            os.environ["TZ"] = zone
        time.tzset()
    return "\n".join(str(line).rstrip() for line in drawn) + "\n"


def _measured(line: DriveLine, at: int) -> DriveLine:
    counts = _TRAFFIC[line.place.device]
    return replace(line, traffic=IoSpan(drive=line.number, at=at, seconds=10.0, counts=counts))


def current() -> str:
    """The picture that stands in the README."""
    return README.read_text(encoding="utf-8").partition(BEGIN)[2].partition(END)[0]


def framed() -> str:
    """The picture as the README holds it."""
    return f"```\n{picture()}```\n"


if __name__ == "__main__":
    text = README.read_text(encoding="utf-8")
    before, _, rest = text.partition(BEGIN)
    README.write_text(before + BEGIN + framed() + END + rest.partition(END)[2], encoding="utf-8")
