"""Metals that join the legs of a couple, and how unlike they and the legs expand."""

from __future__ import annotations

from functools import cache
from typing import Annotated, Literal

from pydantic import Field

from legwright.base.files import datasets_folder, read_toml
from legwright.base.reading import Table, read_as
from legwright.candidate.model import PerKelvin


class Straps(Table):
    """The whole of straps.toml: linear thermal expansion of each metal."""

    schema_: Literal[1] = Field(alias="schema")
    strap: Annotated[dict[str, PerKelvin], Field(min_length=1)]


@cache
def load_straps() -> dict[str, float]:
    """Linear thermal expansion of each strap metal, 1/K."""
    found = read_as(Straps, read_toml(datasets_folder() / "straps.toml"), "straps.toml")
    return {name: number.si for name, number in found.strap.items()}
