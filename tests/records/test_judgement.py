from diskwatch.records import CallWord


def test_calls_rank_from_keep_to_retire():
    assert [word.rank for word in (CallWord.KEEP, CallWord.LOOK, CallWord.COPY, CallWord.RETIRE)] == [
        0,
        1,
        2,
        3,
    ]
