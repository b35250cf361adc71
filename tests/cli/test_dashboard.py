from tests.cli.run import run


def test_without_a_full_terminal_the_bare_command_lists_the_drives_instead(tmp_path):
    ended = run("--state", tmp_path)
    assert ended.code == 3
    assert "no full-screen terminal" in ended.err
