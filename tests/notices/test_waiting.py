import os
import signal
import threading
import time

from diskwatch.notices.waiting import Waiting

USR = signal.SIGUSR2


def test_a_signal_ends_the_wait_at_once_and_is_named():
    with Waiting((USR,)) as waiting:
        threading.Timer(0.1, os.kill, (os.getpid(), USR)).start()
        begun = time.monotonic()
        assert waiting.wait(20) == (USR,)
        assert time.monotonic() - begun < 5
        assert waiting.wait(0) == ()


def test_a_signal_that_came_before_the_wait_is_not_lost():
    with Waiting((USR,)) as waiting:
        os.kill(os.getpid(), USR)
        assert waiting.wait(20) == (USR,)


def test_what_can_be_read_ends_the_wait_without_a_signal():
    out, into = os.pipe()
    os.write(into, b"x")
    with Waiting((USR,)) as waiting:
        assert waiting.wait(20, lambda: out) == ()
    os.close(out)
    os.close(into)


def test_the_handlers_of_before_come_back():
    before = signal.getsignal(USR)
    with Waiting((USR,)):
        assert signal.getsignal(USR) is not before
    assert signal.getsignal(USR) is before
