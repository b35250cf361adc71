"""The pictures in the README: the real screens over invented drives, read or rehearsed through the whole chain.

python -m tests.readme      puts the present pictures into README.md
"""

import asyncio
import contextlib
import os
import tempfile
import time
from collections.abc import Iterator, Mapping
from dataclasses import replace
from pathlib import Path

from diskwatch.cli.pace import Pace
from diskwatch.cli.rehearse import live_through
from diskwatch.cli.scene import Scene
from diskwatch.cli.shown import Shown
from diskwatch.dashboard.app import Dashboard
from diskwatch.dashboard.band import band
from diskwatch.dashboard.feed import Snapshot
from diskwatch.dashboard.head import top_line
from diskwatch.dashboard.questions import Strand
from diskwatch.dashboard.weight import Face
from diskwatch.history.reader import Past
from diskwatch.machine.protocol import Address, Counted, Found, Survey
from diskwatch.machine.smartctl import Smartctl
from diskwatch.records import Bays, Drive, DriveLine, Identity, IoCounts, IoSpan, Kind, Mount, Pass, Place
from diskwatch.rehearsal import scenarios
from diskwatch.rehearsal.course import Course
from diskwatch.service.keeper import Keeper
from diskwatch.service.rounds import Rounds
from diskwatch.units import DAY
from tests.dashboard.screen import rows_of, settled
from tests.player import lay, set_day

README = Path(__file__).parents[1] / "README.md"
PICTURES = ("bays", "drive", "ahead")
"""The first screen; one drive that is to be copied; what is to be expected of one that wears out."""
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
            strands = Shown(lambda: past, Path(folder) / "state", None).strands(bays)
    return _drawn(bays, strands)


@contextlib.contextmanager
def _in_utc() -> Iterator[None]:
    zone, os.environ["TZ"] = os.environ.get("TZ"), "UTC"
    time.tzset()
    try:
        yield
    finally:
        if zone is None:
            del os.environ["TZ"]
        else:
            os.environ["TZ"] = zone
        time.tzset()


def _drawn(bays: Bays, strands: Mapping[int, Strand]) -> str:
    with _in_utc():
        lines = [_measured(line, bays.at) for line in bays.drives]
        bays = Bays(at=bays.at, watcher=1207, drives=tuple(lines))
        drawn: list[object] = [top_line(Snapshot(bays=bays, error=None), "", bays.at, WIDTH, 1800)]
        face = Face(ascii_only=False, colours=False)
        for line in lines:
            drawn += ["", *band(line, bays.at, WIDTH, face, strand=strands.get(line.number))]
    return "\n".join(str(line).rstrip() for line in drawn) + "\n"


def rehearsed(scenario: str, days: int) -> str:
    """The page of the worst drive of a rehearsal after so many days, as the dashboard shows it."""
    with tempfile.TemporaryDirectory() as folder:
        course = Course(scenarios.load(scenario), days=days)
        trouble = live_through(course, Path(folder), None)
        if trouble is not None:
            raise RuntimeError(trouble)
        with Past.open(Path(folder)) as past, _in_utc():
            return asyncio.run(_page(past, Path(folder), course))


async def _page(past: Past, folder: Path, course: Course) -> str:
    at = course.clock.now() + 240
    app = Dashboard(
        lambda now: replace(past.bays(now), watcher=1207),
        lambda: at,
        watching="a rehearsal",
        every=DAY,
        questions=Shown(lambda: past, folder, None),
        stage=Scene(course, Pace(2.0)),
    )
    async with app.run_test(size=(WIDTH, 26)) as pilot:
        await settled(pilot)
        await pilot.press("enter")
        await settled(pilot)
        rows = rows_of(app)
    return "\n".join(rows) + "\n"


def _measured(line: DriveLine, at: int) -> DriveLine:
    counts = _TRAFFIC[line.place.device]
    return replace(line, traffic=IoSpan(drive=line.number, at=at, seconds=10.0, counts=counts))


def drawn(name: str) -> str:
    """One of the pictures as it is now."""
    if name == "bays":
        return picture()
    return rehearsed("scratched-media", 72) if name == "drive" else rehearsed("worn-solid-state-drive", 45)


def ends(name: str) -> tuple[str, str]:
    """What stands before a picture in the README, and after it."""
    return f"<!-- picture {name}: begin -->\n", f"<!-- picture {name}: end -->\n"


def current(name: str) -> str:
    """The picture that stands in the README."""
    begin, end = ends(name)
    return README.read_text(encoding="utf-8").partition(begin)[2].partition(end)[0]


def framed(name: str) -> str:
    """The picture as the README holds it."""
    return f"```\n{drawn(name)}```\n"


if __name__ == "__main__":
    text = README.read_text(encoding="utf-8")
    for name in PICTURES:
        begin, end = ends(name)
        before, _, rest = text.partition(begin)
        text = before + begin + framed(name) + end + rest.partition(end)[2]
    README.write_text(text, encoding="utf-8")
