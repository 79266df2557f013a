"""Couples and segmented legs of a brief: each leg at its best design, and what they deliver together."""

from __future__ import annotations

import itertools
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from legwright.base.errors import InputError
from legwright.base.flags import ordered
from legwright.base.units import CM2
from legwright.candidate.library import Candidate
from legwright.candidate.straps import load_straps
from legwright.decide.brief import Brief, LegTable
from legwright.decide.rank import Row, design_or_best, doping_range, rank
from legwright.decide.score import leg_material, nodes_between, score
from legwright.decide.warnings import point_flags
from legwright.leg.balance import LegMaterial
from legwright.leg.couple import (
    Operation,
    best_couples,
    best_operation,
    largest_difference_of,
    largest_differences,
)
from legwright.leg.duty import SCORE_NAMES, Duty, Setting
from legwright.leg.segments import best_interfaces, compatibility_factor
from legwright.leg.stream import Segments, stream
from legwright.physics.properties import COLDEST, Properties, evaluate

Array = NDArray[np.float64]

#: compatibility factors within this of each other suit one current (common practice; Snyder & Ursell 2003)
_SUITED = 2.0
#: strain that brittle legs bear (common practice), and the temperature at which they are joined, K
_BORNE, ROOM = 2e-3, 300.0
#: nodes of each material's splines, and temperatures at which parts are compared
_NODES, _LOOKS = 17, 5
#: dopings looked at where the size is given
_DOPINGS = 81
#: rounds of design and interfaces in turn; no segment is designed for less than this (K) or has less of the length
_ROUNDS, _LEAST_SPAN, _LEAST_SHARE = 2, 20.0, 0.01


@dataclass(frozen=True)
class Part:
    """One material of a leg: its design, the temperatures of its ends (K), its share of the leg's length.

    `compatibility`: its factor (1/V) at temperatures evenly from the hot end to the cold one.
    """

    candidate: Candidate
    doping: float
    size: float
    hot: float
    cold: float
    share: float
    compatibility: Array


@dataclass(frozen=True)
class Joined:
    """A segmented leg, or a couple; SI. `legs`: the parts of each, hot to cold; of a couple n first.

    `ideal`: the same with nothing between legs and reservoirs. None where it cannot serve. `strains`: differences
    of expansion from 300 K to the hottest joint: between legs or segments ("parts"), and to each strap, the worst.
    """

    legs: tuple[tuple[Part, ...], ...]
    running: Operation | None
    ideal: Operation | None
    largest_difference: float | None
    strains: dict[str, float | None]
    flags: tuple[str, ...]


@dataclass(frozen=True)
class Pair:
    """One couple of the ranking of pairs; the legs' own rows say their designs. `area_ratio`: A_n/A_p."""

    n: Row
    p: Row
    score: float
    score_name: str
    area_ratio: float | None


#: what a leg is made of: candidates hot to cold, each with its doping (1/m³) and size (m)
Design = tuple[tuple[Candidate, float, float], ...]


def pair(brief: Brief, one: Candidate, other: Candidate) -> Joined:
    """The couple of two candidates of opposite carriers, each leg at the brief's best design.

    Raises InputError where they are not opposite, or one cannot serve the brief.
    """
    return join(brief, [designed(brief, [one]), designed(brief, [other])])


def best_pairs(brief: Brief, path: str | Path, count: int | None = None, workers: int = 1) -> list[Pair]:
    """Every n candidate of the brief with every p candidate, best first, each leg at its own best design.

    All pairs at once with the brief's contacts; exchangers are then counted in the `count` best alone.
    """
    _check(brief)
    rows = [row for row in rank(brief, path, workers) if row.score]
    n_rows, p_rows = ([row for row in rows if row.candidate.data.carrier == carrier] for carrier in "np")
    if not (n_rows and p_rows):
        return []
    duty = brief.task
    n_legs, p_legs = (
        [Segments((_material(brief, row.candidate, *_design_of(row)),)) for row in side]
        for side in (n_rows, p_rows)
    )
    if duty.maximise == "delta_t":
        scores = largest_differences(n_legs, p_legs, duty)
        ratios = np.full(scores.shape, np.nan)
    else:
        made = best_couples(n_legs, p_legs, duty)
        scores, ratios = made.score, made.area_ratio
    order = sorted(np.ndindex(*scores.shape), key=lambda at: (-scores[at], at))[:count]
    pairs = []
    for i, j in order:
        best, ratio = float(scores[i, j]), float(ratios[i, j])
        if duty.setting.hot_resistance or duty.setting.cold_resistance:
            best, ratio = _exact([n_legs[i], p_legs[j]], duty)
        pairs.append(
            Pair(
                n_rows[i],
                p_rows[j],
                _shown(best, duty),
                SCORE_NAMES[duty.maximise],
                ratio if best and np.isfinite(ratio) else None,
            )
        )
    return sorted(pairs, key=lambda one: (-one.score, one.n.candidate.name, one.p.candidate.name))


def rank_with(brief: Brief, path: str | Path, partner: Candidate, workers: int = 1) -> list[Row]:
    """The candidates of the carrier that the partner is not, by the score of the couple, each leg at its best."""
    _check(brief)
    wanted = "n" if partner.data.carrier == "p" else "p"
    use = brief.candidates.model_copy(update={"carrier": wanted})
    duty = brief.task
    design = designed(brief, [partner])
    beside = Segments((_material(brief, *design[0]),))

    def of_couple(row: Row) -> Row:
        if not row.score:
            return row
        leg = Segments((_material(brief, row.candidate, *_design_of(row)),))
        best, _ = _exact([leg, beside] if wanted == "n" else [beside, leg], duty)
        flags = ordered([*row.flags, "score-of-couple", *(() if best else ("duty-out-of-reach",))])
        shown = _shown(best, duty)
        return replace(row, score=shown, score_as_designed=shown, flags=flags)

    rows = [of_couple(row) for row in rank(brief.model_copy(update={"candidates": use}), path, workers)]
    rows.sort(key=lambda row: (-row.score, row.candidate.name))
    return [replace(row, rank=place) for place, row in enumerate(rows, start=1)]


def designed(
    brief: Brief, candidates: Sequence[Candidate], doping: float | None = None, size: float | None = None
) -> Design:
    """The leg of these materials, hot to cold, each at its best doping and size for the span it gets.

    Of one material: as given, else the brief's best. A size given for several is that of all.
    Raises InputError where one cannot serve.
    """
    if len(candidates) == 1:
        return ((candidates[0], *design_or_best(candidates[0], brief, doping, size)),)
    if doping is not None:
        raise InputError("a leg of several materials has several dopings: leave it out", key="--doping")
    carriers = {one.data.carrier for one in candidates}
    if len(carriers) > 1:
        raise InputError(
            f"segments of one leg are of one carrier, not {' and '.join(sorted(carriers))}", key="--then"
        )
    duty = _served(brief.task)
    ceilings = _ceilings(candidates)
    ends = [duty.hot, *_capped(np.linspace(duty.hot, duty.cold, len(candidates) + 1)[1:-1], ceilings), duty.cold]
    for _ in range(_ROUNDS):
        design = tuple(
            (one, *_design_for(brief, one, hot, cold, size))
            for one, hot, cold in zip(candidates, ends, ends[1:], strict=False)
        )
        ends = [float(t) for t in _meeting(design, brief, duty).ends(duty.hot, duty.cold)]
    return design


def join(brief: Brief, legs: Sequence[Design]) -> Joined:
    """What a segmented leg, or a couple of two legs of opposite carriers, delivers in the brief's duty."""
    _check(brief)
    if len(legs) == 2:
        first, second = (leg[0][0] for leg in legs)
        if first.data.carrier == second.data.carrier:
            raise InputError(
                f"a couple is of n and p: {first.name} and {second.name} are both {first.data.carrier}",
                key="partner",
            )
        legs = sorted(legs, key=lambda leg: leg[0][0].data.carrier)
    duty = brief.task
    job = _served(duty)
    bare = replace(job, setting=Setting())
    whole = [_meeting(leg, brief, job) for leg in legs]
    running = _held(best_operation(whole, job), job)
    if running is not None and not job.setting.ideal and any(len(leg) > 1 for leg in legs):
        there = replace(job, hot=float(running.hot_end), cold=float(running.cold_end))
        whole = [_meeting(leg, brief, there) for leg in legs]
        running = _held(best_operation(whole, job), job)
    ideal = _held(best_operation(whole, bare), bare)
    reach = largest_difference_of(whole, duty) if duty.kind == "cooler" else None
    parts = tuple(
        _parts(leg, one, brief, job, running, k) for k, (leg, one) in enumerate(zip(legs, whole, strict=True))
    )
    strains = _strains(parts)
    flags = [flag for leg in parts for part in leg for flag in _flags(part, brief)]
    flags += _quarrels(parts) + _mismatch(strains)
    if running is None:
        flags.append("duty-out-of-reach")
    return Joined(parts, running, ideal, reach, strains, ordered(flags))


def _check(brief: Brief) -> None:
    leg = brief.leg
    if leg.side_loss_W_per_m3_K or leg.length_free_mm is not None:
        key = "leg.side_loss_W_per_m3_K" if leg.side_loss_W_per_m3_K else "leg.length_free_mm"
        raise InputError("is not for couples and segmented legs: leave it out", key=key)


def _served(duty: Duty) -> Duty:
    """Legs asked for their largest difference run at their best COP at the duty's own temperatures."""
    return replace(duty, maximise="cop") if duty.maximise == "delta_t" else duty


def _design_of(row: Row) -> tuple[float, float]:
    if row.doping is None or row.size is None:
        raise ValueError(f"{row.candidate.name} has no design")
    return row.doping, row.size


def _ceilings(candidates: Sequence[Candidate]) -> list[float]:
    return [one.data.service.highest_temperature.si for one in candidates]


def _capped(interfaces: Array, ceilings: Sequence[float]) -> list[float]:
    """No interface hotter than the material under it bears, nor than the interface above."""
    return [float(t) for t in np.minimum.accumulate(np.minimum(interfaces, ceilings[1:]))]


def best_doping(brief: Brief, candidate: Candidate, size: float) -> float:
    """The doping (1/m³) within the candidate's and the brief's range that serves best at that size (m)."""
    limits = doping_range(brief, candidate)
    if limits is None:
        raise InputError(
            f"no doping of {candidate.name} lies within the brief's range", key="doping", slug="out-of-range"
        )
    dopings = np.geomspace(*limits, _DOPINGS)
    return float(dopings[np.argmax(score(candidate, brief.task, dopings, size, brief.size.shape))])


def _design_for(
    brief: Brief, candidate: Candidate, hot: float, cold: float, size: float | None
) -> tuple[float, float]:
    """Best doping and size over a part of the duty's span, with nothing between the part and its ends."""
    duty = brief.duty
    middle, half = 0.5 * (hot + cold), 0.5 * max(hot - cold, _LEAST_SPAN)
    goal = "cop" if duty.maximise == "delta_t" else duty.maximise
    part = duty.model_copy(update={"hot_K": middle + half, "cold_K": middle - half, "maximise": goal})
    alone = brief.model_copy(update={"duty": part, "leg": LegTable()})
    if size is not None:
        return best_doping(alone, candidate, size), size
    return design_or_best(candidate, alone, None, None)


def _material(brief: Brief, candidate: Candidate, doping: float, size: float) -> LegMaterial:
    low, high = brief.task.reach
    made = _properties(brief, candidate, nodes_between(max(low, COLDEST), high, _NODES), doping, size)
    return leg_material(candidate, made)


def _properties(brief: Brief, candidate: Candidate, temperature: Array, doping: float, size: float) -> Properties:
    """At those temperatures (K); a segment feels the length of the whole leg."""
    return evaluate(candidate, temperature, doping, size, brief.size.shape, brief.task.felt_length)


def _meeting(leg: Design, brief: Brief, duty: Duty) -> Segments:
    """The leg with its interfaces where they serve that duty best."""
    materials = [_material(brief, *part) for part in leg]
    return best_interfaces(materials, duty, _ceilings([one for one, _, _ in leg]))


def _exact(legs: Sequence[Segments], duty: Duty) -> tuple[float, float]:
    """Score in SI and A_n/A_p of one couple."""
    if duty.maximise == "delta_t":
        return largest_difference_of(legs, duty), float("nan")
    made = best_operation(legs, duty)
    return float(made.score), float(made.area_ratio)


def _shown(value: float, duty: Duty) -> float:
    """Fractions and K as they are, areal figures in W/cm²."""
    return value * CM2 if duty.maximise in ("power", "heat_lifted") else value


def _held(made: Operation, duty: Duty) -> Operation | None:
    """The operation if it serves; energy and Carnot are held at run time."""
    if not made.score > 0:
        return None
    ratio = made.efficiency if duty.kind == "generator" else made.cop
    limit = 1 - duty.cold / duty.hot if duty.kind == "generator" else duty.cold / (duty.hot - duty.cold)
    if not 0 < ratio <= limit * (1 + 1e-9):
        raise AssertionError("the legs beat Carnot")
    return made


def _parts(
    leg: Design, whole: Segments, brief: Brief, duty: Duty, running: Operation | None, place: int
) -> tuple[Part, ...]:
    hot, cold = (duty.hot, duty.cold) if running is None else (float(running.hot_end), float(running.cold_end))
    ends = [float(t) for t in whole.ends(hot, cold)]
    shares = [float("nan")] * len(leg)
    if running is not None:
        shares = [float(share) for share in stream(whole, duty, running.drives[place], hot, cold).shares]
    parts = []
    for (one, doping, size), top, bottom, share in zip(leg, ends, ends[1:], shares, strict=False):
        made = _looked_at(brief, one, doping, size, top, bottom)
        factor = compatibility_factor(np.abs(made.seebeck), made.zt, made.temperature)
        parts.append(Part(one, doping, size, top, bottom, share, factor))
    return tuple(parts)


def _looked_at(brief: Brief, one: Candidate, doping: float, size: float, hot: float, cold: float) -> Properties:
    return _properties(brief, one, np.linspace(hot, cold, _LOOKS), doping, size)


def _flags(part: Part, brief: Brief) -> list[str]:
    made = _looked_at(brief, part.candidate, part.doping, part.size, part.hot, part.cold)
    unused = ["segment-unused"] if part.share < _LEAST_SHARE else []
    return point_flags(part.candidate, made, brief.size.shape) + unused


def _quarrels(legs: tuple[tuple[Part, ...], ...]) -> list[str]:
    """Flags of compatibility factors that lie too far apart, where segments meet and between the legs."""
    flags = []
    for leg in legs:
        if any(_unlike(a.compatibility[-1], b.compatibility[0]) for a, b in itertools.pairwise(leg)):
            flags.append("segments-fight")
    if len(legs) == 2:
        temperature = np.linspace(legs[0][0].hot, legs[0][-1].cold, _LOOKS)
        n, p = (
            np.interp(
                temperature,
                np.concatenate([np.linspace(part.cold, part.hot, _LOOKS) for part in reversed(leg)]),
                np.concatenate([part.compatibility[::-1] for part in reversed(leg)]),
            )
            for leg in legs
        )
        if np.any(_unlike(n, p)):
            flags.append("legs-unlike")
    return flags


def _unlike(a: Array, b: Array) -> NDArray[np.bool_]:
    return np.asarray(np.maximum(a, b) > _SUITED * np.minimum(a, b))


def _strains(legs: tuple[tuple[Part, ...], ...]) -> dict[str, float | None]:
    """Δα (T − 300 K) at the hottest joint: between legs or segments, and the worst of the ends to each strap."""
    tops = [leg[0] for leg in legs]
    hottest = max(abs(part.hot - ROOM) for part in tops)
    between = [(a.candidate, b.candidate, abs(b.hot - ROOM)) for leg in legs for a, b in itertools.pairwise(leg)]
    if len(legs) == 2:
        between.append((tops[0].candidate, tops[1].candidate, hottest))
    found = {"parts": _worst((_expansion(a), _expansion(b), rise) for a, b, rise in between)}
    for strap, expansion in load_straps().items():
        found[strap] = _worst((_expansion(part.candidate), expansion, hottest) for part in tops)
    return found


def _expansion(candidate: Candidate) -> float | None:
    known = candidate.data.cell.thermal_expansion
    return None if known is None else known.si


def _worst(pairs: Iterable[tuple[float | None, float | None, float]]) -> float | None:
    """The largest strain; None where one is not known."""
    strains = [None if a is None or b is None else abs(a - b) * rise for a, b, rise in pairs]
    known = [strain for strain in strains if strain is not None]
    return max(known) if known and len(known) == len(strains) else None


def _mismatch(strains: dict[str, float | None]) -> list[str]:
    straps = [strain for name, strain in strains.items() if name != "parts" and strain is not None]
    parts = strains["parts"] or 0.0
    return ["expansion-mismatch"] if parts > _BORNE or (straps and min(straps) > _BORNE) else []
