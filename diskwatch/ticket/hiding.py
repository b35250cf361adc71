"""Names taken out of a ticket wherever they stand, each for its alias: values, sentences, events, raw text."""

import json
import re
from collections import Counter
from collections.abc import Mapping, Sequence

from diskwatch.ticket.names import Hidden, Name
from diskwatch.ticket.schema import Shape
from diskwatch.ticket.spellings import patterns

_TRIES = 8
_SIGNS = "▒░▓█◆◇○●□■"


class Hiding:
    """Hides a set of names."""

    def __init__(self, names: Sequence[Name]) -> None:
        """Take up the names."""
        self._names = names
        found = [
            (pattern, number)
            for number, name in enumerate(names)
            for pattern in patterns(name.text, wwn=name.wwn)
        ]
        # The longest first, so that a name within another one does not leave the rest of it behind.
        found.sort(key=lambda pair: -len(pair[0]))
        self._owners = [number for _, number in found]
        self._finder = (
            re.compile("|".join(f"({pattern})" for pattern, _ in found), re.IGNORECASE) if found else None
        )
        letters = {letter for name in names for letter in name.text}
        self._sign = next((sign for sign in _SIGNS if sign not in letters), "*")
        self._aliases = [self._unlike(name, number) for number, name in enumerate(names, 1)]
        self.replaced: Counter[Hidden] = Counter()
        """How often a name of each kind was replaced."""
        self.met: set[int] = set()
        """Which names were met."""

    def _unlike(self, name: Name, number: int) -> str:
        """An alias in which no hidden name stands."""
        for alias in (name.alias, f"name-{number}", f"[{number}]"):
            if self._finder is None or self._finder.search(alias) is None:
                return alias
        return self._sign * (2 + number)

    def text(self, words: str) -> str:
        """A text without the names."""
        if self._finder is None:
            return words
        for _ in range(_TRIES):
            after = self._finder.sub(self._replaced, words)
            if after == words:
                return words
            words = after
        # An alias and its neighbours form a name again and again: what is left goes without one.
        while self._finder.search(words) is not None:
            words = self._finder.sub(self._sign, words)
        return words

    def document(self, thing: object, shape: Shape) -> object:
        """A document without the names; words of the program's own stay as they are.

        Args:
            thing: the document, or a part of it.
            shape: what the schema says of it.
        """
        if isinstance(thing, str):
            return thing if shape.is_own_word(thing) else self.text(thing)
        if isinstance(thing, Mapping):
            told = {}
            for key, value in thing.items():
                known = shape.member(key)
                told[key if known.described else self.text(key)] = self.document(value, known)
            return told
        if isinstance(thing, Sequence):
            return [self.document(one, shape.item()) for one in thing]
        return thing

    def listed(self, kinds: Sequence[Hidden]) -> list[dict[str, object]]:
        """What was hidden, by kind."""
        return [
            {
                "kind": kind.value,
                "names": sum(self._names[number].kind is kind for number in self.met),
                "replaced": self.replaced[kind],
            }
            for kind in kinds
        ]

    def _replaced(self, found: re.Match[str]) -> str:
        number = self._owners[(found.lastindex or 1) - 1]
        name = self._names[number]
        self.replaced[name.kind] += 1
        self.met.add(number)
        alias = self._aliases[number]
        # A number of smartctl's document: the text around it stays a document.
        bare = found[0].isdigit() and name.wwn and re.search(r'":\s*$', found.string[: found.start()][-40:])
        return json.dumps(alias, ensure_ascii=False) if bare else alias
