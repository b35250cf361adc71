import json

import pytest

from diskwatch.ticket import canonical
from tests.cli.run import run
from tests.samples import DAY, NOON
from tests.ticket.lives import a_ticket, days, opened


@pytest.fixture(scope="module")
def made(tmp_path_factory):
    with opened(
        tmp_path_factory.mktemp("made") / "state", days(20, lambda day: {"crc_errors": day // 6})
    ) as past:
        return a_ticket(past, NOON + 20 * DAY)


def _checked(tmp_path, thing):
    path = tmp_path / "ticket.json"
    path.write_bytes(thing if isinstance(thing, bytes) else json.dumps(thing).encode())
    return run("ticket-check", path)


def _signed(ticket):
    return {**ticket, "digest": {"sha256": canonical.digest(ticket)}}


def test_a_ticket_as_it_was_made_has_no_fault(made, tmp_path):
    ended = _checked(tmp_path, made)
    assert (ended.code, ended.out.count("\n"), ended.err) == (0, 1, "")


def test_the_order_of_members_and_blanks_do_not_matter(made, tmp_path):
    turned = dict(reversed(list(made.items())))
    assert _checked(tmp_path, json.dumps(turned, indent=7).encode()).code == 0


def test_a_single_changed_letter_breaks_the_digest(made, tmp_path):
    ended = _checked(tmp_path, {**made, "drive": {**made["drive"], "serial": "INV0002"}})
    assert ended.code == 1
    assert "the digest does not fit" in ended.out


def test_every_fault_is_named_one_a_line(made, tmp_path):
    wrong = {**made, "made_at": "today", "findings": None}
    del wrong["cautions"]
    ended = _checked(tmp_path, wrong)
    assert ended.code == 1
    assert ended.out.count("\n") == 4
    for part in ("made_at", "findings", "lacks cautions", "digest"):
        assert part in ended.out


def test_a_ticket_signed_anew_must_still_hold_together(made, tmp_path):
    ended = _checked(tmp_path, _signed({**made, "asked_for": "Please send money."}))
    assert ended.code == 1
    assert "asked_for does not follow" in ended.out


def test_what_cannot_be_checked_is_said(made, tmp_path):
    later = _signed({**made, "made_by": {**made["made_by"], "rules_version": 999}})
    ended = _checked(tmp_path, later)
    assert ended.code == 0
    assert "not checked" in ended.err


@pytest.mark.parametrize(
    "thing",
    [
        b"",
        b"{",
        b"\xff\xfe",
        b"[]",
        b"{}",
        b"null",
        b"3",
        b'{"a": NaN}',
        b'{"a": 1, "a": 2}',
        b"[" * 100_000,
        b'"x\x1b[31m"',
    ],
)
def test_what_is_no_ticket_is_a_fault_and_no_fall(tmp_path, thing):
    ended = _checked(tmp_path, thing)
    assert ended.code == 1
    assert ended.out.count("\n") >= 1
    assert "\x1b" not in ended.out


def test_a_number_too_long_for_any_reader_is_a_fault(made, tmp_path):
    ended = _checked(
        tmp_path, json.dumps(made).replace('"days_read": 20', f'"days_read": {"9" * 400}').encode()
    )
    assert ended.code == 1
    assert _checked(tmp_path, b"[" + b"9" * 5_000 + b"]").code == 1


def test_a_file_that_cannot_be_read_exits_4(tmp_path):
    assert run("ticket-check", tmp_path / "nothing.json").code == 4
    assert run("ticket-check", tmp_path).code == 4
    assert run("ticket-check").code == 2
