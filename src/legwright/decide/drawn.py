"""A candidate under every draw: its size and doping chosen anew in each.

What a draw changes enters in few ways: reflection R acts on carriers, the exponent s on phonons, the prefactor c
only as c × size, the rest as factors. So a few maps over doping and size, at nodes of R and s, hold all draws.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.polynomial.chebyshev import chebpts1, chebvander
from numpy.typing import NDArray

from legwright.candidate.library import Candidate
from legwright.decide.brief import Brief
from legwright.decide.draws import MOST_REFLECTED, laws_for, own_normals, own_spread, under_law
from legwright.decide.rank import Row, doping_range, size_range
from legwright.decide.score import span_nodes
from legwright.leg.balance import LegMaterial
from legwright.leg.duty import Duty, best_score
from legwright.physics.crystal import crystal
from legwright.physics.properties import LARGEST, SMALLEST, evaluate_crystal

Array = NDArray[np.float64]

_NODES, _ROUNDS = 9, 3
#: nodes of exponent and of −ln(1 − R), in which both are smooth; widest step of ln doping and ln size
_LAW_NODES, _DOPING_STEP, _SIZE_STEP, _FEWEST = 8, 0.3, 0.35, 7
#: the map reaches so far beyond the sizes for prefactors off 1, in ln size: more than four standard deviations
_PREFACTOR_REACH = 1.4
#: draws worked on together, always so many: the bits of a draw do not depend on how many are asked
_TOGETHER = 64
#: a parabola through three scores of coarse material is trusted so many nodes out
_LEAP = 3.0
#: a quadratic is laid through 3 × 3 scores so far apart in ln doping and ln size, and trusted so many steps out
_APART, _TRUSTED, _LOOKS = np.array([0.25, 0.35]), 1.5, 8


@dataclass(frozen=True)
class Drawn:
    """One candidate in every draw; SI, arrays of (draws,).

    score at the draw's own best doping and size; coarse: score of coarse material at its own best doping. Where
    legs scatter in making, both are less by what the scatter costs the row, taken as the same share in every draw.
    measured: ln σ, ln |S| and ln κ at mid-span at the row's design, (draws, 3); normals of OWN_NAMES behind it.
    """

    score: Array
    doping: Array
    size: Array
    coarse: Array
    measured: Array
    normals: Array


def drawn(brief: Brief, row: Row, count: int, seed: int) -> Drawn:
    """The row's candidate under `count` draws, the same for whoever else is asked."""
    assert row.doping is not None
    assert row.size is not None
    candidate = row.candidate
    maps = LawMaps.of(brief, candidate)
    normals = own_normals(candidate, count, seed)
    factors = (
        normals @ own_spread(candidate, maps.temperature, row.doping, row.size, row.shape, maps.duty.felt_length).T
    )
    laws = laws_for(candidate, count, seed)
    design = np.log([row.doping, row.size])
    places = np.arange(-(-count // _TOGETHER) * _TOGETHER).reshape(-1, _TOGETHER) % count
    parts: list[list[Array]] = []
    for some in places:
        held = maps.under(laws.exponent[some], laws.prefactor[some], laws.reflection[some], factors[some])
        score, best = held.best()
        parts.append([score, np.exp(best), held.coarse_best(), held.at_mid_span(design)])
    score, best, coarse, measured = (np.concatenate(part)[:count] for part in zip(*parts, strict=True))
    kept = row.score / row.score_as_designed
    dopings = doping_range(brief, candidate)
    assert dopings is not None
    doping, size = np.clip(best[:, 0], *dopings), np.clip(best[:, 1], *size_range(brief, candidate))
    return Drawn(kept * score, doping, size, kept * coarse, measured, normals)


@dataclass(frozen=True)
class LawMaps:
    """Maps over ln doping and ln size at each node of the laws: (law, temperature, doping, size).

    log_lattice has sizes of its own that reach beyond the others; coarse: the four quantities of coarse material,
    (4, temperature, doping).
    """

    duty: Duty
    temperature: Array
    log_doping: Array
    log_size: Array
    log_size_lattice: Array
    log_sigma: Array
    seebeck: Array
    log_electronic: Array
    log_lattice: Array
    coarse: Array

    @classmethod
    def of(cls, brief: Brief, candidate: Candidate) -> LawMaps:
        """The maps over the brief's dopings and sizes."""
        dopings = doping_range(brief, candidate)
        assert dopings is not None
        shape, one = brief.size.shape, crystal(candidate)
        temperature = span_nodes(brief.task, _NODES)
        log_doping, log_size = _even(dopings, _DOPING_STEP), _even(size_range(brief, candidate), _SIZE_STEP)
        laws = zip(_law_nodes(1.0), -np.expm1(-_law_nodes(_MOST_OPAQUE)), strict=True)
        wide = _wider(log_size) if shape == "grain" else log_size
        inside = np.isin(wide, log_size)
        sign = -1.0 if candidate.data.carrier == "n" else 1.0
        found = []
        for exponent, reflection in list(laws) if shape == "grain" else [(0.0, 0.0)]:
            made = evaluate_crystal(
                under_law(one, float(exponent), 1.0, float(reflection)),
                temperature[:, None, None],
                np.exp(log_doping)[:, None],
                np.append(np.clip(np.exp(wide), SMALLEST, LARGEST), np.inf),
                shape,
                brief.task.felt_length,
            )
            electronic, lattice = made.electronic_thermal_conductivity, made.lattice_thermal_conductivity
            sigma = np.log(made.electrical_conductivity)
            found.append((sigma, sign * made.seebeck, np.log(electronic), np.log(lattice)))
        four = [np.stack(part) for part in zip(*found, strict=True)]
        coarse = np.stack([part[0, ..., -1] for part in four])
        sigma, seebeck, electronic = (part[..., :-1][..., inside] for part in four[:3])
        lattice = np.ascontiguousarray(four[3][..., :-1])
        return cls(brief.task, temperature, log_doping, log_size, wide, sigma, seebeck, electronic, lattice, coarse)

    def under(self, exponent: Array, prefactor: Array, reflection: Array, factors: Array) -> Held:
        """The maps under some draws: laws of (draws,), ln factors on mobility, S and κ_L of (draws, 3)."""
        if len(self.log_sigma) > 1:
            by_reflection = _law_weights(-np.log1p(-reflection), _MOST_OPAQUE)
            by_exponent = _law_weights(exponent, 1.0)
            acting = self.log_size + np.log(prefactor)[:, None]
        else:  # wires and films know no grains
            by_reflection = by_exponent = np.ones((exponent.size, 1))
            acting = np.tile(self.log_size, (exponent.size, 1))
        shifted = np.swapaxes(_lagrange_weights(self.log_size_lattice, acting), 1, 2)[:, None]
        lattice = _mixed(by_exponent, self.log_lattice) @ shifted
        mobility, thermopower, phonons = (f.reshape(-1, 1, 1, 1) for f in factors.T)
        return Held(
            self,
            _mixed(by_reflection, self.log_sigma) + mobility,
            _mixed(by_reflection, self.seebeck) * np.exp(thermopower),
            _mixed(by_reflection, self.log_electronic) + mobility,
            lattice + phonons,
            factors,
        )


@dataclass(frozen=True)
class Held:
    """Maps of some draws, (draws, temperature, doping, size), and the ln factors behind them."""

    maps: LawMaps
    log_sigma: Array
    seebeck: Array
    log_electronic: Array
    log_lattice: Array
    factors: Array

    def best(self) -> tuple[Array, Array]:
        """Score at the best design of each draw, and ln doping and ln size there: (draws,), (draws, 2).

        From the top of the rough map, quadratics through 3 × 3 scores lead to the best; a step that goes beyond
        them is followed by another look.
        """
        maps = self.maps
        heat = np.exp(self.log_electronic) + np.exp(self.log_lattice)
        rough = rough_score(maps.duty, self.seebeck, self.log_sigma, heat)
        count = len(rough)
        i, j = np.unravel_index(np.argmax(rough.reshape(count, -1), axis=1), rough.shape[1:])
        low = np.array([maps.log_doping[0], maps.log_size[0]])
        high = np.array([maps.log_doping[-1], maps.log_size[-1]])
        apart = np.minimum(_APART, 0.5 * (high - low))
        where = np.stack([maps.log_doping[i], maps.log_size[j]], axis=1)
        best, looking = np.full(count, -1.0), np.arange(count)
        for _ in range(_LOOKS):
            centre = np.clip(where[looking], low + apart, high - apart)
            grid = centre[:, None] + apart * _STEPS
            around = centre[:, None] + apart * np.array([-1.0, 0.0, 1.0])[:, None]
            scores = self.score(looking, around[..., 0], around[..., 1])
            step = _quadratic_top(scores, (low - centre) / apart, (high - centre) / apart)
            there = np.clip(centre + step * apart, low, high)
            reached = self.score(looking, there[:, :1], there[:, 1:])
            values = np.concatenate([scores.reshape(-1, 9), reached.reshape(-1, 1)], axis=1)
            top = np.argmax(values, axis=1)
            each = np.arange(looking.size)
            gained = values[each, top] > best[looking]
            spot = np.concatenate([grid, there[:, None]], axis=1)[each, top]
            where[looking[gained]] = spot[gained]
            best[looking[gained]] = values[each, top][gained]
            looking = looking[gained & np.any(np.abs(step) > 1, axis=1)]
            if looking.size == 0:
                break
        return best, where

    def score(self, some: NDArray[np.intp], log_doping: Array, log_size: Array) -> Array:
        """The duty's score of some draws at dopings (some, a) and sizes (some, b): (some, a, b)."""
        sigma, seebeck, electronic, lattice = self._at(some, log_doping, log_size)
        return _scored(self.maps, sigma, seebeck, np.exp(electronic) + np.exp(lattice))

    def at_mid_span(self, design: Array) -> Array:
        """ln σ, ln |S| and ln κ at the middle temperature and one design (ln doping, ln size): (draws, 3)."""
        every = np.arange(len(self.log_sigma))
        design = np.tile(design, (every.size, 1))
        middle = self.maps.temperature.size // 2
        sigma, seebeck, electronic, lattice = (
            part[:, middle, 0, 0] for part in self._at(every, design[:, :1], design[:, 1:])
        )
        return np.stack([sigma, np.log(np.abs(seebeck)), np.log(np.exp(electronic) + np.exp(lattice))], axis=1)

    def coarse_best(self) -> Array:
        """Score of coarse material at its own best doping in each draw: (draws,)."""
        maps = self.maps
        mobility, thermopower, phonons = (f.reshape(-1, 1, 1) for f in self.factors.T)
        sigma, seebeck, electronic, lattice = maps.coarse
        sigma, seebeck = sigma + mobility, seebeck * np.exp(thermopower)
        log_heat = np.logaddexp(electronic + mobility, lattice + phonons)
        rough = rough_score(maps.duty, seebeck, sigma, np.exp(log_heat))

        def scores(some: NDArray[np.intp], log_doping: Array) -> Array:
            weights = np.swapaxes(_lagrange_weights(maps.log_doping, log_doping), 1, 2)
            found = (sigma[some] @ weights, seebeck[some] @ weights, np.exp(log_heat[some] @ weights))
            return _scored(maps, *(part[..., None] for part in found))[..., 0]

        low, high = maps.log_doping[[0, -1]]
        step = maps.log_doping[1] - low
        where = maps.log_doping[np.argmax(rough, axis=1)]
        best, looking = np.full(len(where), -1.0), np.arange(len(where))
        for _ in range(_LOOKS):
            around = np.clip(where[looking], low + step, high - step)[:, None] + step * np.array([-1.0, 0.0, 1.0])
            three = scores(looking, around)
            slope, bend = 0.5 * (three[:, 2] - three[:, 0]), three[:, 0] - 2 * three[:, 1] + three[:, 2]
            uphill = np.where(bend < 0, -slope / np.where(bend < 0, bend, 1.0), _LEAP * np.sign(slope))
            moved = np.clip(uphill, -_LEAP, _LEAP)
            there = np.clip(around[:, 1:2] + step * moved[:, None], low, high)
            values, spots = np.hstack([three, scores(looking, there)]), np.hstack([around, there])
            top = np.argmax(values, axis=1)[:, None]
            value, spot = (np.take_along_axis(part, top, axis=1)[:, 0] for part in (values, spots))
            gained = value > best[looking]
            best[looking[gained]], where[looking[gained]] = value[gained], spot[gained]
            looking = looking[gained & (np.abs(moved) > 1)]
            if looking.size == 0:
                break
        return best

    def _at(self, some: NDArray[np.intp], log_doping: Array, log_size: Array) -> tuple[Array, ...]:
        down = _lagrange_weights(self.maps.log_doping, log_doping)[:, None]
        across = np.swapaxes(_lagrange_weights(self.maps.log_size, log_size), 1, 2)[:, None]
        quantities = (self.log_sigma, self.seebeck, self.log_electronic, self.log_lattice)
        return tuple(down @ quantity[some] @ across for quantity in quantities)


def rough_score(duty: Duty, seebeck: Array, log_sigma: Array, heat: Array) -> Array:
    """What rises and falls with the score, from means over temperature (axis 1): where to begin looking.

    Z = S̄²/⟨κρ⟩ for efficiency, COP and ΔT; S̄² ΔT²/⟨ρ⟩ for power and S̄² T_c²/2⟨ρ⟩ − ⟨κ⟩ ΔT for lift (Ioffe 1957).
    """
    weights = _mean_weights(seebeck.shape[1]).reshape(-1, *(1,) * (seebeck.ndim - 2))

    def mean(values: Array) -> Array:
        return np.asarray(np.sum(values * weights, axis=1))

    resistivity = np.exp(-log_sigma)
    pull = np.maximum(mean(seebeck), 0.0) ** 2
    if duty.maximise == "power":
        return pull / mean(resistivity)
    if duty.maximise == "heat_lifted":
        return 0.5 * pull * duty.cold**2 / mean(resistivity) - mean(heat) * (duty.hot - duty.cold)
    return pull / mean(heat * resistivity)


def _scored(maps: LawMaps, log_sigma: Array, seebeck: Array, heat: Array) -> Array:
    legs = (np.moveaxis(part, 1, 0) for part in (seebeck, np.exp(-log_sigma), heat))
    return best_score(LegMaterial.from_nodes(maps.temperature, *legs), maps.duty, _ROUNDS)


def _quadratic_top(scores: Array, low: Array, high: Array) -> Array:
    """Top of the quadratic through the logarithms of 3 × 3 scores, inside the range: steps of (draws, 2).

    Looked up on a fine grid: a ridge, a saddle or a limit needs no case of its own. Where a score is 0, its best.
    """
    positive = np.all(scores > 0, axis=(1, 2))
    logs = np.log(np.where(positive[:, None, None], scores, 1.0)).reshape(-1, 9)
    coefficients = logs @ _FIT.T
    predicted = coefficients @ _FINE_TERMS.T
    allowed = np.all((low[:, None] <= _FINE + 1e-9) & (high[:, None] >= _FINE - 1e-9), axis=2)
    top = _FINE[np.argmax(np.where(allowed, predicted, -np.inf), axis=1)]
    place = np.argmax(scores.reshape(-1, 9), axis=1)
    return np.where(positive[:, None], top, np.stack([place // 3, place % 3], axis=1) - 1.0)


def _terms(at: Array) -> Array:
    x, y = at.T
    return np.stack([np.ones_like(x), x, y, x * x, x * y, y * y], axis=1)


_STEPS = np.stack(np.meshgrid([-1.0, 0.0, 1.0], [-1.0, 0.0, 1.0], indexing="ij"), axis=-1).reshape(-1, 2)
_FIT = np.linalg.pinv(_terms(_STEPS))
_FINE = np.stack(np.meshgrid(*[np.linspace(-_TRUSTED, _TRUSTED, 31)] * 2, indexing="ij"), axis=-1).reshape(-1, 2)
_FINE_TERMS = _terms(_FINE)

_MOST_OPAQUE = float(-np.log1p(-MOST_REFLECTED))


def _law_nodes(most: float) -> Array:
    return np.asarray(0.5 * most * (chebpts1(_LAW_NODES) + 1))


def _law_weights(values: Array, most: float) -> Array:
    """Weights of the nodes at values between 0 and `most`: (values, nodes)."""
    inverse = np.linalg.inv(chebvander(chebpts1(_LAW_NODES), _LAW_NODES - 1))
    return np.asarray(chebvander(2 * values / most - 1, _LAW_NODES - 1) @ inverse)


def _mixed(weights: Array, tables: Array) -> Array:
    return (weights @ tables.reshape(len(tables), -1)).reshape(-1, *tables.shape[1:])


def _even(ends: tuple[float, float], step: float) -> Array:
    """Even nodes of the logarithm between the ends, no further apart than `step`."""
    low, high = np.log(ends)
    return np.linspace(low, high, max(int(np.ceil((high - low) / step)) + 1, _FEWEST))


def _wider(log_size: Array) -> Array:
    """The same nodes and more on both sides, as far as a prefactor may shift them."""
    step = log_size[1] - log_size[0]
    more = step * np.arange(1, int(np.ceil(_PREFACTOR_REACH / step)) + 1)
    finer, coarser = log_size[0] - more[::-1], log_size[-1] + more
    return np.concatenate([finer[finer > np.log(SMALLEST)], log_size, coarser[coarser < np.log(LARGEST)]])


def _lagrange_weights(nodes: Array, x: Array) -> Array:
    """Weights of even nodes for the cubic through the four nearest; x beyond an end counts as there."""
    place = np.clip((x - nodes[0]) / (nodes[1] - nodes[0]), 0, nodes.size - 1)
    first = np.clip(np.floor(place).astype(int) - 1, 0, nodes.size - 4)
    u = (place - first)[..., None]
    own = np.concatenate(
        [
            -(u - 1) * (u - 2) * (u - 3) / 6,
            u * (u - 2) * (u - 3) / 2,
            -u * (u - 1) * (u - 3) / 2,
            u * (u - 1) * (u - 2) / 6,
        ],
        axis=-1,
    )
    weights = np.zeros((*x.shape, nodes.size))
    np.put_along_axis(weights, first[..., None] + np.arange(4), own, axis=-1)
    return weights


def _mean_weights(count: int) -> Array:
    """Clenshaw–Curtis weights of a mean over Chebyshev–Lobatto nodes (Clenshaw & Curtis 1960)."""
    nodes = np.cos(np.pi * np.arange(count) / (count - 1))
    even = np.arange(count) % 2 == 0
    integrals = np.where(even, 1 / (1 - np.arange(count) ** 2 + (~even)), 0.0)
    return np.asarray(np.linalg.solve(chebvander(nodes, count - 1).T, integrals))
