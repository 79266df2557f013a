"""A candidate as plain SI numbers, with the prefactors that its bulk anchors fix."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.errors import InputError
from legwright.base.units import EPS_0
from legwright.candidate.composition import atomic_mass, dopant_disorder
from legwright.candidate.library import Candidate
from legwright.candidate.model import Anchor, Band, Fitted
from legwright.candidate.number import Measure
from legwright.candidate.priors import load_priors
from legwright.physics.carriers import Electrons, Filling, bulk_flow, fill, masses, transport_integrals
from legwright.physics.lattice import (
    Carriers,
    Phonons,
    acoustic_conductivity,
    crystal_rates,
    modes,
    optical_conductivity,
)
from legwright.physics.moments import mobility, seebeck
from legwright.physics.phonon_scattering import vacancy_disorder
from legwright.physics.texture import effective_size_ratio, porous_share

Array = NDArray[np.float64]

#: how the published form of the alloy rate compares with the golden rule for the same U
PUBLISHED_ALLOY_RATIO = 3 * np.pi**2 / 8


@dataclass(frozen=True)
class Crystal:
    """One candidate in SI: its electrons and phonons, and what its grains' spread and its pores do.

    size_ratio: the size that acts over the median one; dense_share: the part of a conductivity that pores leave;
    both dimensionless, 1 where there is nothing of the kind.
    """

    electrons: Electrons
    phonons: Phonons
    size_ratio: float = 1.0
    dense_share: float = 1.0

    def acting_size(self, size: Array, shape: str) -> Array:
        """The one size that acts as the body's do: grains of a given median may be spread."""
        return size * self.size_ratio if shape == "grain" else size


@lru_cache(maxsize=4096)
def crystal(candidate: Candidate) -> Crystal:
    """The candidate's numbers in SI with every prefactor solved from its anchors.

    Prefactors (masses, lattice scattering, heavy doping, anharmonicity, strain, phonons by carriers) are those with
    the smallest Σ (miss/spread)² over the anchors that fix them; a member of a family takes its relatives'.
    Raises InputError where an anchor cannot be met by any value of the prefactor that it is said to fix.
    Source of the practice: Ravich, Efimova & Smirnov (1970); anchors as each candidate's file cites them.

    >>> from legwright.candidate.library import load_candidate
    >>> silicon = load_candidate("si-n")
    >>> anchor = next(each for each in silicon.data.anchor if each.quantity == "mobility")
    >>> at = (anchor.temperature.si, anchor.doping.si)
    >>> moving, _ = bulk_mobility_and_seebeck(crystal(silicon).electrons, *at)
    >>> bool(abs(moving / anchor.measured.si - 1) < 1e-9)  # as many unknowns as anchors: each is met
    True
    """
    making = candidate.data.making
    bare = Crystal(
        _electrons(candidate),
        _phonons(candidate),
        size_ratio=float(effective_size_ratio(_si(making.size_spread))),
        dense_share=float(porous_share(_si(making.porosity))),
    )
    if candidate.relatives:
        return _with_prefactors_of(candidate.relatives, bare)
    if candidate.data.fitted is not None:
        return _with_fitted_prefactors(candidate, candidate.data.fitted, bare)
    brought = _brought_by_making(candidate)
    electrons = _fix_electrons(candidate, bare.electrons)
    as_anchored = _weighing(_with_optical_heat(candidate, bare.phonons), brought, 0.0)
    phonons = _fix_phonons(candidate, Crystal(electrons, as_anchored))
    return replace(bare, electrons=electrons, phonons=_weighing(phonons, brought, 1.0))


def _with_fitted_prefactors(candidate: Candidate, fitted: Fitted, bare: Crystal) -> Crystal:
    anchor = next((a for a in candidate.data.anchor if a.quantity == "lattice_conductivity"), None)
    knots = tuple((float(np.log(knot.doping.si)), float(np.log(knot.factor.si))) for knot in fitted.heavy_doping)
    return replace(
        bare,
        electrons=replace(
            bare.electrons,
            mass_scale=fitted.mass.si,
            lattice_scale=fitted.lattice_scattering.si,
            impurity_knots=knots,
        ),
        phonons=replace(
            bare.phonons,
            anharmonic_scale=fitted.anharmonicity.si,
            strain_scale=fitted.strain.si,
            carrier_weight=fitted.phonons_by_carriers.si,
            optical_excess=fitted.optical_excess.si,
            optical_temperature=anchor.temperature.si if anchor else bare.phonons.optical_temperature,
        ),
    )


def _with_prefactors_of(relatives: tuple[tuple[Candidate, float], ...], bare: Crystal) -> Crystal:
    """A family member's crystal with its relatives' prefactors: means of their logarithms by weight."""
    there = [(crystal(one), weight) for one, weight in relatives if weight]

    def mean(of: Callable[[Crystal], Array | float]) -> Array:
        return np.asarray(sum(weight * np.asarray(of(one)) for one, weight in there))

    def log_mean(of: Callable[[Crystal], float]) -> float:
        return float(np.exp(mean(lambda one: np.log(of(one)))))

    places = sorted({place for one, _ in there for place, _ in one.electrons.impurity_knots})

    def impurity(one: Crystal) -> Array:
        knots = one.electrons.impurity_knots
        return np.interp(places, *np.transpose(knots)) if knots else np.zeros(len(places))

    return replace(
        bare,
        electrons=replace(
            bare.electrons,
            mass_scale=log_mean(lambda one: one.electrons.mass_scale),
            lattice_scale=log_mean(lambda one: one.electrons.lattice_scale),
            impurity_knots=tuple(zip(places, mean(impurity).tolist(), strict=True)),
        ),
        phonons=replace(
            bare.phonons,
            anharmonic_scale=log_mean(lambda one: one.phonons.anharmonic_scale),
            strain_scale=log_mean(lambda one: one.phonons.strain_scale),
            carrier_weight=log_mean(lambda one: one.phonons.carrier_weight),
            optical_excess=float(mean(lambda one: one.phonons.optical_excess)),
            optical_temperature=float(mean(lambda one: one.phonons.optical_temperature)),
        ),
    )


def _si(number: Measure | None, otherwise: float = 0.0) -> float:
    return otherwise if number is None else number.si


def _electrons(candidate: Candidate) -> Electrons:
    data, shared = candidate.data, candidate.data.scattering

    def each(value: Callable[[Band], float]) -> Array:
        return np.array([value(band) for band in data.band])

    def alloy_potential(band: Band) -> float:
        factor = PUBLISHED_ALLOY_RATIO**0.5 if band.alloy_form != "golden rule" else 1.0
        return _si(band.alloy_potential) * factor

    high = shared.high_frequency_dielectric
    reflection = shared.grain_reflection or load_priors().reflection.electrons
    return Electrons(
        carrier=-1 if data.carrier == "p" else 1,
        side=each(lambda b: 1.0 if b.side == "conduction" else -1.0),
        edge=each(lambda b: b.edge.si),
        edge_alpha=each(lambda b: _si(b.edge_alpha)),
        edge_beta=each(lambda b: _si(b.edge_beta)),
        valleys=each(lambda b: b.valleys.si),
        dos_mass=each(lambda b: b.dos_mass.si),
        inertial_mass=each(lambda b: b.inertial_mass.si),
        mass_exponent=each(lambda b: _si(b.mass_exponent)),
        mass_ratio=each(lambda b: _si(b.mass_ratio, 1.0)),
        nonparabolicity=each(lambda b: _si(b.nonparabolicity)),
        deformation_potential=each(lambda b: b.deformation_potential.si),
        intervalley_field=each(lambda b: _si(b.intervalley_field)),
        intervalley_phonon=each(lambda b: _si(b.intervalley_phonon)),
        alloy_potential=each(alloy_potential),
        alloy_fraction=_si(shared.alloy_fraction),
        alloy_volume=_si(shared.alloy_volume),
        elastic_constant=shared.elastic_constant.si,
        density=_density(candidate),
        permittivity=shared.dielectric_constant.si * EPS_0,
        reflection=reflection.si,
        high_frequency_permittivity=high.si * EPS_0 if high else None,
        optical_phonon=_si(shared.optical_phonon),
        barrier=_si(shared.barrier),
    )


def _density(candidate: Candidate) -> float:
    return candidate.disorder.mean_mass / candidate.data.cell.volume_per_atom.si


def _phonons(candidate: Candidate) -> Phonons:
    data, disorder = candidate.data, candidate.disorder
    lattice, law = data.lattice, load_priors().grain_law
    dopant = dopant_disorder(data.doping, disorder.mean_mass)
    roughness = data.making.wall_roughness
    return Phonons(
        speed=np.array([lattice.sound_longitudinal.si, lattice.sound_transverse.si]),
        grueneisen=np.array([lattice.grueneisen_longitudinal.si, lattice.grueneisen_transverse.si]),
        umklapp_divisor=lattice.umklapp_divisor.si,
        normal_ratio=lattice.normal_ratio.si,
        volume_per_atom=data.cell.volume_per_atom.si,
        atoms=data.cell.atoms.si,
        mean_mass=disorder.mean_mass,
        mass_variance=disorder.mass_variance,
        size_variance=disorder.size_variance,
        dopant_mass_variance=dopant.mass_variance,
        dopant_size_variance=dopant.size_variance,
        strain_parameter=lattice.strain_parameter.si,
        carrier_deformation_potential=lattice.carrier_deformation_potential.si,
        density=_density(candidate),
        grain_exponent=law.exponent.si,
        grain_prefactor=law.prefactor.si,
        wall_roughness=roughness.si if roughness else None,
        **_defects(candidate),
    )


def _defects(candidate: Candidate) -> dict[str, float]:
    """Fields of Phonons that the optional tables of defects fill."""
    lattice, mean_mass = candidate.data.lattice, candidate.disorder.mean_mass
    made: dict[str, float] = {}
    if missing := lattice.vacancies:
        mass = atomic_mass(missing.element)
        made["vacancy_disorder"] = float(vacancy_disorder(missing.share.si, mass, mean_mass))
    if lines := lattice.dislocations:
        made |= {"dislocation_density": lines.density.si, "burgers_vector": lines.burgers_vector.si}
    if inclusions := lattice.precipitates:
        made |= {
            "precipitate_share": inclusions.volume_share.si,
            "precipitate_radius": inclusions.radius.si,
            "precipitate_spread": _si(inclusions.radius_spread),
            "precipitate_contrast": inclusions.mass_density.si / _density(candidate) - 1,
        }
    return made


def _with_optical_heat(candidate: Candidate, phonons: Phonons) -> Phonons:
    """With the heat of optical branches that the file knows of, beyond what they carry at least."""
    share = candidate.data.lattice.optical_share
    if share is None:
        return phonons
    anchor = next(a for a in candidate.data.anchor if a.quantity == "lattice_conductivity")
    known = share.si * anchor.measured.si
    least = float(optical_conductivity(phonons, np.array(anchor.temperature.si)))
    return replace(phonons, optical_excess=max(known - least, 0.0), optical_temperature=anchor.temperature.si)


def _weighing(phonons: Phonons, names: list[str], weight: float) -> Phonons:
    return replace(phonons, **dict.fromkeys(names, weight))  # type: ignore[arg-type]


def _brought_by_making(candidate: Candidate) -> list[str]:
    """Weights of the defects that the anchors' samples do not hold."""
    lattice = candidate.data.lattice
    tables = {
        "vacancy_weight": lattice.vacancies,
        "dislocation_weight": lattice.dislocations,
        "precipitate_weight": lattice.precipitates,
    }
    return [weight for weight, table in tables.items() if table is not None and not table.in_anchors]


_BULK = np.array(np.inf)


def bulk_mobility_and_seebeck(
    electrons: Electrons, temperature: ArrayLike, doping: ArrayLike, filling: Filling | None = None
) -> tuple[Array, Array]:
    """σ/(e × majority density) in m²/(V s), and S in V/K, of coarse material at temperature (K) and doping (1/m³).

    µ = e L_0/n and S = −L_1/(e T L_0) as in `moments`; the two broadcast. `filling`: of these bands there, where it
    is known. Raises ArithmeticError as `fill`.
    Source: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (1970).

    >>> from legwright.candidate.library import load_candidate
    >>> one = crystal(load_candidate("si-n"))
    >>> moving, thermopower = bulk_mobility_and_seebeck(one.electrons, 300.0, [1e23, 1e26])
    >>> bool(moving[0] > moving[1] and thermopower[0] < thermopower[1] < 0)
    True
    """
    t, n = np.broadcast_arrays(np.asarray(temperature, dtype=float), np.asarray(doping, dtype=float))
    filling = fill(electrons, t, n) if filling is None else filling
    sums = transport_integrals(bulk_flow(electrons, t, n, filling), _BULK, "grain", 0.0)
    majority, every = electrons.majority, sums.over(np.full(electrons.side.shape, True))
    moving = mobility(sums.over(majority).l0, np.sum(filling.density[..., majority], axis=-1))
    return moving, seebeck(every.l0, every.l1, t)


def _fix_electrons(candidate: Candidate, bare: Electrons) -> Electrons:
    """Mass, lattice-scattering and heavy-doping factors that meet the anchors best, all solved together.

    Each factor is one unknown (heavy doping: one per anchored density); misses are weighed by the spread of
    their anchor. With as many anchors as unknowns every anchor is met exactly.
    """
    anchors = [a for a in candidate.data.anchor if a.fixes in _ELECTRON_FIXES]
    if not anchors:
        return bare
    unknowns = sorted({_unknown(anchor) for anchor in anchors})

    def scaled(logs: Array) -> Electrons:
        made, knots = bare, []
        for (fixes, log_doping), log in zip(unknowns, logs, strict=True):
            if fixes == "mass":
                made = replace(made, mass_scale=float(np.exp(log)))
            elif fixes == "lattice scattering":
                made = replace(made, lattice_scale=float(np.exp(log)))
            else:
                knots.append((log_doping, float(log)))
        pure = [(float(np.log(_si(a.doping))), 0.0) for a in anchors if a.fixes == "lattice scattering"]
        return replace(made, impurity_knots=tuple(sorted({**dict(pure), **dict(knots)}.items())))

    temperature = np.array([anchor.temperature.si for anchor in anchors])
    doping = np.array([_si(anchor.doping) for anchor in anchors])
    measured = np.array([anchor.measured.si for anchor in anchors])
    spread = np.array([anchor.measured.relative_spread for anchor in anchors])
    of_mobility = np.array([anchor.quantity == "mobility" for anchor in anchors])

    @lru_cache(maxsize=2)
    def filled(mass_scale: float) -> Filling:
        return fill(replace(bare, mass_scale=mass_scale), temperature, doping)

    def misses(logs: Array) -> Array:
        one = scaled(logs)
        moving, thermopower = bulk_mobility_and_seebeck(one, temperature, doping, filled(one.mass_scale))
        return np.asarray((np.where(of_mobility, moving, thermopower) / measured - 1) / spread)

    logs, left = _least_misses(misses, len(unknowns))
    _refuse_far_misses(candidate, anchors, left)
    return scaled(logs)


_ELECTRON_FIXES = ("mass", "lattice scattering", "impurity scattering")
_FARTHEST = float(np.log(1e4))
#: an anchor that its prefactor leaves further off than this many spreads is a fault of the file
_FAR = 3.0


def _unknown(anchor: Anchor) -> tuple[str, float]:
    """The factor that an anchor fixes; heavy doping has one per density."""
    return anchor.fixes, float(np.log(_si(anchor.doping))) if anchor.fixes == "impurity scattering" else 0.0


def _least_misses(misses: Callable[[Array], Array], unknowns: int) -> tuple[Array, Array]:
    """Logarithms of the factors with the smallest Σ miss², and the misses there.

    Newton's steps as Gauss shortened them, which take few looks where anchors are met; scipy's trust region where
    they do not settle: its import alone takes a third of the time of a whole sheet.
    """
    logs, left = np.zeros(unknowns), misses(np.zeros(unknowns))
    for _ in range(_NEWTON_STEPS):
        slope = np.stack([misses(logs + nudge) - left for nudge in _NUDGE * np.eye(unknowns)], axis=1) / _NUDGE
        step = np.linalg.lstsq(slope, -left, rcond=None)[0]
        tried = np.clip(logs + step, -_FARTHEST, _FARTHEST)
        now = misses(tried)
        if not np.sum(now**2) <= np.sum(left**2) * (1 + 1e-9) + 1e-24:
            break
        logs, left = tried, now
        if np.max(np.abs(step)) < _SETTLED:
            return logs, left

    from scipy.optimize import least_squares

    found = least_squares(misses, logs, bounds=(-_FARTHEST, _FARTHEST), xtol=1e-12, ftol=1e-12, gtol=1e-12)
    return found.x, found.fun


_NEWTON_STEPS, _NUDGE, _SETTLED = 25, 1e-7, 3e-8


def _refuse_far_misses(candidate: Candidate, anchors: list[Anchor], misses: Array) -> None:
    worst = int(np.argmax(np.abs(misses)))
    if abs(misses[worst]) > _FAR:
        anchor = anchors[worst]
        raise InputError(
            f"no '{anchor.fixes}' meets this {anchor.quantity.replace('_', ' ')}: the nearest is "
            f"{100 * misses[worst] * anchor.measured.relative_spread:+.0f} % off; "
            "change the anchor, its spread or the scattering parameters",
            file=candidate.path.name,
            key=f"anchor[{candidate.data.anchor.index(anchor) + 1}]",
            slug="anchor-out-of-reach",
        )


def bulk_lattice_conductivity(one: Crystal, temperature: float, doping: float | None) -> float:
    """Acoustic and optical lattice conductivity of coarse material, W/(m K).

    κ_L = `acoustic_conductivity` at infinite size + `optical_conductivity`, at temperature (K) and doping (1/m³;
    None: undoped), one of each. Raises ArithmeticError as `fill`.
    Source: Callaway, Physical Review 113, 1046 (1959).

    >>> from legwright.candidate.library import load_candidate
    >>> one = crystal(load_candidate("si-n"))
    >>> bulk_lattice_conductivity(one, 300.0, None) > bulk_lattice_conductivity(one, 300.0, 1e26)
    True
    """
    t = np.array(temperature)
    n = np.array(doping or 0.0)
    carriers = majority_carriers(one.electrons, t, fill(one.electrons, t, n).eta) if doping else None
    mesh = modes(one.phonons)
    rates = crystal_rates(one.phonons, mesh, t, n, carriers)
    acoustic = acoustic_conductivity(one.phonons, mesh, rates, t, _BULK, "grain")
    return float(acoustic + optical_conductivity(one.phonons, t))


def majority_carriers(electrons: Electrons, temperature: Array, eta: Array) -> Carriers:
    """What phonons see of the majority bands: η, one valley's mass (kg) and how many; last axis bands.

    m_b = m_d/N_v^(2/3) at temperature T (K), eta η = ±(µ − E_edge)/k_B T of all bands, of the shape of T with a
    last axis of bands. Raises nothing of its own.
    Source: Ziman, Electrons and Phonons (1960).

    >>> from legwright.candidate.library import load_candidate
    >>> one = crystal(load_candidate("si-n"))
    >>> t = np.array(300.0)
    >>> seen = majority_carriers(one.electrons, t, fill(one.electrons, t, np.array(1e26)).eta)
    >>> int(seen.valleys[0])
    6
    """
    keep = electrons.majority
    mass, _ = masses(electrons, temperature)
    valley_mass = mass[..., keep] / electrons.valleys[keep] ** (2 / 3)
    return Carriers(eta[..., keep], valley_mass, electrons.valleys[keep])


def _fix_phonons(candidate: Candidate, one: Crystal) -> Phonons:
    """Anharmonic, strain and carrier factors that meet the lattice anchors best, weighed as for the carriers."""
    anchors = [a for a in candidate.data.anchor if a.fixes in _PHONON_FIXES]
    if not anchors:
        return one.phonons
    unknowns = sorted({anchor.fixes for anchor in anchors})

    def scaled(logs: Array) -> Phonons:
        scales = {_PHONON_FIXES[fixes]: float(np.exp(log)) for fixes, log in zip(unknowns, logs, strict=True)}
        return replace(one.phonons, **scales)  # type: ignore[arg-type]

    def misses(logs: Array) -> Array:
        made = replace(one, phonons=scaled(logs))
        return np.array([_lattice_miss(made, anchor) / anchor.measured.relative_spread for anchor in anchors])

    logs, left = _least_misses(misses, len(unknowns))
    _refuse_far_misses(candidate, anchors, left)
    return scaled(logs)


_PHONON_FIXES = {
    "anharmonicity": "anharmonic_scale",
    "strain": "strain_scale",
    "carrier scattering": "carrier_weight",
}


def _lattice_miss(one: Crystal, anchor: Anchor) -> float:
    doping = anchor.doping.si if anchor.doping else None
    return bulk_lattice_conductivity(one, anchor.temperature.si, doping) / anchor.measured.si - 1
