"""The one door to sqlite-utils.

sqlite-utils imports numpy and pandas wherever they happen to be installed, which costs the watch some tens of
megabytes that it never uses. Both are hidden for the moment of the import and shown again afterwards.
"""

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from types import ModuleType

_UNWANTED = ("numpy", "pandas")


@contextmanager
def _hidden(names: tuple[str, ...]) -> Iterator[None]:
    """Let imports of some modules fail for a while, as they do where these are not installed."""
    modules: dict[str, ModuleType | None] = sys.modules  # type: ignore[assignment]  # None is documented there
    before = {name: modules[name] for name in names if name in modules}
    modules.update(dict.fromkeys(names))
    try:
        yield
    finally:
        for name in names:
            modules.pop(name, None)
        modules.update(before)


with _hidden(_UNWANTED):
    from sqlite_utils import Database, Migrations

__all__ = ["Database", "Migrations"]
