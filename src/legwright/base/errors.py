"""Refusals: one sentence that names file, key, value and what is allowed."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import get_close_matches


class InputError(ValueError):
    """The user's input cannot be used. The command line turns it into exit code 2."""

    def __init__(self, message: str, *, file: object = None, key: str | None = None) -> None:
        where = ": ".join(str(part) for part in (file, key) if part)
        super().__init__(_one_line(f"{where}: {message}" if where else message))


#: characters of a refusal; what a file holds may be longer
_LONGEST = 2000


def _one_line(text: str) -> str:
    """Nothing that a terminal obeys, however odd the quoted value: one line, printable, not endless."""
    plain = "".join(each if each.isprintable() else ascii(each)[1:-1] for each in " ".join(text.split()))
    return plain if len(plain) <= _LONGEST else f"{plain[: _LONGEST - 200]} … {plain[-195:]}"


class NothingFeasible(Exception):
    """Every design was tried and none can serve. The command line turns it into exit code 3."""


def nearest(name: str, allowed: Iterable[str]) -> str:
    """A clause that offers the nearest valid name, or lists what is allowed.

    >>> nearest("gran", ["grain", "wire"])
    "did you mean 'grain'? (allowed: grain, wire)"
    """
    names = sorted(allowed)
    close = get_close_matches(name, names, n=1)
    listing = f"(allowed: {', '.join(names)})"
    return f"did you mean '{close[0]}'? {listing}" if close else listing
