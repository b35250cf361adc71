"""A folder for a history, in memory where that can be had."""

from tests.history.conftest import _own_run_folder, folder

__all__ = ["_own_run_folder", "folder"]
