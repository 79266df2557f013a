"""What is not known, drawn: grain law and reflection shared by all candidates, anchors and misses of each its own.

Every draw is joint: the same place in every candidate's list is one and the same world.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cache

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr, ndtri
from scipy.stats import qmc

from legwright.base.units import E_CHARGE
from legwright.candidate.library import Candidate
from legwright.candidate.model import Anchor
from legwright.candidate.priors import load_priors
from legwright.physics.crystal import Crystal, crystal
from legwright.physics.properties import evaluate_crystal

Array = NDArray[np.float64]

#: standard normals of a candidate's own: its anchors, then what the model misses, each of mobility, S and κ_L
OWN_NAMES = (
    "mobility anchor",
    "seebeck anchor",
    "lattice_conductivity anchor",
    "mobility discrepancy",
    "seebeck discrepancy",
    "lattice_conductivity discrepancy",
)
SHARED_NAMES = ("grain_law exponent", "grain_law prefactor", "grain reflection")
#: a boundary turns back no more than this share
MOST_REFLECTED = 0.95
#: fewest draws
FEWEST = 16
#: step of a fitted candidate's logarithms (of its gap: eV) for slopes; they bend little over it
_STEP = 1e-2


def rounded(draws: int) -> int:
    """The next power of two: only whole nets of a Sobol sequence are balanced."""
    return int(max(2 ** int(np.ceil(np.log2(max(draws, 1)))), FEWEST))


@dataclass(frozen=True)
class Laws:
    """Grain law and reflection of each draw: (draws,)."""

    exponent: Array
    prefactor: Array
    reflection: Array


@cache
def law_normals(count: int, seed: int) -> Array:
    """Standard normals of SHARED_NAMES, the same for all candidates: (count, 3)."""
    return np.asarray(ndtri(qmc.Sobol(3, rng=np.random.default_rng(seed)).random(count)))


def laws_for(candidate: Candidate, count: int, seed: int) -> Laws:
    """The laws of `count` draws: one set for all, but for the prior of a reflection that a candidate knows."""
    law = load_priors().grain_law
    own = candidate.data.scattering.grain_reflection
    prior = own or load_priors().reflection.electrons
    normals = law_normals(count, seed)
    half_range = 3**0.5 * law.exponent.spread
    exponent = np.clip(law.exponent.si + half_range * (2 * ndtr(normals[:, 0]) - 1), 0, 1)
    prefactor = law.prefactor.si * np.exp(law.prefactor.relative_spread * normals[:, 1])
    reflection = np.clip(prior.si * (1 + prior.relative_spread * normals[:, 2]), 0, MOST_REFLECTED)
    return Laws(exponent, prefactor, reflection)


def under_law(one: Crystal, exponent: float, prefactor: float, reflection: float) -> Crystal:
    """The crystal with that grain law and reflection."""
    return replace(
        one,
        electrons=replace(one.electrons, reflection=reflection),
        phonons=replace(one.phonons, grain_exponent=exponent, grain_prefactor=prefactor),
    )


def with_each_law(candidate: Candidate, one: Crystal, count: int, seed: int) -> list[Crystal]:
    """The crystal under each of `count` draws of grain law and reflection, which all candidates share."""
    laws = laws_for(candidate, count, seed)
    each = zip(laws.exponent.tolist(), laws.prefactor.tolist(), laws.reflection.tolist(), strict=True)
    return [under_law(one, *law) for law in each]


def anchors_behind(candidate: Candidate) -> list[tuple[Anchor, float]]:
    """The anchors that stand behind a candidate, its own or its relatives', with their weights."""
    if not candidate.relatives:
        return [(anchor, 1.0) for anchor in candidate.data.anchor]
    return [(a, w * v) for relative, w in candidate.relatives if w for a, v in anchors_behind(relative)]


def anchor_spreads(candidate: Candidate) -> tuple[float, float, float]:
    """Relative spread of the mobility, Seebeck and lattice anchors: the median of those that fix something."""
    found = []
    for quantity in ("mobility", "seebeck", "lattice_conductivity"):
        of_it = [a for a, _ in anchors_behind(candidate) if a.quantity == quantity]
        fixing = [a for a in of_it if a.fixes != "nothing"] or of_it
        found.append(float(np.median([a.measured.relative_spread for a in fixing])))
    return found[0], found[1], found[2]


def own_normals(candidate: Candidate, count: int, seed: int) -> Array:
    """Standard normals of OWN_NAMES: (count, 6), whoever else is asked.

    A scrambled net in an order of its own: unshuffled, the nets of two candidates, and of a candidate and the
    shared laws, have leading digits in common and rise and fall together.
    """
    rng = np.random.default_rng(np.random.SeedSequence([seed, *candidate.name.encode()]))
    net = qmc.Sobol(len(OWN_NAMES), rng=rng).random(count)
    return np.asarray(ndtri(net[rng.permutation(count)]))


def own_spread(
    candidate: Candidate, temperature: Array, doping: float, size: float, shape: str, length: float = np.inf
) -> Array:
    """What turns a candidate's normals into ln factors on mobility, S and κ_L: a matrix of (3, 6).

    The anchors' spreads and the model's discrepancy are independent of one another, so the matrix is two diagonal
    blocks. A candidate that `fit` made keeps its covariance instead of the anchors' spreads: it is carried to the
    three quantities by slopes at the given design, as means over temperature.
    """
    model = load_priors().discrepancy
    missed = (model.electrical_conductivity.si, model.seebeck.si, model.thermal_conductivity_sized.si)
    known = (
        np.diag(anchor_spreads(candidate))
        if candidate.data.fitted is None
        else _fitted_spread(candidate, temperature, doping, size, shape, length)
    )
    return np.hstack([known, np.diag(missed)])


def _fitted_spread(
    candidate: Candidate, temperature: Array, doping: float, size: float, shape: str, length: float
) -> Array:
    """A lower triangle L with L Lᵀ the covariance of ln mobility, ln S and ln κ_L that the fit left."""
    fitted = candidate.data.fitted
    assert fitted is not None
    one = crystal(candidate)

    def logs(moved: Crystal) -> Array:
        made = evaluate_crystal(moved, temperature, doping, size, shape, length)
        three = (made.electrical_conductivity, np.abs(made.seebeck), made.lattice_thermal_conductivity)
        return np.array([np.mean(np.log(values)) for values in three])

    kept = [name for name in fitted.names if name in _MOVED]
    places = [fitted.names.index(name) for name in kept]
    slopes = np.stack(
        [(logs(_MOVED[name](one, _STEP)) - logs(_MOVED[name](one, -_STEP))) / (2 * _STEP) for name in kept], axis=1
    )
    covariance = slopes @ np.array(fitted.covariance)[np.ix_(places, places)] @ slopes.T
    values, vectors = np.linalg.eigh(covariance)
    _, upper = np.linalg.qr((vectors * np.sqrt(np.maximum(values, 0.0))).T)
    return np.asarray(upper.T)


def _heavier(one: Crystal, log: float) -> Crystal:
    electrons = one.electrons
    return replace(one, electrons=replace(electrons, mass_scale=electrons.mass_scale * float(np.exp(log))))


def _scattering_more(one: Crystal, log: float) -> Crystal:
    electrons = one.electrons
    return replace(one, electrons=replace(electrons, lattice_scale=electrons.lattice_scale * float(np.exp(log))))


def _more_anharmonic(one: Crystal, log: float) -> Crystal:
    phonons = one.phonons
    return replace(one, phonons=replace(phonons, anharmonic_scale=phonons.anharmonic_scale * float(np.exp(log))))


def _with_wider_gap(one: Crystal, volts: float) -> Crystal:
    electrons = one.electrons
    shift = np.where(electrons.majority, 0.0, electrons.side * volts * E_CHARGE)
    return replace(one, electrons=replace(electrons, edge=electrons.edge + shift))


#: what a fit moves, by its own names
_MOVED = {
    "mass": _heavier,
    "lattice scattering": _scattering_more,
    "anharmonicity": _more_anharmonic,
    "gap": _with_wider_gap,
}
