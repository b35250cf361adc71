from diskwatch.records import Settled
from tests.samples import NOON


def test_a_word_without_signals_is_about_everything():
    assert Settled(at=NOON, because="x").about(())
    assert Settled(at=NOON, because="x").about(("crc-errors",))


def test_a_word_with_signals_is_about_these_alone():
    word = Settled(at=NOON, because="x", signals=("crc-errors",))
    assert word.about(("crc-errors", "link-resets"))
    assert not word.about(("pending-sectors",))
    assert not word.about(())
