"""The reference for the heat balance of a leg: a boundary-value solution, one leg and one current at a time.

Thomson heat written out, and an adaptive solver that bounds its own residual. It shares no function with the quick
ways through a leg (`balance`, `profile`, `installed`), only the dataclasses that carry arguments, and is some
hundred times slower: it is there to be compared with.
Source: Domenicali, Reviews of Modern Physics 26, 237 (1954).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.integrate import solve_bvp
from scipy.optimize import minimize_scalar

from legwright.leg.balance import LegMaterial
from legwright.leg.duty import Duty

Array = NDArray[np.float64]

#: mesh intervals to begin with, nodes at most
_INTERVALS, _MOST = 40, 100_000
#: a trial current without a steady state counts as this bad
_NO_STATE = -1e300


@dataclass(frozen=True)
class Balance:
    """One steady state, areal, one number each.

    from_hot and to_cold: heat that leaves the hot reservoir and reaches the cold one (W/m²); sideways: lost through
    the sides (W/m²); power delivered (W/m²; negative where it is spent); hot_end and cold_end: of the leg (K).
    """

    from_hot: float
    to_cold: float
    sideways: float
    power: float
    hot_end: float
    cold_end: float


def balance_at(material: LegMaterial, duty: Duty, current: float, tolerance: float = 1e-10) -> Balance:
    """The steady state at a current density j (A/m², positive from hot to cold: a generator), for one leg.

    (κ T')' = j T (dS/dT) T' − ρ j² + a (T − T_a) over the leg, and q = j S T − κ T' at its ends: T_h − T =
    R_h (q − j² ρ_c) at the hot one, T − T_c = R_c (q + j² ρ_c) at the cold one, or q + j² ρ_c = 0 there where the
    duty is the largest difference. Solved in x/L, T/T_h and κT' over κ T_h/L. `tolerance`: relative residual of
    each mesh interval, dimensionless. One leg: material, duty and current one of each.
    ArithmeticError where no steady state was found. Source: Domenicali, Reviews of Modern Physics 26, 237 (1954).

    >>> t = np.linspace(290.0, 610.0, 9)
    >>> same = np.ones_like(t)
    >>> material = LegMaterial.from_nodes(t, 2e-4 * same, 1e-5 * same, 1.5 * same)
    >>> made = balance_at(material, Duty("generator", 600.0, 300.0, "power", 1e-3), 3e6)
    >>> f"{made.power / 1e4:.6f}"  # j S ΔT − j² ρ L
    '9.000000'
    """
    setting, hot, length = duty.setting, duty.hot, duty.length
    cold_like = duty.cold if duty.kind == "generator" else duty.hot
    ambient = cold_like if setting.ambient is None else setting.ambient
    seebeck, resistivity, conductivity = material.seebeck, material.resistivity, material.thermal_conductivity
    unit = float(conductivity(0.5 * (hot + duty.cold))) * hot / length  # of heat, W/m²
    joule = current**2 * setting.contact

    def slopes(_: Array, y: Array) -> Array:
        t = y[0] * hot
        per_length = -y[1] * unit / conductivity(t)  # T', K/m
        thomson = current * t * seebeck(t, 1) * per_length
        leak = setting.side_loss * (t - ambient)
        spent = current * (resistivity(t) * current + seebeck(t) * per_length)
        return np.array(
            [
                per_length * length / hot,
                (resistivity(t) * current**2 - thomson - leak) * length / unit,
                -spent * length / unit,
                leak * length / unit,
            ]
        )

    def carried(t: float, conducted: float) -> float:
        return current * float(seebeck(t * hot)) * t * hot + conducted * unit

    def ends(first: Array, last: Array) -> Array:
        from_hot, to_cold = carried(*first[:2]) - joule, carried(*last[:2]) + joule
        cold = (last[0] * hot - duty.cold - setting.cold_resistance * to_cold) / hot
        return np.array(
            [
                (hot - first[0] * hot - setting.hot_resistance * from_hot) / hot,
                to_cold / unit if duty.maximise == "delta_t" else cold,
                first[2],
                first[3],
            ]
        )

    x = np.linspace(0.0, 1.0, _INTERVALS + 1)
    guess = np.zeros((4, x.size))
    guess[0] = np.linspace(1.0, duty.cold / hot, x.size)
    guess[1] = 1 - duty.cold / hot
    found = solve_bvp(slopes, ends, x, guess, tol=tolerance, max_nodes=_MOST, bc_tol=tolerance)
    if not found.success:
        raise ArithmeticError(f"no steady state at {current:g} A/m²: {found.message}")
    first, last = found.y[:, 0], found.y[:, -1]
    return Balance(
        carried(*first[:2]) - joule,
        carried(*last[:2]) + joule,
        float(last[3] * unit),
        float(last[2] * unit - 2 * joule),
        float(first[0] * hot),
        float(last[0] * hot),
    )


def best_at(material: LegMaterial, duty: Duty, bracket: tuple[float, float]) -> tuple[float, float]:
    """Current density (A/m²) and figure that are best for the duty's goal, its size in `bracket`, one of each.

    A fraction (efficiency, COP), W/m² (power, heat lifted) or K (largest difference). For one leg. A current
    without a steady state counts as none. Source: Brent, Algorithms for Minimization without Derivatives (1973).

    >>> t = np.linspace(290.0, 610.0, 9)
    >>> same = np.ones_like(t)
    >>> material = LegMaterial.from_nodes(t, 2e-4 * same, 1.2e-5 * same, 1.5 * same)  # mean ZT of 1
    >>> f"{best_at(material, Duty('generator', 600.0, 300.0, 'efficiency', 1e-3), (1e6, 4e6))[1]:.5f}"
    '0.10819'
    """
    sense = 1.0 if duty.kind == "generator" else -1.0
    figures: dict[str, Callable[[Balance], float]] = {
        "efficiency": lambda made: made.power / made.from_hot,
        "power": lambda made: made.power,
        "cop": lambda made: made.to_cold / made.power,
        "heat_lifted": lambda made: -made.to_cold,
        "delta_t": lambda made: duty.hot - made.cold_end,
    }

    def figure(current: float) -> float:
        try:
            return figures[duty.maximise](balance_at(material, duty, sense * current))
        except ArithmeticError:
            return _NO_STATE

    found = minimize_scalar(
        lambda j: -figure(float(j)), bounds=bracket, method="bounded", options={"xatol": 1e-5 * bracket[1]}
    )
    return float(found.x), float(-found.fun)
