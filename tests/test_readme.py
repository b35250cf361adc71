import re

import pytest

from diskwatch.cli import COMMANDS
from tests.readme import PICTURES, README, current, framed


@pytest.mark.parametrize("name", PICTURES)
def test_a_picture_in_the_readme_is_what_the_screen_shows(name):
    assert current(name) == framed(name), "run: python -m tests.readme"


def test_the_readme_opens_with_the_job_and_names_every_command():
    text = README.read_text(encoding="utf-8")
    assert text.split("\n\n")[1].startswith("diskwatch is for the person who answers for the data")
    for command in COMMANDS:
        assert re.search(rf"^diskwatch {command}\b", text, re.MULTILINE), command
