"""What goes into each kind of figure: plain records in trade units, from a candidate, an aim and a design."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from legwright.base.errors import InputError, NothingFeasible
from legwright.base.units import MICRO, NM, PER_CM3
from legwright.candidate.library import Candidate, load_candidate
from legwright.decide.brief import Brief, load_brief
from legwright.decide.bulk import COMPARED, BulkSample, bulk_samples
from legwright.decide.confidence import confidences, draw_all
from legwright.decide.curves import Aim, aim_name, leans, size_curve, surface, worth_of
from legwright.decide.peak import LARGEST, SMALLEST, peak
from legwright.decide.rank import Row, best_design, design_or_best, rank, size_range, window
from legwright.decide.why import design_of, why
from legwright.leg.duty import Duty
from legwright.physics.properties import SHAPES, Properties, evaluate
from legwright.show.records import Record, nanometres, rank_record, why_record

#: coarse samples that one figure shows; the eye tells no more lines apart
MOST_SAMPLES = 4
#: kinds that find the size themselves
OVER_SIZE = ("size", "map")


@dataclass(frozen=True)
class Design:
    """A candidate at a design point under an aim, SI; `limits` of the sizes that are looked at."""

    candidate: Candidate
    aim: Aim
    doping: float
    size: float
    window: tuple[float, float] | None
    shape: str
    limits: tuple[float, float]

    @property
    def where(self) -> str:
        """Temperatures in words."""
        if isinstance(self.aim, Duty):
            return f"{self.aim.cold:g}\u00a0to\u00a0{self.aim.hot:g}\u00a0K"
        return f"{self.aim:g}\u00a0K"

    @property
    def head(self) -> Record:
        """What every record of a design begins with."""
        return {
            "candidate": self.candidate.name,
            "shape": self.shape,
            "where": self.where,
            "doping_per_cm3": self.doping / PER_CM3,
            "size_nm": nanometres(self.size),
            "quantity": aim_name(self.aim),
            "value": worth_of(self.candidate, self.aim, self.doping, self.size, self.shape),
        }


def design_in(job: Brief, row: Row) -> Design:
    """The design of a row that can serve."""
    assert row.doping is not None
    assert row.size is not None
    limits = (job.size.min_nm * NM, job.size.max_nm * NM)
    return Design(row.candidate, job.task, row.doping, row.size, row.window, row.shape, limits)


def design_for(
    candidate: Candidate,
    job: Brief | None,
    temperature: float | None,
    doping: float | None,
    size: float | None,
    shape: str | None,
) -> Design:
    """As given (SI), else the best for the brief, or for zT at that temperature; InputError without either."""
    if (temperature is None) == (job is None):
        raise InputError("give either --temperature or --brief")
    if job is None:
        assert temperature is not None
        form = shape or SHAPES[0]
        found = peak(candidate, temperature, doping, form)
        return Design(
            candidate, temperature, found.doping, size or found.size, found.window, form, (SMALLEST, LARGEST)
        )
    form, sizes = shape or job.size.shape, size_range(job, candidate)
    if doping is not None and size is None:
        _, size, _ = best_design(candidate, job.task, (doping, doping), sizes, form)
    doping, size = design_or_best(candidate, job, doping, size)
    low, high, _ = window(candidate, job.task, doping, size, sizes, form)
    return Design(
        candidate, job.task, doping, size, (low, high), form, (job.size.min_nm * NM, job.size.max_nm * NM)
    )


@dataclass(frozen=True)
class Asked:
    """What a caller may say of the design, SI; None: not said."""

    temperature: float | None = None
    brief: Path | None = None
    doping: float | None = None
    size: float | None = None
    shape: str | None = None


def gather(kind: str, subject: str, asked: Asked, draws: int, seed: int) -> Record:
    """The record of a figure of that kind; InputError where what is asked does not fit it."""
    if kind == "ranking":
        if asked != Asked():
            raise InputError("a ranking takes a brief and nothing else that says a design", key=kind)
        return _ranked(Path(subject), draws, seed)
    candidate = load_candidate(subject)
    job = None if asked.brief is None else load_brief(asked.brief)
    if kind == "temperature":
        return temperature_record(candidate, _design_or_none(candidate, job, asked))
    if kind in OVER_SIZE and asked.size is not None:
        raise InputError("finds the size itself", key=f"{kind}: --size")
    at = design_for(candidate, job, asked.temperature, asked.doping, asked.size, asked.shape)
    if kind == "size":
        return size_record(at, draws, seed)
    if kind == "map":
        return map_record(at)
    return sensitivity_record(at) if kind == "sensitivity" else why_figure_record(kind, at, job)


def _ranked(brief: Path, draws: int, seed: int) -> Record:
    job = load_brief(brief)
    found = rank(job, brief)
    if not any(row.score for row in found):
        raise NothingFeasible("no candidate can serve this brief")
    sure = confidences(draw_all(job, found, draws, seed)) if draws else None
    return ranking_record(job.title, [rank_record(row, sure) for row in found])


def _design_or_none(candidate: Candidate, job: Brief | None, asked: Asked) -> Design | None:
    """For a figure over temperature: a brief's design, the one that is given whole, or none."""
    if asked.temperature is not None:
        raise InputError("runs over temperature itself", key="temperature: --temperature")
    if job is not None:
        return design_for(candidate, job, None, asked.doping, asked.size, asked.shape)
    if asked.doping is None and asked.size is None:
        return None
    if asked.doping is None or asked.size is None:
        raise InputError("needs --doping and --size together, or a brief", key="temperature")
    form = asked.shape or SHAPES[0]
    kelvin = candidate.data.service.data_to.si
    return Design(candidate, kelvin, asked.doping, asked.size, None, form, (SMALLEST, LARGEST))


def size_record(at: Design, draws: int, seed: int) -> Record:
    """Worth against size, its band and the ends of the grain law."""
    found = size_curve(at.candidate, at.aim, at.doping, at.limits, at.shape, draws, seed)
    columns = {
        "size_nm": found.sizes / NM,
        "value": found.values,
        "low": found.low,
        "high": found.high,
        "grey": found.grey,
        "by_wavelength": found.by_wavelength,
    }
    return {
        "kind": "size",
        **at.head,
        "window_nm": None if at.window is None else [end / NM for end in at.window],
        "smallest_nm": at.candidate.data.making.smallest(at.shape) / NM,
        "coarse": found.coarse,
        "curve": _rows({name: values for name, values in columns.items() if values is not None}),
    }


def temperature_record(candidate: Candidate, at: Design | None) -> Record:
    """Coarse samples with the model at each one's doping, and the model at a design."""
    found = sorted(bulk_samples(candidate), key=lambda one: -len(one.points))
    if not found and at is None:
        raise InputError(f"nothing published is shipped for {candidate.name}; give a design or a brief")
    content: Record = {
        "kind": "temperature",
        "candidate": candidate.name,
        "samples": [_sample_record(one) for one in found[:MOST_SAMPLES]],
        "left_out": len(found[MOST_SAMPLES:]),
    }
    if at is not None:
        service = candidate.data.service
        kelvin = np.linspace(service.data_from.si, service.data_to.si, 41)
        made = evaluate(candidate, kelvin, at.doping, at.size, at.shape)
        content["design"] = {
            "size_nm": nanometres(at.size),
            "doping_per_cm3": at.doping / PER_CM3,
            "points": [],
            "curve": _over_temperature(made),
        }
    return content


def map_record(at: Design) -> Record:
    """Worth over size and doping, and what of it can be made."""
    found = surface(at.candidate, at.aim, at.limits, at.shape)
    doping = at.candidate.data.doping
    return {
        "kind": "map",
        **at.head,
        "sizes_nm": (found.size / NM).tolist(),
        "dopings_per_cm3": (found.doping / PER_CM3).tolist(),
        "values": found.values.tolist(),
        "smallest_nm": at.candidate.data.making.smallest(at.shape) / NM,
        "makeable_dopings_per_cm3": [doping.lowest.si / PER_CM3, doping.highest.si / PER_CM3],
    }


def why_figure_record(kind: str, at: Design, job: Brief | None) -> Record:
    """Free paths or shares at a design; `kind` is `paths` or `shares`."""
    temperature = None if isinstance(at.aim, Duty) else at.aim
    found = why(at.candidate, *design_of(at.candidate, job, temperature, at.doping, at.size, at.shape))
    return {"kind": kind, **why_record(found), "where": at.where}


def sensitivity_record(at: Design) -> Record:
    """Change of the worth for one standard deviation of each assumption."""
    found = leans(at.candidate, at.aim, at.doping, at.size, at.shape)
    rows = [
        {
            "name": one.name,
            "doping_per_cm3": None if one.doping is None else one.doping / PER_CM3,
            "change": one.change,
            "source": one.source,
        }
        for one in found
    ]
    return {"kind": "sensitivity", **at.head, "leans": rows}


def ranking_record(title: str, rows: list[Record]) -> Record:
    """The rows of `rank` under a brief's title."""
    return {"kind": "ranking", "title": title, "rows": rows}


def flat_rows(record: Record) -> list[Record]:
    """A figure's data, one row a point, for CSV."""
    if record["kind"] == "temperature":
        return [
            {"sample": sample["name"], "doping_per_cm3": sample["doping_per_cm3"], **point}
            for sample in record["samples"]
            for point in sample["points"]
        ]
    if record["kind"] == "map":
        return [
            {"doping_per_cm3": doping, "size_nm": size, record["quantity"]: value}
            for doping, row in zip(record["dopings_per_cm3"], record["values"], strict=True)
            for size, value in zip(record["sizes_nm"], row, strict=True)
        ]
    if record["kind"] == "shares":
        return [
            {"resistance": kind, "process": process, "share": share}
            for kind in ("electrical", "thermal")
            for process, share in record[f"{kind}_resistance_shares"].items()
        ]
    key = {"size": "curve", "paths": "free_paths", "ranking": "rows", "sensitivity": "leans"}[record["kind"]]
    return list(record[key])


def file_suffix(into: Path) -> str:
    """`.svg` or `.png`; InputError for another ending."""
    suffix = into.suffix.lower()
    if suffix not in (".svg", ".png"):
        raise InputError(f"'{into}' must end in .svg or .png", key="--into")
    return suffix


#: figures of a sample: name here with its unit, and SI over that unit
_UNITS: dict[str, tuple[str, float]] = {
    "zt": ("zt", 1.0),
    "seebeck": ("seebeck_uV_per_K", MICRO),
    "electrical_conductivity": ("electrical_conductivity_S_per_cm", 100.0),
    "thermal_conductivity": ("thermal_conductivity_W_per_mK", 1.0),
    "lattice_thermal_conductivity": ("lattice_thermal_conductivity_W_per_mK", 1.0),
}


def _over_temperature(made: Properties) -> list[Record]:
    columns = {_UNITS[name][0]: getattr(made, name) / _UNITS[name][1] for name in COMPARED}
    return _rows({"temperature_K": made.temperature, **columns})


def _sample_record(one: BulkSample) -> Record:
    points = [
        {
            "quantity": _UNITS[point.quantity][0],
            "temperature_K": point.temperature,
            "value": point.value / _UNITS[point.quantity][1],
            "fitted": point.fitted,
            "source": point.source,
        }
        for point in one.points
    ]
    return {
        "name": one.name,
        "doping_per_cm3": one.doping / PER_CM3,
        "points": points,
        "curve": _over_temperature(one.made),
    }


def _rows(columns: dict[str, Any]) -> list[Record]:
    return [dict(zip(columns, map(float, row), strict=True)) for row in zip(*columns.values(), strict=True)]
