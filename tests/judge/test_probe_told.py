from diskwatch.judge import probe_told
from diskwatch.trends import late_reads, probe_speed
from tests.trends.probes import seeded
from tests.trends.test_probed import lived


def test_while_it_learns_it_says_how_far_it_is():
    early = lived(seeded(1), 5)
    assert probe_told.late_standing(early, late_reads.THRESHOLD) == (
        "Late reads: how long reads usually take is still being learnt, from 1,280 of 3,000 reads."
    )
    assert probe_told.speed_standing(early, probe_speed.THRESHOLD).endswith("from 5 of 15 days.")


def test_what_is_learnt_is_told_with_numbers_and_an_interval():
    now = lived(seeded(2), 20)
    told = probe_told.late_standing(now, late_reads.THRESHOLD)
    assert f"of {now.late.reads:,} beyond" in told
    assert "80 % interval" in told
    assert "alarms at" in told
    assert "times as long as in the first 15 probes" in probe_told.speed_standing(now, probe_speed.THRESHOLD)


def test_an_alarm_says_how_many_reads_were_late_and_what_to_do():
    told = probe_told.late(late=12, reads=3_000, limit_ms=11.4, norm=0.001, evidence=40_000.0)
    assert "12 of 3,000 small reads of the probe were late (beyond 11 ms)" in told
    assert "at most 1 in a thousand" in told
    assert "see that a copy of its data is up to date" in told
    assert "take 1.22 times as long" in probe_told.slower(shift=0.2, evidence=40_000.0)
