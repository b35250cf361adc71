from pathlib import Path

from diskwatch.machine.kernel_files import bytes_of, names_in, number_of, text_of, tidy, whole_of


def test_a_missing_file_is_just_not_known(tmp_path: Path):
    assert bytes_of(tmp_path / "none") is None
    assert text_of(tmp_path / "none") is None
    assert number_of(tmp_path / "none") is None
    assert whole_of(tmp_path / "none") is None
    assert names_in(tmp_path / "none") == ()


def test_a_folder_where_a_file_should_be_is_just_not_known(tmp_path: Path):
    assert text_of(tmp_path) is None


def test_a_number_is_decimal_digits_and_nothing_else(tmp_path: Path):
    for content, expected in (
        ("12\n", 12),
        ("0", 0),
        ("-1\n", None),
        ("0x10\n", None),
        ("SD\n", None),
        ("\n", None),
        ("²\n", None),
    ):
        (tmp_path / "file").write_text(content)
        assert number_of(tmp_path / "file") == expected, content


def test_padding_is_removed_and_odd_bytes_do_not_hide_the_rest():
    assert tidy(b"  INV 1\0\0 \n") == "INV 1"
    assert tidy(b"\0 \n") is None
    assert tidy(b"INV\xff1") == "INV\ufffd1"
