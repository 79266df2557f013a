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


@cache
def _registry() -> pint.UnitRegistry[float]:
    import pint

    return pint.UnitRegistry()


@cache
def si_factor(unit: str, si_unit: str) -> float:
    """Factor that takes a value in `unit` to `si_unit`; InputError where the two do not convert.

    >>> round(si_factor("cm^2/V/s", "m^2/V/s"), 6)
    0.0001
    """
    import pint

    registry = _registry()
    if unit.strip() == "1":
        unit = "dimensionless"
    if si_unit == "1":
        si_unit = "dimensionless"
    try:
        zero = registry.Quantity(0.0, unit).to(si_unit).magnitude
        factor = float(registry.Quantity(1.0, unit).to(si_unit).magnitude)
    except (pint.PintError, tokenize.TokenError, ArithmeticError, *_UNREADABLE) as error:
        raise InputError(f"unit '{unit}' is not a unit that converts to {si_unit}") from error
    if zero != 0.0:
        raise InputError(f"unit '{unit}' has a shifted zero; give it in {si_unit}")
    return factor
