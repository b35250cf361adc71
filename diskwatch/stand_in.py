"""Loading a library without a library that it names at its top and that we never let it use.

What a watch loads it holds for months. A module that stands in is there only while the other is being loaded; a
library that is loaded already, or that turns out to need the real one after all, is loaded as usual.
"""

import importlib
import sys
from collections.abc import Mapping
from types import ModuleType


def without(name: str, unwanted: str, words: Mapping[str, object]) -> ModuleType:
    """Load a library; while it loads, another one is a module that holds a few words and nothing else.

    Args:
        name: the library that is wanted.
        unwanted: the one that it is not to bring along.
        words: what it takes from that one as it loads.

    Returns:
        The library.
    """
    if name in sys.modules or unwanted in sys.modules:
        return importlib.import_module(name)
    before = set(sys.modules)
    stand_in = ModuleType(unwanted)
    stand_in.__dict__.update(words)
    sys.modules[unwanted] = stand_in
    try:
        return importlib.import_module(name)
    except ImportError:
        # Half of it must not stay behind, for it holds the module that stood in.
        for half in set(sys.modules) - before:
            del sys.modules[half]
    finally:
        if sys.modules.get(unwanted) is stand_in:
            del sys.modules[unwanted]
    return importlib.import_module(name)
