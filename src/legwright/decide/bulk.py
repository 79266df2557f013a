"""How a candidate's coarse material compares with what was published of it: each sample at its own doping."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from legwright.base.files import datasets_folder
from legwright.base.units import E_CHARGE
from legwright.candidate.library import Candidate
from legwright.decide.audit import UNDOPED, Verdict, judge, samples
from legwright.physics.crystal import crystal
from legwright.physics.properties import Properties, evaluate_crystal

Array = NDArray[np.float64]

#: what is compared, and the word for it in Properties
COMPARED = ("zt", "seebeck", "electrical_conductivity", "thermal_conductivity", "lattice_thermal_conductivity")
_TEMPERATURES = 41


@dataclass(frozen=True)
class Point:
    """One published figure, SI; `fitted` where it, or one like it, fixed the candidate."""

    quantity: str
    temperature: float
    value: float
    fitted: bool
    source: str


@dataclass(frozen=True)
class BulkSample:
    """A coarse sample: its doping (1/m³), its figures, and what the model says of it over temperature."""

    name: str
    doping: float
    points: tuple[Point, ...]
    made: Properties


def bulk_samples(candidate: Candidate) -> list[BulkSample]:
    """The candidate's anchors by doping, then the coarse samples of the shipped table; SI."""
    groups: dict[tuple[str, float], list[Point]] = {}
    for anchor in () if candidate.relatives else candidate.data.anchor:
        doping = UNDOPED if anchor.doping is None else anchor.doping.si
        point = Point(
            _WORDS[anchor.quantity],
            anchor.temperature.si,
            anchor.measured.si * (E_CHARGE * doping if anchor.quantity == "mobility" else 1.0),
            anchor.fixes != "nothing",
            anchor.measured.source,
        )
        groups.setdefault(("anchors", doping), []).append(point)
    for verdict in _verdicts(candidate):
        scale = E_CHARGE * verdict.doping.density if verdict.quantity == "mobility" else 1.0
        point = Point(
            _WORDS[verdict.quantity],
            verdict.temperature,
            verdict.measured * scale,
            verdict.fitted,
            verdict.source,
        )
        groups.setdefault((verdict.sample, verdict.doping.density), []).append(point)
    return [BulkSample(*key, tuple(points), _made(candidate, key[1], points)) for key, points in groups.items()]


_WORDS = {
    "zt": "zt",
    "seebeck": "seebeck",
    "mobility": "electrical_conductivity",
    "electrical_conductivity": "electrical_conductivity",
    "thermal_conductivity": "thermal_conductivity",
    "lattice_conductivity": "lattice_thermal_conductivity",
}


def _verdicts(candidate: Candidate) -> list[Verdict]:
    found, _ = samples([datasets_folder() / "measurements" / "bulk.csv"])
    mine = [one for one in found if one.candidate.path == candidate.path and one.candidate.name == candidate.name]
    coarse = [one for one in mine if math.isinf(one.size)]
    return [v for one in coarse for v in judge(one) if v.quantity in _WORDS and not v.unlike]


def _made(candidate: Candidate, doping: float, points: list[Point]) -> Properties:
    """The model over the temperatures that the file vouches for, and over those of the sample."""
    service = candidate.data.service
    measured = [point.temperature for point in points]
    ends = min(service.data_from.si, *measured), max(service.data_to.si, *measured)
    return evaluate_crystal(crystal(candidate), np.linspace(*ends, _TEMPERATURES), doping, np.inf)
