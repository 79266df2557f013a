"""Temperature along many legs at once, at given currents, with contacts, exchangers and side loss.

x runs from the hot end (0) to the cold end (1). With p = dT/dx, J = j L and Q = q L, heat towards the cold end,
κ p = J S T − Q and dQ/dx = J (J ρ + S p) − a L² (T − T_a): Thomson heat is in S(T). p is the polynomial through
its values at the Gauss points of the leg, T and Q are its integrals, and Newton's method moves all of them
together; the sensitivities to current and to length come from the same matrices. A leg may be hottest inside and
S may change sign.
Sources: Domenicali, Reviews of Modern Physics 26, 237 (1954); collocation at Gauss points as in Ascher, Mattheij &
Russell, Numerical Solution of Boundary Value Problems for Ordinary Differential Equations (1988).
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from functools import cache

import numpy as np
from numpy.polynomial.legendre import leggauss, legvander
from numpy.typing import NDArray

from legwright.leg.balance import LegMaterial

Array = NDArray[np.float64]
Indices = NDArray[np.intp]

#: Newton's steps at most; the last one is this small, the longest this long (shares of the hot temperature)
_ROUNDS, _LAST_STEP, _LONGEST_STEP = 25, 1e-7, 0.2
#: heat conducted counts as at least this share of κ T
_STILL = 1e-3
#: where the hottest and coldest places are looked for, a Gauss point
_LOOKS = 4
#: a search that leaves the nodes by this factor does not come back
_LOST = 3.0


@dataclass(frozen=True)
class Ends:
    """What a leg stands between, arrays of one value a leg; L is its length.

    hot and cold: reservoirs (K); hot_resistance and cold_resistance: to heat between reservoir and leg's end, over
    L (K m/W); contact: resistivity of each contact over L (Ω m); side: a L² (W/(m K)) to `ambient` (K).
    idle: no heat comes from the cold reservoir (its temperature is then a result).
    """

    hot: Array
    cold: Array
    hot_resistance: Array
    cold_resistance: Array
    contact: Array
    side: Array
    ambient: Array
    idle: NDArray[np.bool_]

    def of(self, some: Indices) -> Ends:
        """The same of some legs."""
        return Ends(*(getattr(self, one.name)[some] for one in fields(self)))


@dataclass(frozen=True)
class Profiles:
    """Steady states of legs: where not `found` there is none and the figures mean nothing.

    state: p at the Gauss points, T and Q at the hot end, one row a leg; by_current: its derivative by J.
    lowest and highest temperature in the leg (K). The others hold the value, its derivative by J and its derivative
    by ln L (at constant J) along their first axis: from_hot, heat from the hot reservoir; to_cold, to the cold
    one; sideways, through the sides; power delivered, from voltage and current (W/m: times length); hot_end,
    cold_end (K). flowing: the size of what flows
    (W/m), not less than a small share of κ T; unbalanced: what the energy misses, as a share of that.
    """

    found: NDArray[np.bool_]
    state: Array
    by_current: Array
    lowest: Array
    highest: Array
    from_hot: Array
    to_cold: Array
    sideways: Array
    power: Array
    hot_end: Array
    cold_end: Array
    flowing: Array
    unbalanced: Array

    def of(self, some: NDArray[np.bool_]) -> Profiles:
        """The same of some legs."""
        rows = {"state", "by_current"}
        values = {one.name: getattr(self, one.name) for one in fields(self)}
        return Profiles(
            **{name: value[some] if name in rows else value[..., some] for name, value in values.items()}
        )


class Legs:
    """The splines of many legs in one table, to look up each leg at temperatures of its own."""

    def __init__(self, material: LegMaterial) -> None:
        splines = (material.seebeck, material.resistivity, material.thermal_conductivity)
        self.nodes = np.asarray(material.seebeck.x)
        self.pieces = self.nodes.size - 1
        table = np.stack([spline.c.reshape(4, self.pieces, -1) for spline in splines])
        self.count = table.shape[-1]
        self._rows = np.ascontiguousarray(table.transpose(3, 2, 0, 1)).reshape(-1, 12)

    def look_up(self, which: Indices, temperature: Array) -> tuple[Array, ...]:
        """S, ρ, κ, then their slopes, at (legs, points); beyond the nodes along the tangent: Newton may return."""
        inside = np.clip(temperature, self.nodes[0], self.nodes[-1])
        piece = np.clip(np.searchsorted(self.nodes, inside, side="right") - 1, 0, self.pieces - 1)
        c = np.moveaxis(self._rows[which[:, None] * self.pieces + piece], -1, 0)
        t, beyond = inside - self.nodes[piece], temperature - inside
        values, slopes = [], []
        for k in (0, 4, 8):
            slope = (3 * c[k] * t + 2 * c[k + 1]) * t + c[k + 2]
            values.append(((c[k] * t + c[k + 1]) * t + c[k + 2]) * t + c[k + 3] + slope * beyond)
            slopes.append(slope)
        return (*values, *slopes)


@cache
def _integrals(points: int) -> tuple[Array, Array, Array]:
    """Integrals of the polynomial through the Gauss points, as weights of its values there.

    From the hot end to each Gauss point, over the whole leg, and from the hot end to places close together.
    """
    nodes, weights = leggauss(points)
    to_degrees = _to_degrees(points)

    def upto(places: Array) -> Array:
        at = legvander(places, points)
        below = np.column_stack([-np.ones(places.size), at[:, : points - 1]])  # ∫ P_0 begins at −1
        grown = (at[:, 1:] - below) / (2 * np.arange(points) + 1)  # ∫ P_n = (P_{n+1} − P_{n−1})/(2n + 1)
        return np.asarray(grown @ to_degrees / 2)

    return upto(nodes), weights / 2, upto(-np.cos(np.linspace(0, np.pi, _LOOKS * points)))


@cache
def _to_degrees(points: int) -> Array:
    """Coefficients in Legendre polynomials of the polynomial through values at the Gauss points."""
    nodes, weights = leggauss(points)
    return np.asarray((legvander(nodes, points - 1) * weights[:, None] * (np.arange(points) + 0.5)).T)


def profiles(legs: Legs, which: Indices, ends: Ends, current: Array, start: Array) -> Profiles:
    """Steady states of the legs `which` (places in `legs`, shape (n,)) at J = j L (A/m), negative in a cooler.

    ends and current: one value for each of `which`; start: `state` to begin from, which sets how many Gauss points
    are taken along the leg. Each leg stops when its own step is
    small. Raises nothing of its own. Source: Domenicali, Reviews of Modern Physics 26, 237 (1954).

    >>> t = np.linspace(280.0, 620.0, 9)
    >>> same = np.ones_like(t)
    >>> legs = Legs(LegMaterial.from_nodes(t, 2e-4 * same, 1e-5 * same, 1.5 * same))
    >>> one, none = np.ones(1), np.zeros(1)
    >>> ends = Ends(600 * one, 300 * one, none, none, none, none, none, none > 0)
    >>> which = np.zeros(1, dtype=int)
    >>> made = profiles(legs, which, ends, np.array([3000.0]), straight(legs, which, ends, 8))
    >>> f"{made.power[0, 0]:.6f}"  # J S ΔT − J² ρ
    '90.000000'
    """
    state = start.copy()
    by_current, by_length = np.zeros_like(state), np.zeros_like(state)
    found = np.zeros(which.size, dtype=bool)
    active = np.arange(which.size)
    limit = _LOST * legs.nodes[-1]
    for _ in range(_ROUNDS):
        now = _Balance(legs, which[active], ends.of(active), current[active], state[active])
        step, by_current[active], by_length[active] = now.solved()
        size = np.max(np.abs(step[:, :-1]), axis=1) / now.ends.hot
        with np.errstate(divide="ignore"):
            state[active] += step * np.minimum(1.0, _LONGEST_STEP / size)[:, None]
        found[active[size < _LAST_STEP]] = True
        lost = ~(np.max(np.abs(now.t), axis=1) < limit)
        active = active[(size >= _LAST_STEP) & ~lost]
        if not active.size:
            break
    return _Balance(legs, which, ends, current, state).told(found, by_current, by_length)


def straight(legs: Legs, which: Indices, ends: Ends, points: int) -> Array:
    """First guesses at `state`: a straight line of temperature through a leg without current.

    κ (T_h − T_c) reaches from end to end, in series with both exchangers. Arguments, units and shapes as
    `profiles`. Raises nothing of its own. By definition.

    >>> t = np.linspace(280.0, 620.0, 9)
    >>> same = np.ones_like(t)
    >>> legs = Legs(LegMaterial.from_nodes(t, 2e-4 * same, 1e-5 * same, 1.5 * same))
    >>> one, none = np.ones(1), np.zeros(1)
    >>> ends = Ends(600 * one, 300 * one, one / 3, one / 3, none, none, none, none > 0)
    >>> straight(legs, np.zeros(1, dtype=int), ends, 2).round(9).tolist()  # slope and slope, hot end, heat
    [[-150.0, -150.0, 525.0, 225.0]]
    """
    middle = 0.5 * (ends.hot + ends.cold)
    kappa = legs.look_up(which, middle[:, None])[2][:, 0]
    beyond = ends.hot_resistance + np.where(ends.idle, 0.0, ends.cold_resistance)
    flow = (ends.hot - ends.cold) / (1 / kappa + beyond)
    state = np.empty((which.size, points + 2))
    state[:, :-2] = -(flow / kappa)[:, None]
    state[:, -2] = ends.hot - flow * ends.hot_resistance
    state[:, -1] = flow
    return state


def finer(state: Array, points: int) -> Array:
    """The same `state`, rows as in `Profiles` (K, W/m; shape (n, points + 2)), with other Gauss `points`.

    The polynomial through the old points, at the new ones. Raises nothing of its own. By definition.

    >>> finer(np.array([[-1.0, 1.0, 500.0, 3.0]]), 3).round(6).tolist()
    [[-1.341641, 0.0, 1.341641, 500.0, 3.0]]
    """
    return np.column_stack(
        [np.einsum("ik,mk->mi", _between(state.shape[1] - 2, points), state[:, :-2]), state[:, -2:]]
    )


@cache
def _between(few: int, many: int) -> Array:
    """Values at `many` Gauss points of the polynomial through its values at `few`."""
    return np.asarray(legvander(leggauss(many)[0], few - 1) @ _to_degrees(few))


class _Balance:
    """The balance at one state of each leg: what it misses, and its derivatives."""

    def __init__(self, legs: Legs, which: Indices, ends: Ends, current: Array, state: Array) -> None:
        self.ends, self.j, self.state = ends, current[:, None], state
        self.upto, self.weights, self.looks = _integrals(state.shape[1] - 2)
        self.p, self.t_hot, self.q_hot = state[:, :-2], state[:, -2], state[:, -1]
        self.t = self.t_hot[:, None] + self._upto(self.p)
        self.s, self.rho, self.kappa, self.ds, self.drho, self.dkappa = legs.look_up(which, self.t)
        self.sides = ends.side[:, None] * (self.t - ends.ambient[:, None])
        self.electric = self.j * (self.j * self.rho + self.s * self.p)
        self.source = self.electric - self.sides
        self.q = self.q_hot[:, None] + self._upto(self.source)
        self.t_cold = self.t_hot + self._whole(self.p)
        self.q_cold = self.q_hot + self._whole(self.source)
        self.joule = ends.contact * current**2
        self.short = self.kappa * self.p - self.j * self.s * self.t + self.q

    def _upto(self, values: Array) -> Array:
        return np.asarray(np.einsum("ik,mk->mi", self.upto, values))

    def _whole(self, values: Array) -> Array:
        return np.asarray(np.einsum("k,mk->m", self.weights, values))

    def solved(self) -> tuple[Array, Array, Array]:
        """Newton's step, and the state's derivatives by J and by ln L."""
        ends, j, n = self.ends, self.j, self.p.shape[1]
        by_t = j**2 * self.drho + j * self.ds * self.p - ends.side[:, None]  # of the source
        direct = self.dkappa * self.p - j * (self.s + self.ds * self.t)
        matrix = np.empty((j.size, n + 2, n + 2))
        inner = matrix[:, :n, :n]
        np.matmul(self.upto, by_t[:, :, None] * self.upto, out=inner)
        inner += (direct[:, :, None] + (j * self.s)[:, None, :]) * self.upto
        inner[:, np.arange(n), np.arange(n)] += self.kappa
        matrix[:, :n, n] = direct + self._upto(by_t)
        matrix[:, :n, n + 1] = 1.0
        matrix[:, n, :n] = 0.0
        matrix[:, n, n] = 1.0
        matrix[:, n, n + 1] = ends.hot_resistance
        pull, push = self._cold_side()
        q_by_p = self.weights * j * self.s + np.einsum("mk,ki->mi", self.weights * by_t, self.upto)
        matrix[:, n + 1, :n] = pull[:, None] * self.weights - push[:, None] * q_by_p
        matrix[:, n + 1, n] = pull - push * self._whole(by_t)
        matrix[:, n + 1, n + 1] = -push
        right = np.empty((j.size, n + 2, 3))
        right[:, :n, 0] = self.short
        right[:, n, 0] = self.t_hot - ends.hot + ends.hot_resistance * (self.q_hot - self.joule)
        right[:, n + 1, 0] = pull * (self.t_cold - ends.cold) - push * (self.q_cold + self.joule)
        by_current, by_length = self._source_by()
        contact = 2 * ends.contact * j[:, 0]
        right[:, :n, 1] = self._upto(by_current) - self.s * self.t
        right[:, n, 1] = -ends.hot_resistance * contact
        right[:, n + 1, 1] = -push * (self._whole(by_current) + contact)
        right[:, :n, 2] = self._upto(by_length)
        right[:, n, 2] = ends.hot_resistance * (2 * self.joule - self.q_hot)
        resistance = np.where(ends.idle, 0.0, ends.cold_resistance)
        right[:, n + 1, 2] = resistance * (self.q_cold + self.joule) - push * (self._whole(by_length) - self.joule)
        solved = np.linalg.solve(matrix, -right)
        return solved[..., 0], solved[..., 1], solved[..., 2]

    def _cold_side(self) -> tuple[Array, Array]:
        """The condition there: pull (T − T_c) = push Q, an exchanger's or that of no heat from outside."""
        idle = self.ends.idle
        return np.where(idle, 0.0, 1.0), np.where(idle, -1.0, self.ends.cold_resistance)

    def _source_by(self) -> tuple[Array, Array]:
        """The source's own derivatives by J and by ln L."""
        return 2 * self.j * self.rho + self.s * self.p, -2 * self.sides

    def told(self, found: NDArray[np.bool_], by_current: Array, by_length: Array) -> Profiles:
        """All that flows, with its derivatives."""
        ends, j = self.ends, self.j[:, 0]
        zero = np.zeros_like(j)
        joule = np.stack([self.joule, 2 * ends.contact * j, -self.joule])
        hot_end, q_hot, t_cold, sideways, electric = ([value] for value in (
            self.t_hot, self.q_hot, self.t_cold, self._whole(self.sides), self._whole(self.electric)
        ))  # fmt: skip
        own = (
            (by_current, 2 * self.j * self.rho + self.s * self.p, zero),
            (by_length, zero[:, None], 2 * sideways[0]),
        )
        for change, electric_own, sideways_own in own:
            p, t_hot, q = change[:, :-2], change[:, -2], change[:, -1]
            t = t_hot[:, None] + self._upto(p)
            hot_end.append(t_hot)
            q_hot.append(q)
            t_cold.append(t_hot + self._whole(p))
            sideways.append(self._whole(ends.side[:, None] * t) + sideways_own)
            by_t = self.j**2 * self.drho + self.j * self.ds * self.p
            electric.append(self._whole(electric_own + by_t * t + self.j * self.s * p))
        from_hot = np.stack(q_hot) - joule
        lost, spent = np.stack(sideways), np.stack(electric)
        to_cold = np.stack(q_hot) + spent - lost + joule
        power = -spent - 2 * joule
        carried, conducted = (
            np.abs(self.j * self.s * self.t),
            self.kappa * np.maximum(np.abs(self.p), _STILL * self.t),
        )
        flowing = np.max(carried, axis=1) + np.max(conducted, axis=1)
        closing = np.abs(from_hot[0] - to_cold[0] - lost[0] - power[0])
        unbalanced = np.maximum(np.max(np.abs(self.short), axis=1), closing) / flowing
        t = self.t_hot[:, None] + np.einsum("ik,mk->mi", self.looks, self.p)
        return Profiles(
            found=found,
            state=self.state,
            by_current=by_current,
            lowest=np.min(t, axis=1),
            highest=np.max(t, axis=1),
            from_hot=from_hot,
            to_cold=to_cold,
            sideways=lost,
            power=power,
            hot_end=np.stack(hot_end),
            cold_end=np.stack(t_cold),
            flowing=flowing,
            unbalanced=unbalanced,
        )
