"""Legs where they work, many at once: contacts at their ends, exchangers beyond them, loss through their sides.

Each contact adds its Joule heat at its own end; contacts and exchangers of heat stand between the reservoirs and
the leg's ends, so that the leg sees less than the whole difference; its sides lose heat to surroundings of one
temperature. The best current, and the best length where it is free, are where the goal's derivative is zero.
Sources: Rowe & Min, Journal of Power Sources 73, 193 (1998) for contacts; Ioffe, Semiconductor Thermoelements and
Thermoelectric Cooling (1957).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.leg.balance import LegMaterial
from legwright.leg.profile import Ends, Indices, Legs, Profiles, finer, profiles, straight

if TYPE_CHECKING:
    from legwright.leg.duty import Duty

Array = NDArray[np.float64]

#: Gauss points while the best current is sought, where the goal is flat; then of the answer, more until it changes
#: by no more than this share: what is left is some ten times less
_SEEKING, _ANSWERING, _SETTLED = 8, (16, 32, 64), 3e-7
#: the best current and length are found to this share, and so the flat goal to its square
_FOUND, _TRIALS = 1e-6, 60
#: the first step of a search, and the longest, as shares of where it stands
_FIRST_STEP, _LONGEST = 0.15, 0.6
#: lengths tried first where the length is free
_LENGTHS = 9
#: legs of one block: their matrices stay in the fast memory
_BLOCK = 512
#: power is looked at this closely, as a share of the heat
_SMALL_POWER = 1e-3
#: rounding may carry a leg's end this far past the last node, K
_GRACE = 1e-6
#: what the energy may miss, and by what Carnot may seem beaten, as a share of the heat: rounding
_CLOSES = 1e-9


@dataclass(frozen=True)
class Running:
    """Operating points, areal, arrays of the legs' shape.

    serves: whether the leg does; its other figures are nan where it does not. heat_hot: taken from the hot
    reservoir by a generator, given to it by a cooler; heat_cold: given to the cold one, or lifted from it;
    side_heat: lost through the sides; power: made (generator) or spent (cooler), all W/m²; current (A/m²); length
    (m); hot_end and cold_end: temperatures of the leg's ends (K).
    """

    serves: NDArray[np.bool_]
    heat_hot: Array
    heat_cold: Array
    side_heat: Array
    power: Array
    current: Array
    length: Array
    hot_end: Array
    cold_end: Array

    @property
    def efficiency(self) -> Array:
        """Power over heat taken from the hot reservoir."""
        return self.power / self.heat_hot

    @property
    def cop(self) -> Array:
        """Heat lifted over power spent."""
        return self.heat_cold / self.power


def running_at(material: LegMaterial, duty: Duty, current: ArrayLike) -> Running:
    """Operating points at a current density (A/m², > 0), which broadcasts with the legs.

    q_h = j Φ_h ∓ j² ρ_c and q_c = j Φ_c ± j² ρ_c with the upper signs for a generator, T_end,h = T_h ∓ q_h R_h,
    T_end,c = T_c ± q_c R_c; P = ±(q_h − q_c − sides). Legs whose balance has no steady state, or one beyond the
    temperatures of the material's nodes, do not serve.
    AssertionError if energy did not close or Carnot was beaten: a fault of the program, never of the input.
    Source: Rowe & Min, Journal of Power Sources 73, 193 (1998).

    >>> from legwright.leg.duty import Duty, Setting
    >>> t = np.linspace(290.0, 610.0, 9)
    >>> same = np.ones_like(t)
    >>> material = LegMaterial.from_nodes(t, 2e-4 * same, 1e-5 * same, 1.5 * same)
    >>> duty = Duty("generator", 600.0, 300.0, "power", 1e-3, Setting(contact=1e-9))
    >>> made = running_at(material, duty, [2e6, 3e6])
    >>> (made.power / 1e4).round(6).tolist()  # j S ΔT − j² (ρ L + 2 ρ_c)
    [7.2, 7.2]
    """
    legs = Legs(material)
    shape = np.broadcast_shapes(material.shape, np.shape(current))
    which = np.broadcast_to(np.arange(legs.count).reshape(material.shape), shape).ravel()
    density = np.broadcast_to(np.asarray(current, dtype=float), shape).ravel()
    length = np.full(which.size, duty.length)

    def run(part: slice) -> Running:
        own, span = which[part], length[part]
        flow = _sense(duty) * density[part] * span
        begin = straight(legs, own, _ends(duty, span), _SEEKING)
        return _settled(legs, own, duty, span, flow, begin, _GRACE)

    return _in_blocks(run, which.size, shape)


def best_running(material: LegMaterial, duty: Duty) -> Running:
    """The operating points that the duty's goal wants, for each leg; where there is none it does not serve.

    The current j at which the goal (P/q_h, P, q_c/P, q_c, or T_h − T_c at q_c = 0) has no slope; with
    `duty.lengths` also the length where it has none, or that end of the range towards which the goal rises.
    Currents that would carry part of the leg beyond the temperatures of the material's nodes are not considered.
    SI; arrays have the shape of the legs.
    AssertionError if energy did not close or Carnot was beaten: a fault of the program, never of the input.
    Source: Ioffe, Semiconductor Thermoelements and Thermoelectric Cooling (1957).

    >>> from legwright.leg.duty import Duty
    >>> t = np.linspace(290.0, 610.0, 9)
    >>> same = np.ones_like(t)
    >>> material = LegMaterial.from_nodes(t, 2e-4 * same, 1.2e-5 * same, 1.5 * same)  # mean ZT of 1
    >>> found = best_running(material, Duty("generator", 600.0, 300.0, "efficiency", 1e-3))
    >>> f"{found.efficiency:.5f}"
    '0.10819'
    """
    legs = Legs(material)

    def run(part: slice) -> Running:
        which = np.arange(legs.count)[part]
        free = duty.lengths
        span = _best_length(legs, which, duty, free) if free else np.full(which.size, duty.length)
        return _best(legs, which, duty, span)

    return _in_blocks(run, legs.count, material.shape)


def _in_blocks(run: Callable[[slice], Running], count: int, shape: tuple[int, ...]) -> Running:
    """The same for all legs as block by block: no leg hangs on its neighbours."""
    parts = [run(slice(first, first + _BLOCK)) for first in range(0, count, _BLOCK)]
    names = [field.name for field in fields(Running)]
    return Running(*(np.concatenate([getattr(one, name) for one in parts]).reshape(shape) for name in names))


def _sense(duty: Duty) -> float:
    """Direction of the current: from hot to cold in a generator."""
    return 1.0 if duty.kind == "generator" else -1.0


def _ends(duty: Duty, length: Array) -> Ends:
    one, setting = np.ones_like(length), duty.setting
    return Ends(
        hot=duty.hot * one,
        cold=duty.cold * one,
        hot_resistance=setting.hot_resistance / length,
        cold_resistance=setting.cold_resistance / length,
        contact=setting.contact / length,
        side=setting.side_loss * length**2,
        ambient=_ambient(duty) * one,
        idle=np.full(length.size, duty.maximise == "delta_t"),
    )


def _ambient(duty: Duty) -> float:
    if duty.setting.ambient is not None:
        return duty.setting.ambient
    return duty.cold if duty.kind == "generator" else duty.hot


def _within(legs: Legs, made: Profiles, grace: float = _GRACE) -> NDArray[np.bool_]:
    """Which profiles are steady states between the nodes of the material, or that near to them (K)."""
    inside = (made.lowest > legs.nodes[0] - grace) & (made.highest < legs.nodes[-1] + grace)
    return np.asarray(made.found & inside)


def _slope(duty: Duty, made: Profiles, by: int) -> Array:
    """Sign and course of the goal's derivative by J (1) or by ln L (2): its zero is the goal's top."""
    power, heat, lifted = made.power, made.from_hot, -made.to_cold
    areal = 1.0 if by == 2 else 0.0  # W/m² is W/m over L
    if duty.maximise == "efficiency":
        return np.asarray(power[by] * heat[0] - power[0] * heat[by])
    if duty.maximise == "power":
        return np.asarray(power[by] - areal * power[0])
    if duty.maximise == "cop":
        return np.asarray(lifted[0] * power[by] - lifted[by] * power[0])
    if duty.maximise == "heat_lifted":
        return np.asarray(lifted[by] - areal * lifted[0])
    return np.asarray(-made.cold_end[by])


def _best(legs: Legs, which: Indices, duty: Duty, length: Array) -> Running:
    """Best current of each leg at its length: safeguarded secant steps on the goal's slope."""
    current, state = _best_current(legs, which, duty, length)
    found = _settled(legs, which, duty, length, current, state, np.inf)
    serves = found.serves & (current != 0) & _useful(duty, found)
    figures = {name: np.where(serves, values, np.nan) for name, values in vars(found).items() if name != "serves"}
    return replace(found, **figures, serves=serves)


def _settled(
    legs: Legs, which: Indices, duty: Duty, length: Array, current: Array, state: Array, grace: float
) -> Running:
    """Operating points at J from rough profiles on, with as many Gauss points as each leg needs.

    They do not serve where the leg passes the material's last nodes by more than `grace` (K).
    """
    ends = _ends(duty, length)
    made = profiles(legs, which, ends, current, state)
    answer = _told(legs, made, duty, current, length, grace)
    left = np.arange(which.size)
    for points in _ANSWERING:
        before, begin = _heats(made), finer(made.state, points)
        made = profiles(legs, which[left], ends.of(left), current[left], begin)
        for name, values in vars(_told(legs, made, duty, current[left], length[left], grace)).items():
            getattr(answer, name)[left] = values
        now = _heats(made)
        heat = np.maximum(np.abs(now[0]), np.abs(now[1]))
        scale = np.stack([heat, heat, np.maximum(np.abs(now[2]), _SMALL_POWER * heat)])
        more = made.found & np.any(np.abs(now - before) > _SETTLED * scale, axis=0)
        if not np.any(more):
            break
        left, made = left[more], made.of(more)
    return answer


def _heats(made: Profiles) -> Array:
    return np.stack([made.from_hot[0], made.to_cold[0], made.power[0]])


def _useful(duty: Duty, found: Running) -> NDArray[np.bool_]:
    """Whether the goal is reached at all: power made, heat lifted, a difference held."""
    if duty.maximise == "delta_t":
        return np.asarray(found.cold_end < duty.hot)
    heat = found.heat_hot if duty.kind == "generator" else found.heat_cold
    return np.asarray((found.power > 0) & (heat > 0))


def _best_current(legs: Legs, which: Indices, duty: Duty, length: Array) -> tuple[Array, Array]:
    """J of the best current and the profile there, sought with few points; J = 0 where no current serves."""
    ends = _ends(duty, length)
    expected = _sense(duty) * _expected(legs, which, duty, ends)
    state = straight(legs, which, ends, _SEEKING)
    by_current, at = np.zeros_like(state), np.zeros(which.size)

    def slope(some: Indices, share: Array) -> tuple[NDArray[np.bool_], Array]:
        current = share * expected[some]
        start = state[some] + (current - at[some])[:, None] * by_current[some]
        made = profiles(legs, which[some], ends.of(some), current, start)
        good = _within(legs, made)
        kept = some[good]
        state[kept], by_current[kept], at[kept] = made.state[good], made.by_current[good], current[good]
        return good, expected[some] * _slope(duty, made, 1)

    share = _where_flat(slope, np.ones(which.size), np.zeros(which.size), np.full(which.size, np.inf))
    return np.where(np.isfinite(share), share, 0.0) * expected, state


def _expected(legs: Legs, which: Indices, duty: Duty, ends: Ends) -> Array:
    """A first guess at |J| (A/m): Ioffe's best current for the properties at mid-span."""
    middle = 0.5 * (duty.hot + duty.cold)
    s, rho, kappa = (each[:, 0] for each in legs.look_up(which, np.full((which.size, 1), middle))[:3])
    span = np.linspace(duty.cold, duty.hot, 9)
    s = np.maximum(
        np.abs(s), np.mean(np.abs(legs.look_up(which, np.broadcast_to(span, (which.size, 9)))[0]), axis=1)
    )
    rho = rho + 2 * ends.contact
    difference = (duty.hot - duty.cold) / (1 + kappa * (ends.hot_resistance + ends.cold_resistance))
    root = np.sqrt(1 + s**2 / (rho * kappa) * middle)
    if duty.maximise == "efficiency":
        return np.asarray(s * difference / (rho * (1 + root)))
    if duty.maximise == "power":
        return np.asarray(s * difference / (2 * rho))
    if duty.maximise == "cop":
        return np.asarray(s * difference / (rho * np.maximum(root - 1, 1e-9)))
    return np.asarray(
        s * duty.cold / (rho * (1 + s**2 / rho * (ends.hot_resistance + ends.cold_resistance) * middle))
    )


def _best_length(legs: Legs, which: Indices, duty: Duty, length: tuple[float, float]) -> Array:
    """Where the goal at the best current has no slope over ln L, or the end of the range towards which it rises."""
    every, shortest = np.arange(which.size), length[0]

    def made_at(some: Indices, x: Array) -> tuple[Profiles, NDArray[np.bool_], Array]:
        span = shortest * np.exp(x - 1)  # x from 1 up: its steps are shares of where it stands
        current, state = _best_current(legs, which[some], duty, span)
        made = profiles(legs, which[some], _ends(duty, span), current, state)
        return made, _within(legs, made) & (current != 0), span

    def slope(some: Indices, x: Array) -> tuple[NDArray[np.bool_], Array]:
        made, good, _ = made_at(some, x)
        return good, _slope(duty, made, 2)

    places = 1 + np.linspace(0, np.log(length[1] / shortest), _LENGTHS)
    goals = []
    for place in places:
        made, good, span = made_at(every, np.full(which.size, place))
        goals.append(np.where(good, _goal(duty, made, span), -np.inf))
    best = np.argmax(goals, axis=0)
    low, high = places[np.maximum(best - 1, 0)], places[np.minimum(best + 1, _LENGTHS - 1)]
    found = _where_flat(slope, places[best], low, high)
    return np.clip(shortest * np.exp(np.where(np.isfinite(found), found, places[best]) - 1), *length)


def _goal(duty: Duty, made: Profiles, length: Array) -> Array:
    """What is to be large, to compare lengths by."""
    with np.errstate(divide="ignore", invalid="ignore"):
        figures = {
            "efficiency": made.power[0] / made.from_hot[0],
            "power": made.power[0] / length,
            "cop": made.to_cold[0] / made.power[0],
            "heat_lifted": -made.to_cold[0] / length,
            "delta_t": -made.cold_end[0],
        }
    figure = figures[duty.maximise]
    return np.where(np.isnan(figure), -np.inf, figure)


#: places (of the unknowns) and trial values in, whether there is an answer and the goal's slope out
_SlopeAt = Callable[[Indices, Array], tuple[NDArray[np.bool_], Array]]


def _where_flat(slope: _SlopeAt, guess: Array, low: Array, high: Array) -> Array:
    """The last x between low and high to which the goal still rises, for each place; nan where none was good.

    Secant steps, halved into the bracket where they would leave it. A trial without an answer went too far from the
    last one that had, or, where none had, was too large.
    """
    x, bottom, top = guess.copy(), low, high
    low, high = low.copy(), high.copy()
    best, old_x, old_f = (np.full_like(x, np.nan) for _ in range(3))
    active = np.arange(x.size)
    for _ in range(_TRIALS):
        at = x[active]
        good, f = slope(active, at)
        rising = good & (f > 0)
        best[active[good]] = at[good]
        too_small = rising | (~good & (at < old_x[active]))
        low[active[too_small]] = at[too_small]
        high[active[~too_small]] = at[~too_small]
        with np.errstate(divide="ignore", invalid="ignore"):
            step = -f * (at - old_x[active]) / (f - old_f[active])
        step = np.where(np.isfinite(step) & (step * f > 0), step, np.sign(f) * _FIRST_STEP)
        reach = _LONGEST * np.abs(at)
        lower, upper = low[active], high[active]
        onward = np.clip(at + np.clip(step, -reach, reach), bottom[active], top[active])
        untried = ((onward == bottom[active]) & (lower == onward)) | ((onward == top[active]) & (upper == onward))
        inside = good & (((onward > lower) & (onward < upper)) | (untried & (onward != at)))
        halfway = 0.5 * (lower + np.where(np.isfinite(upper), upper, 4 * at))
        old_x[active[good]], old_f[active[good]] = at[good], f[good]
        x[active] = np.where(inside, onward, halfway)
        active = active[np.abs(x[active] - at) > _FOUND * np.abs(at)]
        if not active.size:
            break
    return best


def _told(legs: Legs, made: Profiles, duty: Duty, current: Array, length: Array, grace: float) -> Running:
    """Operating points per area, nan where there is none; energy and Carnot are held at run time."""
    good = _within(legs, made, grace)
    _hold(made, good, duty)
    sense = _sense(duty)

    def areal(values: Array) -> Array:
        return np.where(good, values / length, np.nan)

    return Running(
        good, areal(sense * made.from_hot[0]), areal(sense * made.to_cold[0]), areal(made.sideways[0]),
        areal(sense * made.power[0]), areal(np.abs(current)), length,
        np.where(good, made.hot_end[0], np.nan), np.where(good, made.cold_end[0], np.nan),
    )  # fmt: skip


def _hold(made: Profiles, good: NDArray[np.bool_], duty: Duty) -> None:
    """Energy and the second law, at run time: what is said must be possible."""
    if np.any(made.unbalanced[good] > _CLOSES):
        raise AssertionError("the leg's energy does not close")
    cold = made.cold_end[0] if duty.maximise == "delta_t" else duty.cold
    entropy = made.to_cold[0] / cold + made.sideways[0] / _ambient(duty) - made.from_hot[0] / duty.hot
    if np.any((entropy < -_CLOSES * made.flowing / duty.cold)[good]):
        raise AssertionError("the leg beats Carnot")
