"""Units at the door: SI inside, published units in files and on screens."""

from __future__ import annotations

import tokenize
from functools import cache
from typing import TYPE_CHECKING

from scipy import constants

from legwright.base.errors import InputError

if TYPE_CHECKING:
    import pint

HBAR = constants.hbar
H = constants.h
K_B = constants.k
E_CHARGE = constants.e
M_E = constants.m_e
EPS_0 = constants.epsilon_0
ATOMIC_MASS = constants.atomic_mass

#: trade unit per SI unit, for what users type and read
NM = 1e-9
PER_CM3 = 1e6
CM2 = 1e-4
MICRO = 1e-6


#: what reading a unit that is none may raise
_UNREADABLE = (AttributeError, AssertionError, ValueError, TypeError, SyntaxError)


#: the units of this trade as pint defines them; its whole list takes longer to read than a sheet takes to compute
_USUAL = """
giga- = 1e9 = G-
mega- = 1e6 = M-
kilo- = 1e3 = k-
centi- = 1e-2 = c-
milli- = 1e-3 = m-
micro- = 1e-6 = µ- = μ- = u-
nano- = 1e-9 = n-
meter = [length] = m
second = [time] = s
ampere = [current] = A
gram = [mass] = g
kelvin = [temperature] = K
newton = kilogram * meter / second ** 2 = N
joule = newton * meter = J
watt = joule / second = W
coulomb = ampere * second = C
volt = joule / coulomb = V
ohm = volt / ampere = Ω
siemens = ampere / volt = S
pascal = newton / meter ** 2 = Pa
angstrom = 1e-10 * meter = Å
"""


@cache
def _registry(usual: bool) -> pint.UnitRegistry[float]:
    import pint

    if not usual:
        return pint.UnitRegistry()
    registry: pint.UnitRegistry[float] = pint.UnitRegistry(None)
    registry.load_definitions(
        [
            *_USUAL.split("\n"),
            f"electron_volt = {E_CHARGE!r} * joule = eV",
            f"electron_mass = {M_E!r} * kilogram = m_e",
        ]
    )
    return registry


@cache
def si_factor(unit: str, si_unit: str) -> float:
    """Factor that takes a value in `unit` to `si_unit`; InputError where the two do not convert.

    >>> round(si_factor("cm^2/V/s", "m^2/V/s"), 6)
    0.0001
    """
    import pint

    own = {"1": "dimensionless"}
    unit_there, si_there = own.get(unit.strip(), unit), own.get(si_unit, si_unit)

    def value_of(number: float, usual: bool) -> float:
        return float(_registry(usual).Quantity(number, unit_there).to(si_there).magnitude)

    try:
        try:
            zero, factor = value_of(0.0, True), value_of(1.0, True)
        except pint.UndefinedUnitError:
            zero, factor = value_of(0.0, False), value_of(1.0, False)
    except (pint.PintError, tokenize.TokenError, ArithmeticError, *_UNREADABLE) as error:
        raise InputError(f"unit '{unit}' is not a unit that converts to {si_unit}", slug="bad-unit") from error
    if zero != 0.0:
        raise InputError(f"unit '{unit}' has a shifted zero; give it in {si_unit}", slug="bad-unit")
    return factor
