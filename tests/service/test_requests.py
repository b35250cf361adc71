import json
import os
import threading

import pytest

from diskwatch.errors import HistoryError, UsageError
from diskwatch.history.writer import History
from diskwatch.service import requests
from diskwatch.service.requests import Answer, leave, take_up, wait, waiting

OTHER = 65534


@pytest.fixture
def state(tmp_path):
    History.open(tmp_path).close()
    return tmp_path


def done(words):
    return Answer(done=(f"did {words['what']}",), wrong=("row 3",))


def test_a_request_is_answered_and_nothing_is_left_behind(state):
    assert not waiting(state)
    request = leave(state, "do", {"what": "it"})
    assert waiting(state)
    assert take_up(state, {"do": done}) == 1
    assert not waiting(state)
    assert wait(request) == Answer(done=("did it",), wrong=("row 3",))
    assert list(request.parent.iterdir()) == []


def test_who_waits_is_answered_when_the_watch_gets_to_it(state):
    request = leave(state, "do", {"what": "it"})
    threading.Timer(0.2, take_up, (state, {"do": done})).start()
    assert wait(request).done == ("did it",)


def test_requests_are_taken_up_in_the_order_in_which_they_were_left(state):
    order = []

    def note(words):
        order.append(words["what"])
        return Answer()

    for number in range(5):
        leave(state, "do", {"what": number})
    assert take_up(state, {"do": note}) == 5
    assert order == [0, 1, 2, 3, 4]


def test_what_the_watch_refuses_is_an_error_where_it_was_asked(state):
    def refuses(_words):
        raise UsageError("the file is no exported history", hint="name another")

    request = leave(state, "do", {})
    take_up(state, {"do": refuses})
    with pytest.raises(HistoryError, match="no exported history; name another"):
        wait(request)


def test_a_deed_that_this_watch_does_not_know_is_refused_by_name(state):
    request = leave(state, "fly", {})
    take_up(state, {"do": done})
    with pytest.raises(HistoryError, match="knows no request fly"):
        wait(request)


@pytest.mark.parametrize(
    "text", ["", "{", "[]", "{}", '{"deed": "do", "words": 5}', '{"deed": "do", "words": {}}']
)
def test_what_is_no_request_is_answered_too_and_taken_away(state, text):
    request = leave(state, "do", {})
    request.write_text(text)
    take_up(state, {"do": done})
    with pytest.raises(HistoryError, match="cannot be understood"):
        wait(request)
    assert not waiting(state)


def test_nobody_who_answers_ends_the_waiting_and_takes_the_request_back(state):
    request = leave(state, "do", {})
    with pytest.raises(HistoryError, match="has not answered"):
        wait(request, patience=0)
    assert not request.exists()


def test_a_request_that_others_may_write_is_not_believed(state):
    request = leave(state, "do", {"what": "it"})
    request.chmod(0o666)
    take_up(state, {"do": done})
    with pytest.raises(HistoryError, match="not from the history's owner"):
        wait(request)


def test_a_folder_that_others_may_write_is_left_alone(state):
    request = leave(state, "do", {"what": "it"})
    request.parent.chmod(0o777)
    assert take_up(state, {"do": done}) == 0


def test_a_link_is_not_followed(state, tmp_path):
    request = leave(state, "do", {"what": "it"})
    elsewhere = tmp_path / "elsewhere"
    request.rename(elsewhere)
    request.symlink_to(elsewhere)
    take_up(state, {"do": done})
    assert elsewhere.exists()
    with pytest.raises(HistoryError, match="cannot be understood"):
        wait(request)


@pytest.mark.skipif(os.geteuid() != 0, reason="needs root to become another user")
def test_a_user_without_the_right_is_told_so_and_leaves_nothing(state):
    child = os.fork()
    if child == 0:
        os.seteuid(65534)
        try:
            leave(state, "do", {})
        except HistoryError as error:
            os._exit(7 if "run as the user that owns the history" in str(error) else 1)
        os._exit(2)
    assert os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]) == 7
    assert not waiting(state)


def test_answers_that_nobody_came_back_for_go_after_a_day(state):
    request = leave(state, "do", {"what": "it"})
    take_up(state, {"do": done})
    answer = request.with_name(request.stem + ".answer.json")
    take_up(state, {"do": done})
    assert answer.exists()
    os.utime(answer, (0, 0))
    take_up(state, {"do": done})
    assert not answer.exists()


def test_a_request_says_what_to_do_in_plain_json(state):
    request = leave(state, "do", {"what": "it"})
    assert json.loads(request.read_text()) == {"deed": "do", "words": {"what": "it"}}
    assert request.stat().st_mode & 0o777 == 0o600
    assert requests.EVERY <= 10


needs_root = pytest.mark.skipif(os.geteuid() != 0, reason="needs root to become another user")


@pytest.fixture
def theirs(state):
    """A state folder that is another user's, where that user's watch runs."""
    for path in (state, *state.iterdir()):
        os.chown(path, OTHER, OTHER)
    # pytest's own folders are closed to others.
    for above in list(state.parents)[:3]:
        above.chmod(0o755)
    return state


@needs_root
def test_the_watch_of_another_user_reads_what_root_asks_of_it(theirs):
    request = leave(theirs, "do", {"what": "it"})
    assert {one.stat().st_uid for one in (request, request.parent)} == {OTHER}
    child = os.fork()
    if child == 0:
        os.setgid(OTHER)
        os.setuid(OTHER)
        os._exit(take_up(theirs, {"do": done}))
    assert os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]) == 1
    assert wait(request).done == ("did it",)


def test_a_request_that_is_nested_without_end_is_refused_and_keeps_up_no_other(state):
    folder = state / requests.FOLDER
    folder.mkdir(mode=0o755)
    deep = folder / "0-1.json"
    deep.write_text('{"deed": "do", "words": {"a": ' + "[" * 200_000 + "]" * 200_000 + "}}")
    deep.chmod(0o600)
    request = leave(state, "do", {"what": "it"})
    assert take_up(state, {"do": done}) == 2
    assert "cannot be understood" in (folder / "0-1.answer.json").read_text()
    assert wait(request).done == ("did it",)


@needs_root
def test_root_gives_away_and_writes_nothing_behind_a_link_in_the_place_of_the_folder(theirs, tmp_path_factory):
    target = tmp_path_factory.mktemp("roots")
    (theirs / requests.FOLDER).symlink_to(target)
    with pytest.raises(HistoryError, match="cannot be asked"):
        leave(theirs, "do", {"what": "it"})
    assert list(target.iterdir()) == []
    assert target.stat().st_uid == 0


@needs_root
def test_a_strangers_folder_in_its_place_is_refused(state):
    folder = state / requests.FOLDER
    folder.mkdir()
    os.chown(folder, OTHER, OTHER)
    with pytest.raises(HistoryError, match="not the history owner's"):
        leave(state, "do", {"what": "it"})
    assert list(folder.iterdir()) == []
