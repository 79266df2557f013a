"""Legs that share one current: couples of an n and a p leg of equal length, side by side between the reservoirs.

The current is I = j_n A_n = j_p A_p, so the ratio of cross-sections lets each leg run at its own current density,
and per current heats and areas add up. Every score of a couple is then a ratio of sums over its legs,
(gain_n + gain_p)/(price_n + price_p): a score s is the best where the largest gain − s × price of each leg add up
to zero, and those two maxima are found leg by leg (Dinkelbach, Management Science 13, 492 (1967)).
Source: Ioffe, Semiconductor Thermoelements and Thermoelectric Cooling (1957).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline

from legwright.leg.balance import crest, zoom
from legwright.leg.duty import Duty
from legwright.leg.stream import Segments, Stream, drive_range, stream

Array = NDArray[np.float64]

#: points of the first look at the drive and of each closer one, how many of those, and of quartics at the end
_FIRST, _POINTS, _ZOOMS, _POLISHES = 33, 9, 3, 3
#: drives, about the best, of the points of a quartic
_OFFSETS = 0.03 * np.arange(-2.0, 3.0)
#: rounds of Dinkelbach's method on a grid; each squares the miss
_PRICINGS = 8
#: with exchangers: points a drive of the first look and of each closer one, how many looks, steps of their marches
_FIRST_BOTH, _BOTH, _LOOKS, _FEW_STEPS = 13, 7, 10, 24
#: Newton's rounds for the temperatures of the ends, the difference that makes its slopes, and what may be left (K)
_END_ROUNDS, _END_STEP, _END_MISS = 8, 0.05, 1e-6
#: cold temperatures looked at for the largest difference
_COLDS = 49


@dataclass(frozen=True)
class Operation:
    """Legs that share a current at one operating point, per area of all of them together; arrays of one shape.

    score of the duty's goal in SI (fraction or W/m²); areas: each leg's share of the cross-section; heat_hot and
    heat_cold at the reservoirs, power made or spent (W/m²); current (A/m²); hot_end and cold_end: temperatures of
    the legs' ends (K); drives: of each leg, as `stream` takes them. Legs that cannot serve have a score of 0, and
    their other figures mean nothing.
    """

    score: Array
    areas: tuple[Array, ...]
    heat_hot: Array
    heat_cold: Array
    power: Array
    current: Array
    hot_end: Array
    cold_end: Array
    drives: tuple[Array, ...]

    @property
    def efficiency(self) -> Array:
        """Power over heat taken from the hot reservoir."""
        return self.power / self.heat_hot

    @property
    def cop(self) -> Array:
        """Heat lifted over power spent."""
        return self.heat_cold / self.power

    @property
    def area_ratio(self) -> Array:
        """A_n/A_p of a couple."""
        return self.areas[0] / self.areas[1]


def best_couples(n_legs: Sequence[Segments], p_legs: Sequence[Segments], duty: Duty, steps: int = 96) -> Operation:
    """Each n leg with each p leg, at the areas and the current that the duty's goal wants; reservoirs at the ends.

    max over both current densities of Σ(Φ_h − Φ_c)/ΣΦ_h, Σ(Φ_h − Φ_c)/Σ(1/j), ΣΦ_c/Σ(Φ_h − Φ_c) or ΣΦ_c/Σ(1/j),
    where Φ counts the Joule heat of the setting's contacts; exchangers are left out. A leg's S counts positive
    for its own carrier. For constant properties Z is (S_n + S_p)²/(√(ρκ)_n + √(ρκ)_p)² and
    A_n/A_p = √(ρ_n κ_p/(ρ_p κ_n)). Figures in W/m², A/m² and K, of shape (n legs, p legs); the goal is not delta_t,
    which is `largest_differences`; `steps`: of each march, even. Raises nothing of its own.
    Source: Ioffe, Semiconductor Thermoelements and Thermoelectric Cooling (1957).

    >>> from legwright.leg.balance import LegMaterial
    >>> nodes = np.linspace(300.0, 600.0, 9)
    >>> same = np.ones_like(nodes)
    >>> n = Segments((LegMaterial.from_nodes(nodes, 1e-4 * same, 2e-5 * same, 4 * same),))
    >>> p = Segments((LegMaterial.from_nodes(nodes, 3e-4 * same, 2e-5 * same, 1 * same),))
    >>> made = best_couples([n], [p], Duty("generator", 600.0, 300.0, "efficiency", 1e-3))
    >>> z = 4e-4**2 / (8e-5**0.5 + 2e-5**0.5) ** 2
    >>> m = (1 + z * 450) ** 0.5
    >>> f"{made.score[0, 0]:.6f} {0.5 * (m - 1) / (m + 0.5):.6f}", f"{made.area_ratio[0, 0]:.4f}"
    ('0.054424 0.054424', '0.5000')
    """

    def flows(drives: Drives) -> list[Stream]:
        at = (duty.hot, duty.cold, steps)
        n = [stream(leg, duty, drives[0][:, i, :], *at) for i, leg in enumerate(n_legs)]
        p = [stream(leg, duty, drives[1][:, :, j], *at) for j, leg in enumerate(p_legs)]
        return [_stacked(n, 1), _stacked(p, 2)]

    drives = _best_drives(flows, duty, 2, (len(n_legs), len(p_legs)))
    return _at_ends(flows, duty, drives)


def best_operation(legs: Sequence[Segments], duty: Duty, steps: int = 96) -> Operation:
    """One leg or one couple (n, p) at its best, with contacts and exchangers, those per area of all legs together.

    T_end,h = T_h ∓ q_h R_h, T_end,c = T_c ± q_c R_c, the upper sign in a generator; all drives are then searched
    together. Where the exchangers are ideal it is the one of `best_couples`. K, W/m², A/m²; the figures have no
    axes, one of each; `steps`: of the final march, even. Raises nothing of its own.
    Source: Ioffe, Semiconductor Thermoelements and Thermoelectric Cooling (1957).

    >>> from legwright.leg.balance import LegMaterial
    >>> from legwright.leg.duty import Setting
    >>> nodes = np.linspace(300.0, 600.0, 9)
    >>> same = np.ones_like(nodes)
    >>> leg = Segments((LegMaterial.from_nodes(nodes, 1e-6 * same, 1e-5 * same, 2 * same),))  # almost no current
    >>> duty = Duty("generator", 600.0, 300.0, "power", 1e-3, Setting(hot_resistance=5e-4))  # as much as the legs
    >>> made = best_operation([leg, leg], duty)
    >>> f"{made.hot_end:.2f}"
    '450.00'
    """
    if duty.setting.hot_resistance or duty.setting.cold_resistance:
        return _best_with_exchangers(legs, duty, steps, idle=False)

    def flows(drives: Drives) -> list[Stream]:
        return [
            stream(leg, duty, drive, duty.hot, duty.cold, steps) for leg, drive in zip(legs, drives, strict=True)
        ]

    return _at_ends(flows, duty, _best_drives(flows, duty, len(legs), ()))


def largest_difference_of(legs: Sequence[Segments], duty: Duty) -> float:
    """ΔT (K) between the reservoirs at which a leg or a couple lifts nothing any more; 0 where it never lifts.

    As `largest_differences`; with exchangers all drives are searched together for the coldest cold end. legs
    and duty: one of each. Raises nothing of its own.
    Source: Ioffe, Semiconductor Thermoelements and Thermoelectric Cooling (1957).

    >>> from legwright.leg.balance import LegMaterial
    >>> nodes = np.linspace(140.0, 400.0, 9)
    >>> same = np.ones_like(nodes)
    >>> leg = Segments((LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 4 / 3 * same),))  # Z = 3e-3 / K
    >>> from legwright.leg.duty import Setting
    >>> duty = Duty("cooler", 292.6, 280.0, "delta_t", 1e-3, Setting(hot_resistance=1e-12))
    >>> f"{largest_difference_of([leg, leg], duty):.1f}"  # ½ × 3e-3 × 220²
    '72.6'
    """
    if not duty.setting.hot_resistance:
        first, last = legs[0], legs[-1]  # a leg alone is as good as two like it
        return float(largest_differences([first], [last], duty)[0, 0])
    job = replace(duty, maximise="heat_lifted")
    made = _best_with_exchangers(legs, job, 96, idle=True)
    return float(duty.hot - made.cold_end) if made.score > 0 else 0.0


def largest_differences(n_legs: Sequence[Segments], p_legs: Sequence[Segments], duty: Duty) -> Array:
    """ΔT (K) at which each n leg with each p leg lifts nothing any more, shape (n legs, p legs).

    Reservoirs at the legs' ends. The cold temperature at which max Φ_c,n + max Φ_c,p = 0, each leg at its own
    current density, found on a spline over √(T_h − T_c); with ideal contacts and constant properties ½ Z T_c².
    Exchangers are left out. Limited by the lowest node. Raises nothing of its own.
    Source: Ioffe, Semiconductor Thermoelements and Thermoelectric Cooling (1957).

    >>> from legwright.leg.balance import LegMaterial
    >>> nodes = np.linspace(140.0, 400.0, 9)
    >>> same = np.ones_like(nodes)
    >>> leg = Segments((LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 4 / 3 * same),))  # Z = 3e-3 / K
    >>> f"{largest_differences([leg], [leg], Duty('cooler', 292.6, 280.0, 'delta_t', 1e-3))[0, 0]:.1f}"
    '72.6'
    """
    lowest = max(material.lowest for leg in (*n_legs, *p_legs) for material in leg.materials)
    depth = np.sqrt(duty.hot - lowest) * np.linspace(0.02, 1.0, _COLDS)
    cold = duty.hot - depth**2

    def most(leg: Segments) -> Array:
        low, high = (np.full(_COLDS, end) for end in drive_range(duty))

        def taken_in(drive: Array) -> Array:
            made = stream(leg, duty, drive, duty.hot, cold)
            return np.where(made.valid, made.cold, -np.inf)

        return zoom(taken_in, low, high, _POINTS, 2 * _ZOOMS)[1]

    left_n, left_p = ([most(leg) for leg in legs] for legs in (n_legs, p_legs))
    return np.array([[_first_zero(depth, a + b) ** 2 for b in left_p] for a in left_n])


def _first_zero(x: Array, y: Array) -> float:
    """The first x at which y is zero: 0 where y starts below it, the last x where it stays above."""
    below = np.flatnonzero(~(y > 0))
    if not below.size:
        return float(x[-1])
    if below[0] == 0:
        return 0.0
    known = np.isfinite(y)
    roots = CubicSpline(x[known], y[known]).roots(extrapolate=False)
    return float(np.min(roots, initial=x[below[0]]))


#: one array a leg
Drives = Sequence[Array]
#: each leg's stream at its drives, points along the first axis
_Flows = Callable[[Drives], list[Stream]]


def _stacked(parts: Sequence[Stream], axis: int) -> Stream:
    """Streams (points, partners), set side by side along an axis; the shares of their segments are left out."""
    hot, cold, area, valid = (
        np.stack([getattr(part, name) for part in parts], axis) for name in ("hot", "cold", "area", "valid")
    )
    return Stream(hot, cold, area, (), valid)


def _best_drives(flows: _Flows, duty: Duty, legs: int, shape: tuple[int, ...]) -> list[Array]:
    """Each leg's drive where Σ gain/Σ price is largest: grids that shrink, then the crests of quartics."""
    limits = drive_range(duty)
    low, high = (np.full((legs, *shape), end) for end in limits)
    column = (-1, *(1,) * len(shape))
    for look in range(_ZOOMS + 1):
        steps = np.linspace(0.0, 1.0, _POINTS if look else _FIRST).reshape(column)
        grids = [a + (b - a) * steps for a, b in zip(low, high, strict=True)]
        best = _priced(flows(grids), duty)[0]
        for k, grid in enumerate(grids):
            for end, by in ((low, -1), (high, +1)):
                near = np.clip(best[k] + by, 0, steps.size - 1)
                end[k] = np.take_along_axis(grid, near[None], axis=0)[0]
    drives = list(np.clip(0.5 * (low + high), *limits))
    for _ in range(_POLISHES):
        worths = _priced(flows([drive + _OFFSETS.reshape(column) for drive in drives]), duty)[1]
        for k, worth in enumerate(worths):
            known = np.all(np.isfinite(worth), axis=0)
            where, _ = crest(np.where(known, worth, 0.0))
            drives[k] = np.clip(drives[k] + where * (_OFFSETS[1] - _OFFSETS[0]), *limits)
    return drives


def _priced(flows: list[Stream], duty: Duty) -> tuple[list[NDArray[np.intp]], list[Array]]:
    """Of points along the first axis, each leg's best at the best score of all, and what all are worth there."""
    parts = [one.parts(duty.maximise) for one in flows]
    score: Array | float = 0.0
    for _ in range(_PRICINGS):
        worths = [
            np.where(one.valid, gain - score * price, -np.inf)
            for one, (gain, price) in zip(flows, parts, strict=True)
        ]
        best = [np.argmax(worth, axis=0) for worth in worths]
        gain, price = (
            np.asarray(
                sum(np.take_along_axis(part[i], at[None], axis=0)[0] for part, at in zip(parts, best, strict=True))
            )
            for i in range(2)
        )
        score = np.where(price > 0, gain / np.where(price > 0, price, 1.0), 0.0)
    return best, worths


def _at_ends(flows: _Flows, duty: Duty, drives: Drives) -> Operation:
    """Operation at those drives between reservoirs that are the legs' ends."""
    parts = flows([drive[None] for drive in drives])
    one = np.ones((1, *np.shape(drives[0])))
    return _told([part.first for part in parts], duty, drives, duty.hot * one[0], duty.cold * one[0])


def _told(parts: Sequence[Stream], duty: Duty, drives: Drives, hot: Array, cold: Array) -> Operation:
    def whole(values: Sequence[Array]) -> Array:
        return np.asarray(sum(values))

    area = whole([one.area for one in parts])
    heat_hot, heat_cold = whole([one.hot for one in parts]) / area, whole([one.cold for one in parts]) / area
    gain, price = (whole([one.parts(duty.maximise)[i] for one in parts]) for i in range(2))
    usable = np.logical_and.reduce([*(one.valid for one in parts), price > 0])
    score = np.where(usable, gain / np.where(usable, price, 1.0), 0.0)
    return Operation(
        np.maximum(score, 0.0),
        tuple(one.area / area for one in parts),
        heat_hot,
        heat_cold,
        np.abs(heat_hot - heat_cold),
        1 / area,
        hot,
        cold,
        tuple(drives),
    )


def _best_with_exchangers(legs: Sequence[Segments], duty: Duty, steps: int, idle: bool) -> Operation:
    """All drives searched on a square; `idle`: for the coldest cold end that takes in no heat."""
    low, high = (np.full(len(legs), end) for end in drive_range(duty))
    ends = (np.array(duty.hot), np.array(duty.cold))
    for look in range(_LOOKS):
        points = _BOTH if look else _FIRST_BOTH
        sides = [np.linspace(a, b, points) for a, b in zip(low, high, strict=True)]
        made = _between_exchangers(legs, duty, np.ix_(*sides), ends, _FEW_STEPS, idle)
        worth = np.where(made.score > 0, duty.hot - made.cold_end if idle else made.score, -np.inf)
        best = [int(i) for i in np.unravel_index(np.argmax(worth), worth.shape)]
        ends = made.hot_end[*best], made.cold_end[*best]
        for k, side in enumerate(sides):
            low[k], high[k] = side[max(best[k] - 1, 0)], side[min(best[k] + 1, points - 1)]
    middle = [np.array(0.5 * (a + b)) for a, b in zip(low, high, strict=True)]
    return _between_exchangers(legs, duty, middle, ends, steps, idle)


def _between_exchangers(
    legs: Sequence[Segments],
    duty: Duty,
    drives: Drives,
    start: tuple[Array, Array],
    steps: int,
    idle: bool,
) -> Operation:
    """The legs at given drives, their ends where the exchangers allow; score 0 where there are none.

    Newton's method from `start`, slopes from differences. `idle`: the cold end takes in no heat, at whatever
    temperature that is; the score is then 1.
    """
    sense, setting = -1.0 if duty.kind == "generator" else 1.0, duty.setting
    shape = np.broadcast_shapes(*(drive.shape for drive in drives))
    hot, cold = (np.array(np.broadcast_to(end, shape)) for end in start)

    def at(hot: Array, cold: Array) -> tuple[Operation, Array, Array]:
        above = np.maximum(hot, cold + 1.0)
        parts = [
            stream(leg, duty, np.broadcast_to(drive, shape), above, cold, steps)
            for leg, drive in zip(legs, drives, strict=True)
        ]
        made = _told(parts, duty, drives, hot, cold)
        hot_miss = duty.hot + sense * made.heat_hot * setting.hot_resistance - hot
        cold_miss = duty.cold - sense * made.heat_cold * setting.cold_resistance - cold
        return made, hot_miss, made.heat_cold / made.current if idle else cold_miss

    farthest = 0.2 * duty.hot
    for _ in range(_END_ROUNDS):
        _, f, g = at(hot, cold)
        _, f_hot, g_hot = at(hot + _END_STEP, cold)
        _, f_cold, g_cold = at(hot, cold + _END_STEP)
        a, b, c, d = (x / _END_STEP for x in (f_hot - f, f_cold - f, g_hot - g, g_cold - g))
        det = np.where(a * d == b * c, 1.0, a * d - b * c)
        hot = hot - np.clip((d * f - b * g) / det, -farthest, farthest)
        cold = np.maximum(cold - np.clip((a * g - c * f) / det, -farthest, farthest), 0.3 * duty.cold)
    made, f, g = at(hot, cold)
    settled = (np.abs(f) < _END_MISS) & (np.abs(g) < _END_MISS) & (hot > cold)
    return replace(made, score=np.where(settled, 1.0 if idle else made.score, 0.0))
