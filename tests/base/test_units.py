"""Published units become SI once, at the door."""

import math

import pint
import pytest
from scipy import constants

from legwright.base import units
from legwright.base.errors import InputError

#: one multiplication or division of doubles inside pint
ROUNDING = 1e-14


@pytest.mark.parametrize(
    ("unit", "si_unit", "factor"),
    [
        ("cm^2/V/s", "m^2/V/s", 1e-4),
        ("1/cm^3", "1/m^3", 1e6),
        ("angstrom", "m", 1e-10),
        ("angstrom^3", "m^3", 1e-30),
        ("nm", "m", 1e-9),
        ("GPa", "Pa", 1e9),
        ("uV/K", "V/K", 1e-6),
        ("W/cm/K", "W/m/K", 1e2),
        ("mW/cm/K", "W/m/K", 0.1),
        ("1", "1", 1.0),
        ("percent", "1", 0.01),
        ("K", "K", 1.0),
    ],
)
def test_factor(unit, si_unit, factor):
    assert units.si_factor(unit, si_unit) == pytest.approx(factor, rel=ROUNDING, abs=0)


@pytest.mark.parametrize(
    ("unit", "si_unit", "factor"),
    [
        ("eV", "J", constants.e),
        ("meV", "J", constants.e * 1e-3),
        ("1/eV", "1/J", 1 / constants.e),
        ("eV/cm", "J/m", constants.e * 100),
        ("m_e", "kg", constants.m_e),
    ],
)
def test_factor_with_a_constant_is_codata(unit, si_unit, factor):
    # pint and scipy may carry constants of different CODATA years: they differ by less than 1e-9
    assert units.si_factor(unit, si_unit) == pytest.approx(factor, rel=1e-9, abs=0)


@pytest.mark.parametrize("unit", ["cm/V/s", "eV", "furlongs", "", "cm^^2", "K; import os", "°"])
def test_unit_that_does_not_convert_is_refused_by_name(unit):
    with pytest.raises(InputError) as refusal:
        units.si_factor(unit, "m^2/V/s")
    assert f"'{unit}'" in str(refusal.value)
    assert "m^2/V/s" in str(refusal.value)


@pytest.mark.parametrize("unit", ["degC", "degF"])
def test_unit_with_a_shifted_zero_is_refused(unit):
    with pytest.raises(InputError, match=unit):
        units.si_factor(unit, "K")


def test_exact_constants():
    """Source: the SI of 2019 fixes these four."""
    assert units.K_B == 1.380649e-23
    assert units.H == 6.62607015e-34
    assert units.E_CHARGE == 1.602176634e-19
    assert units.HBAR * 2 * math.pi == pytest.approx(units.H, rel=ROUNDING, abs=0)


def test_the_usual_units_are_those_of_the_whole_list():
    """Each prefix with each unit, by symbol and by name, against pint's own list."""
    usual, whole = units._registry(True), units._registry(False)
    prefixes = [
        "",
        "G",
        "M",
        "k",
        "c",
        "m",
        "u",
        "µ",
        "n",
        "giga",
        "mega",
        "kilo",
        "centi",
        "milli",
        "micro",
        "nano",
    ]
    names = [str(name) for name in usual._units if name not in usual._prefixes]
    compared = 0
    for prefix in prefixes:
        for name in names:
            try:
                ours = usual.Quantity(1.0, prefix + name).to_base_units()
            except pint.UndefinedUnitError:
                continue
            theirs = whole.Quantity(1.0, prefix + name).to(str(ours.units))
            assert ours.magnitude == pytest.approx(theirs.magnitude, rel=1e-9, abs=0), prefix + name
            compared += 1
    assert compared > 300
