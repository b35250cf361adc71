import re

from diskwatch import errors

KINDS = {
    name: kind
    for name, kind in vars(errors).items()
    if isinstance(kind, type) and issubclass(kind, errors.DiskwatchError)
}


def test_the_tree_at_the_top_names_every_error_with_its_exit_code():
    drawn = dict(re.findall(r"(\w+) +(\d) ", errors.__doc__ or ""))
    drawn |= dict(re.findall(r"(DiskwatchError) +(\d)", errors.__doc__ or ""))
    assert drawn == {name: str(kind.exit_code) for name, kind in KINDS.items()}


def test_an_error_is_one_line_of_what_happened_and_what_to_do():
    assert str(errors.HistoryError("it is full", hint="make room")) == "it is full; make room"
    assert str(errors.HistoryError("it is full")) == "it is full"
