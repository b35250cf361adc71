from hypothesis import given, strategies as st

from diskwatch.machine.kernel_line import line_of


def test_a_record_is_taken_apart():
    line = line_of(b"3,812,98213311,-;I/O error, dev sda\n SUBSYSTEM=block\n DEVICE=b8:0\n")
    assert line is not None
    assert (line.sequence, line.seconds, line.text) == (812, 98.213311, "I/O error, dev sda")


def test_fields_that_later_kernels_add_do_no_harm():
    line = line_of(b"6,1,2,-,caller=T1;text;with;marks")
    assert line is not None
    assert line.text == "text;with;marks"


def test_what_a_program_writes_into_the_log_says_nothing():
    line = line_of(b"12,5,6,-;I/O error, dev sda, sector 8 op 0x0:(READ)")
    assert line is not None
    assert (line.sequence, line.text) == (5, "")


def test_what_is_no_record_gives_no_line():
    for record in (b"", b"no record", b"3,x,1,-;text", b"3;text", b"3,-1,1,-;text", b" SUBSYSTEM=block"):
        assert line_of(record) is None


@given(st.binary(max_size=200))
def test_no_bytes_raise(record):
    line_of(record)
