"""What goes wrong with input: one class that covers all, so that a caller can catch it in one place."""

from collections.abc import Iterable
from difflib import get_close_matches


class InputError(ValueError):
    """Something that was given is wrong; the message says where, what was found and what to do."""


class ProcessError(InputError):
    """A cross section, a process or a set of them is not a possible one."""


class SetFileError(InputError):
    """A set file cannot be used, found or written."""


class ColumnError(InputError):
    """A file of columns cannot be imported, or leaves questions open."""


class MixtureError(InputError):
    """A mixture is not a possible one."""


def nearest(given: str, known: Iterable[str]) -> str:
    """The nearest of the `known` names, or nothing where none is near."""
    by_lower = {name.lower(): name for name in known}
    near = get_close_matches(given.lower(), by_lower, n=1, cutoff=0.5)
    return by_lower[near[0]] if near else ""


def suggestion(given: str, known: Iterable[str]) -> str:
    """A question with the nearest of the `known` names, with a space before it, or nothing where none is near."""
    near = nearest(given, known)
    return f" Did you mean {near}?" if near else ""


def printable(text: str) -> str:
    """Text for one line of a message: control signs and line ends escaped, cut where long."""
    text = text if text.isprintable() else repr(text)[1:-1]
    return text if len(text) <= 60 else text[:57] + "..."
