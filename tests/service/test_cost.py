"""What an idle watch of six drives costs: run with ``pytest -m bench -s tests/service/test_cost.py``.

A watch in a process of its own looks at six invented drives for ``DISKWATCH_BENCH_SECONDS`` (600 unless set;
half an hour and more to see everything that is due). The kernel tells what it cost. For comparison the bare
libraries do nothing but hold their imports in a process beside it. Where ``/run`` is no memory, figures of the
moment go to a disk and count as writes: run it in a mount namespace with a tmpfs there.
"""

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from tests.cli.run import COMMAND, ROOT, settings_for
from tests.player import lay

SECONDS = int(os.environ.get("DISKWATCH_BENCH_SECONDS", "600"))
FOLDERS = (
    *("invented_hdd_sister", "invented_hdd_series", "invented_nvme_json", "invented_hdd_failing"),
    *("sas_hdd_0_issue_51", "invented_hdd_sister"),
)
KINDS = {"invented_nvme_json": "nvme", "sas_hdd_0_issue_51": "scsi"}
BARE = (
    "import apscheduler.schedulers.background, msgspec, psutil, pySMART, sqlite_utils, sys\n"
    "psutil.disk_io_counters(perdisk=True); print(flush=True); sys.stdin.read()"
)

MEMORY_MIB = 40.0
CPU_SHARE = 0.001
SWITCHES = 0.5
WRITES_A_DAY = 10 * 2**20


def status(pid: int, field: str) -> int:
    """A figure of a process, its threads left out."""
    lines = Path(f"/proc/{pid}/status").read_text().splitlines()
    return int(next(line for line in lines if line.startswith(f"{field}:")).split()[1])


def switches(pid: int) -> int:
    """Voluntary and other switches of all threads."""
    fields = ("voluntary_ctxt_switches", "nonvoluntary_ctxt_switches")
    total = 0
    for task in Path(f"/proc/{pid}/task").iterdir():
        for line in (task / "status").read_text().splitlines():
            total += int(line.split()[1]) if line.startswith(fields) else 0
    return total


def processor(pid: int) -> float:
    """Seconds of processor time, children that have ended left out."""
    fields = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()
    return (int(fields[11]) + int(fields[12])) / os.sysconf("SC_CLK_TCK")


def written(pid: int) -> int:
    """Bytes that it has caused to be written to disks."""
    lines = Path(f"/proc/{pid}/io").read_text().splitlines()
    return int(next(line for line in lines if line.startswith("write_bytes:")).split()[1])


@pytest.mark.bench
def test_an_idle_watch_of_six_drives_stays_within_its_figures(tmp_path):
    command = lay(
        tmp_path / "player",
        [
            {"node": f"/dev/inv{number}", "type": KINDS.get(folder, "sat"), "folder": folder}
            for number, folder in enumerate(FOLDERS)
        ],
        json=True,
    )
    only = ", ".join(f'"/dev/inv{number}"' for number in range(len(FOLDERS)))
    settings = settings_for(command, tmp_path, more=f"[watch]\nonly = [{only}]\n")
    words = [
        *(one for one in COMMAND if one not in {"-W", "error"}),
        "watch",
        "--state",
        str(tmp_path / "state"),
    ]
    # The day on which a history is begun is not what a watch costs.
    subprocess.run([*words, "--once", "--settings", str(settings)], cwd=ROOT, check=True, capture_output=True)
    with (
        subprocess.Popen([sys.executable, "-c", BARE], stdin=subprocess.PIPE, stdout=subprocess.PIPE) as bare,
        subprocess.Popen(
            [*words, "--settings", str(settings)], cwd=ROOT, stdin=subprocess.DEVNULL, stdout=subprocess.DEVNULL
        ) as watch,
    ):
        assert bare.stdout is not None
        bare.stdout.readline()
        time.sleep(60)  # the start and the first round are not what an idle watch costs
        began, before = time.monotonic(), (processor(watch.pid), switches(watch.pid), written(watch.pid))
        time.sleep(SECONDS)
        spent = time.monotonic() - began
        after = (processor(watch.pid), switches(watch.pid), written(watch.pid))
        memory, floor = status(watch.pid, "VmRSS") / 1024, status(bare.pid, "VmRSS") / 1024
        watch.send_signal(signal.SIGTERM)
        asked = time.monotonic()
        watch.wait(20)
        took = time.monotonic() - asked
        bare.communicate()
    share, a_second, a_day = (
        (after[0] - before[0]) / spent,
        (after[1] - before[1]) / spent,
        (after[2] - before[2]) / spent * 86_400,
    )
    sys.stdout.write(
        f"\nover {spent:.0f} s: memory {memory:.1f} MiB (bare libraries {floor:.1f}), processor {share:.3%}, "
        f"{a_second:.2f} switches a second, {a_day / 2**20:.1f} MiB written a day, ended in {took:.1f} s\n"
    )
    assert took < 3
    assert a_second <= SWITCHES
    assert share <= CPU_SHARE
    assert a_day <= WRITES_A_DAY
    assert memory <= MEMORY_MIB
