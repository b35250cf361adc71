"""What several tests of the kernel's side share."""

from pathlib import Path

import pytest

from tests.machine.trees import Tree


@pytest.fixture
def tree(tmp_path: Path) -> Tree:
    """An empty machine."""
    return Tree(tmp_path)
