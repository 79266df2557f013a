"""The library against published samples: each figure predicted with its interval, and how often those hold."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cache, cached_property
from hashlib import sha256
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import minimize_scalar
from scipy.special import ndtri
from scipy.stats import binomtest, qmc

from legwright.base.files import datasets_folder
from legwright.base.units import PER_CM3
from legwright.candidate.family import family_names, family_of
from legwright.candidate.library import Candidate, library_names, load_candidate
from legwright.candidate.measurements import Measurements, read_measurements
from legwright.candidate.priors import load_priors
from legwright.decide.draws import anchor_spreads, anchors_behind, with_each_law
from legwright.physics.crystal import Crystal, crystal
from legwright.physics.properties import DENSEST, Properties, evaluate_crystal

Array = NDArray[np.float64]

#: what is judged
QUANTITIES = (
    "lattice_conductivity",
    "thermal_conductivity",
    "electrical_conductivity",
    "seebeck",
    "zt",
    "power_factor",
    "mobility",
)
#: nominal cover of an interval, and its half-width in standard deviations
COVER = 0.90
WIDTH = float(ndtri(0.5 + COVER / 2))
#: active density of a sample that is called undoped, 1/m³: below what bears on any figure
UNDOPED = 1e14 * PER_CM3
ROOM = 300.0
UNSTATED = "not published: that of the best zT"
#: carriers that bring less than this share of the heat leave a lattice conductivity
_NO_ELECTRONS = 0.01
#: blind: nobody looked at it, and nothing like it fixed the candidate; unlike: blind too, of a sample that its file
#: does not describe; seen: looked at while parameters were chosen, but fixed nothing
KINDS = ("blind", "unlike", "seen", "fitted")
#: papers that set the model discrepancy, and the others
HALVES = ("setting", "testing")
#: grain laws, drawn once for all candidates, and draws of candidate and sample under each
_LAWS, _OWN, _SEED = 16, 8, 20
_DOPINGS = 61


@dataclass(frozen=True)
class Sample:
    """One published sample: rows of a table that share candidate and name. SI; NaN where nothing is published."""

    name: str
    candidate: Candidate
    shape: str
    size: float
    temperature: Array
    published: dict[str, Array]
    hall_density: float | None
    sources: tuple[str, ...]
    roles: tuple[frozenset[str], ...]
    notes: tuple[str, ...]


@dataclass(frozen=True)
class Doping:
    """Active density of a sample (1/m³), how it is known, and the row whose own figure fixed it."""

    density: float
    how: str
    anchor: tuple[str, int] | None = None


@dataclass(frozen=True)
class Verdict:
    """One published figure and its prediction, SI.

    `spread`: one standard deviation of the logarithm without the model discrepancy, which is `missed`. `fitted`:
    the figure, or one like it, fixed the candidate. `unlike`: the sample holds what the file does not describe.
    """

    sample: str
    material: str
    quantity: str
    shape: str
    size: float
    temperature: float
    doping: Doping
    measured: float
    predicted: float
    spread: float
    missed: float
    fitted: bool
    seen: bool
    unlike: bool
    source: str
    note: str

    @property
    def deviation(self) -> float:
        """Predicted over measured, less one."""
        return self.predicted / self.measured - 1

    @property
    def log_miss(self) -> float:
        """ln(predicted/measured); infinite where the signs differ."""
        ratio = self.predicted / self.measured
        return math.log(ratio) if ratio > 0 else math.inf

    @cached_property
    def ends(self) -> tuple[float, float]:
        """The 90 % interval, lower end first."""
        factor = math.exp(WIDTH * math.hypot(self.spread, self.missed))
        low, high = sorted((self.predicted / factor, self.predicted * factor))
        return low, high

    @property
    def inside(self) -> bool:
        low, high = self.ends
        return low <= self.measured <= high

    @property
    def half_width(self) -> float:
        """Half the interval over the predicted value."""
        low, high = self.ends
        return (high - low) / (2 * abs(self.predicted))

    @property
    def kind(self) -> str:
        """One of KINDS."""
        return "fitted" if self.fitted else "seen" if self.seen else "unlike" if self.unlike else "blind"

    @property
    def half(self) -> str:
        """One of HALVES."""
        return half_of(self.source)

    @property
    def likely_cause(self) -> str:
        """What is known of the sample that may explain a miss."""
        unstated = "density of the sample not published" if self.doping.how == UNSTATED else ""
        return "; ".join(filter(None, (self.note, unstated))) or "not known"


@dataclass(frozen=True)
class Audit:
    """All verdicts, and how many figures of which material have no candidate yet."""

    verdicts: tuple[Verdict, ...]
    without_candidate: dict[str, int]


@dataclass(frozen=True)
class Total:
    """What a group of verdicts amounts to; `papers` are the clusters.

    `cover` by value with its binomial interval (Clopper & Pearson 1934); `paper_cover` with one vote a paper.
    """

    material: str
    kind: str
    half: str
    quantity: str
    values: int
    papers: int
    median_error: float
    median_half_width: float
    cover: float
    cover_interval: tuple[float, float]
    paper_cover: float
    paper_interval: tuple[float, float]


def half_of(source: str) -> str:
    """The half a paper is of: setting if the SHA-256 of its key is even, a rule fixed before any value was seen."""
    return HALVES[sha256(source.encode()).digest()[-1] % 2]


def audit(paths: Sequence[Path] | None = None) -> Audit:
    """Every published figure of the tables, predicted; by default the shipped tables."""
    found, missing = samples(paths)
    return Audit(tuple(verdict for sample in found for verdict in judge(sample)), missing)


def samples(paths: Sequence[Path] | None = None) -> tuple[list[Sample], dict[str, int]]:
    """The samples of the tables, and how many figures of which material have no candidate."""
    if paths is None:
        paths = sorted((datasets_folder() / "measurements").glob("*.csv"))
    found: list[Sample] = []
    missing: dict[str, int] = {}
    for path in paths:
        table = read_measurements(path)
        for (name, sample), rows in _grouped(table).items():
            if _known(name):
                found.append(_sample(table, load_candidate(name), sample, rows))
            else:
                figures = sum(int(np.sum(np.isfinite(_figures(table, q)[rows]))) for q in QUANTITIES)
                missing[name] = missing.get(name, 0) + figures
    return found, missing


def _grouped(table: Measurements) -> dict[tuple[str, str], list[int]]:
    rows: dict[tuple[str, str], list[int]] = {}
    for i, key in enumerate(zip(table.word("candidate"), table.word("sample"), strict=True)):
        rows.setdefault(key, []).append(i)
    return rows


def _known(name: str) -> bool:
    family = family_of(name)
    return name in library_names() or (family is not None and family[0] in family_names())


def _figures(table: Measurements, quantity: str) -> Array:
    return table.conductivity if quantity == "electrical_conductivity" else table.of(quantity)


def _sample(table: Measurements, candidate: Candidate, name: str, rows: list[int]) -> Sample:
    hall = table.of("hall_density")[rows]
    known = hall[np.isfinite(hall)]
    return Sample(
        name,
        candidate,
        table.word("shape")[rows[0]],
        float(table.of("size")[rows[0]]),
        table.of("temperature")[rows],
        {quantity: _figures(table, quantity)[rows] for quantity in QUANTITIES},
        float(known[0]) if known.size else None,
        tuple(table.word("source")[i] for i in rows),
        tuple(frozenset(filter(None, table.word("role")[i].split(", "))) for i in rows),
        tuple(table.word("note")[i] for i in rows),
    )


def judge(sample: Sample, one: Crystal | None = None) -> list[Verdict]:
    """Each published figure of a sample that did not fix its doping; `one` in place of the candidate's crystal.

    A whole conductivity of which carriers bring less than 1 % (undoped silicon) is a lattice conductivity.
    """
    one = crystal(sample.candidate) if one is None else one
    doping = doping_of(sample, one)
    made = evaluate_crystal(one, sample.temperature, doping.density, sample.size, sample.shape)
    predicted = _quantities(made)
    electronic_share = made.electronic_thermal_conductivity / made.thermal_conductivity
    drawn = _drawn_spread(sample, one, doping)
    verdicts = []
    for quantity in QUANTITIES:
        for i in np.flatnonzero(np.isfinite(sample.published[quantity])):
            if doping.anchor == (quantity, int(i)):
                continue
            bare = quantity == "thermal_conductivity" and electronic_share[i] < _NO_ELECTRONS
            verdicts.append(
                Verdict(
                    sample.name,
                    sample.candidate.name,
                    "lattice_conductivity" if bare else quantity,
                    sample.shape,
                    sample.size,
                    float(sample.temperature[i]),
                    doping,
                    float(sample.published[quantity][i]),
                    float(predicted[quantity][i]),
                    math.hypot(float(drawn[quantity][i]), _laboratory(quantity)),
                    float(getattr(load_priors().discrepancy, discrepancy_of(quantity, sample.size)).si),
                    _is_fitted(sample, quantity, int(i)),
                    "seen" in sample.roles[i],
                    "unlike" in sample.roles[i],
                    sample.sources[i],
                    sample.notes[i],
                )
            )
    return verdicts


def _quantities(
    made: Properties,
    mobility: Array | float = 1.0,
    seebeck: Array | float = 1.0,
    lattice: Array | float = 1.0,
) -> dict[str, Array]:
    """What is judged, with mobility, thermopower and lattice conductivity off by the given factors."""
    sigma, thermopower = made.electrical_conductivity * mobility, made.seebeck * seebeck
    lattice_heat = made.lattice_thermal_conductivity * lattice
    heat = lattice_heat + made.electronic_thermal_conductivity * mobility
    power = thermopower**2 * sigma
    return {
        "lattice_conductivity": lattice_heat,
        "thermal_conductivity": heat,
        "electrical_conductivity": sigma,
        "seebeck": thermopower,
        "zt": power * made.temperature / heat,
        "power_factor": power,
        "mobility": made.mobility * mobility,
    }


def doping_of(sample: Sample, one: Crystal) -> Doping:
    """A sample's active density: published, or from its own S or σ at the temperature nearest to 300 K.

    An undoped sample has none that counts; where a paper says nothing, that of the best zT at its temperatures.
    """
    if "undoped" in sample.roles[0]:
        return Doping(UNDOPED, "undoped")
    if sample.hall_density is not None:
        return Doping(sample.hall_density, "published density")
    for quantity, how in (
        ("seebeck", "own Seebeck coefficient at {:.0f} K"),
        ("electrical_conductivity", "own conductivity at {:.0f} K"),
    ):
        rows = np.flatnonzero(np.isfinite(sample.published[quantity]))
        if rows.size:
            i = int(rows[np.argmin(np.abs(sample.temperature[rows] - ROOM))])
            target = np.array([sample.published[quantity][i]])
            density = float(_densities(sample, one, quantity, i, target)[0])
            return Doping(density, how.format(sample.temperature[i]), (quantity, i))
    limits = sample.candidate.data.doping
    grid = np.geomspace(limits.lowest.si, limits.highest.si, _DOPINGS)
    zt = evaluate_crystal(one, sample.temperature[:, None], grid, sample.size, sample.shape).zt
    return Doping(float(grid[np.argmax(np.mean(zt, axis=0))]), UNSTATED)


def _densities(sample: Sample, one: Crystal, quantity: str, row: int, targets: Array) -> Array:
    """The largest densities at which S or σ at the temperature of `row` has the target values, or comes nearest."""
    limits = sample.candidate.data.doping
    grid = np.geomspace(limits.lowest.si / 10, min(limits.highest.si * 10, DENSEST), _DOPINGS)
    made = evaluate_crystal(one, sample.temperature[row], grid, sample.size, sample.shape)
    rising = quantity == "electrical_conductivity"
    curve = np.log(made.electrical_conductivity) if rising else -np.abs(made.seebeck)
    wanted = np.log(targets) if rising else -np.abs(targets)
    below = curve[None, :] <= wanted[:, None]
    last = np.where(below.any(axis=1), _DOPINGS - 1 - np.argmax(below[:, ::-1], axis=1), np.argmin(curve))
    next_up = np.minimum(last + 1, _DOPINGS - 1)
    step = curve[next_up] - curve[last]
    part = np.clip((wanted - curve[last]) / np.where(step > 0, step, np.inf), 0, 1)
    return np.asarray(np.exp(np.log(grid[last]) + part * np.log(grid[next_up] / grid[last])))


@cache
def _own_draws() -> Array:
    """Standard normals of mobility, thermopower, lattice conductivity and doping: (4, laws, draws of each)."""
    u = qmc.Sobol(4, rng=np.random.default_rng(_SEED + 1)).random(_LAWS * _OWN)
    return np.asarray(ndtri(u).T.reshape(4, _LAWS, _OWN))


def _drawn_spread(sample: Sample, one: Crystal, doping: Doping) -> dict[str, Array]:
    """Standard deviation of the logarithm of each quantity at each row over the draws.

    The anchors' spreads shift mobility, S and κ_L of the candidate as a whole; grain law and reflection act on
    grains.
    """
    mobility, thermopower, lattice = (
        np.exp(spread * z) for spread, z in zip(anchor_spreads(sample.candidate), _own_draws()[:3], strict=True)
    )
    normal = _own_draws()[3]
    acting = sample.shape == "grain" and math.isfinite(sample.size)
    laws = with_each_law(sample.candidate, one, _LAWS, _SEED) if acting else [one]
    logs: dict[str, list[Array]] = {quantity: [] for quantity in QUANTITIES}
    for k, crystal_k in enumerate(laws):
        mine = (k,) if acting else (slice(None),)
        factors = [np.ravel(f[mine]) for f in (mobility, thermopower, lattice)]
        density = _drawn_densities(sample, crystal_k, doping, np.ravel(normal[mine]), *factors[:2])
        made = evaluate_crystal(crystal_k, sample.temperature[:, None], density, sample.size, sample.shape)
        for quantity, values in _quantities(made, *factors).items():
            logs[quantity].append(np.log(np.abs(values)))
    return {quantity: _robust_deviation(np.concatenate(parts, axis=1)) for quantity, parts in logs.items()}


def _robust_deviation(logs: Array) -> Array:
    """Half the central 68 % range over the last axis."""
    low, high = np.quantile(logs, (0.1587, 0.8413), axis=1)
    return np.asarray(0.5 * (high - low))


def _drawn_densities(
    sample: Sample, one: Crystal, doping: Doping, normal: Array, mobility: Array, thermopower: Array
) -> Array:
    laboratory = load_priors().laboratory
    if doping.anchor is not None:
        quantity, i = doping.anchor
        off = thermopower if quantity == "seebeck" else mobility
        targets = sample.published[quantity][i] * np.exp(_laboratory(quantity) * normal) / off
        return _densities(sample, one, quantity, i, targets)
    if doping.how == "undoped":
        return np.full(normal.shape, doping.density)
    known = sample.hall_density is not None
    spread = laboratory.hall_density.si if known else laboratory.unstated_doping.si
    return np.asarray(doping.density * np.exp(spread * normal))


def _laboratory(quantity: str) -> float:
    """Spread between laboratories, one standard deviation of the logarithm."""
    shared = load_priors().laboratory
    sigma, thermopower = shared.electrical_conductivity.si, shared.seebeck.si
    return {
        "lattice_conductivity": shared.thermal_conductivity.si,
        "thermal_conductivity": shared.thermal_conductivity.si,
        "electrical_conductivity": sigma,
        "seebeck": thermopower,
        "zt": shared.zt.si,
        "power_factor": math.hypot(sigma, 2 * thermopower),
        "mobility": math.hypot(sigma, shared.hall_density.si),
    }[quantity]


_KIND_OF = {
    "lattice_conductivity": "thermal_conductivity",
    "thermal_conductivity": "thermal_conductivity",
    "electrical_conductivity": "electrical_conductivity",
    "mobility": "electrical_conductivity",
    "power_factor": "electrical_conductivity",
    "seebeck": "seebeck",
    "zt": "zt",
}
#: no quantity is taken as modelled better than a tenth, however few papers say so (common practice)
_LEAST_DISCREPANCY, _LARGEST_DISCREPANCY = 0.1, 2.0


def discrepancy_of(quantity: str, size: float) -> str:
    """Which discrepancy a quantity shares in; heat in bodies of a stated size has its own."""
    kind = _KIND_OF[quantity]
    return f"{kind}_sized" if kind == "thermal_conductivity" and math.isfinite(size) else kind


def discrepancies(verdicts: Iterable[Verdict]) -> dict[str, float]:
    """The model's own spreads δ that make the blind misses of the setting papers likeliest: one vote a paper.

    ln(predicted/measured) is taken as normal of variance spread² + δ²; δ is never under a tenth. Papers of the
    other half are not looked at.
    """
    chosen = [v for v in verdicts if v.kind == "blind" and v.half == "setting"]
    found = {}
    for name in type(load_priors().discrepancy).model_fields:
        group = [v for v in chosen if discrepancy_of(v.quantity, v.size) == name]
        papers = [v.source for v in group]
        votes = np.array([1 / papers.count(source) for source in papers])
        known, missed = np.array([v.spread**2 for v in group]), np.array([v.log_miss**2 for v in group])
        found[name] = _likeliest_spread(votes, known, missed)
    return found


def _likeliest_spread(votes: Array, known: Array, missed: Array) -> float:
    def unlikelihood(spread: float) -> float:
        variance = known + spread**2
        return float(np.sum(votes * (np.log(variance) + missed / variance)))

    found = minimize_scalar(unlikelihood, bounds=(0.0, _LARGEST_DISCREPANCY), method="bounded")
    return max(float(found.x), _LEAST_DISCREPANCY)


def _is_fitted(sample: Sample, quantity: str, row: int) -> bool:
    """Whether this figure fixed the candidate, or repeats one that did.

    Coarse samples only: no fine-grained one fixes anything. A sample whose source gives an anchor that fixes a
    prefactor, a figure that an anchor was compared with, and undoped heat between the temperatures of undoped
    anchors.
    """
    if "fitted" in sample.roles[row]:
        return True
    if math.isfinite(sample.size):
        return False
    source, t = sample.sources[row], float(sample.temperature[row])
    anchors = [anchor for anchor, _ in anchors_behind(sample.candidate)]
    if any(a.measured.source == source and a.fixes != "nothing" for a in anchors):
        return True
    if any(
        a.measured.source == source and a.quantity == quantity and math.isclose(a.temperature.si, t)
        for a in anchors
    ):
        return True
    undoped = [a.temperature.si for a in anchors if a.doping is None]
    heat = quantity in ("lattice_conductivity", "thermal_conductivity")
    return heat and "undoped" in sample.roles[row] and bool(undoped) and min(undoped) <= t <= max(undoped)


def totals(verdicts: Sequence[Verdict]) -> list[Total]:
    """All materials by kind, by half of the papers and by quantity; then each material's blind values."""
    made = []
    for kind in KINDS:
        of_kind = [v for v in verdicts if v.kind == kind]
        made += _by_quantity("all", kind, "both", of_kind)
        if kind == "blind":
            for half in HALVES:
                made += _by_quantity("all", kind, half, [v for v in of_kind if v.half == half])
    blind = [v for v in verdicts if v.kind == "blind"]
    for material in sorted({v.material for v in blind}):
        made += _by_quantity(material, "blind", "both", [v for v in blind if v.material == material])
    return made


def _by_quantity(material: str, kind: str, half: str, verdicts: Sequence[Verdict]) -> list[Total]:
    groups = {"any": verdicts} if material == "all" else {}
    groups |= {quantity: [v for v in verdicts if v.quantity == quantity] for quantity in QUANTITIES}
    return [_total(material, kind, half, name, group) for name, group in groups.items() if group]


def _total(material: str, kind: str, half: str, quantity: str, verdicts: Sequence[Verdict]) -> Total:
    inside = [v.inside for v in verdicts]
    by_paper: dict[str, list[bool]] = {}
    for v in verdicts:
        by_paper.setdefault(v.source, []).append(v.inside)
    papers = len(by_paper)
    votes = sum(float(np.mean(each)) for each in by_paper.values())
    return Total(
        material,
        kind,
        half,
        quantity,
        len(verdicts),
        papers,
        float(np.median([abs(v.deviation) for v in verdicts])),
        float(np.median([v.half_width for v in verdicts])),
        sum(inside) / len(inside),
        _binomial(sum(inside), len(inside)),
        votes / papers,
        _binomial(round(votes), papers),
    )


def _binomial(hits: int, of: int) -> tuple[float, float]:
    found = binomtest(hits, of).proportion_ci(0.95, method="exact")
    return float(found.low), float(found.high)
