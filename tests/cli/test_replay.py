from tests.cli.run import run


def test_the_json_has_the_shape_that_scripts_rely_on(tmp_path):
    table = tmp_path / "table.csv"
    days = "".join(f"{day},INV1,Invented 1,0,{9 * (day > 3)},{day == 9:d}\n" for day in range(1, 10))
    table.write_text(f"day,serial,model,a5_raw,a197_raw,failed\n{days}bad\n", encoding="utf-8")
    ended = run("replay", table, "--json")
    assert ended.code == 0
    assert ended.err.count("\n") == 1
    assert "table.csv:11" in ended.err
    answer = ended.json
    (drive,) = answer["drives"]
    assert set(drive) >= {"serial", "model", "first", "last", "failed", "worst", "calls", "drifts"}
    assert [call["call"] for call in drive["calls"]] == ["keep", "copy"]
    assert set(drive["calls"][0]) >= {"at", "call", "cause", "reason", "evidence"}
    assert answer["summary"] == {
        "drives": 1,
        "failed": 1,
        "warned_failed": 1,
        "warned_sound": 0,
        "median_lead_days": 5.0,
        "drive_days": 9,
        "skipped": 1,
    }


def test_the_text_tells_every_drive_that_was_more_than_kept_and_the_sum(tmp_path):
    table = tmp_path / "table.csv"
    table.write_text("day,serial,a197_raw\n1,INV1,0\n2,INV1,9\n1,INV2,0\n", encoding="utf-8")
    told = run("replay", table, "--jobs", 2).out
    assert "INV1" in told
    assert "INV2" not in told
    assert "2 drives over 3 days of readings" in told


def test_a_table_of_another_kind_is_wrong_usage_and_a_missing_one_cannot_be_read(tmp_path):
    (tmp_path / "other.csv").write_text("a,b\n", encoding="utf-8")
    assert run("replay", tmp_path / "other.csv").code == 2
    assert run("replay", tmp_path / "none.csv").code == 4
    assert run("replay", tmp_path / "other.csv", "--jobs", 0).code == 2
