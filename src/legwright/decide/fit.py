"""A candidate calibrated to measurements of one's own: what the data say, how surely, and what they leave open."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import least_squares

from legwright.base.errors import InputError
from legwright.base.units import E_CHARGE, K_B
from legwright.candidate.library import Candidate
from legwright.candidate.measurements import Measurements
from legwright.candidate.priors import load_priors
from legwright.candidate.supply import mass_density
from legwright.physics.crystal import Crystal, crystal
from legwright.physics.properties import Properties, evaluate_crystal

Array = NDArray[np.float64]

#: what is fitted beside the samples' densities, and how far it may lie from the starting candidate: one standard
#: deviation of the logarithm, of the gap in eV (common practice: samples of one formula differ by so much)
PRIOR_SPREADS = {"mass": 0.3, "lattice scattering": 0.6, "anharmonicity": 0.4, "gap": 0.05}
#: a Hall density is taken as good to this share; without one a sample's density may be off the typical by e
HALL_SPREAD, FREE_SPREAD = 0.1, 1.0
#: a parameter whose spread shrank by less than this is not determined by the data
_SHRUNK = 0.8
#: half-width of a 90 % interval in standard deviations
_NINETY = 1.645
_MOST_TRIALS = 60
#: a miss counts by its square up to about this many spreads, by its size beyond: one wild row does not rule
_TAME = 3.0


@dataclass(frozen=True)
class Parameter:
    """One fitted number: a factor on the start's (gap: shift in eV; density: 1/m³), and the spread of its ln."""

    name: str
    value: float
    spread: float
    prior_spread: float

    @property
    def determined(self) -> bool:
        """Whether the data say more of it than was known before."""
        return self.spread < _SHRUNK * self.prior_spread

    @property
    def interval(self) -> tuple[float, float]:
        """90 % interval."""
        reach = _NINETY * self.spread
        if self.name == "gap":
            return self.value - reach, self.value + reach
        return self.value * math.exp(-reach), self.value * math.exp(reach)


@dataclass(frozen=True)
class Fit:
    """What a fit found, or the best it had when it stopped and why (`complete`, `reason`)."""

    start: Candidate
    table: Measurements
    parameters: tuple[Parameter, ...]
    covariance: Array
    crystal: Crystal
    residuals: dict[str, tuple[int, float]]
    heat_capacity: str
    complete: bool
    reason: str


def fit(table: Measurements, start: Candidate) -> Fit:
    """Masses, lattice scattering, anharmonicity, gap and each sample's density that meet the table best.

    Robust least squares (soft L1) of ln(computed/measured) over the laboratories' spread, for σ, S, κ and κ_L,
    with the starting candidate's values as priors; the covariance is that of the linearised problem with priors.
    Raises InputError where the table holds nothing that can be fitted; otherwise always returns, if need be the
    best so far with the reason.
    """
    problem = _Problem(table, start)
    best: dict[str, Any] = {"cost": math.inf, "x": np.zeros(problem.size)}

    def misses(x: Array) -> Array:
        found = problem.misses(x)
        cost = float(np.sum(np.abs(found)))
        if math.isfinite(cost) and cost < best["cost"]:
            best.update(cost=cost, x=x.copy())
        return found

    complete, reason = True, "converged"
    covariance = np.diag(problem.prior**2)
    try:
        found = least_squares(
            misses,
            np.zeros(problem.size),
            loss="soft_l1",
            f_scale=_TAME,
            max_nfev=_MOST_TRIALS,
            xtol=1e-8,
            ftol=1e-8,
        )
        x, slopes = found.x, np.asarray(found.jac)
        covariance = problem.prior[:, None] * np.linalg.inv(slopes.T @ slopes) * problem.prior
        if found.status == 0:
            complete, reason = False, f"stopped after {_MOST_TRIALS} trials without settling"
    except (ArithmeticError, ValueError, np.linalg.LinAlgError) as error:
        complete, reason, x = False, f"stopped: {error}", best["x"]
    return Fit(
        start, table, problem.parameters(x, covariance), covariance, problem.crystal(x), problem.residuals(x),
        problem.heat_capacity, complete, reason,
    )  # fmt: skip


class _Problem:
    """Unknowns in units of their prior spread, and how far the model is from the table."""

    def __init__(self, table: Measurements, start: Candidate) -> None:
        self.table, self.start, self.one = table, start, crystal(start)
        self.temperature, self.grain = table.of("temperature"), table.of("size")
        self.grain = np.where(np.isnan(self.grain), np.inf, self.grain)
        names = table.word("sample")
        self.samples = tuple(dict.fromkeys(names))
        self.of_sample = np.array([self.samples.index(name) for name in names])
        self.measured, self.heat_capacity = _measured(table, start)
        if not any(np.any(~np.isnan(series)) for series in self.measured.values()):
            raise InputError("holds neither σ, S nor κ: nothing to fit", file=table.path, slug="bad-row")
        hall = table.of("hall_density")
        self.expected, spreads = [], []
        for index in range(len(self.samples)):
            given = hall[(self.of_sample == index) & ~np.isnan(hall)]
            doping = start.data.doping
            typical = math.sqrt(doping.lowest.si * doping.highest.si)
            self.expected.append(float(given[0]) if given.size else typical)
            spreads.append(HALL_SPREAD if given.size else FREE_SPREAD)
        self.prior = np.array([*PRIOR_SPREADS.values(), *spreads])
        self.size = self.prior.size

    def crystal(self, x: Array) -> Crystal:
        """The starting crystal with the unknowns' values."""
        mass, scattering, anharmonicity, gap = (x * self.prior)[: len(PRIOR_SPREADS)]
        electrons, phonons = self.one.electrons, self.one.phonons
        minority = ~electrons.majority
        return replace(
            self.one,
            electrons=replace(
                electrons,
                mass_scale=electrons.mass_scale * math.exp(mass),
                lattice_scale=electrons.lattice_scale * math.exp(scattering),
                edge=electrons.edge + np.where(minority, electrons.side * gap * E_CHARGE, 0.0),
            ),
            phonons=replace(phonons, anharmonic_scale=phonons.anharmonic_scale * math.exp(anharmonicity)),
        )

    def densities(self, x: Array) -> Array:
        """Active density of each sample, 1/m³."""
        return np.asarray(np.array(self.expected) * np.exp((x * self.prior)[len(PRIOR_SPREADS) :]))

    def predicted(self, x: Array) -> Properties:
        """Every row of the table."""
        return evaluate_crystal(self.crystal(x), self.temperature, self.densities(x)[self.of_sample], self.grain)

    def deviations(self, x: Array) -> dict[str, Array]:
        """ln(computed/measured) by quantity; of S the relative difference, so that a wrong sign counts."""
        made = self.predicted(x)
        by_quantity = {
            "electrical_conductivity": made.electrical_conductivity,
            "thermal_conductivity": made.thermal_conductivity,
            "lattice_conductivity": made.lattice_thermal_conductivity,
        }
        off = {q: np.log(values / self.measured[q]) for q, values in by_quantity.items()}
        off["seebeck"] = made.seebeck / self.measured["seebeck"] - 1
        return {q: values[~np.isnan(self.measured[q])] for q, values in off.items()}

    def misses(self, x: Array) -> Array:
        """Deviations over the laboratories' spread, then the unknowns themselves (their priors)."""
        laboratory = load_priors().laboratory
        spread = {
            "electrical_conductivity": laboratory.electrical_conductivity.si,
            "thermal_conductivity": laboratory.thermal_conductivity.si,
            "lattice_conductivity": laboratory.thermal_conductivity.si,
            "seebeck": laboratory.seebeck.si,
        }
        return np.concatenate([*(off / spread[q] for q, off in sorted(self.deviations(x).items())), x])

    def residuals(self, x: Array) -> dict[str, tuple[int, float]]:
        """Rows of each quantity, and the root mean square of their relative deviation."""
        off = self.deviations(x)
        return {q: (values.size, float(np.sqrt(np.mean(values**2)))) for q, values in off.items() if values.size}

    def parameters(self, x: Array, covariance: Array) -> tuple[Parameter, ...]:
        """The unknowns as a reader wants them."""
        spread, values = np.sqrt(np.diag(covariance)), x * self.prior
        made = [
            Parameter(name, float(v) if name == "gap" else math.exp(v), float(s), float(p))
            for name, v, s, p in zip(PRIOR_SPREADS, values, spread, self.prior, strict=False)
        ]
        count = len(PRIOR_SPREADS)
        made += [
            Parameter(f"density of {name or 'the sample'}", float(n), float(s), float(p))
            for name, n, s, p in zip(
                self.samples, self.densities(x), spread[count:], self.prior[count:], strict=True
            )
        ]
        return tuple(made)


def _measured(table: Measurements, start: Candidate) -> tuple[dict[str, Array], str]:
    """σ, S, κ and κ_L in SI, κ from diffusivity where it is not given; and whose heat capacity that took."""
    heat, said = table.of("thermal_conductivity"), "none needed"
    diffusivity = table.of("diffusivity")
    wanting = np.isnan(heat) & ~np.isnan(diffusivity)
    if np.any(wanting):
        classical = 3 * K_B / start.disorder.mean_mass
        capacity, density = table.of("heat_capacity"), table.of("density")
        said = "measured"
        if np.any(np.isnan(capacity[wanting])):
            said = f"Dulong–Petit, {classical:.0f} J/(kg K), where none was measured (some per cent low when hot)"
        capacity = np.where(np.isnan(capacity), classical, capacity)
        density = np.where(np.isnan(density), mass_density(start), density)
        heat = np.where(wanting, diffusivity * density * capacity, heat)
    return {
        "electrical_conductivity": table.conductivity,
        "seebeck": table.of("seebeck"),
        "thermal_conductivity": heat,
        "lattice_conductivity": table.of("lattice_conductivity"),
    }, said


def candidate_text(found: Fit) -> str:
    """The calibrated candidate as a file: the start with fitted prefactors, shifted gap and their covariance."""
    import tomli_w

    raw = found.start.data.model_dump(by_alias=True, exclude_none=True)
    note = f"fitted to {found.table.path.name}, starting from {found.start.name}"
    if not found.complete:
        note += f"; {found.reason}"

    def number(value: float, spread: float, unit: str = "1") -> dict[str, Any]:
        return {
            "value": value, "unit": unit, "spread": spread, "source": "own-measurements",
            "basis": "calibrated on bulk", "note": note,
        }  # fmt: skip

    spread = {parameter.name: parameter.spread for parameter in found.parameters}
    electrons, phonons = found.crystal.electrons, found.crystal.phonons
    knots = [
        {"doping": number(math.exp(place), 0.1, "1/m^3"), "factor": number(math.exp(log), 0.2)}
        for place, log in electrons.impurity_knots
    ]
    for band, edge, major in zip(raw["band"], electrons.edge, electrons.majority, strict=True):
        if not major:
            band["edge"] = {**number(float(edge) / E_CHARGE, spread["gap"], "eV"), "spread_unit": "eV"}
    raw["title"] = f"{found.start.data.title}, fitted to {found.table.path.stem}"
    raw["fitted"] = {
        "mass": number(electrons.mass_scale, spread["mass"]),
        "lattice_scattering": number(electrons.lattice_scale, spread["lattice scattering"]),
        "anharmonicity": number(phonons.anharmonic_scale, spread["anharmonicity"]),
        "strain": number(phonons.strain_scale, 0.1),
        "phonons_by_carriers": number(phonons.carrier_weight, 0.1),
        "optical_excess": number(phonons.optical_excess, 0.2, "W/m/K"),
        "heavy_doping": knots,
        "names": [parameter.name for parameter in found.parameters],
        "covariance": found.covariance.tolist(),
    }
    return f"# Written by a fit to {found.table.path.name}: {found.reason}.\n\n{tomli_w.dumps(raw)}"
