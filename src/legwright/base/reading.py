"""From a parsed TOML table to a frozen, checked object: pydantic does the work, we word the refusal."""

from __future__ import annotations

import datetime
import math
from collections.abc import Mapping
from pathlib import Path
from typing import Any, TypeVar

from pydantic import BaseModel, ConfigDict, ValidationError

from legwright.base.errors import InputError, nearest


class Table(BaseModel):
    """A table of an input file: frozen, every key known, no silent conversion of text to numbers."""

    model_config = ConfigDict(extra="forbid", frozen=True, strict=True, allow_inf_nan=False)


T = TypeVar("T", bound=BaseModel)


def read_as(kind: type[T], data: Mapping[str, Any], file: Path | str) -> T:
    """`data` as `kind`; InputError naming file, key, value and what is allowed for the first fault."""
    try:
        return kind.model_validate(_tuples(data))
    except ValidationError as error:
        fault = _worst(error)
        raise InputError(_sentence(kind, fault), file=file, key=_key(fault["loc"]), slug="bad-field") from error


def _tuples(value: Any) -> Any:
    """TOML arrays as tuples, so that strict, frozen objects take them."""
    if isinstance(value, Mapping):
        return {key: _tuples(item) for key, item in value.items()}
    if isinstance(value, list):
        return tuple(_tuples(item) for item in value)
    return value


def _worst(error: ValidationError) -> Any:
    """An unknown key explains most other faults, so it is told first."""
    faults = error.errors(include_url=False)
    return next((fault for fault in faults if fault["type"] == "extra_forbidden"), faults[0])


def _key(location: tuple[Any, ...]) -> str:
    text = ""
    for part in location:
        text += f"[{part + 1}]" if isinstance(part, int) else f".{part}" if text else str(part)
    return text


def _sentence(kind: type[BaseModel], fault: Any) -> str:
    value = fault.get("input")
    if fault["type"] == "extra_forbidden":
        table = _table_at(kind, fault["loc"][:-1])
        known = [name for name, field in table.model_fields.items() if not field.exclude] if table else []
        return f"unknown key; {nearest(str(fault['loc'][-1]), known)}"
    if fault["type"] == "missing":
        return "is missing"
    if isinstance(value, float) and not math.isfinite(value):
        return f"value {value} is not a finite number"
    if fault["type"] == "literal_error" and isinstance(value, str):
        allowed = fault["ctx"]["expected"].replace(" or ", ", ").replace("'", "").split(", ")
        return f"value '{value}' is not allowed; {nearest(value, allowed)}"
    message = str(fault["msg"]).removeprefix("Value error, ")
    message = message.replace("valid tuple", "list").replace("valid dictionary", "table")
    shown = isinstance(value, str | int | float | bool | datetime.date)
    return f"value {value!r}: {message}" if shown else message


def _table_at(kind: type[BaseModel], location: tuple[Any, ...]) -> type[BaseModel] | None:
    """The table class that a location of a validation error points into."""
    table: Any = kind
    for part in location:
        if isinstance(part, int):
            continue
        if table is None or part not in table.model_fields:
            return None
        table = _table_in(table.model_fields[part].annotation)
    return table  # type: ignore[no-any-return]


def _table_in(annotation: Any) -> type[BaseModel] | None:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return annotation
    for argument in getattr(annotation, "__args__", ()):
        found = _table_in(argument)
        if found:
            return found
    return None
