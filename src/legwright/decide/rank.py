"""The main job: for each candidate the best size and doping of a leg, then the order of candidates."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline

from legwright.base.errors import InputError
from legwright.base.flags import ordered
from legwright.base.units import NM, PER_CM3
from legwright.candidate.library import Candidate
from legwright.candidate.supply import cost_per_kg, hazardous_elements, supply_concentration
from legwright.decide.brief import Brief, candidates_of
from legwright.decide.robust import MadeMap
from legwright.decide.score import around, leg_material, properties_over_span, score
from legwright.decide.warnings import point_flags
from legwright.leg.duty import SCORE_NAMES, Duty, score_of
from legwright.leg.installed import best_running
from legwright.physics.properties import Properties

Array = NDArray[np.float64]

#: a size is inside the window when it keeps this share of the best score
WINDOW_SHARE = 0.95
_MAP_DOPINGS, _MAP_SIZES, _WINDOW_SIZES = 25, 33, 129
_FINE_NODES, _FINE_ROUNDS = 17, 8
_ZOOMS, _COARSE_ZOOMS = 5, 4


@dataclass(frozen=True)
class Row:
    """One line of the ranking; SI except where the name says otherwise. None: not defined, with a flag.

    Where the brief names the scatter of making, score, window and gain are of legs as they are made, and
    score_as_designed is that of the leg that hits its design; otherwise the two scores are one.
    """

    candidate: Candidate
    shape: str
    size: float | None
    window: tuple[float, float] | None
    doping: float | None
    score: float
    score_name: str
    zt_mean: float | None
    zt_peak: float | None
    gain_over_bulk: float | None
    flags: tuple[str, ...]
    score_as_designed: float
    rank: int = 0


def rank(brief: Brief, path: str | Path, workers: int = 1) -> list[Row]:
    """All candidates of the brief, best first; those that cannot serve stand last with score 0 and a flag.

    `workers` processes share the candidates; each candidate is one whole task, so the figures do not change.
    """
    candidates = candidates_of(brief, path)
    if workers == 1:
        rows = [rank_one(brief, candidate) for candidate in candidates]
    else:
        from joblib import Parallel, delayed

        rows = Parallel(n_jobs=workers)(delayed(rank_one)(brief, candidate) for candidate in candidates)
    rows.sort(key=lambda row: (-row.score, row.candidate.name))
    return [replace(row, rank=place) for place, row in enumerate(rows, start=1)]


def design_or_best(
    candidate: Candidate, brief: Brief, doping: float | None, size: float | None
) -> tuple[float, float]:
    """Doping (1/m³) and size (m): as given, else those of the brief's best design.

    Raises InputError where the candidate cannot serve the brief and they are not given.
    """
    if doping is not None and size is not None:
        return doping, size
    best = rank_one(brief, candidate)
    if best.doping is None or best.size is None:
        raise InputError(f"{candidate.name} cannot serve this brief ({best.flags[0]}); give --doping and --size")
    return doping or best.doping, size or best.size


def rank_one(brief: Brief, candidate: Candidate) -> Row:
    """Dense map over doping and size, refined around its best point; then window, zT and gain there."""
    duty, shape = brief.task, brief.size.shape
    refused = refusal(brief, candidate, duty)
    dopings = doping_range(brief, candidate)
    if refused or dopings is None:
        return _infeasible(brief, candidate, refused or "no-doping-range")
    sizes = size_range(brief, candidate)
    scatter = brief.scatter
    if scatter is None:
        found = design_map(candidate, duty, dopings, sizes, shape)
        doping, size, _ = best_on(found, candidate, duty, shape)
    else:
        legs = MadeMap.of(candidate, duty, dopings, sizes, shape, scatter)
        doping, size, worth = legs.best(dopings, sizes)
    made = properties_over_span(candidate, duty, doping, size, shape, _FINE_NODES)
    best = float(score_of(best_running(leg_material(candidate, made), duty), duty))
    if best == 0:
        return _infeasible(brief, candidate, "duty-out-of-reach")
    if scatter is None:
        kept, bulk = 1.0, best_coarse_score(found, candidate, duty, shape)
        low, high, open_ended = window(candidate, duty, doping, size, sizes, shape)
    else:
        kept, bulk = worth / legs.as_designed(doping, size), legs.best_coarse(dopings)
        length = window_sizes(sizes, size)
        low, high, open_ended = window_of(length, legs.worth(doping, length))
    inside = made
    if not duty.setting.ideal:  # properties that the leg only meets in its setting are not the duty's
        inside = properties_over_span(candidate, duty.alone, doping, size, shape, _FINE_NODES)
    zt_mean, zt_peak = zt_over(inside, duty)
    flags = _design_flags(candidate, brief, inside, doping, size, dopings, sizes)
    if open_ended:
        flags.append("window-open")
    if bulk == 0:
        flags.append("no-gain-reference")
    return Row(
        candidate,
        shape,
        size,
        (low, high),
        doping,
        kept * best,
        SCORE_NAMES[duty.maximise],
        zt_mean,
        zt_peak,
        kept * best / bulk if bulk > 0 else None,
        ordered(flags),
        best,
    )


def doping_range(brief: Brief, candidate: Candidate) -> tuple[float, float] | None:
    """The candidate's active densities (1/m³), cut to the brief's; None where they do not overlap."""
    low, high = candidate.data.doping.lowest.si, candidate.data.doping.highest.si
    if brief.doping is not None:
        low = max(low, brief.doping.min_per_cm3 * PER_CM3)
        high = min(high, brief.doping.max_per_cm3 * PER_CM3)
    return (low, high) if low < high else None


def size_range(brief: Brief, candidate: Candidate) -> tuple[float, float]:
    """The brief's sizes (m), cut to those that the candidate can be made in; as they stand where none can."""
    low, high = brief.size.min_nm * NM, brief.size.max_nm * NM
    smallest = candidate.data.making.smallest(brief.size.shape)
    return (max(low, smallest), high) if smallest < high else (low, high)


def refusal(brief: Brief, candidate: Candidate, duty: Duty) -> str | None:
    """The flag that says why the brief has no use for the candidate; None where it has."""
    avoid = brief.avoid
    if set(avoid.elements) & set(candidate.elements):
        return "avoided-element"
    if avoid.hazardous and hazardous_elements(candidate):
        return "hazardous-element"
    if avoid.cost_above_USD_per_kg is not None and cost_per_kg(candidate) > avoid.cost_above_USD_per_kg:
        return "too-costly"
    if avoid.supply_concentration_above is not None:
        concentration = supply_concentration(candidate)
        if concentration is None or concentration > avoid.supply_concentration_above:
            return "supply-too-concentrated"
    too_hot = duty.hot > candidate.data.service.highest_temperature.si
    if too_hot and brief.leg.beyond_service == "refuse":
        return "above-service-temperature"
    return None


def _infeasible(brief: Brief, candidate: Candidate, flag: str) -> Row:
    name = SCORE_NAMES[brief.duty.maximise]
    return Row(candidate, brief.size.shape, None, None, None, 0.0, name, None, None, None, (flag,), 0.0)


@dataclass(frozen=True)
class Map:
    """Scores over dopings (1/m³) and sizes (m), and of coarse material at the same dopings."""

    doping: Array
    size: Array
    scores: Array
    coarse: Array


def design_map(
    candidate: Candidate, duty: Duty, dopings: tuple[float, float], sizes: tuple[float, float], shape: str
) -> Map:
    """The dense map from which searches start; coarse material comes along as one more size."""
    density, length = np.geomspace(*dopings, _MAP_DOPINGS), np.geomspace(*sizes, _MAP_SIZES)
    scores = score(candidate, duty, density[:, None], np.append(length, np.inf), shape)
    return Map(density, length, scores[:, :-1], scores[:, -1])


def best_design(
    candidate: Candidate, duty: Duty, dopings: tuple[float, float], sizes: tuple[float, float], shape: str
) -> tuple[float, float, float]:
    """(doping, size, score) of the best leg: a dense map, then grids that shrink around the best point."""
    return best_on(design_map(candidate, duty, dopings, sizes, shape), candidate, duty, shape)


def best_on(found: Map, candidate: Candidate, duty: Duty, shape: str) -> tuple[float, float, float]:
    """(doping, size, score) of the best leg, by grids that shrink around the best point of a map."""
    density, length, scores = found.doping, found.size, found.scores
    for rounds_left in range(_ZOOMS, -1, -1):
        i, j = np.unravel_index(int(np.argmax(scores)), scores.shape)
        best = float(density[i]), float(length[j]), float(scores[i, j])
        if rounds_left:
            density, length = around(density, int(i)), around(length, int(j))
            scores = score(candidate, duty, density[:, None], length, shape)
    return best


def best_coarse_score(found: Map, candidate: Candidate, duty: Duty, shape: str) -> float:
    """Score of coarse-grained material (size = ∞) at its own best doping, from a map on."""
    density, scores = found.doping, found.coarse
    for _ in range(_COARSE_ZOOMS):
        density = around(density, int(np.argmax(scores)))
        scores = score(candidate, duty, density, np.inf, shape)
    doping = float(density[int(np.argmax(scores))])
    return float(score(candidate, duty, doping, np.inf, shape, _FINE_NODES, _FINE_ROUNDS))


def window(
    candidate: Candidate, duty: Duty, doping: float, size: float, sizes: tuple[float, float], shape: str
) -> tuple[float, float, bool]:
    """Sizes around the best that keep WINDOW_SHARE of its score, and whether an end is a limit of the range."""
    length = window_sizes(sizes, size)
    return window_of(length, score(candidate, duty, doping, length, shape))


def window_sizes(sizes: tuple[float, float], best: float) -> Array:
    """Sizes of the range, the best among them, ascending."""
    return np.sort(np.append(np.geomspace(*sizes, _WINDOW_SIZES), best))


def window_of(size: Array, scores: Array, level: float | None = None) -> tuple[float, float, bool]:
    """Window of a score curve over ascending sizes; its ends are interpolated in ln(size) between samples.

    `level`: the score that counts as inside, not above the best; WINDOW_SHARE of the best where it is not given.
    """
    best = int(np.argmax(scores))
    if level is None:
        level = WINDOW_SHARE * float(scores[best])
    outside = np.flatnonzero(scores < level)
    below, above = outside[outside < best], outside[outside > best]

    def crossing(out: int, kept: int) -> float:
        share = (level - scores[out]) / (scores[kept] - scores[out])
        return float(size[out] * (size[kept] / size[out]) ** share)

    low = crossing(below[-1], below[-1] + 1) if below.size else float(size[0])
    high = crossing(above[0], above[0] - 1) if above.size else float(size[-1])
    return low, high, not (below.size and above.size)


def zt_over(made: Properties, duty: Duty) -> tuple[float, float]:
    """Mean ∫zT dT/(T_h − T_c) and largest zT between the duty's temperatures."""
    curve = CubicSpline(made.temperature, made.zt)
    mean = curve.integrate(duty.cold, duty.hot) / (duty.hot - duty.cold)
    return float(mean), float(np.max(curve(np.linspace(duty.cold, duty.hot, 501))))


def _design_flags(
    candidate: Candidate,
    brief: Brief,
    made: Properties,
    doping: float,
    size: float,
    dopings: tuple[float, float],
    sizes: tuple[float, float],
) -> list[str]:
    flags = point_flags(candidate, made, brief.size.shape)
    if not sizes[0] * 1.001 < size < sizes[1] * 0.999:
        flags.append("size-at-limit")
    if not dopings[0] * 1.001 < doping < dopings[1] * 0.999:
        flags.append("doping-at-limit")
    return flags
