from diskwatch.judge.bound_told import breaks, joint, rests_on


def test_what_is_proved_computed_and_assumed_is_told_apart():
    assert [one.split(",")[0] for one in rests_on(latency=True)] == ["Proved", "Computed", "Assumed"]
    assert [one.split(",")[0] for one in rests_on(latency=False)] == ["Proved", "Computed"]


def test_what_breaks_the_bound_names_the_changes_that_no_counter_shows():
    told = " ".join(breaks(latency=True))
    assert "fewer hits in a cache" in told
    assert "one kind of work only" in told
    assert len(breaks(latency=False)) == 1


def test_the_joint_figure_is_said_never_to_alarm():
    assert joint(36_525.0).startswith("All ledgers of this drive together: once in 100 years.")
