"""What a leg of one design delivers in a brief's duty, with the brief's contacts and exchangers."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from legwright.base.flags import ordered
from legwright.candidate.library import Candidate
from legwright.decide.brief import Brief
from legwright.decide.rank import design_or_best
from legwright.decide.score import leg_material, nodes_between
from legwright.decide.warnings import point_flags
from legwright.leg.duty import Duty
from legwright.leg.installed import PEAK_RISE, Running, Setting, best_running, largest_reach
from legwright.physics.properties import COLDEST, evaluate

_NODES = 17


@dataclass(frozen=True)
class Delivered:
    """A leg in its duty; SI. `ideal`: the same leg with ideal contacts and exchangers. None: it cannot serve."""

    candidate: Candidate
    doping: float
    size: float
    shape: str
    running: Running | None
    ideal: Running | None
    largest_difference: float | None
    flags: tuple[str, ...]


def deliver(candidate: Candidate, brief: Brief, doping: float | None, size: float | None) -> Delivered:
    """The leg of that doping (1/m³) and size (m), or of the brief's best design where they are not given.

    Raises InputError where the candidate cannot serve the brief and no design is given.
    """
    doping, size = design_or_best(candidate, brief, doping, size)
    duty, shape = brief.task, brief.size.shape
    made = evaluate(candidate, nodes_between(*_span(duty), _NODES), doping, size, shape)
    material = leg_material(candidate, made)
    running, ideal = (best_running(material, _served(duty), setting) for setting in (brief.setting, Setting()))
    reach = largest_reach(material, duty, brief.setting) if duty.kind == "cooler" else None
    inside = evaluate(candidate, np.linspace(duty.cold, duty.hot, 5), doping, size, shape)
    flags = point_flags(candidate, inside, shape)
    if running is None:
        flags.append("duty-out-of-reach")
    return Delivered(candidate, doping, size, shape, running, ideal, reach, ordered(flags))


def _span(duty: Duty) -> tuple[float, float]:
    """Temperatures that the leg's ends and inside can reach, K."""
    if duty.kind == "generator":
        return duty.cold, duty.hot
    return max(0.45 * duty.hot, COLDEST), duty.hot + 2 * PEAK_RISE


def _served(duty: Duty) -> Duty:
    """A leg asked for its largest difference runs at its best COP at the duty's own temperatures."""
    return Duty(duty.kind, duty.hot, duty.cold, "cop", duty.length) if duty.maximise == "delta_t" else duty
