"""The job of a leg, and the best score that a material reaches in it."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Literal, get_args

import numpy as np
from numpy.typing import NDArray

from legwright.leg.balance import (
    LegMaterial,
    cool_past_peak,
    cop_by_w,
    crest,
    efficiency_by_w,
    largest_difference,
    power_by_w,
    zoom,
)
from legwright.leg.installed import Running, best_running

Array = NDArray[np.float64]
Kind = Literal["generator", "cooler"]
Goal = Literal["efficiency", "power", "cop", "delta_t", "heat_lifted"]

GOALS: dict[str, tuple[Goal, ...]] = {
    "generator": ("efficiency", "power"),
    "cooler": ("cop", "delta_t", "heat_lifted"),
}
SCORE_NAMES: dict[Goal, str] = {
    "efficiency": "efficiency",
    "power": "power_W_per_cm2",
    "cop": "cop",
    "delta_t": "delta_t_max_K",
    "heat_lifted": "heat_lifted_W_per_cm2",
}
assert set(SCORE_NAMES) == set(get_args(Goal))

#: W/m² in one W/cm²
_PER_CM2 = 1e4
#: a cooler's interior may rise this far above its hot end, as a share of the hot temperature
_PEAK_RISE = 0.2
#: lowest temperature looked at for the largest difference, as a share of the hot temperature
_COLDEST = 0.5


@dataclass(frozen=True)
class Setting:
    """What surrounds a leg, per area of leg, one number each.

    contact: resistivity of each contact (Ω m²); hot_resistance and cold_resistance to heat between reservoir and
    leg's end (K m²/W), contact and exchanger together; side_loss: heat-transfer coefficient of the sides times
    perimeter over area of the leg (W/(m³ K)); ambient: temperature around the sides (K), where None the cold
    reservoir's of a generator, the hot one's of a cooler.
    """

    contact: float = 0.0
    hot_resistance: float = 0.0
    cold_resistance: float = 0.0
    side_loss: float = 0.0
    ambient: float | None = None

    @property
    def ideal(self) -> bool:
        """Whether nothing at all stands between the leg and its reservoirs, or leaks."""
        return not (self.contact or self.hot_resistance or self.cold_resistance or self.side_loss)


@dataclass(frozen=True)
class Duty:
    """What the leg is for, one number each.

    kind: generator or cooler; hot and cold, the temperatures of its ends (K); maximise: the goal that counts, one
    of `GOALS` of the kind; length of the leg (m); setting: contacts, exchangers and side loss; lengths: a range of
    lengths (m) that are free, where the best one is wanted instead of `length`; felt_length: what free paths of
    carriers and phonons feel of it (m), inf in a long leg.
    """

    kind: Kind
    hot: float
    cold: float
    maximise: Goal
    length: float
    setting: Setting = Setting()
    lengths: tuple[float, float] | None = None
    felt_length: float = math.inf

    @property
    def alone(self) -> Duty:
        """The same duty with nothing between the leg and its reservoirs."""
        return replace(self, setting=Setting(), lengths=None)

    @property
    def span(self) -> tuple[float, float]:
        """Temperatures over which the material's properties are needed."""
        if not self.setting.ideal:
            return self.reach
        if self.maximise == "delta_t":
            return _COLDEST * self.hot, self.hot
        if self.maximise == "heat_lifted":
            return self.cold, (1 + _PEAK_RISE) * self.hot
        return self.cold, self.hot

    @property
    def reach(self) -> tuple[float, float]:
        """Temperatures that the ends and the inside of a leg can come to in any setting."""
        if self.kind == "generator":
            return self.cold, self.hot
        return min(_COLDEST * self.hot, self.cold), (1 + _PEAK_RISE) * self.hot


def best_score(material: LegMaterial, duty: Duty, rounds: int = 4) -> Array:
    """The duty's score at the best current; 0 where the leg cannot serve.

    Efficiency 1 − Φ_c/Φ_h, COP Φ_c/(Φ_h − Φ_c), power j (Φ_h − Φ_c) or heat lifted j Φ_c with Φ = S T + w, or ΔT.
    Efficiency and COP are fractions, areal figures W/cm² of leg, ΔT in K; the shape is that of the legs. `rounds`
    sets how closely the best current is found: each divides the bracket by three. A setting that is not ideal, or a
    free length, goes through `best_running`, whose currents are closer than any rounds, and
    whose AssertionError is a fault of the program.
    Sources: Ioffe, Semiconductor Thermoelements and Thermoelectric Cooling (1957); Snyder & Ursell, Physical Review
    Letters 91, 148301 (2003).

    >>> nodes = np.linspace(300.0, 600.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1.2e-5 * same, 1.5 * same)  # mean ZT of 1
    >>> f"{float(best_score(material, Duty('generator', 600.0, 300.0, 'efficiency', 1e-3), 8)):.5f}"
    '0.10819'
    """
    if not duty.setting.ideal or duty.lengths:
        return score_of(best_running(material, duty), duty)
    if duty.maximise == "delta_t":
        return largest_difference(material, duty.hot)
    if duty.maximise == "heat_lifted":
        return _serving(_best_lift(material, duty) / duty.length / _PER_CM2)
    pull = np.maximum(material.seebeck(duty.hot) * duty.hot, 1e-12)
    root = np.sqrt(1 + _figure_of_merit(material, duty) * 0.5 * (duty.hot + duty.cold))
    if duty.kind == "cooler":
        cop = cop_by_w(material, duty.hot, duty.cold)
        return _serving(zoom(cop, np.zeros_like(pull), pull, 7, rounds + 1)[1])
    expected = np.log(pull / np.maximum(root - 1, 1e-9))
    trial = efficiency_by_w if duty.maximise == "efficiency" else power_by_w
    figure = trial(material, duty.hot, duty.cold)
    _, score = zoom(lambda log_w: figure(np.exp(log_w)), expected - 2.5, expected + 2.5, 7, rounds + 1)
    return _serving(score if duty.maximise == "efficiency" else score / duty.length / _PER_CM2)


def score_of(running: Running, duty: Duty) -> Array:
    """The duty's score at operating points: fractions, W/cm² of leg or K, 0 where the leg does not serve.

    Shape of `running`. Raises nothing of its own. By definition.

    >>> nodes = np.linspace(300.0, 600.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1.2e-5 * same, 1.5 * same)
    >>> duty = Duty("generator", 600.0, 300.0, "power", 1e-3)
    >>> f"{float(score_of(best_running(material, duty), duty)):.4f}"  # (S ΔT)²/4ρL
    '7.5000'
    """
    if duty.maximise == "delta_t":
        score = duty.hot - running.cold_end
    elif duty.maximise in ("efficiency", "cop"):
        score = running.efficiency if duty.maximise == "efficiency" else running.cop
    else:
        score = (running.power if duty.maximise == "power" else running.heat_cold) / _PER_CM2
    return np.where(running.serves, score, 0.0)


def _figure_of_merit(material: LegMaterial, duty: Duty) -> Array:
    """Z from S, ρ and κ at mid-span, 1/K: only a first guess for the best current."""
    middle = 0.5 * (duty.hot + duty.cold)
    heat = material.resistivity(middle) * material.thermal_conductivity(middle)
    return np.asarray(material.seebeck(middle) ** 2 / heat)


def _serving(score: Array) -> Array:
    return np.where(np.isfinite(score) & (score > 0), score, 0.0)


def _best_lift(material: LegMaterial, duty: Duty) -> Array:
    """Largest lifted heat × length over interior peak temperatures.

    Smooth in √(T_peak − T_h), and so is its maximum between the best three of an even grid of that: their
    parabola, moved by the fourth-order term of the best five.
    """
    rise = _PEAK_RISE * duty.hot * np.linspace(0, 1, _PEAKS) ** 2
    lifted = np.stack(
        [cool_past_peak(material, duty.hot, duty.cold, duty.hot + up).heat_times_length for up in rise]
    )
    centre = np.clip(np.argmax(lifted, axis=0), 2, _PEAKS - 3)[None]
    five = np.stack([np.take_along_axis(lifted, centre + step, axis=0)[0] for step in range(-2, 3)])
    _, top = crest(five)
    return np.asarray(np.maximum(np.max(lifted, axis=0), top))


_PEAKS = 25
