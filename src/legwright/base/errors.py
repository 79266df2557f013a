"""Refusals: one sentence that names file, key, value and what is allowed."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import get_close_matches

#: kinds of refusal, and what `legwright explain` says of each
REFUSALS: dict[str, str] = {
    "usage": (
        "The words of the command do not go together, or one is missing. `legwright VERB --help` lists "
        "what a verb takes; the message says what to leave out or add."
    ),
    "unknown-name": (
        "No candidate, alloy line, element or figure is called that. The message offers the nearest name; "
        "`legwright candidates` lists the library. A file of your own is named by its path, which ends in "
        ".toml."
    ),
    "unreadable-file": (
        "The file is not there, may not be read, is too large, or is not what its name says (TOML or CSV, "
        "in UTF-8). The message gives line and column where the parser stopped."
    ),
    "cannot-write": (
        "The result could not be put where it was to go: a folder that is missing or takes no file, or a "
        "full disk. Nothing was written and an older file of that name is as it was."
    ),
    "bad-field": (
        "A field of a brief or candidate file is unknown, missing, of the wrong kind or outside what is "
        "possible. The message names the file, the key from the top down, the value and what is allowed."
    ),
    "bad-unit": (
        "The unit is none, or does not convert to what the field holds. Units are written as in "
        "`cm^2/V/s`, `W/m/K`, `1/cm^3`; temperatures are in K."
    ),
    "bad-row": (
        "A table of measurements has a row or header that cannot be meant: the message names the row and "
        "the likely cause (swapped columns, degrees Celsius, a lost sign, a gap). Nothing was fitted or "
        "written."
    ),
    "out-of-range": (
        "A number lies outside what the physics here can answer for (temperature, doping, size). The "
        "message gives the limits."
    ),
    "anchor-out-of-reach": (
        "No value of the prefactor that an anchor is said to fix meets it: the anchor, its spread or the "
        "parameters around it are off. Check units and the density that belongs to the measurement first."
    ),
    "other-run": (
        "The checkpoint is damaged, belongs to another question, or another run is at work on it. Name "
        "another file, or remove it to begin anew."
    ),
    "missing-extra": (
        "This needs packages that come with an extra: `pip install 'legwright[scale]'` for Parquet files "
        "and clusters."
    ),
}


class InputError(ValueError):
    """The user's input cannot be used. The command line turns it into exit code 2.

    `slug`: the kind of fault, a key of `REFUSALS`, which tell more of it.
    """

    def __init__(self, message: str, *, file: object = None, key: str | None = None, slug: str = "usage") -> None:
        self.slug = slug
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
