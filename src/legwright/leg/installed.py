"""A leg where it works: contacts at its ends, exchangers beyond them, one length.

Each contact adds its Joule heat at its own end; contacts and exchangers of heat stand between the reservoirs and
the leg's ends, so that the leg sees less than the whole difference. One leg at a time: the searches over maps take
ideal contacts.
Source: Rowe & Min, Journal of Power Sources 73, 193 (1998) for contacts; Ioffe, Semiconductor Thermoelements and
Thermoelectric Cooling (1957).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq, minimize_scalar, root

from legwright.leg.balance import LegMaterial, cool, cool_past_peak, generate
from legwright.leg.duty import Duty

#: how far inside a cooler may rise above its hot end, K
PEAK_RISE = 60.0
#: points of the first look at the current, and steps of its marches
_GRID, _FEW_STEPS = 41, 12


@dataclass(frozen=True)
class Setting:
    """What surrounds a leg, per area of leg, one number each.

    contact: resistivity of each contact (Ω m²); hot_resistance and cold_resistance to heat between reservoir and
    leg's end (K m²/W), contact and exchanger together.
    """

    contact: float = 0.0
    hot_resistance: float = 0.0
    cold_resistance: float = 0.0


@dataclass(frozen=True)
class Running:
    """One operating point, areal, one number each.

    heat_hot and heat_cold at the reservoirs (W/m²); power made (generator) or spent (cooler; W/m²); current (A/m²);
    hot_end and cold_end: temperatures of the leg's ends (K).
    """

    heat_hot: float
    heat_cold: float
    power: float
    current: float
    hot_end: float
    cold_end: float

    @property
    def efficiency(self) -> float:
        """Power over heat taken from the hot reservoir."""
        return self.power / self.heat_hot

    @property
    def cop(self) -> float:
        """Heat lifted over power spent."""
        return self.heat_cold / self.power


def run_generator(material: LegMaterial, duty: Duty, setting: Setting, w_hot: float, steps: int = 96) -> Running:
    """A generator at |w| = w_hot (W/A) at its hot end.

    q_h = j Φ_h − j² ρ_c, q_c = j Φ_c + j² ρ_c, T_end,h = T_h − q_h R_h, T_end,c = T_c + q_c R_c; P = q_h − q_c.
    material, duty and setting of one leg, one of each; `steps`: of the march, even.
    ArithmeticError where no end temperatures satisfy both.
    Source: Rowe & Min, Journal of Power Sources 73, 193 (1998).

    >>> nodes = np.linspace(290.0, 610.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 1.5 * same)
    >>> duty = Duty("generator", 600.0, 300.0, "power", 1e-3)
    >>> ideal, real = (run_generator(material, duty, Setting(c), 0.15) for c in (0.0, 1e-9))
    >>> bool(real.power < ideal.power)
    True
    """

    def at(hot: float, cold: float) -> tuple[float, float, float]:
        made = generate(material, hot, cold, np.array(w_hot), steps)
        current = float(made.current_times_length) / duty.length
        joule = current**2 * setting.contact
        heat = float(made.heat_times_length) / duty.length - joule
        return heat, heat - float(made.power_times_length) / duty.length + 2 * joule, current

    return _settled(at, duty, setting, -1.0)


def run_cooler(material: LegMaterial, duty: Duty, setting: Setting, drive: float, steps: int = 96) -> Running:
    """A cooler at `drive` 0 … 2: up to 1 temperature rises all the way to the hot end, beyond it peaks inside.

    q_c = j Φ_c − j² ρ_c, q_h = j Φ_h + j² ρ_c, T_end,h = T_h + q_h R_h, T_end,c = T_c − q_c R_c; P = q_h − q_c.
    Up to 1, |w| at the hot end is (1 − drive) S T_h (W/A); beyond, the peak is (drive − 1) `PEAK_RISE` over T_h.
    material, duty and setting of one leg, one of each; `steps`: of each march, even.
    ArithmeticError where no end temperatures (K) satisfy both.
    Source: Ioffe, Semiconductor Thermoelements and Thermoelectric Cooling (1957).

    >>> nodes = np.linspace(200.0, 380.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 1.5 * same)
    >>> duty = Duty("cooler", 300.0, 280.0, "cop", 1e-3)
    >>> ideal, real = (run_cooler(material, duty, Setting(c), 0.8) for c in (0.0, 1e-9))
    >>> bool(real.heat_cold < ideal.heat_cold)
    True
    """

    def at(hot: float, cold: float) -> tuple[float, float, float]:
        if drive < 1:
            pull = max(float(material.seebeck(hot)) * hot, 1e-12)
            made = cool(material, hot, cold, np.array((1 - drive) * pull), steps)
        else:
            made = cool_past_peak(material, hot, cold, hot + (drive - 1) * PEAK_RISE, steps)
        current = float(made.current_times_length) / duty.length
        joule = current**2 * setting.contact
        heat = float(made.heat_times_length) / duty.length - joule
        return heat + float(made.power_times_length) / duty.length + 2 * joule, heat, current

    return _settled(at, duty, setting, +1.0)


#: heat at the hot and at the cold contact (W/m²) and current (A/m²) for the temperatures of the leg's ends (K)
_Fluxes = Callable[[float, float], tuple[float, float, float]]


def _settled(at: _Fluxes, duty: Duty, setting: Setting, sense: float) -> Running:
    """The operating point at which the exchangers carry what the leg takes in and gives off."""
    hot, cold = _ends(at, duty, setting, sense)
    heat_hot, heat_cold, current = at(hot, cold)
    return Running(heat_hot, heat_cold, heat_hot - heat_cold, current, hot, cold)


def _ends(at: _Fluxes, duty: Duty, setting: Setting, sense: float) -> tuple[float, float]:
    """Temperatures of the leg's ends; `sense` −1: heat comes in at the hot end, +1: it leaves there."""
    if not (setting.hot_resistance or setting.cold_resistance):
        return duty.hot, duty.cold

    def misses(ends: np.ndarray) -> list[float]:
        hot, cold = float(ends[0]), float(ends[1])
        if not cold < hot:
            return [1e3 * (cold - hot) + 1, 1e3 * (cold - hot) + 1]
        heat_hot, heat_cold, _ = at(hot, cold)
        return [
            duty.hot + sense * heat_hot * setting.hot_resistance - hot,
            duty.cold - sense * heat_cold * setting.cold_resistance - cold,
        ]

    third = 0.1 * (duty.hot - duty.cold)
    found = root(misses, [duty.hot + sense * third, duty.cold - sense * third], tol=1e-11)
    if max(map(abs, misses(found.x))) > 1e-6 * duty.hot:
        raise ArithmeticError("no end temperatures satisfy the exchangers at this current")
    return float(found.x[0]), float(found.x[1])


def best_running(material: LegMaterial, duty: Duty, setting: Setting) -> Running | None:
    """The operating point that the duty's goal wants, K and W/m² as `Running`; None where the leg cannot serve.

    max over j of P/q_h, P, q_c/P or q_c: a grid over the current, then Brent's bounded search around its best.
    AssertionError if its energy did not close or it beat Carnot: a fault of the program, never of the input.
    Source: Brent, Algorithms for Minimization without Derivatives (1973).

    >>> nodes = np.linspace(290.0, 610.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1.2e-5 * same, 1.5 * same)  # mean ZT of 1
    >>> found = best_running(material, Duty("generator", 600.0, 300.0, "efficiency", 1e-3), Setting())
    >>> f"{found.efficiency:.5f}"
    '0.10819'
    """
    if duty.kind == "generator":
        pull = max(abs(float(material.seebeck(duty.hot))) * duty.hot, 1e-9)
        low, high = math.log(0.02 * pull), math.log(2e4 * pull)

        def run(x: float, steps: int = 96) -> Running:
            return run_generator(material, duty, setting, math.exp(x), steps)

        def gain(made: Running) -> float:
            if made.heat_hot <= 0:
                return -math.inf
            return made.efficiency if duty.maximise == "efficiency" else made.power
    else:
        low, high = 0.01, 2.0 if duty.maximise == "heat_lifted" else 0.999

        def run(x: float, steps: int = 96) -> Running:
            return run_cooler(material, duty, setting, x, steps)

        def gain(made: Running) -> float:
            if made.power <= 0:
                return -math.inf
            return made.cop if duty.maximise == "cop" else made.heat_cold

    def worth(x: float, steps: int = 96) -> float:
        try:
            return gain(run(x, steps))
        except ArithmeticError:
            return -math.inf

    grid = np.linspace(low, high, _GRID)
    worths = np.array([worth(float(x), _FEW_STEPS) for x in grid])
    best = int(np.argmax(worths))
    if not worths[best] > 0:
        return None
    bracket = (float(grid[max(best - 1, 0)]), float(grid[min(best + 1, _GRID - 1)]))
    found = minimize_scalar(lambda x: -worth(float(x)), bounds=bracket, method="bounded", options={"xatol": 1e-9})
    made = run(float(found.x))
    _hold(made, duty)
    return made


def largest_reach(material: LegMaterial, duty: Duty, setting: Setting) -> float:
    """ΔT (K) at which a cooler with these contacts and exchangers lifts nothing any more; 0 where it never lifts.

    The cold reservoir at which the largest heat lifted over all currents is zero: max_j q_c(T_c, j) = 0.
    With ideal contacts and constant properties ½ Z T_c². Raises nothing of its own.
    Source: Ioffe, Semiconductor Thermoelements and Thermoelectric Cooling (1957).

    >>> nodes = np.linspace(140.0, 400.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 4 / 3 * same)  # Z = 3e-3 / K
    >>> duty = Duty("cooler", 292.6, 280.0, "delta_t", 1e-3)
    >>> f"{largest_reach(material, duty, Setting()):.1f}"
    '72.6'
    """

    def lifted(cold: float) -> float:
        job = Duty("cooler", duty.hot, cold, "heat_lifted", duty.length)

        def worth(x: float, steps: int = 96) -> float:
            try:
                return run_cooler(material, job, setting, x, steps).heat_cold
            except ArithmeticError:
                return -math.inf

        grid = np.linspace(0.02, 1.6, 33)
        best = int(np.argmax([worth(float(x), _FEW_STEPS) for x in grid]))
        bracket = (float(grid[max(best - 1, 0)]), float(grid[min(best + 1, 32)]))
        found = minimize_scalar(
            lambda x: -worth(float(x)), bounds=bracket, method="bounded", options={"xatol": 1e-8}
        )
        return float(-found.fun)

    near, far = duty.hot - 0.01, material.lowest
    if lifted(near) <= 0:
        return 0.0
    if lifted(far) > 0:
        return duty.hot - far
    return float(duty.hot - brentq(lifted, far, near, xtol=1e-6))


def _hold(made: Running, duty: Duty) -> None:
    """Energy and Carnot, at run time: what is said must be possible."""
    scale = abs(made.heat_hot) + abs(made.heat_cold)
    if abs(made.heat_hot - made.heat_cold - made.power) > 1e-9 * scale:
        raise AssertionError("the leg's energy does not close")
    ratio = made.efficiency if duty.kind == "generator" else made.cop
    limit = 1 - duty.cold / duty.hot if duty.kind == "generator" else duty.cold / (duty.hot - duty.cold)
    if ratio > limit * (1 + 1e-9):
        raise AssertionError("the leg beats Carnot")
