"""Marks for gettext: what stands in them can be extracted and translated; today nothing is translated.

Every text that a person reads is one whole sentence with named fields in ``_()``, or a pair for one and for
many in ``ngettext()``; texts in a table are marked there by `marked` and `marked_plural`.
"""


def _(text: str) -> str:
    """A text in the reader's language."""
    return text


def ngettext(one: str, many: str, count: int) -> str:
    """The text for a count in the reader's language, with ``{count}`` still to be filled in."""
    return one if count == 1 else many


def marked(text: str) -> str:
    """A text in a table, marked for extraction; ``_()`` translates it where it is used."""
    return text


def marked_plural(one: str, many: str) -> tuple[str, str]:
    """Texts for one and for many in a table, marked likewise; ``ngettext()`` chooses where they are used."""
    return one, many
