import pytest
from hypothesis import given, strategies as st

from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.heads import SOUND_RETRIES, TRIES, Head
from diskwatch.rehearsal.rotating import Mix

MIX = Mix(size=4_096, sequential=0.2, cached=0.3, stroke=0.5)


def weak(days: float, *, of: int = 4) -> Head:
    head = Head(number=1, of=of, growth=0.05)
    for _ in range(int(days * 24)):
        head.live(1 / 24)
    return head


def test_a_sound_head_stays_as_it_is_and_needs_a_second_turn_now_and_then():
    head = Head(number=0, of=4)
    head.live(1_000.0)
    assert head.weakness == 0.0
    assert head.reading(MIX).retried == SOUND_RETRIES
    assert head.given_up(stream(1, "sound"), 1e9) == 0


def test_a_weak_head_fails_for_its_share_of_reads_only():
    head = weak(30)
    assert 0.1 < head.weakness < 0.3
    mix = head.reading(MIX)
    assert mix.retried == pytest.approx(SOUND_RETRIES + head.weakness / 4)
    assert mix.again == head.weakness
    assert mix.size == MIX.size


def test_reads_that_fail_at_every_try_are_given_up():
    head = weak(100)
    tries = stream(1, "tries")
    chance = head.weakness ** (1 + TRIES)
    mean = 1e8 / 4 * chance
    counts = [head.given_up(tries, 1e8) for _ in range(200)]
    assert sum(counts) / 200 == pytest.approx(mean, rel=0.05)


@given(st.floats(0.001, 10), st.lists(st.floats(0, 10), max_size=50))
def test_a_weak_head_never_gets_better_and_never_fails_at_each_try(growth, spans):
    head = Head(number=0, of=2, growth=growth)
    for days in spans:
        before = head.weakness
        head.live(days)
        assert before <= head.weakness <= 0.6
