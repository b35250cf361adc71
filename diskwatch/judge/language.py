"""The marks of `diskwatch.language`, as the texts of the judgement have always taken them."""

from diskwatch.language import _, marked, marked_plural, ngettext

__all__ = ["_", "marked", "marked_plural", "ngettext"]
