from diskwatch.history.arriving import described
from diskwatch.history.leaving import lines_of
from diskwatch.history.moments import Dated
from diskwatch.history.moving import Judged, Part
from diskwatch.history.packing import packed
from diskwatch.history.writer import History
from tests.history.examples import NOON, a_call, a_drive, a_part, a_pass, a_place, full_round

BEGUN = Dated(turn=0, at=NOON, state="begun")


def _part():
    with History.in_memory() as source:
        known = source.admit(a_drive(), a_place(), NOON)
        for number in range(3):
            source.record(full_round(known, NOON + number * 60, number))
        lines = tuple(lines_of(source._db.conn, 1))
    return Part(known=None, described=described(lines[0]), lines=lines[1:])


def test_who_judges_sees_the_passes_and_the_states_of_both_sides(history):
    cases = []

    def judge(case):
        cases.append(
            (case.known.number, case.copies, case.arrived.states, [one.at for _, one in case.passes(BEGUN)])
        )

    history.arrive([_part()], judge)
    assert cases == [(1, (), (Dated(turn=0, at=NOON + 120, state="state 2"),), [NOON + 60, NOON + 120])]


def test_what_is_judged_is_kept_and_copies_that_are_no_longer_right_give_way(history):
    history.arrive([_part()], lambda _: None)
    history._db.conn.execute(
        "INSERT INTO kept_state (drive, at, packed) VALUES (1, ?, ?)", (NOON + 9, packed("old"))
    )
    history._db.conn.commit()
    (known,) = history.known()
    call = a_call(at=NOON + 120, reason="judged anew")
    part = a_part(known, a_pass(NOON + 120), state="anew", call=call)
    history.arrive(
        [Part(known=known, described=_part().described, lines=())],
        lambda _: Judged(part=part, since=BEGUN, copies=(Dated(turn=0, at=NOON + 5, state="copy"),)),
    )
    assert history.copies(1) == ((NOON + 5, "copy"),)
    assert history.states() == {1: "anew"}
    assert history.calls() == {1: call}


def test_where_a_drive_was_judged_from_its_first_pass_on_no_dated_state_of_before_is_left(history):
    history.arrive([_part()], lambda _: None)
    history._db.conn.execute(
        "INSERT INTO kept_state (drive, at, packed) VALUES (1, ?, ?)", (NOON + 9, packed("old"))
    )
    history._db.conn.commit()
    (known,) = history.known()
    part = a_part(known, a_pass(NOON + 120), state="anew")
    history.arrive(
        [Part(known=known, described=_part().described, lines=())],
        lambda _: Judged(part=part, since=None, copies=(), anew=True),
    )
    assert history.copies(1) == ()
