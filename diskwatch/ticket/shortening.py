"""The last resort against a history full of junk: long texts and lists cut, so that a ticket keeps its size."""

from collections.abc import Mapping, Sequence

_WHOLE = frozenset({"answer", "ledgers", "passes_by_outcome", "made_by", "schema", "made_at"})
"""Members that have limits of their own, or that mean nothing in part."""

_NEWEST_LAST = frozenset({"events", "moves", "gaps", "changes"})


def shortened(document: Mapping[str, object], letters: int | None, items: int | None) -> dict[str, object]:
    """A document with its texts and lists cut.

    Args:
        document: the whole.
        letters: most letters of a text; None for no limit.
        items: most items of a list; None likewise.
    """
    return {key: _cut(value, key, letters, items) for key, value in document.items()}


def _cut(thing: object, key: str, letters: int | None, items: int | None) -> object:
    if key in _WHOLE or (letters is None and items is None):
        return thing
    if isinstance(thing, str):
        return thing if letters is None or len(thing) <= letters else f"{thing[:letters]} [...]"
    if isinstance(thing, Mapping):
        kept = list(thing.items()) if items is None or key != "data" else list(thing.items())[:items]
        return {name: _cut(value, name, letters, items) for name, value in kept}
    if isinstance(thing, Sequence):
        kept_items = thing if items is None else thing[-items:] if key in _NEWEST_LAST else thing[:items]
        return [_cut(one, "", letters, items) for one in kept_items]
    return thing
