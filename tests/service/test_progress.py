from diskwatch.service.progress import Progress


def test_work_that_is_done_in_time_is_never_late_and_what_stands_still_is():
    progress = Progress()
    progress.expect("counting", 60, 0)
    progress.expect("rounds", 600, 0)
    for second in range(0, 1200, 30):
        progress.done("counting", second)
        assert progress.late(second) == (("rounds",) if second > 600 else ())
    progress.done("rounds", 1200)
    assert progress.late(1200) == ()
    assert progress.late(1300) == ("counting",)


def test_what_nobody_expects_is_no_matter():
    progress = Progress()
    progress.done("singing", 5)
    assert progress.late(1e9) == ()
