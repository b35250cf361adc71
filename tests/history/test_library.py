import subprocess
import sys

from diskwatch.history import library

_PROGRAM = """
import sys
from diskwatch.history import library
assert library.Database and library.Migrations
assert "numpy" not in sys.modules and "pandas" not in sys.modules, "loaded beside sqlite-utils"
import numpy, pandas
print(numpy.invented, pandas.invented)
"""


def test_numpy_and_pandas_are_not_loaded_with_the_library_and_can_be_loaded_later(tmp_path):
    for name in ("numpy", "pandas"):
        (tmp_path / f"{name}.py").write_text("invented = 'yes'\n")
    program = f"import sys; sys.path.insert(0, {str(tmp_path)!r})\n{_PROGRAM}"
    ended = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=False, timeout=60
    )
    assert (ended.stdout, ended.stderr) == ("yes yes\n", "")


def test_a_module_that_was_loaded_before_is_there_again_afterwards(monkeypatch):
    marker = object()
    monkeypatch.setitem(sys.modules, "invented_module", marker)
    with library._hidden(("invented_module", "invented_absent")):
        assert sys.modules.get("invented_module", marker) is not marker
    assert sys.modules["invented_module"] is marker
    assert "invented_absent" not in sys.modules
