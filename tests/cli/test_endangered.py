from dataclasses import replace
from pathlib import Path

import pytest

from diskwatch.cli.endangered import Warner, endangered
from diskwatch.machine import blocks, here
from diskwatch.records import Bays, CallWord
from tests.cli.test_bays import line
from tests.samples import NOON


def bays(word):
    return Bays(at=NOON, watcher=None, drives=(line(CallWord.KEEP), replace(line(word), number=2)))


@pytest.fixture(autouse=True)
def kernel(monkeypatch):
    """A machine on which the history lies on every drive that is here; how often it was asked."""
    asked = []

    def physical_drives():
        asked.append(1)
        return ()

    monkeypatch.setattr(blocks, "physical_drives", physical_drives)
    monkeypatch.setattr(here, "found_of", lambda *_: object())
    monkeypatch.setattr(here, "lies_on", lambda *_: True)
    return asked


@pytest.mark.parametrize("word", [CallWord.COPY, CallWord.RETIRE])
def test_a_history_on_a_drive_in_trouble_is_to_be_moved(word):
    told = endangered(bays(word), Path("/var"))
    assert told is not None
    assert f"is called {word.value}" in told
    assert "diskwatch move-history DIR" in told


@pytest.mark.parametrize("word", [CallWord.KEEP, CallWord.LOOK, None])
def test_as_long_as_no_drive_is_in_trouble_the_kernel_is_not_even_asked(kernel, word):
    assert endangered(bays(word), Path("/var")) is None
    assert kernel == []


def test_a_drive_that_is_not_here_or_holds_something_else_endangers_nothing(monkeypatch):
    monkeypatch.setattr(here, "lies_on", lambda *_: False)
    assert endangered(bays(CallWord.RETIRE), Path("/var")) is None
    monkeypatch.setattr(here, "lies_on", lambda *_: True)
    monkeypatch.setattr(here, "found_of", lambda *_: None)
    assert endangered(bays(CallWord.RETIRE), Path("/var")) is None


def test_the_warning_joins_the_troubles_and_the_kernel_is_asked_once_a_change_of_call(kernel):
    warn = Warner(Path("/var"))
    calm, trouble = bays(CallWord.KEEP), bays(CallWord.COPY)
    assert warn(calm) == calm
    for _ in range(3):
        assert len(warn(trouble).trouble) == 1
    assert len(kernel) == 1
