"""The library against published samples: what it would have said, how sure it was, and how often it was right."""

from __future__ import annotations

import hashlib
import math
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.stats import binomtest

from legwright.base.files import datasets_folder
from legwright.candidate.library import Candidate, load_candidate
from legwright.candidate.measurements import Measurements, read_measurements
from legwright.candidate.model import Anchor
from legwright.candidate.number import Measure
from legwright.candidate.priors import ByQuantity, load_priors
from legwright.physics.crystal import Crystal, crystal
from legwright.physics.properties import Properties, evaluate_crystal

Array = NDArray[np.float64]

#: quantities that are judged, in SI, and how a prediction gives them
JUDGED: dict[str, Callable[[Properties], Array]] = {
    "lattice_conductivity": lambda made: made.lattice_thermal_conductivity,
    "thermal_conductivity": lambda made: made.thermal_conductivity,
    "seebeck": lambda made: made.seebeck,
    "electrical_conductivity": lambda made: made.electrical_conductivity,
    "mobility": lambda made: made.mobility,
    "power_factor": lambda made: made.power_factor,
    "zt": lambda made: made.zt,
}
#: whose laboratory and model spread each quantity takes
_KIND = {
    "lattice_conductivity": "thermal_conductivity",
    "mobility": "electrical_conductivity",
    "power_factor": "electrical_conductivity",
}
#: half-width of a 90 % interval in standard deviations
NINETY = 1.645
#: an active density that a paper gives is good to 15 per cent, one merely typical to half
_DENSITY_SPREAD = {"hall": 0.15, "seebeck": 0.0, "typical": 0.5, "undoped": 0.0}
_UNDOPED = 1e20


@dataclass(frozen=True)
class Judgement:
    """One published value against its prediction; SI. `spread`: of ln(predicted), by parameters and laboratory."""

    material: str
    sample: str
    quantity: str
    shape: str
    size: float
    temperature: float
    measured: float
    predicted: float
    spread: float
    role: str
    density_from: str
    source: str
    note: str

    @property
    def fitted(self) -> bool:
        """Used to fix a parameter: shown, and never counted as a prediction."""
        return self.role == "calibration"

    @property
    def deviation(self) -> float:
        """ln(predicted/measured): as a share where it is small."""
        return math.log(abs(self.predicted / self.measured))

    @property
    def half_width(self) -> float:
        """Half of the 90 % interval in ln, the model's own discrepancy with it."""
        own = getattr(load_priors().discrepancy, self.kind)
        return NINETY * math.hypot(self.spread, own.si)

    @property
    def kind(self) -> str:
        """Which of the discrepancies applies."""
        kind = _KIND.get(self.quantity, self.quantity)
        return f"{kind}_sized" if kind == "thermal_conductivity" and math.isfinite(self.size) else kind

    @property
    def interval(self) -> tuple[float, float]:
        """The 90 % interval of the measured value, low and high."""
        ends = (self.predicted * math.exp(-self.half_width), self.predicted * math.exp(self.half_width))
        return min(ends), max(ends)

    @property
    def inside(self) -> bool:
        """Whether the published value lies in the interval."""
        return abs(self.deviation) <= self.half_width


def _of(table: ByQuantity, quantity: str) -> float:
    number = getattr(table, _KIND.get(quantity, quantity))
    return float(number.si)


def audit() -> list[Judgement]:
    """Every published value of the measurement tables, sample by sample.

    A sample's doping is its Hall density, else what gives its own Seebeck coefficient at one temperature (which is
    then not judged), else undoped where it says so, else the density of the candidate's mobility anchor. Intervals
    are first-order: the spread of each anchor, of grain law, reflection and density moves the prediction by itself,
    and squares add up.
    """
    judged: list[Judgement] = []
    for path in sorted((datasets_folder() / "measurements").glob("*.csv")):
        table = read_measurements(path)
        for where in _samples(table):
            judged += _judge(table, where)
    return judged


def _samples(table: Measurements) -> Iterable[list[int]]:
    """Rows of each sample, coldest first."""
    names = list(zip(table.word("candidate"), table.word("sample"), table.word("source"), strict=True))
    groups: dict[tuple[str, ...], list[int]] = {}
    for index, name in enumerate(names):
        groups.setdefault((*name, repr(float(table.of("size")[index]))), []).append(index)
    for rows in groups.values():
        yield sorted(rows, key=lambda i: float(table.of("temperature")[i]))


def _judge(table: Measurements, rows: list[int]) -> list[Judgement]:
    candidate = load_candidate(table.word("candidate")[rows[0]])
    one = crystal(candidate)
    shape = table.word("shape")[rows[0]] or "grain"
    temperature, size = table.of("temperature")[rows], table.of("size")[rows]
    density, told = _density(table, rows, candidate, one, shape)
    base = evaluate_crystal(one, temperature, density, size, shape)
    moved = [
        evaluate_crystal(other, temperature, density, size, shape) for other in _one_spread_away(candidate, one)
    ]
    if _DENSITY_SPREAD[told]:
        moved.append(evaluate_crystal(one, temperature, density * math.exp(_DENSITY_SPREAD[told]), size, shape))
    found = []
    for quantity, of in JUDGED.items():
        measured = table.conductivity if quantity == "electrical_conductivity" else table.of(quantity)
        expected = of(base)
        shifts = np.array([np.log(np.abs(of(other) / expected)) for other in moved])
        spread = np.sqrt(np.sum(shifts**2, axis=0) + _of(load_priors().laboratory, quantity) ** 2)
        for place, row in enumerate(rows):
            anchored = told == "seebeck" and quantity == "seebeck" and place == _anchor_place(table, rows)
            if math.isnan(measured[row]) or anchored:
                continue
            found.append(
                Judgement(
                    candidate.name, table.word("sample")[row], quantity, shape, float(size[place]),
                    float(temperature[place]), float(measured[row]), float(expected[place]), float(spread[place]),
                    _role(candidate, float(temperature[place]), table.word("role")[row]), told,
                    table.word("source")[row], table.word("note")[row],
                )
            )  # fmt: skip
    return found


#: beyond the span of temperatures over which a candidate was checked, by more than this share, it is not judged
_BEYOND = 0.05


def _role(candidate: Candidate, temperature: float, written: str) -> str:
    service = candidate.data.service
    within = (1 - _BEYOND) * service.data_from.si <= temperature <= (1 + _BEYOND) * service.data_to.si
    return written if within or written == "calibration" else "outside data"


def _anchor_place(table: Measurements, rows: list[int]) -> int:
    """Which of the sample's rows gives its density through S: that nearest to 300 K."""
    given = [place for place, row in enumerate(rows) if not math.isnan(table.of("seebeck")[row])]
    return min(given, key=lambda place: abs(float(table.of("temperature")[rows[place]]) - 300)) if given else -1


def _density(
    table: Measurements, rows: list[int], candidate: Candidate, one: Crystal, shape: str
) -> tuple[float, str]:
    """Active density of the sample, 1/m³, and where it is from."""
    hall = table.of("hall_density")[rows]
    if np.any(~np.isnan(hall)):
        return float(hall[~np.isnan(hall)][0]), "hall"
    place = _anchor_place(table, rows)
    if place >= 0:
        row = rows[place]
        t, d = table.of("temperature")[row], table.of("size")[row]
        return _density_of(one, candidate, float(t), float(d), shape, float(table.of("seebeck")[row])), "seebeck"
    if "undoped" in table.word("note")[rows[0]]:
        return _UNDOPED, "undoped"
    return _typical(candidate), "typical"


def _typical(candidate: Candidate) -> float:
    """Density of the densest mobility anchor that fixes something; of a family's heaviest relative."""
    parent = max(candidate.relatives, key=lambda pair: pair[1])[0] if candidate.relatives else candidate
    densities = [a.doping.si for a in parent.data.anchor if a.quantity == "mobility" and a.doping]
    return max(densities) if densities else parent.data.doping.highest.si


def _density_of(
    one: Crystal, candidate: Candidate, temperature: float, size: float, shape: str, thermopower: float
) -> float:
    """The density at which S is what was measured, on the branch where |S| falls with it; the nearest otherwise."""
    doping = candidate.data.doping
    density = np.geomspace(doping.lowest.si / 30, doping.highest.si * 30, 241)
    size_of_s = np.abs(evaluate_crystal(one, temperature, density, size, shape).seebeck)
    peak = int(np.argmax(size_of_s))
    falling = size_of_s[peak:]
    last = int(np.argmax(np.diff(falling, append=np.inf) > 0)) + 1
    return float(np.exp(np.interp(-abs(thermopower), -falling[:last], np.log(density[peak : peak + last]))))


def _one_spread_away(candidate: Candidate, one: Crystal) -> list[Crystal]:
    """The crystal with each uncertain thing one standard deviation up: anchors, grain law, reflection."""
    electrons, phonons, law = one.electrons, one.phonons, load_priors().grain_law
    parent = max(candidate.relatives, key=lambda pair: pair[1])[0] if candidate.relatives else candidate
    reflection = parent.data.scattering.grain_reflection or load_priors().reflection.electrons
    share = {quantity: _anchor_spread(parent.data.anchor, quantity) for quantity in ("mobility", "seebeck")}
    heat = _anchor_spread(parent.data.anchor, "lattice_conductivity")
    knots = tuple((place, log + share["mobility"]) for place, log in electrons.impurity_knots)
    return [
        replace(
            one,
            electrons=replace(
                electrons, lattice_scale=electrons.lattice_scale * math.exp(share["mobility"]), impurity_knots=knots
            ),
        ),
        # near 200 µV/K, S changes by a share if the mass changes by 1.2 times that share
        replace(
            one, electrons=replace(electrons, mass_scale=electrons.mass_scale * math.exp(1.2 * share["seebeck"]))
        ),
        replace(one, phonons=replace(phonons, anharmonic_scale=phonons.anharmonic_scale * math.exp(1.5 * heat))),
        replace(one, phonons=replace(phonons, grain_exponent=_up(law.exponent))),
        replace(one, phonons=replace(phonons, grain_prefactor=_up(law.prefactor))),
        replace(one, electrons=replace(electrons, reflection=min(_up(reflection), 0.95))),
    ]  # fmt: skip


def _up(number: Measure) -> float:
    """One standard deviation above."""
    return number.si * (1 + number.relative_spread)


def _anchor_spread(anchors: tuple[Anchor, ...], quantity: str) -> float:
    """Relative spread of the anchor that fixes most of the quantity."""
    of = [a.measured.relative_spread for a in anchors if a.quantity == quantity]
    fixing = [a.measured.relative_spread for a in anchors if a.quantity == quantity and a.fixes != "nothing"]
    return min(fixing or of or [0.2])


# ---- totals


@dataclass(frozen=True)
class Total:
    """Blind values of one material (or all) and quantity: how far off, and how often inside."""

    material: str
    quantity: str
    values: int
    papers: int
    median: float
    inside: int
    coverage: tuple[float, float]
    half_width: float


#: what counts: values that nobody looked at while choosing, and those that were seen but fixed nothing
BLIND_AND_SEEN = ("", "seen")


def totals(judged: Iterable[Judgement], roles: tuple[str, ...] = BLIND_AND_SEEN) -> list[Total]:
    """Medians of |predicted/measured − 1| and coverage with its 90 % binomial interval, overall first.

    Values that fixed a parameter are left out. Values of one paper are not independent: `papers` says how many
    there are, and with few the binomial interval is too narrow.
    """
    counted = [one for one in judged if one.role in roles]
    groups: dict[tuple[str, str], list[Judgement]] = {}
    for one in counted:
        groups.setdefault(("all", one.quantity), []).append(one)
        groups.setdefault((one.material, one.quantity), []).append(one)
    made = []
    for (material, quantity), ones in groups.items():
        inside = sum(one.inside for one in ones)
        low, high = binomtest(inside, len(ones)).proportion_ci(0.9)
        made.append(
            Total(
                material, quantity, len(ones), len({one.source for one in ones}),
                float(np.median([abs(one.predicted / one.measured - 1) for one in ones])),
                inside, (float(low), float(high)), float(np.median([math.expm1(one.half_width) for one in ones])),
            )
        )  # fmt: skip
    order = {quantity: place for place, quantity in enumerate(JUDGED)}
    return sorted(made, key=lambda total: (total.material != "all", total.material, order[total.quantity]))


def of_first_half(source: str) -> bool:
    """Papers whose key has an even SHA-256 set the discrepancy, the others test it: fixed before any was seen."""
    return hashlib.sha256(source.encode()).digest()[-1] % 2 == 0


#: no quantity is taken as modelled better than this, however few papers say so (common practice)
_LEAST_DISCREPANCY = 0.1


def fitting_discrepancy(judged: Iterable[Judgement], kind: str) -> float:
    """The least spread of its own that puts nine in ten values of the first half inside; never under a tenth."""
    ones = [one for one in judged if one.role in BLIND_AND_SEEN and of_first_half(one.source) and one.kind == kind]
    if not ones:
        return 0.0
    wanted = sorted(math.sqrt(max((one.deviation / NINETY) ** 2 - one.spread**2, 0.0)) for one in ones)
    return max(wanted[min(math.ceil(0.9 * len(wanted)), len(wanted)) - 1], _LEAST_DISCREPANCY)
