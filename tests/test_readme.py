import re

from diskwatch.cli import COMMANDS
from tests.readme import README, current, framed


def test_the_picture_in_the_readme_is_what_the_screen_shows():
    assert current() == framed(), "run: python -m tests.readme"


def test_the_readme_opens_with_the_job_and_names_every_command():
    text = README.read_text(encoding="utf-8")
    assert text.split("\n\n")[1].startswith("diskwatch is for the person who answers for the data")
    for command in COMMANDS:
        assert re.search(rf"^diskwatch {command}\b", text, re.MULTILINE), command
