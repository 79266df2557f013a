"""What is not known, drawn: the grain law and reflection shared by all candidates, anchors of each its own."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cache

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtri
from scipy.stats import qmc

from legwright.candidate.library import Candidate
from legwright.candidate.model import Anchor
from legwright.candidate.priors import load_priors
from legwright.decide.brief import Brief
from legwright.decide.rank import Row, doping_range, size_range
from legwright.decide.score import span_nodes
from legwright.leg.balance import LegMaterial
from legwright.leg.duty import best_score
from legwright.physics.crystal import Crystal, crystal
from legwright.physics.properties import evaluate_crystal

Array = NDArray[np.float64]

#: draws of what is a candidate's own under each draw of the shared laws
OWN = 16
_NODES, _ROUNDS, _GRID = 9, 3, 5
#: the designs looked at anew for each draw lie within these factors of the best one
_DOPING_REACH, _SIZE_REACH = 2.5, 3.0


@cache
def _law_draws(count: int, seed: int) -> tuple[Array, Array, Array]:
    """Exponents, prefactors and standard normal of reflection: one set for all candidates."""
    law = load_priors().grain_law
    u = qmc.Sobol(3, rng=np.random.default_rng(seed)).random(count)
    half_range = 3**0.5 * law.exponent.spread
    exponent = np.clip(law.exponent.si + half_range * (2 * u[:, 0] - 1), 0, 1)
    prefactor = law.prefactor.si * np.exp(law.prefactor.relative_spread * ndtri(u[:, 1]))
    return exponent, prefactor, ndtri(u[:, 2])


def with_each_law(candidate: Candidate, one: Crystal, count: int, seed: int) -> list[Crystal]:
    """The crystal under each of `count` draws of grain law and reflection, which all candidates share."""
    own = candidate.data.scattering.grain_reflection
    prior = own or load_priors().reflection.electrons
    exponent, prefactor, normal = _law_draws(count, seed)
    reflection = np.clip(prior.si * (1 + prior.relative_spread * normal), 0, 0.95)
    return [
        replace(
            one,
            electrons=replace(one.electrons, reflection=float(r)),
            phonons=replace(one.phonons, grain_exponent=float(s), grain_prefactor=float(c)),
        )
        for s, c, r in zip(exponent, prefactor, reflection, strict=True)
    ]


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


@dataclass(frozen=True)
class Confidence:
    """5 and 95 % points of a row's score over the draws, and the share of draws that it wins."""

    low: float
    high: float
    win_share: float


def confidences(brief: Brief, rows: list[Row], draws: int, seed: int) -> dict[str, Confidence]:
    """By candidate name, for the rows that can serve: scores drawn anew, each at its own best design.

    Per draw of the grain law (shared: wrong for all at once) each candidate's mobility, S and κ_L move as a whole
    by the spreads of its anchors and by the model's own discrepancy; the best of a small grid of dopings and sizes
    around the row's design is that draw's score. `draws` is rounded up to a power of two, 16 at the least.
    """
    laws = max(2 ** int(np.ceil(np.log2(max(draws, OWN) / OWN))), 1)
    drawn = {row.candidate.name: _scores(brief, row, laws, seed) for row in rows if row.score > 0}
    best = np.max(np.stack(list(drawn.values())), axis=0) if drawn else np.zeros(0)
    found = {}
    for name, scores in drawn.items():
        low, high = np.quantile(scores, (0.05, 0.95))
        found[name] = Confidence(float(low), float(high), float(np.mean(scores >= best)))
    return found


def _scores(brief: Brief, row: Row, laws: int, seed: int) -> Array:
    """Score of one candidate in every draw: (laws × OWN,)."""
    candidate, duty = row.candidate, brief.task
    dopings, sizes = doping_range(brief, candidate), size_range(brief, candidate)
    assert row.doping is not None
    assert row.size is not None
    assert dopings is not None
    steps = np.linspace(-1, 1, _GRID)
    doping = np.clip(row.doping * _DOPING_REACH**steps, *dopings)[:, None]
    size = np.clip(row.size * _SIZE_REACH**steps, *sizes)
    temperature = span_nodes(duty, _NODES)
    mobility, thermopower, lattice = _own_factors(candidate, laws, seed)
    sign = -1.0 if candidate.data.carrier == "n" else 1.0
    found = []
    one = crystal(candidate)
    for k, law in enumerate(with_each_law(candidate, one, laws, seed)):
        made = evaluate_crystal(law, temperature[:, None, None], doping, size, row.shape, duty.felt_length)

        def off(values: Array, factor: Array) -> Array:
            return values[:, None] * factor[:, None, None]

        sigma = off(made.electrical_conductivity, mobility[k])
        heat = off(made.electronic_thermal_conductivity, mobility[k])
        heat = heat + off(made.lattice_thermal_conductivity, lattice[k])
        seebeck = off(sign * made.seebeck, thermopower[k])
        material = LegMaterial.from_nodes(temperature, seebeck, 1 / sigma, heat)
        found.append(np.max(best_score(material, duty, _ROUNDS), axis=(-2, -1)))
    return np.concatenate(found)


def _own_factors(candidate: Candidate, laws: int, seed: int) -> tuple[Array, Array, Array]:
    """Factors on mobility, S and κ_L, each (laws, OWN): anchors' spreads and the model's discrepancy together."""
    model = load_priors().discrepancy
    spreads = np.hypot(
        anchor_spreads(candidate),
        (model.electrical_conductivity.si, model.seebeck.si, model.thermal_conductivity_sized.si),
    )
    own_seed = np.random.SeedSequence([seed, *candidate.name.encode()])  # does not hang on who else is asked
    u = qmc.Sobol(3, rng=np.random.default_rng(own_seed)).random(laws * OWN)
    factors = np.exp(spreads[:, None] * ndtri(u).T).reshape(3, laws, OWN)
    return factors[0], factors[1], factors[2]
