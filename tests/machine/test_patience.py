import threading
import time

from diskwatch.machine.patience import Patience


def test_an_answer_that_comes_in_time_is_handed_over():
    assert Patience(lambda a, b: (a, b))("x", 1) == ("x", 1)


def test_what_does_not_answer_is_waited_for_once_and_not_asked_again_meanwhile():
    held, asked = threading.Event(), []

    def ask(question: str) -> str:
        asked.append(question)
        if question == "stuck":
            held.wait(10)
        return question

    patience = Patience(ask, seconds=0.05)
    assert [patience("stuck"), patience("stuck"), patience("free")] == [None, None, "free"]
    assert asked == ["stuck", "free"]
    held.set()
    for _ in range(200):
        if patience("stuck") == "stuck":
            break
        time.sleep(0.01)
    else:
        raise AssertionError
