import json
import sys
import time
from contextlib import suppress
from pathlib import Path

import pytest

from diskwatch.notices.hook import HookFailed, run


def python(code, *words):
    return (sys.executable, "-c", code, *words)


def test_the_program_gets_one_json_object_and_its_own_words_untouched_by_any_shell(tmp_path):
    out = tmp_path / "out"
    code = "import sys; open(sys.argv[1], 'w').write(sys.stdin.read() + sys.argv[2])"
    run(python(code, str(out), "$HOME; `id`"), {"summary": "dröve \u202e", "drive": None})
    told, _, words = out.read_text().partition("\n")
    assert json.loads(told) == {"summary": "dröve \u202e", "drive": None}
    assert told.isascii()
    assert words == "$HOME; `id`"


@pytest.mark.parametrize(
    ("command", "told"),
    [
        (("/no/such/program",), "could not be started: No such file"),
        (("/",), "could not be started: Permission denied"),
        (
            python("import sys; sys.stderr.write('no \\x1b[31mmail\\nhere'); sys.exit(3)"),
            "ended with 3 and said: no",
        ),
        (python("import os; os.kill(os.getpid(), 9)"), "ended with -9"),
    ],
)
def test_a_program_that_fails_is_one_harmless_line(command, told):
    with pytest.raises(HookFailed) as caught:
        run(command, {})
    assert told in str(caught.value)
    assert "\x1b" not in str(caught.value)
    assert "\n" not in str(caught.value)


def test_a_program_that_takes_too_long_is_ended_with_all_that_it_started(tmp_path):
    code = (
        "import subprocess, sys, time\n"
        "child = subprocess.Popen([sys.executable, '-c', 'import time; time.sleep(60)'])\n"
        "open(sys.argv[1], 'w').write(str(child.pid))\n"
        "time.sleep(60)"
    )
    note = tmp_path / "pid"
    with pytest.raises(HookFailed, match=r"took more than 1 seconds"):
        run(python(code, str(note)), {}, 1.0)
    pid = int(note.read_text())
    until = time.monotonic() + 5
    while _runs(pid) and time.monotonic() < until:
        time.sleep(0.02)
    assert not _runs(pid)


def _runs(pid):
    with suppress(OSError):
        return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0] not in "ZX"
    return False


def test_a_program_that_reads_nothing_and_leaves_something_running_is_no_failure():
    code = "import subprocess, sys; subprocess.Popen([sys.executable, '-c', 'import time; time.sleep(3)'])"
    begun = time.monotonic()
    run(python(code), {"body": "x" * 10}, 30.0)
    assert time.monotonic() - begun < 3
