"""A number that knows where it came from: value, published unit, spread, source, basis."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import cached_property
from typing import Any, Literal

from pydantic import Field, WrapValidator

from legwright.base.errors import InputError
from legwright.base.reading import Table
from legwright.base.units import si_factor

Basis = Literal["measured", "published model", "calibrated on bulk", "common practice", "from memory"]


class Measure(Table):
    """One published figure.

    `spread` is one standard deviation: relative for positive quantities, absolute in `spread_unit`
    where that is given. `source` is a key of sources.bib. `note` says what the figure hides.
    `si_unit` is not read from the file: the field that holds the number sets it.
    """

    value: float
    unit: str
    spread: float = Field(ge=0)
    source: str = Field(min_length=1)
    basis: Basis
    spread_unit: str | None = None
    note: str | None = None
    si_unit: str = Field(default="1", exclude=True)

    @cached_property
    def si(self) -> float:
        """The value in SI units."""
        return self.value * si_factor(self.unit, self.si_unit)

    @property
    def relative_spread(self) -> float:
        """One standard deviation as a share of the value."""
        if self.spread_unit is None:
            return self.spread
        return self.spread * si_factor(self.spread_unit, self.si_unit) / abs(self.si)


def measure(
    si_unit: str, low: float = -float("inf"), high: float = float("inf"), *, above: bool = False
) -> WrapValidator:
    """What makes a Measure of a field: its SI unit and range (SI); `above` leaves `low` itself out."""

    def check(raw: Any, handler: Callable[[Any], Any]) -> Measure:
        if isinstance(raw, Mapping):
            if "si_unit" in raw:
                raise ValueError("unknown key 'si_unit'")
            raw = {**raw, "si_unit": si_unit}
        number: Measure = handler(raw)
        try:
            si = number.si
            if number.spread_unit is not None:
                si_factor(number.spread_unit, si_unit)
        except InputError as error:
            raise ValueError(str(error)) from error
        if not low <= si <= high or (above and si == low):
            bound = "above" if above else "at least"
            upper = f" and at most {high:g}" if high < float("inf") else ""
            raise ValueError(
                f"value {number.value:g} {number.unit} is out of range: {bound} {low:g}{upper} {si_unit}"
            )
        return number

    return WrapValidator(check)
