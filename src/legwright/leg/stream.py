"""What flows through a leg per current, whatever its cross-section: of one material or of several along its length.

Legs that share a current, as those of a couple do, add up in these terms: heats per current (V), and leg area per
current (m²/A). w = (conducted heat flux)/(current density) as in `balance`. Where two segments meet, the heat per
current Φ = S T + w is continuous but for the Joule heat of the joint, so w jumps by the difference of S T.
Sources: Snyder & Ursell, Physical Review Letters 91, 148301 (2003); Snyder, Applied Physics Letters 84, 2436 (2004)
for segments.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from legwright.leg.balance import LegMaterial, march_down
from legwright.leg.duty import Duty

Array = NDArray[np.float64]

#: rounds of the current that heats a joint, which depends on the joint's heat; each gains a digit or more
_JOINT_ROUNDS = 12
#: ln(w/w_0) of generators, w_0² = 2∫κρ dT: from almost short-circuited to a leg of ZT = 1e-4
_LEAST_LOG, _MOST_LOG = -1.5, 7.0
#: coolers' drive reaches from here, in √(T_hot/2R), to 1; no best COP lies below −1
_LEAST_DRIVE = -1.5


@dataclass(frozen=True)
class Segments:
    """A leg of one or several materials along its length.

    materials: hot to cold; interfaces: the temperatures between them (K), descending, numbers or arrays; joint:
    contact resistivity of each interface (Ω m²).
    """

    materials: tuple[LegMaterial, ...]
    interfaces: tuple[float | Array, ...] = ()
    joint: float = 0.0

    def ends(self, hot: float | Array, cold: float | Array) -> tuple[float | Array, ...]:
        """Temperatures of the segments' ends, K, hot to cold; an interface outside the leg's own moves to them."""
        return hot, *(np.clip(t, cold, hot) for t in self.interfaces), cold


@dataclass(frozen=True)
class Through:
    """Heat per current (V) through the faces `hot` and `cold` of a leg, and current density × length (A/m).

    `current_lengths`: one a segment. `valid`: temperature is monotonic as supposed. Arrays of one shape.
    """

    hot: Array
    cold: Array
    current_lengths: tuple[Array, ...]
    valid: NDArray[np.bool_]

    @property
    def current_length(self) -> Array:
        """Of the whole leg, A/m."""
        return np.asarray(sum(self.current_lengths))


def through(
    leg: Segments,
    hot: float | Array,
    cold: float | Array,
    sign: int,
    w_hot: Array,
    length: float,
    steps: int = 24,
    beyond: Array | float = 0.0,
) -> Through:
    """March down a leg in relative current, segment by segment, from |w| = w_hot (W/A) at its hot end.

    At an interface Φ_below = Φ_above ± j ρ_joint, so |w| grows by ±(S_above − S_below) T + j ρ_joint, + of a
    generator (sign +1), − of a cooler (sign −1). hot and cold in K, arrays or numbers that broadcast with w_hot and
    the interfaces; length of the leg (m); `beyond`: current density × length of what lies above (A/m); `steps`: of
    each march, even. Raises nothing of its own.
    Source: Snyder, Applied Physics Letters 84, 2436 (2004).

    >>> nodes = np.linspace(280.0, 620.0, 9)
    >>> same = np.ones_like(nodes)
    >>> one = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 1.5 * same)
    >>> whole, halves = Segments((one,)), Segments((one, one), (450.0,))
    >>> a, b = (through(leg, 600.0, 300.0, +1, np.array(0.1), 1e-3) for leg in (whole, halves))
    >>> bool(abs(a.cold - b.cold) < 1e-12)
    True
    """
    ends = leg.ends(hot, cold)
    joined = leg.joint > 0 and len(leg.materials) > 1
    current: Array | float = beyond
    for _ in range(_JOINT_ROUNDS if joined else 1):
        w, valid, lengths = w_hot, np.asarray(True), []
        for k, material in enumerate(leg.materials):
            if k:
                t = ends[k]
                step = sign * (leg.materials[k - 1].seebeck(t) - material.seebeck(t)) * t
                w = w + step + current / length * leg.joint
                valid = valid & (w > 0)
            along = march_down(material, ends[k], ends[k + 1], sign, np.maximum(w, 0.0), steps)
            w = along.w[-1]
            valid = valid & ((w > 0) | (along.temperature[-1] == ends[k]))
            lengths.append(along.current_length)
        current = beyond + np.asarray(sum(lengths))
    phi_hot = leg.materials[0].seebeck(hot) * hot + sign * w_hot
    phi_cold = leg.materials[-1].seebeck(cold) * cold + sign * w
    return Through(np.asarray(phi_hot), np.asarray(phi_cold), tuple(lengths), valid)


def through_past_peak(
    leg: Segments, hot: float | Array, cold: float | Array, peak: Array, length: float, steps: int = 24
) -> Through:
    """A cooling leg that is hottest inside its hot segment, at `peak` ≥ `hot` (K): w = 0 there.

    Φ_h = S T_h + |w_h| from a march back to the hot end. hot, cold and peak in K, which broadcast with each other
    and the interfaces; length of the leg (m); `steps`: of each march, even. Raises nothing of its own.
    Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003).

    >>> nodes = np.linspace(240.0, 360.0, 9)
    >>> same = np.ones_like(nodes)
    >>> leg = Segments((LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 4 / 3 * same),))
    >>> made = through_past_peak(leg, 300.0, 280.0, np.array(320.0), 1e-3)
    >>> bool(abs(made.cold - (2e-4 * 280 - (2 * 4 / 3 * 1e-5 * 40) ** 0.5)) < 1e-12)
    True
    """
    first = leg.materials[0]
    at_rest = np.zeros(np.shape(peak))
    back = march_down(first, peak, hot, +1, at_rest, steps)
    down = through(leg, peak, cold, -1, at_rest, length, steps, beyond=back.current_length)
    phi_hot = first.seebeck(hot) * hot + back.w[-1]
    head, *tail = down.current_lengths
    return Through(np.asarray(phi_hot), down.cold, (head + back.current_length, *tail), down.valid)


@dataclass(frozen=True)
class Stream:
    """A leg at one operating point, arrays of one shape.

    hot and cold: heat per current (V) at the outer faces of its contacts, from the hot side and to the cold one in
    a generator, to the hot side and from the cold one in a cooler; area of leg per current (m²/A); shares: of the
    length, one a segment; valid: there is such a point.
    """

    hot: Array
    cold: Array
    area: Array
    shares: tuple[Array, ...]
    valid: NDArray[np.bool_]

    @property
    def first(self) -> Stream:
        """The first along the first axis."""
        shares = tuple(share[0] for share in self.shares)
        return Stream(self.hot[0], self.cold[0], self.area[0], shares, self.valid[0])

    def parts(self, goal: str) -> tuple[Array, Array]:
        """(gain, price): the goal's score is gain over price, of legs that share a current the sums of both."""
        return {
            "efficiency": (self.hot - self.cold, self.hot),
            "power": (self.hot - self.cold, self.area),
            "cop": (self.cold, self.hot - self.cold),
            "heat_lifted": (self.cold, self.area),
        }[goal]


def stream(
    leg: Segments,
    duty: Duty,
    drive: Array,
    hot: float | Array,
    cold: float | Array,
    steps: int = 24,
) -> Stream:
    """The leg between ends at hot and cold (K) at a `drive` within `drive_range`, with contacts at both ends.

    A generator's drive is ln(w/w_0), w_0² = 2∫κρ dT; it takes in Φ_h − j ρ_c and gives off Φ_c + j ρ_c. A cooler's
    is negative where temperature rises all the way, w = −drive √(2κρ R) at the hot end, and positive where it
    peaks inside, drive² R above that end, R from the hot end to the top of the duty's reach; it takes in
    Φ_c − j ρ_c and gives off Φ_h + j ρ_c. j = current density × length over `duty.length`. drive is dimensionless,
    of any shape that broadcasts with hot, cold and the interfaces; `steps`: of each march, even. Raises nothing of
    its own.
    Sources: Snyder & Ursell, Physical Review Letters 91, 148301 (2003); Rowe & Min, Journal of Power Sources 73,
    193 (1998) for contacts.

    >>> nodes = np.linspace(300.0, 600.0, 9)
    >>> same = np.ones_like(nodes)
    >>> leg = Segments((LegMaterial.from_nodes(nodes, 2e-4 * same, 1.2e-5 * same, 1.5 * same),))  # mean ZT of 1
    >>> duty = Duty("generator", 600.0, 300.0, "efficiency", 1e-3)
    >>> gain, price = stream(leg, duty, np.linspace(0.0, 3.0, 301), 600.0, 300.0).parts("efficiency")
    >>> f"{np.max(gain / price):.5f}"
    '0.10819'
    """
    if duty.kind == "generator":
        made = through(leg, hot, cold, +1, _scale(leg, hot, cold) * np.exp(drive), duty.length, steps)
        lost = made.current_length / duty.length * duty.setting.contact
        valid = made.valid & (made.hot > 0)
    else:
        made = _cooling(leg, drive, hot, cold, duty, steps)
        lost = -made.current_length / duty.length * duty.setting.contact
        valid = made.valid
    total = made.current_length
    shares = tuple(part / total for part in made.current_lengths)
    return Stream(made.hot - lost, made.cold + lost, duty.length / total, shares, valid)


def drive_range(duty: Duty) -> tuple[float, float]:
    """Least and largest drive within which every goal's best lies, dimensionless; one of each.

    ln(w/w_0) is between −1.5 and 7 for figures of merit ZT from 1e-4 to 100 or so. For COP |w| at the hot end is
    (constant properties) below √(κρT) for any ZT. Raises nothing of its own. By definition.

    >>> drive_range(Duty("generator", 600.0, 300.0, "power", 1e-3))
    (-1.5, 7.0)
    """
    if duty.kind == "generator":
        return _LEAST_LOG, _MOST_LOG
    return _LEAST_DRIVE * float(np.sqrt(duty.hot / (2 * _rise(duty)))), 1.0


def _rise(duty: Duty) -> float:
    """How far inside a cooler may be hotter than its hot end, K."""
    return duty.reach[1] - duty.hot


def _scale(leg: Segments, hot: float | Array, cold: float | Array) -> Array:
    """w_0 = √(2∫κρ dT) with κρ at the middle of each segment, W/A."""
    ends = leg.ends(hot, cold)
    total: Array | float = 0.0
    for material, top, bottom in zip(leg.materials, ends, ends[1:], strict=False):
        middle = 0.5 * (np.asarray(top) + bottom)
        total = total + material.thermal_conductivity(middle) * material.resistivity(middle) * (top - bottom)
    return np.asarray(np.sqrt(2 * np.asarray(total)))


def _cooling(
    leg: Segments, drive: Array, hot: float | Array, cold: float | Array, duty: Duty, steps: int
) -> Through:
    rising = np.asarray(drive) < 0
    first = leg.materials[0]
    rise, length = _rise(duty), duty.length
    scale = np.sqrt(2 * first.thermal_conductivity(hot) * first.resistivity(hot) * rise)
    if np.all(rising):
        return through(leg, hot, cold, -1, -drive * scale, length, steps)
    peaked = through_past_peak(leg, hot, cold, hot + np.maximum(drive, 0.0) ** 2 * rise, length, steps)
    if not np.any(rising):
        return peaked
    risen = through(leg, hot, cold, -1, np.maximum(-drive, 0.0) * scale, length, steps)
    return Through(
        np.where(rising, risen.hot, peaked.hot),
        np.where(rising, risen.cold, peaked.cold),
        tuple(np.where(rising, a, b) for a, b in zip(risen.current_lengths, peaked.current_lengths, strict=True)),
        np.where(rising, risen.valid, peaked.valid),
    )
