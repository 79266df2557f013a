"""One number: conversion, spread, range."""

from typing import Annotated

import pytest

from legwright.base.errors import InputError
from legwright.base.reading import Table, read_as
from legwright.candidate.number import Measure, measure


class Holder(Table):
    """A file with one number of each kind."""

    mobility: Annotated[Measure, measure("m^2/V/s", 0, above=True)] | None = None
    share: Annotated[Measure, measure("1", 0, 1)] | None = None
    edge: Annotated[Measure, measure("J")] | None = None


def number(**changes: object) -> dict[str, object]:
    whole = {"value": 1400.0, "unit": "cm^2/V/s", "spread": 0.03, "source": "s", "basis": "measured", **changes}
    return {key: value for key, value in whole.items() if value is not None}


def refused(**fields: object) -> str:
    with pytest.raises(InputError) as caught:
        read_as(Holder, fields, "a.toml")
    return str(caught.value)


def test_value_in_si_and_relative_spread():
    made = read_as(Holder, {"mobility": number()}, "a.toml").mobility
    assert made is not None
    assert made.si == pytest.approx(0.14, rel=1e-15)  # one multiplication
    assert made.relative_spread == 0.03


def test_absolute_spread_in_its_own_unit():
    field = number(value=-1.0, unit="eV", spread=50.0, spread_unit="meV")
    made = read_as(Holder, {"edge": field}, "a.toml").edge
    assert made is not None
    assert made.relative_spread == pytest.approx(0.05, rel=1e-12)  # a few multiplications


@pytest.mark.parametrize("key", ["value", "unit", "spread", "source", "basis"])
def test_nothing_may_be_missing(key):
    assert f"mobility.{key}: is missing" in refused(mobility=number(**{key: None}))


@pytest.mark.parametrize(
    ("field", "changes", "words"),
    [
        ("mobility", {"value": 0.0}, ["out of range", "above 0"]),
        ("mobility", {"value": -3.0}, ["-3 cm^2/V/s", "above 0"]),
        ("mobility", {"value": float("nan")}, ["nan", "finite"]),
        ("mobility", {"value": float("inf")}, ["inf", "finite"]),
        ("mobility", {"unit": "cm/V/s"}, ["'cm/V/s'", "m^2/V/s"]),
        ("mobility", {"unit": ""}, ["''", "m^2/V/s"]),
        ("mobility", {"spread": -0.1}, ["spread", "-0.1"]),
        ("mobility", {"spread_unit": "K"}, ["'K'", "m^2/V/s"]),
        ("mobility", {"source": ""}, ["source", "''"]),
        ("mobility", {"basis": "guess"}, ["basis", "'guess'", "from memory"]),
        ("mobility", {"si_unit": "K"}, ["si_unit"]),
        ("share", {"value": 1.01, "unit": "1"}, ["1.01", "at most 1"]),
        ("share", {"value": 101.0, "unit": "percent"}, ["101", "at most 1"]),
    ],
)
def test_refusal_names_the_fault(field, changes, words):
    said = refused(**{field: number(**changes)})
    assert said.startswith(f"a.toml: {field}")
    assert not [word for word in words if word not in said], said


def test_ends_of_a_closed_range_are_allowed():
    for value in (0.0, 1.0):
        assert read_as(Holder, {"share": number(value=value, unit="1")}, "a.toml").share is not None
