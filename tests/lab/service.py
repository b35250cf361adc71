"""The installed service on a real systemd: started, hardened, killed, its clock set, booted again, taken away.

Needs ``LAB_WHEELHOUSE`` (wheels of diskwatch and its libraries) and ``LAB_REBOOT=1``.
"""

import json
import os
import subprocess
import sys
from functools import partial
from pathlib import Path
from typing import Any

from tests.lab.bench import check, end, lab, say, sh, wait

DISKWATCH = "/usr/local/bin/diskwatch"
BOOTED = Path("/var/tmp/diskwatch-lab-booted")  # noqa: S108 - a mark in a guest that lives for minutes
MOCK = Path("/var/tmp/mock")  # noqa: S108
SHOWN = Path("/var/tmp/shown")  # noqa: S108
SETTINGS = Path("/etc/diskwatch/settings.toml")
UNIT = "diskwatch.service"
AGENT = "diskwatch-notify.service"
PERSON = "person"
INSTALL = f"{sys.executable} -m diskwatch install --wheels /mnt/wheelhouse"


def shown(what: str, unit: str = UNIT) -> str:
    """One property of a unit."""
    return sh(f"systemctl show -P {what} {unit}")


def active(unit: str = UNIT) -> bool:
    return shown("ActiveState", unit) == "active"


def bays() -> dict[str, dict[str, Any]]:
    found = json.loads(sh(f"{DISKWATCH} bays --json", check=False) or '{"drives": []}')
    return {str(drive["serial"] or drive["device"]): drive for drive in found["drives"]}


def book() -> list[str]:
    return [one["text"] for one in json.loads(sh(f"{DISKWATCH} daybook --json"))["entries"]]


def journal(unit: str = UNIT) -> str:
    return sh(f"journalctl -b -o cat -u {unit}")


def of_process(pid: str, field: str) -> int:
    """A figure of a process, as /proc/PID/status has it."""
    return int(sh(f"awk '/^{field}:/ {{ print $2 }}' /proc/{pid}/status"))


def installed() -> None:
    began = sh(INSTALL)
    say(began.replace("\n", "\n         "))
    check(wait("the service is active", active, 60) < 60, "it starts")
    again = sh(INSTALL)
    check("is there already" in again, "installing twice is no harm")
    check(wait("the service is active again", active, 60) < 60, "and it runs afterwards")
    seconds = wait("a first round", lambda: "last round" in shown("StatusText"), 120)
    say(f"first round {seconds:.0f} s after the start: {shown('StatusText')}")
    run = sh("systemctl is-enabled " + UNIT + " " + AGENT)
    check(run == "enabled\nenabled", "both units are enabled")


def hardened() -> None:
    told = sh(f"systemd-analyze security --no-pager {UNIT} | tail -n 1")
    say(told)
    check(float(told.split(":")[1].split()[0]) <= 2.0, "its exposure is 2.0 at the most")
    say(sh(f"systemd-analyze security --no-pager {AGENT} | tail -n 1"))
    say(sh(f"systemd-analyze verify /etc/systemd/system/{UNIT} /etc/systemd/system/{AGENT} 2>&1", check=False))


def senses() -> None:
    disk = lab("dev", "vblk")
    sh(f"mkfs.ext4 -q -F {disk}; mkdir -p /home/data; mount -o noatime {disk} /home/data")
    pid = shown("MainPID")
    unhardened = f"{sys.executable} -m diskwatch"
    sh(f"{unhardened} watch --once --state /var/tmp/free >/dev/null")
    before = json.loads(sh(f"{unhardened} bays --json --state /var/tmp/free"))
    free = {str(one["serial"] or one["device"]): one for one in before["drives"]}
    asked = shown("StatusText")
    sh(f"kill -USR1 {pid}")
    wait("a round on demand", lambda: shown("StatusText") != asked, 90)
    here = bays()
    check(set(here) == set(free), "it sees the drives that an unhardened watch sees")
    for name, one in free.items():
        mine = here.get(name, {})
        for key in ("last_pass", "lives_here", "bay", "kind", "capacity_bytes"):
            theirs, ours = one[key], mine.get(key)
            if key == "last_pass":
                theirs, ours = theirs["outcome"], (ours or {}).get("outcome")
            check(theirs == ours, f"{name}: {key} is {ours} as without hardening ({theirs})")
        check(set(one["signals"]) <= set(mine.get("signals", {})), f"{name}: no signal is lost")
    check(any("/home/data" in str(one["lives_here"]) for one in here.values()), "what lies under /home is seen")


def hears() -> None:
    disk = lab("dev", "hdd")
    lab("bad", "hdd", "2048")
    sh(f"dd if={disk} of=/dev/null bs=512 skip=2048 count=1 iflag=direct", check=False)
    wait("the kernel's word in the day book", lambda: any("failed at sector" in one for one in book()), 60)
    check(any("failed at sector" in one for one in book()), "it hears the kernel")
    lab("good", "hdd")
    seconds = wait("the call", lambda: bays()["LABHDD0001"]["call"] == "look", 120)
    say(f"the call changed within {seconds:.0f} s")


def tells() -> None:
    seconds = wait("the notice in the journal", lambda: "Look at" in journal(AGENT), 90)
    check("Look at" in journal(AGENT), f"the machine's agent told within {seconds:.0f} s")
    wait("the notice on the desktop", lambda: "Look at" in SHOWN.read_text(), 90)
    check(SHOWN.read_text().count("Look at") == 1, "the user's agent showed it, once")


def person() -> None:
    """A user with a session, in which a server of notices runs."""
    sh(f"useradd -m {PERSON}; loginctl enable-linger {PERSON}")
    uid = sh(f"id -u {PERSON}")
    bus = f"/run/user/{uid}/bus"
    wait("the user's bus", lambda: Path(bus).exists(), 60)
    MOCK.write_bytes(Path("/mnt/share/mock.py").read_bytes())
    SHOWN.write_text("")
    sh(f"chown {PERSON} {SHOWN}; chmod 644 {MOCK}")
    subprocess.Popen(
        ["runuser", "-u", PERSON, "--", "/opt/venv/bin/python", str(MOCK), str(SHOWN), "actions", "body"],
        env={
            **os.environ,
            "DBUS_SESSION_BUS_ADDRESS": f"unix:path={bus}",
            "PYTHONPATH": "/opt/diskwatch/lib/python3.11/site-packages",
        },
        stdin=subprocess.PIPE,
        cwd="/",
    )
    wait("the server of notices", lambda: "ready" in SHOWN.read_text(), 60)
    sh(f"systemctl --user -M {PERSON}@ start {AGENT}")
    check(sh(f"systemctl --user -M {PERSON}@ is-active {AGENT}", check=False) == "active", "the user unit runs")


def settings() -> None:
    began = book().count("Watching began.")
    SETTINGS.parent.mkdir(exist_ok=True)
    SETTINGS.write_text('[smart]\nevery = "1m"\n')
    sh(f"systemctl reload {UNIT}")
    wait("other settings", lambda: book().count("Watching began.") > began, 60)
    check(active(), "it goes on with other settings")
    good = SETTINGS.read_text()
    SETTINGS.write_text("[smart]\nevery = 3\n")
    sh(f"systemctl reload {UNIT}")
    wait("one clear line", lambda: "the settings that held before go on" in journal(), 60)
    check(active() and journal().count("the settings that held before go on") == 1, "wrong ones are one line")
    SETTINGS.write_text(good)


def passes() -> int:
    return int(
        sh("sqlite3 -readonly /var/lib/diskwatch/history.db 'select count(*) from pass'", check=False) or -1
    )


def _other_status(was: str) -> bool:
    return shown("StatusText") != was


def _told_of_clocks() -> int:
    return sum("clock was set" in one for one in book())


def clock() -> None:
    """With rounds every minute: what a clock that is set does to their number within some minutes."""
    for by, name in (("+1 hour", "forward"), ("-2 hours", "back")):
        sh(f"date -s '{by}' >/dev/null")
        seconds = wait(
            f"a round after the clock was set {name}", partial(_other_status, shown("StatusText")), 150
        )
        check(seconds <= 60 + 30 + 10, f"set {name} by hours: the next round came {seconds:.0f} s later")
    wait("the clocks' words in the day book", lambda: _told_of_clocks() == 2, 60)
    check(_told_of_clocks() == 2, "and both are told")


def watchdog() -> None:
    sh("mkdir -p /etc/systemd/system/diskwatch.service.d; "
       "printf '[Service]\\nWatchdogSec=45\\n' >/etc/systemd/system/diskwatch.service.d/lab.conf; "
       f"systemctl daemon-reload; systemctl restart {UNIT}")  # fmt: skip
    wait("the service is active", active, 60)
    pid = shown("MainPID")
    sh(f"kill -STOP {pid}")
    seconds = wait("the watchdog", lambda: shown("MainPID") not in {pid, "0"} and active(), 150)
    check(shown("NRestarts") == "1", f"one that stands still is started anew, after {seconds:.0f} s")
    sh("rm -r /etc/systemd/system/diskwatch.service.d; systemctl daemon-reload")
    pid = shown("MainPID")
    sh(f"kill -KILL {pid}")
    seconds = wait("the service after a kill", lambda: shown("MainPID") not in {pid, "0"} and active(), 60)
    check(active(), f"one that is killed is started anew, after {seconds:.0f} s")
    began = sh("date +%s%N")
    sh(f"systemctl stop {UNIT}")
    seconds = (int(sh("date +%s%N")) - int(began)) / 1e9
    check(seconds < 5, f"it ends within {seconds:.1f} s (emulated)")
    sh(f"systemctl start {UNIT}")


def figures() -> None:
    pid = shown("MainPID")
    say(f"resident memory {of_process(pid, 'VmRSS') / 1024:.1f} MiB, threads {of_process(pid, 'Threads')}")


def rights() -> None:
    """What an ordinary user may do."""
    as_person = f"runuser -u {PERSON} --"
    check("LABHDD0001" in sh(f"{as_person} {DISKWATCH} bays --json"), "an ordinary user may read")
    check("diskwatch:" in sh(f"{as_person} {DISKWATCH} greet"), "and is greeted")
    for words in ("settle LABHDD0001 --because x", "tell LABHDD0001 --label x", "uninstall", "watch --once"):
        state = "" if words == "uninstall" else " --state /var/lib/diskwatch"
        done = subprocess.run(
            ["runuser", "-u", PERSON, "--", DISKWATCH, *words.split(), *state.split()],
            capture_output=True, text=True, check=False,
        )  # fmt: skip
        check(done.returncode == 4, f"but not {words.split()[0]}: {done.stderr.strip()}")


def first() -> None:
    installed()
    hardened()
    figures()
    person()
    senses()
    settings()
    hears()
    tells()
    rights()
    clock()
    watchdog()
    figures()
    BOOTED.touch()
    say(f"{passes()} passes before the boot")


def second() -> None:
    check(wait("the service after the boot", active, 90) < 90, "after a boot it watches again")
    check(wait("its agent after the boot", lambda: active(AGENT), 60) < 60, "and so does the agent")
    check(any("failed at sector" in one for one in book()), "what was known is known")

    sh("sleep 40")
    check("Look at" not in journal(AGENT), "nothing is told twice over a boot")
    say(sh(f"{DISKWATCH} uninstall").replace("\n", "\n         "))
    check(not Path("/opt/diskwatch").exists() and not Path(DISKWATCH).exists(), "taken away, nothing is left")
    check(not Path(f"/etc/systemd/system/{UNIT}").exists(), "no unit either")
    check(Path("/var/lib/diskwatch/history.db").exists(), "but for the history")
    check("nothing to take away" in sh(f"{sys.executable} -m diskwatch uninstall"), "twice is no harm")


if BOOTED.exists():
    second()
    end()
else:
    first()
    sh("systemctl reboot")
    sh("sleep 600", check=False)
