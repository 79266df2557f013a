"""Published legs, couples and modules: what they were made of, between which temperatures, and what they did."""

from __future__ import annotations

import csv
import io
import math
from functools import cache
from pathlib import Path
from typing import Literal

from pydantic import Field, model_validator

from legwright.base.errors import InputError
from legwright.base.files import datasets_folder
from legwright.base.reading import Table, read_as
from legwright.base.units import NM, si_factor

_SI = {"efficiency": "1", "power": "W/m^2", "delta_t": "K"}


class Device(Table):
    """One published figure of a device; SI. `n` and `p`: candidates hot to cold, one or both.

    `length` of the legs: needed for a power per area alone.
    """

    device: str = Field(min_length=1)
    n: tuple[str, ...]
    p: tuple[str, ...]
    n_size: float = Field(gt=0, allow_inf_nan=True)
    p_size: float = Field(gt=0, allow_inf_nan=True)
    hot: float = Field(gt=0)
    cold: float | None
    quantity: Literal["efficiency", "power", "delta_t"]
    measured: float = Field(gt=0)
    length: float | None = Field(gt=0)
    source: str = Field(min_length=1)
    basis: str = Field(min_length=1)
    note: str

    @model_validator(mode="after")
    def _possible(self) -> Device:
        if not (self.n or self.p):
            raise ValueError("names neither an n nor a p leg")
        if (self.cold is None) != (self.quantity == "delta_t"):
            raise ValueError("has a cold side unless its largest difference is given")
        if self.quantity == "power" and self.length is None:
            raise ValueError("gives a power per area and no length")
        return self


@cache
def load_devices(path: Path | None = None) -> tuple[Device, ...]:
    """The published devices of the shipped table, or of another like it; InputError names file and row."""
    shown = datasets_folder() / "devices.csv" if path is None else path
    rows = csv.DictReader(io.StringIO(shown.read_text(encoding="utf-8")))
    return tuple(_device(row, shown, number) for number, row in enumerate(rows, start=2))


def _device(row: dict[str, str], path: Path, number: int) -> Device:
    def figure(name: str, factor: float = 1.0) -> float | None:
        cell = row[name].strip()
        return factor * float(cell) if cell else None

    def size(name: str) -> float:
        return math.inf if row[name] in ("", "bulk") else NM * float(row[name])

    try:
        made = {
            "device": row["device"],
            "n": tuple(filter(None, row["n"].split(" > "))),
            "p": tuple(filter(None, row["p"].split(" > "))),
            "n_size": size("n_size [nm]"),
            "p_size": size("p_size [nm]"),
            "hot": figure("hot [K]"),
            "cold": figure("cold [K]"),
            "quantity": row["quantity"],
            "measured": figure("measured", si_factor(row["unit"], _SI[row["quantity"]])),
            "length": figure("length [mm]", 1e-3),
            "source": row["source"],
            "basis": row["basis"],
            "note": row["note"],
        }
    except (KeyError, ValueError) as error:
        raise InputError(
            f"cannot be read: {error}", file=path, key=f"row {number}", slug="unreadable-file"
        ) from error
    return read_as(Device, made, f"{path}, row {number}")
