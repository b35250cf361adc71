import pytest

from diskwatch.machine.rates import opaque, rates
from diskwatch.records import Attribute, SignalKind


def row(number: int, name: str, raw: str) -> Attribute:
    return Attribute(number=number, name=name, value=78, worst=64, threshold=6, prefail=True, raw=raw)


ROWS = (
    row(1, "Raw_Read_Error_Rate", "60234824"),
    row(7, "Seek_Error_Rate", str((2 << 32) | 2_427_904)),
    row(195, "Hardware_ECC_Recovered", "60234824"),
)


def read(*rows: Attribute, model: str | None = None) -> dict[str, tuple[object, str]]:
    found = tuple(rates(rows, model))
    assert {value.kind for value in found} <= {SignalKind.GAUGE}
    return {value.signal: (value.value, value.unit) for value in found}


def test_a_maker_that_is_known_to_pack_them_gives_errors_and_operations():
    assert read(*ROWS, model="ST0000INVENTED") == {
        "read-errors": (0, "errors"),
        "read-operations": (60_234_824, "operations"),
        "seek-errors": (2, "errors"),
        "seek-operations": (2_427_904, "operations"),
        "corrected-errors": (0, "errors"),
        "corrected-operations": (60_234_824, "operations"),
    }


@pytest.mark.parametrize("model", [None, "Borealis Tundra BT4000"])
def test_of_any_other_the_raw_value_is_kept_as_it_stands(model: str | None):
    assert read(*ROWS, model=model) == {
        "raw-read-error-rate": (60_234_824, "opaque"),
        "raw-seek-error-rate": ((2 << 32) | 2_427_904, "opaque"),
        "raw-corrected-error-rate": (60_234_824, "opaque"),
    }


def test_errors_and_operations_that_are_printed_apart_need_no_maker():
    assert read(row(1, "Raw_Read_Error_Rate", "3/60234824")) == {
        "read-errors": (3, "errors"),
        "read-operations": (60_234_824, "operations"),
    }


def test_a_row_under_another_name_or_with_another_text_states_nothing():
    assert read(row(1, "Host_Writes_GiB", "5"), row(7, "Seek_Error_Rate", "-")) == {}
    assert not list(opaque(row(9, "Power_On_Hours", str(2**48)), "power-on-hours"))
