"""A leg of several materials along its length: which meet where, and whether they suit one current."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.leg.balance import LegMaterial, zoom
from legwright.leg.duty import Duty
from legwright.leg.stream import Segments, drive_range, stream

Array = NDArray[np.float64]

#: points of the first look at an interface and of each closer one, and how many looks: bracket / 4 each
_FIRST, _POINTS, _LOOKS = 33, 9, 9
#: points and rounds of the drive at each set of interfaces, and how far to either side it is looked for later on
_DRIVES, _ROUNDS, _NEAR = 15, 4, 0.7


def compatibility_factor(seebeck: ArrayLike, zt: ArrayLike, temperature: ArrayLike) -> Array:
    """s = (√(1 + zT) − 1)/(S T), 1/V: the current per conducted heat at which a generator's material does best.

    Segments of one leg carry one current per heat, so factors should lie within about a factor of two of each
    other. seebeck S in V/K, zt dimensionless, temperature in K; they broadcast. Raises nothing of its own.
    Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003).

    >>> f"{compatibility_factor(2e-4, 1.0, 500.0):.3f}"
    '4.142'
    """
    return np.asarray((np.sqrt(1 + np.asarray(zt)) - 1) / (np.asarray(seebeck) * temperature))


def reduced_efficiency(
    relative_current: ArrayLike, seebeck: ArrayLike, zt: ArrayLike, temperature: ArrayLike
) -> Array:
    """η_r = u (S − u ρκ)/(u S + 1/T) with ρκ = S² T/zT: the share of Carnot's efficiency at u = 1/w (1/V).

    Largest at the compatibility factor: (√(1 + zT) − 1)/(√(1 + zT) + 1). seebeck S in V/K, zt dimensionless,
    temperature in K, relative_current u in 1/V; they broadcast. Raises nothing of its own.
    Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003).

    >>> best = compatibility_factor(2e-4, 1.0, 500.0)
    >>> f"{reduced_efficiency(best, 2e-4, 1.0, 500.0):.6f} {(2**0.5 - 1) / (2**0.5 + 1):.6f}"
    '0.171573 0.171573'
    """
    x = np.asarray(relative_current) * np.asarray(seebeck) * temperature
    return np.asarray(x * (1 - x / np.asarray(zt)) / (x + 1))


def best_interfaces(
    materials: Sequence[LegMaterial],
    duty: Duty,
    ceilings: Sequence[float],
    joint: float = 0.0,
) -> Segments:
    """The leg of these materials, hot to cold, whose interfaces serve the duty's goal best.

    max over interface temperatures and current of the goal, on grids that shrink around their best point, all
    points at once. `ceilings`: what each material bears (K), one of each; no interface is hotter than the colder
    material bears. joint: resistivity of each interface (Ω m²). The goal is not delta_t.
    Raises nothing of its own.
    Source: Snyder, Applied Physics Letters 84, 2436 (2004).

    >>> nodes = np.linspace(300.0, 700.0, 9)
    >>> same = np.ones_like(nodes)
    >>> hot = LegMaterial.from_nodes(nodes, 2e-4 * same, 5e-3 / nodes, 2 * same)  # better above 500 K
    >>> cold = LegMaterial.from_nodes(nodes, 2e-4 * same, 2e-8 * nodes, 2 * same)  # the same κ and S: better below
    >>> leg = best_interfaces([hot, cold], Duty("generator", 700.0, 300.0, "efficiency", 1e-3), [700.0, 700.0])
    >>> f"{leg.interfaces[0]:.1f}"
    '500.0'
    """
    count = len(materials) - 1
    if not count:
        return Segments(tuple(materials), (), joint)
    low, high = np.zeros(count), np.ones(count)
    drives = drive_range(duty)
    for look in range(_LOOKS):
        sides = [
            np.linspace(a, b, _POINTS if look or count > 1 else _FIRST) for a, b in zip(low, high, strict=True)
        ]
        interfaces = _temperatures(np.ix_(*sides), duty, ceilings)
        leg = Segments(tuple(materials), interfaces, joint)
        shape = np.broadcast_shapes(*(t.shape for t in interfaces))
        least, most = (np.full(shape, end) for end in drives)
        drive, score = zoom(partial(_score, leg, duty), least, most, _DRIVES, _ROUNDS)
        best = [int(i) for i in np.unravel_index(np.argmax(score), shape)]
        near = float(drive[*best])
        drives = max(near - _NEAR, drive_range(duty)[0]), min(near + _NEAR, drive_range(duty)[1])
        for k, side in enumerate(sides):
            low[k], high[k] = side[max(best[k] - 1, 0)], side[min(best[k] + 1, side.size - 1)]
    chosen = [np.array(0.5 * (a + b)) for a, b in zip(low, high, strict=True)]
    return Segments(tuple(materials), tuple(float(t) for t in _temperatures(chosen, duty, ceilings)), joint)


def _temperatures(depths: Sequence[Array], duty: Duty, ceilings: Sequence[float]) -> tuple[Array, ...]:
    """Interfaces at shares of what is left down to the cold end, none above what the material under it bears."""
    found: list[Array] = []
    above: Array | float = duty.hot
    for depth, ceiling in zip(depths, ceilings[1:], strict=True):
        top = np.maximum(np.minimum(above, ceiling), duty.cold)
        above = top - depth * (top - duty.cold)
        found.append(np.asarray(above))
    return tuple(found)


def _score(leg: Segments, duty: Duty, drive: Array) -> Array:
    made = stream(leg, duty, drive, duty.hot, duty.cold)
    gain, price = made.parts(duty.maximise)
    usable = made.valid & (price > 0)
    return np.where(usable, gain / np.where(usable, price, 1.0), -np.inf)
