from tests.rehearsal.examples import hdd


def test_amounts_of_a_file_become_bytes():
    spec = hdd(capacity_gb=4_000, written_tb=1.5, read_tb=2.0)
    assert (spec.capacity, spec.written_bytes, spec.read_bytes) == (4 * 10**12, 15 * 10**11, 2 * 10**12)
