"""Tables of measurements: CSV with the unit in each header, read strictly, refused with row and likely cause."""

from __future__ import annotations

import csv
import io
import math
import re
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from legwright.base.errors import InputError, nearest
from legwright.base.files import read_text
from legwright.base.units import si_factor

Array = NDArray[np.float64]

#: quantity: SI unit, and what a solid can have (SI); outside, a unit or a column was most likely mistaken
QUANTITIES: dict[str, tuple[str, float, float]] = {
    "temperature": ("K", 2.0, 3000.0),
    "seebeck": ("V/K", -3e-3, 3e-3),
    "resistivity": ("ohm*m", 1e-8, 1e2),
    "electrical_conductivity": ("S/m", 1e-2, 1e8),
    "thermal_conductivity": ("W/m/K", 0.03, 1e4),
    "lattice_conductivity": ("W/m/K", 0.03, 1e4),
    "diffusivity": ("m^2/s", 1e-8, 1e-2),
    "density": ("kg/m^3", 5e2, 2.5e4),
    "heat_capacity": ("J/kg/K", 1.0, 5e3),
    "hall_density": ("1/m^3", 1e19, 1e29),
    "mobility": ("m^2/V/s", 1e-7, 1e3),
    "power_factor": ("W/m/K^2", 1e-9, 1.0),
    "zt": ("1", 1e-6, 5.0),
    "size": ("m", 1e-10, 1.0),
}
WORDS = (
    "sample",
    "candidate",
    "source",
    "shape",
    "direction",
    "heat_capacity_from",
    "basis",
    "role",
    "note",
)
_HEADER = re.compile(r"^\s*([a-z_]+)\s*(?:\[\s*([^\]]*?)\s*\])?\s*$")


@dataclass(frozen=True)
class Measurements:
    """One row a sample and temperature: SI arrays (NaN where empty, a size may be infinite), words, file rows."""

    path: Path
    values: dict[str, Array]
    words: dict[str, tuple[str, ...]]
    rows: tuple[int, ...]

    def __len__(self) -> int:
        return len(self.rows)

    def of(self, quantity: str) -> Array:
        """That quantity in SI, NaN in rows without it."""
        return self.values.get(quantity, np.full(len(self), np.nan))

    def word(self, name: str) -> tuple[str, ...]:
        """That column of words, empty where the file has none."""
        return self.words.get(name, ("",) * len(self))

    @property
    def conductivity(self) -> Array:
        """σ, from itself or from the resistivity, S/m."""
        own = self.of("electrical_conductivity")
        return np.where(np.isnan(own), 1 / self.of("resistivity"), own)


def read_measurements(path: str | Path, carrier: str | None = None) -> Measurements:
    """The table in a CSV file.

    Headers are `name [unit]` for quantities, `name` for words; `size` may be the word bulk. One quantity may stand
    in two columns with different units, filled in different rows. `carrier` n or p: the sign that S must have.
    Raises InputError naming file, row and the likely cause.
    """
    shown = Path(path)
    read = csv.reader(io.StringIO(read_text(shown, path)))
    try:
        lines = [(number, line) for number, line in enumerate(read, start=1) if any(line)]
    except csv.Error as error:
        raise InputError(
            f"is not a table of comma-separated values: {error}", file=path, slug="unreadable-file"
        ) from error
    if len(lines) < 2:
        raise InputError("holds no rows under its header", file=path, slug="bad-row")
    columns = [_column(cell, path) for cell in lines[0][1]]
    if not any(name == "temperature" for name, _ in columns):
        raise InputError("has no column 'temperature [K]'", file=path, slug="bad-row")
    values: dict[str, list[float]] = {name: [] for name, factor in columns if factor is not None}
    words: dict[str, list[str]] = {name: [] for name, factor in columns if factor is None}
    rows = []
    for number, line in lines[1:]:
        if len(line) != len(columns):
            raise _fault(
                path, number, f"{len(line)} cells under {len(columns)} headers: a comma inside a cell needs quotes"
            )
        found: dict[str, float] = {}
        for (name, factor), cell in zip(columns, line, strict=True):
            if factor is None:
                words[name].append(cell.strip())
            elif cell.strip():
                if name in found:
                    raise _fault(path, number, f"'{name}' is given twice: fill one of its columns")
                found[name] = _number(name, factor, cell.strip(), path, number)
        for name, series in values.items():
            series.append(found.get(name, math.nan))
        rows.append(number)
    table = Measurements(
        shown,
        {name: np.array(series) for name, series in values.items()},
        {name: tuple(series) for name, series in words.items()},
        tuple(rows),
    )
    _check_rows(table, carrier)
    return table


def _column(cell: str, path: str | Path) -> tuple[str, float | None]:
    """Name and factor to SI of a header; None for words."""
    matched = _HEADER.match(cell)
    if not matched:
        raise InputError(f"header '{cell}' is not 'name [unit]'", file=path, slug="bad-row")
    name, unit = matched.groups()
    if name in WORDS:
        return name, None
    if name not in QUANTITIES:
        raise InputError(
            f"unknown column '{name}'; {nearest(name, [*QUANTITIES, *WORDS])}", file=path, slug="bad-row"
        )
    if not unit:
        raise InputError(
            f"column '{name}' says no unit: write '{name} [{QUANTITIES[name][0]}]' or another",
            file=path,
            slug="bad-unit",
        )
    try:
        return name, si_factor(unit.replace(" ", "*") if "*" not in unit else unit, QUANTITIES[name][0])
    except InputError as error:
        hint = "; a temperature must be in K, add 273.15 to degrees Celsius" if name == "temperature" else ""
        raise InputError(f"column '{name}': {error}{hint}", file=path, slug="bad-unit") from error


def _number(name: str, factor: float, cell: str, path: str | Path, row: int) -> float:
    if name == "size" and cell == "bulk":
        return math.inf
    try:
        value = float(cell) * factor
    except ValueError:
        raise _fault(path, row, f"'{name}' is '{cell}', not a number") from None
    _, low, high = QUANTITIES[name]
    if not low <= value <= high:
        cause = "is the unit of the header right, or are two columns swapped?"
        if name == "temperature" and -273.15 < value < 100:
            cause = "degrees Celsius given as kelvin? Add 273.15"
        raise _fault(path, row, f"'{name}' = {cell} is not what a solid has ({low:g} to {high:g} in SI): {cause}")
    return value


def _fault(path: str | Path, row: int, what: str) -> InputError:
    return InputError(what, file=path, key=f"row {row}", slug="bad-row")


def _check_rows(table: Measurements, carrier: str | None) -> None:
    """What no single cell shows: rows twice, without a temperature or a figure, a sign, σ and κ that disagree."""
    seen: dict[tuple[object, ...], int] = {}
    temperature, thermopower = table.of("temperature"), table.of("seebeck")
    for index, row in enumerate(table.rows):
        if math.isnan(temperature[index]):
            raise _fault(table.path, row, "has no temperature: a gap in the table?")
        figures = [name for name, series in table.values.items() if not math.isnan(series[index])]
        if not set(figures) - {"temperature", "size", "hall_density", "density", "heat_capacity"}:
            raise _fault(table.path, row, "gives nothing measured: a gap in the table?")
        key = tuple(words[index] for name, words in table.words.items() if name != "note")
        key += tuple(repr(float(series[index])) for series in table.values.values())
        if key in seen:
            raise _fault(table.path, row, f"repeats row {seen[key]}")
        seen[key] = row
        if thermopower[index] == 0:
            raise _fault(table.path, row, "the Seebeck coefficient is 0: a gap that was filled?")
        if carrier is not None and not math.isnan(thermopower[index]):
            expected = -1 if carrier == "n" else 1
            if thermopower[index] * expected < 0:
                what = f"the Seebeck coefficient has the wrong sign for carrier '{carrier}'"
                raise _fault(table.path, row, f"{what}: a lost minus, or another carrier?")
    _check_wiedemann_franz(table)
    _check_kelvin(table)


#: κ can hardly be below this share of L_0 σ T (Sommerfeld's Lorenz number 2.44e-8): below, a unit is wrong
_LEAST_LORENZ = 0.45 * 2.443e-8


def _check_wiedemann_franz(table: Measurements) -> None:
    temperature, heat = table.of("temperature"), table.of("thermal_conductivity")
    least = _LEAST_LORENZ * table.conductivity * temperature
    both = ~np.isnan(least) & ~np.isnan(heat)
    for index in np.flatnonzero(both & (heat < least)):
        what = f"thermal conductivity {heat[index]:.3g} W/m/K is less than its carriers alone would conduct"
        cause = "is the electrical column in another unit, or swapped with another?"
        raise _fault(table.path, table.rows[index], f"{what} ({least[index]:.3g}): {cause}")


def _check_kelvin(table: Measurements) -> None:
    """Even steps of 25 degrees from a room's 15 to 35, or from under 60 to where no cryostat goes: Celsius."""
    temperature = table.of("temperature")
    steps = np.unique(np.round(np.diff(np.unique(temperature)), 6))
    even = steps.size == 1 and steps[0] % 25 == 0
    low, high = np.min(temperature), np.max(temperature)
    from_a_room, too_wide = 15 <= low <= 35 and high > 150, low < 60 and high > 400
    if temperature.size > 2 and even and (from_a_room or too_wide):
        what = f"temperatures from {low:g} to {high:g} in even steps"
        raise _fault(table.path, table.rows[0], f"{what}: degrees Celsius given as kelvin? Add 273.15")
