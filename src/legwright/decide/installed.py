"""What a leg of one design delivers in a brief's duty, with what surrounds it there."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from legwright.base.flags import ordered
from legwright.candidate.library import Candidate
from legwright.decide.brief import Brief
from legwright.decide.rank import design_or_best, rank_one
from legwright.decide.score import leg_material, nodes_between
from legwright.decide.warnings import point_flags
from legwright.leg.balance import LegMaterial
from legwright.leg.duty import Duty, score_of
from legwright.leg.installed import Running, best_running
from legwright.physics.properties import COLDEST, evaluate

_NODES = 17


@dataclass(frozen=True)
class Delivered:
    """A leg in its duty; SI. `ideal`: the same leg with nothing between it and its reservoirs; `matched`: a
    generator of the same length at the load that draws the most power.

    None where the leg cannot serve; `refusal` then says why, and what would be the nearest that it could.
    """

    candidate: Candidate
    doping: float | None
    size: float | None
    shape: str
    running: Running | None
    ideal: Running | None
    matched: Running | None
    largest_difference: float | None
    flags: tuple[str, ...]
    refusal: str | None


def deliver(candidate: Candidate, brief: Brief, doping: float | None, size: float | None) -> Delivered:
    """The leg of that doping (1/m³) and size (m), or of the brief's best design where they are not given.

    A duty out of reach is answered, not refused. Raises InputError where the brief avoids the candidate and no
    design is given.
    """
    duty, shape = brief.task, brief.size.shape
    highest = candidate.data.service.highest_temperature.si
    if duty.hot > highest and brief.leg.beyond_service == "refuse":
        why = f"{candidate.name} serves up to {highest:g} K: hot_K at most {highest:g}"
        flag = ("above-service-temperature",)
        return Delivered(candidate, doping, size, shape, None, None, None, None, flag, why)
    doping, size = _design(brief, candidate, doping, size)
    low, high = duty.reach
    made = evaluate(
        candidate, nodes_between(max(low, COLDEST), high, _NODES), doping, size, shape, duty.felt_length
    )
    material = leg_material(candidate, made)
    job = served(duty)
    running, ideal = (_one(material, each) for each in (job, job.alone))
    matched = None
    if running is not None and duty.kind == "generator":
        matched = _one(material, replace(job, maximise="power", length=float(running.length), lengths=None))
    reach = _largest_difference(material, duty) if duty.kind == "cooler" else None
    inside = evaluate(candidate, np.linspace(duty.cold, duty.hot, 5), doping, size, shape, duty.felt_length)
    flags = point_flags(candidate, inside, shape)
    if running is None:
        flags.append("duty-out-of-reach")
    nearest = None if running is not None else _nearest(duty, reach)
    return Delivered(candidate, doping, size, shape, running, ideal, matched, reach, ordered(flags), nearest)


def _design(brief: Brief, candidate: Candidate, doping: float | None, size: float | None) -> tuple[float, float]:
    """The design as given or the brief's best; where none can serve a cooler, the one that reaches furthest."""
    duty = brief.duty
    if duty.kind == "cooler" and (doping is None or size is None):
        row = rank_one(brief, candidate)
        if row.flags[:1] == ("duty-out-of-reach",):
            furthest = duty.model_copy(update={"maximise": "delta_t"})
            return design_or_best(candidate, brief.model_copy(update={"duty": furthest}), doping, size)
    return design_or_best(candidate, brief, doping, size)


def served(duty: Duty) -> Duty:
    """A leg asked for its largest difference runs at its best COP at the duty's own temperatures."""
    return replace(duty, maximise="cop") if duty.maximise == "delta_t" else duty


def _one(material: LegMaterial, duty: Duty) -> Running | None:
    running = best_running(material, duty)
    return running if running.serves else None


def _largest_difference(material: LegMaterial, duty: Duty) -> float:
    """ΔT at which the leg lifts nothing any more, 0 where it never lifts."""
    furthest = replace(duty, maximise="delta_t")
    return float(score_of(best_running(material, furthest), furthest))


def _nearest(duty: Duty, reach: float | None) -> str:
    """The duty that the leg could still do."""
    if not reach:
        return f"no current makes this leg a {duty.kind} between {duty.cold:g} and {duty.hot:g} K"
    step = 0.1 if reach > 1 else 10.0 ** (math.floor(math.log10(reach)) - 1)
    coldest = duty.hot - step * math.floor(reach / step)
    return f"largest ΔT {reach:.3g} K from {duty.hot:g} K: cold_K at least {coldest:.8g}"
