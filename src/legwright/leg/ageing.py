"""What years of service do to a leg: grains grow where it is hot, and its sides evaporate.

A place of the leg ages at its own temperature. All places start alike, so what they have become is a function of
temperature alone: an aged leg is a leg of one material whose grain size goes with temperature.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy import constants
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from legwright.candidate.model import Coarsening
from legwright.leg.balance import LegMaterial
from legwright.leg.duty import Duty
from legwright.leg.installed import Running

Array = NDArray[np.float64]

#: how closely temperature along a leg is followed, as a share
_FOLLOWED = 1e-9


@dataclass(frozen=True)
class Growth:
    """Grain growth d^n − d_0^n = k_0 exp(−Q/RT) t, whose three numbers belong together; one of each.

    exponent n (dimensionless), activation_energy Q (J/mol), prefactor k_0 (m^n/s, in SI).
    """

    exponent: float
    activation_energy: float
    prefactor: float


def growth_of(seen: Coarsening) -> Growth:
    """The law through one annealing that was watched: k_0 = (d_1^n − d_0^n) exp(Q/RT)/t, SI.

    Raises nothing of its own. Source: Burke & Turnbull, Progress in Metal Physics 3, 220 (1952).

    >>> from legwright.candidate.number import Measure
    >>> def of(value, unit, si_unit):
    ...     return Measure(value=value, unit=unit, si_unit=si_unit, spread=0, source="none", basis="measured")
    >>> seen = Coarsening.model_construct(
    ...     exponent=of(2, "1", "1"), activation_energy=of(200, "kJ/mol", "J/mol"), temperature=of(1000, "K", "K"),
    ...     from_size=of(30, "nm", "m"), to_size=of(50, "nm", "m"), hours=of(1, "hour", "s"))
    >>> f"{float(grown_size(30e-9, 1000.0, 3600.0, growth_of(seen))):.3e}"
    '5.000e-08'
    """
    n, energy = seen.exponent.si, seen.activation_energy.si
    grown = seen.to_size.si**n - seen.from_size.si**n
    return Growth(n, energy, grown / seen.hours.si * np.exp(energy / (constants.R * seen.temperature.si)))


def grown_size(size: ArrayLike, temperature: ArrayLike, time: ArrayLike, growth: Growth) -> Array:
    """Size d = [d_0^n + k_0 exp(−Q/RT) t]^(1/n) after a time at a temperature, m.

    size d_0 (m, > 0; infinite stays so), temperature T (K, > 0), time t (s, ≥ 0); all broadcast. Normal growth of
    one phase: no pinning at a largest size, no grains that outgrow the others.
    ValueError for a size, temperature or time out of these.
    Source: Burke & Turnbull, Progress in Metal Physics 3, 220 (1952).

    >>> law = Growth(exponent=2.0, activation_energy=0.0, prefactor=1e-20)
    >>> f"{float(grown_size(30e-9, 800.0, 1.6e5, law)):.3e}"  # √(30² + 1600) nm
    '5.000e-08'
    """
    d, t, seconds = (np.asarray(value, dtype=float) for value in (size, temperature, time))
    if not (np.all(d > 0) and np.all(t > 0) and np.all(seconds >= 0)):
        raise ValueError("size and temperature must be above 0, time not below it")
    with np.errstate(divide="ignore"):
        added = np.log(growth.prefactor) + np.log(seconds) - growth.activation_energy / (constants.R * t)
    return np.asarray(np.exp(np.logaddexp(growth.exponent * np.log(d), added) / growth.exponent))


def time_factor(seen: Coarsening, temperature: ArrayLike) -> Array:
    """Factor (1 standard deviation) by which the times of `growth_of` may be wrong, from the file's spreads.

    exp √{(n d_1^n s_1/(d_1^n − d_0^n))² + (n d_0^n s_0/(d_1^n − d_0^n))² + [s_Q Q/R (1/T − 1/T_a)]²} with relative
    spreads s of the sizes and of Q; the exponent counts as known. temperature T (K), any shape; dimensionless.
    Raises nothing of its own. By definition of a logarithmic spread.

    >>> from legwright.candidate.number import Measure
    >>> def of(value, unit, si_unit, spread):
    ...     return Measure(value=value, unit=unit, si_unit=si_unit, spread=spread, source="none", basis="measured")
    >>> seen = Coarsening.model_construct(
    ...     exponent=of(2, "1", "1", 0), activation_energy=of(200, "kJ/mol", "J/mol", 0.1),
    ...     temperature=of(1000, "K", "K", 0), from_size=of(30, "nm", "m", 0), to_size=of(50, "nm", "m", 0),
    ...     hours=of(1, "hour", "s", 0))
    >>> [f"{factor:.2f}" for factor in time_factor(seen, [1000.0, 800.0])]  # e^(20 000/8.314 × 2.5e-4)
    ['1.00', '1.82']
    """
    n = seen.exponent.si
    first, last = seen.from_size.si**n, seen.to_size.si**n
    sizes = [
        n * part * one.relative_spread / (last - first)
        for part, one in ((first, seen.from_size), (last, seen.to_size))
    ]
    energy = seen.activation_energy.si * seen.activation_energy.relative_spread / constants.R
    away = energy * (1 / np.asarray(temperature, dtype=float) - 1 / seen.temperature.si)
    return np.asarray(np.exp(np.sqrt(sizes[0] ** 2 + sizes[1] ** 2 + away**2)))


def most_sublimed(measured: ArrayLike, rate: ArrayLike, temperature: ArrayLike) -> Array:
    """Mass lost to vapour per area and time, at most, kg/(m² s); nan where it is not known.

    Between measured temperatures ln(rate) is a straight line over 1/T (Langmuir's law with the vapour pressure's
    heat of sublimation). A rate falls as it gets colder, so below the coldest measurement that one is the most;
    above the hottest nothing is known. measured T (K) and rate (kg/(m² s)): ascending, of one axis; temperature
    (K): any shape. ValueError for other measurements.
    Source: Langmuir, Physical Review 2, 329 (1913).

    >>> most_sublimed([1000.0, 1250.0], [1e-8, 1e-6], [900.0, 1111.1111, 1300.0]).round(12).tolist()
    [1e-08, 1e-07, nan]
    """
    at, there, t = (np.asarray(value, dtype=float) for value in (measured, rate, temperature))
    if not (at.ndim == 1 and at.shape == there.shape and np.all(np.diff(at) > 0) and np.all(at > 0)):
        raise ValueError("measured temperatures must ascend, with one rate each")
    if not np.all(there > 0):
        raise ValueError("a rate must be above 0")
    most = np.exp(np.interp(-1 / t, -1 / at, np.log(there)))
    return np.where(t > at[-1], np.nan, most)


def thinned_share(recession: Array, position: Array, width: float, time: float) -> float:
    """Share of its power, or of the heat it lifts, that a square leg keeps after its four sides have receded.

    (∫dx)/(∫dx A_0/A) with A/A_0 = (1 − 2ut/a)². At given temperatures of its ends a leg of any cross-section A(x)
    has the temperatures of an even one over ξ = ∫dx/A: what it delivers goes with 1/∫dx/A, efficiency and COP stay.
    recession u (m/s) at each position (of one axis, any unit; ascending), taken as constant in time; width a (m)
    and time t (s): one of each. 0 once a place is eaten through. Raises nothing of its own. By definition.

    >>> x = np.linspace(0.0, 1.0, 11)
    >>> f"{thinned_share(np.full(11, 1e-12), x, 1e-3, 5e7):.3f}"  # (1 − 0.1)²
    '0.810'
    """
    left = 1 - 2 * recession * time / width
    if np.any(left <= 0):
        return 0.0
    return float((position[-1] - position[0]) / np.trapezoid(left**-2, position))


def time_to_thin(recession: Array, position: Array, width: float, share: float) -> float:
    """Time until `thinned_share` has fallen to a share (0 … 1), s; infinite where nothing recedes.

    For an even recession u it is a (1 − √share)/(2u). Arguments, units, shapes and source as `thinned_share`.
    Raises nothing of its own.

    >>> x = np.linspace(0.0, 1.0, 11)
    >>> f"{time_to_thin(np.full(11, 1e-12), x, 1e-3, 0.81):.4e}"
    '5.0000e+07'
    """
    fastest = float(np.max(recession))
    if fastest <= 0:
        return np.inf
    through = 0.5 * width / fastest

    def over(part: float) -> float:
        return thinned_share(recession, position, width, part * through) - share

    return through * float(brentq(over, 0.0, 1.0, xtol=1e-12))


def temperature_along(material: LegMaterial, duty: Duty, running: Running, count: int) -> tuple[Array, Array]:
    """Positions from the hot end (m) and temperatures there (K), of one leg at its operating point.

    dT/dx = (j S T − q)/κ and dq/dx = j (j ρ + S dT/dx) − a (T − T_a), followed from the hot end's temperature and
    heat; q runs to the cold end, and so does j in a generator. `count` even positions. ArithmeticError where the
    course cannot be followed. Source: Domenicali, Reviews of Modern Physics 26, 237 (1954).

    >>> from legwright.leg.installed import running_at
    >>> t = np.linspace(290.0, 610.0, 9)
    >>> same = np.ones_like(t)
    >>> material = LegMaterial.from_nodes(t, 2e-4 * same, 1e-5 * same, 1.5 * same)
    >>> duty = Duty("generator", 600.0, 300.0, "power", 1e-3)
    >>> _, found = temperature_along(material, duty, running_at(material, duty, 3e6), 3)
    >>> found.round(6).tolist()  # 450 K and ρ j² L²/8κ
    [600.0, 457.5, 300.0]
    """
    sense = 1.0 if duty.kind == "generator" else -1.0
    current, length = sense * float(running.current), float(running.length)
    setting = duty.setting
    around = setting.ambient
    if around is None:
        around = duty.cold if duty.kind == "generator" else duty.hot
    heat = sense * float(running.heat_hot) + current**2 * setting.contact

    def slope(_: float, state: Array) -> list[float]:
        t, q = state
        seebeck = float(material.seebeck(t))
        gradient = (current * seebeck * t - q) / float(material.thermal_conductivity(t))
        source = current * (current * float(material.resistivity(t)) + seebeck * gradient)
        return [gradient, source - setting.side_loss * (t - around)]

    x = np.linspace(0.0, length, count)
    start = [float(running.hot_end), heat]
    found = solve_ivp(slope, (0.0, length), start, "DOP853", x, rtol=_FOLLOWED, atol=_FOLLOWED)
    if not found.success:
        raise ArithmeticError("the temperature along the leg cannot be followed")
    return x, np.asarray(found.y[0])
