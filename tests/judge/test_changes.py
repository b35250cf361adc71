from diskwatch.judge import changes


def test_one_more_occasion_says_whether_it_would_make_it_look():
    enough = changes.one_more_would("link", 1_000, 20_000, 18_000, 7)
    short = changes.one_more_would("link", 1_000, 2_000, 18_000, 7)
    assert enough.endswith("which makes it look.")
    assert short.endswith("look comes from once in 49 years on.")


def test_what_ends_a_call_names_the_days_and_the_command():
    assert "30 powered days" in changes.falls_with_the_link(30.0)
    assert "90 days" in changes.falls_when_rewritten(90)
    for told in (changes.stands(), changes.falls_with_the_link(30.0), changes.falls_when_rewritten(90)):
        assert "diskwatch settle" in told
