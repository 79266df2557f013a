"""What to measure next: which figure of which candidate would sharpen the choice most for its effort.

A measurement is worth what the choice gains by it: outcomes are taken from the draws, with the spread between
laboratories; each reweights the draws by its likelihood, the best mean is chosen anew, and what that choice really
scores in the draw behind the outcome is set against choosing now (expected value of sample information: Raiffa &
Schlaifer, Applied Statistical Decision Theory, 1961). The draw behind an outcome takes no part in the choice.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from legwright.candidate.priors import load_priors
from legwright.decide.drawn import Drawn
from legwright.decide.draws import OWN_NAMES, SHARED_NAMES, law_normals

Array = NDArray[np.float64]

#: what is measured, in the order of `Drawn.measured`
QUANTITIES = ("electrical_conductivity", "seebeck", "thermal_conductivity")
#: draws weighed against outcomes at a time
_BLOCK = 1024


@dataclass(frozen=True)
class Measurement:
    """One thing to measure on a sample of a candidate's best design, at mid-span.

    gain: expected gain of the chosen candidate's score, and its standard error; effort in units of one Seebeck
    coefficient on a sample in hand.
    """

    candidate: str
    quantity: str
    gain: float
    error: float
    effort: float

    @property
    def gain_per_effort(self) -> float:
        """What the advice goes by."""
        return self.gain / self.effort


@dataclass(frozen=True)
class Sensitivity:
    """Share of a score's variance that one input makes alone (first), and with the others (total)."""

    candidate: str
    source: str
    first: float
    total: float


@dataclass(frozen=True)
class Advice:
    """Measurements, best first, and what hangs on them.

    chosen: the candidate with the best mean score, `expected`; `all_known`: what the choice would gain if
    everything were known; `explained`: share of each candidate's variance that the sensitivities account for.
    """

    measurements: tuple[Measurement, ...]
    chosen: str
    expected: float
    all_known: float
    sensitivities: tuple[Sensitivity, ...]
    explained: dict[str, float]


def advise(found: dict[str, Drawn], fitted: frozenset[str], seed: int, about: tuple[str, ...]) -> Advice:
    """What to measure next, from the draws of `seed`; sensitivities of the candidates `about` alone.

    `fitted`: the candidates that `fit` made, whose three anchors stand together as one source.
    """
    names = sorted(found)
    scores = np.stack([found[name].score for name in names])
    means = np.mean(scores, axis=1)
    best = int(np.argmax(means))
    measurements = []
    for name in names:
        for k, quantity in enumerate(QUANTITIES):
            rng = np.random.default_rng(np.random.SeedSequence([seed, k, *name.encode()]))
            known = found[name].measured[:, k]
            outcomes = known + noise_of(quantity) * rng.standard_normal(known.size)
            chosen = choices(scores, known, outcomes, noise_of(quantity), leave_out=True)
            gains = scores[chosen, np.arange(known.size)] - scores[best]
            error = float(np.std(gains) / np.sqrt(gains.size))
            measurements.append(Measurement(name, quantity, float(np.mean(gains)), error, effort_of(quantity)))
    measurements.sort(key=lambda m: (-m.gain_per_effort, m.candidate, m.quantity))
    parts = {name: sensitivities(name, found[name], seed, name in fitted) for name in about}
    return Advice(
        tuple(measurements),
        names[best],
        float(means[best]),
        float(np.mean(np.max(scores, axis=0)) - means[best]),
        tuple(each for part, _ in parts.values() for each in part),
        {name: explained for name, (_, explained) in parts.items()},
    )


def noise_of(quantity: str) -> float:
    """Spread of the logarithm of a measurement; of σ with that of the density, without which it says little."""
    laboratory = load_priors().laboratory
    spread: float = getattr(laboratory, quantity).si
    return float(np.hypot(spread, laboratory.hall_density.si)) if quantity == "electrical_conductivity" else spread


def effort_of(quantity: str) -> float:
    """Of making a sample and measuring one quantity on it."""
    effort = load_priors().effort
    return float(effort.sample.si + getattr(effort, quantity).si)


def choices(
    scores: Array, known: Array, outcomes: Array, noise: float, leave_out: bool = False
) -> NDArray[np.intp]:
    """For each outcome of a measurement, the candidate with the best mean score over the draws reweighted by it.

    scores: (candidates, draws); known: what each draw holds of the measured logarithm, (draws,); with `leave_out`
    outcome i belongs to draw i, which then has no weight.
    """
    chosen = []
    for start in range(0, outcomes.size, _BLOCK):
        some = outcomes[start : start + _BLOCK]
        off = -0.5 * ((some[:, None] - known) / noise) ** 2
        if leave_out:
            here = np.arange(some.size)
            off[here, start + here] = -np.inf
        weights = np.exp(off - np.max(off, axis=1, keepdims=True))
        chosen.append(np.argmax(weights @ scores.T, axis=1))  # the sum of weights is the same for all candidates
    return np.concatenate(chosen)


def sensitivities(name: str, one: Drawn, seed: int, fitted: bool) -> tuple[tuple[Sensitivity, ...], float]:
    """Sobol indices of a score from its own draws, and the share of variance that they account for.

    A quadratic in the standard normals behind the draws, in orthonormal Hermite polynomials: each coefficient's
    square is a share of the variance (Sudret, Reliability Engineering & System Safety 93, 964 (2008)).
    """
    normals = np.hstack([law_normals(len(one.score), seed), one.normals])
    count = normals.shape[1]
    terms = [(i,) for i in range(count)] + [(i, j) for i in range(count) for j in range(i, count)]
    basis = np.stack([_hermite(normals, term) for term in terms], axis=1)
    if len(one.score) < 2 * len(terms):  # too few draws for the products: straight lines
        terms, basis = terms[:count], basis[:, :count]
    whole = np.column_stack([np.ones(len(basis)), basis])
    coefficients = np.linalg.lstsq(whole, one.score, rcond=None)[0]
    variance = float(np.var(one.score))
    shares = coefficients[1:] ** 2 / variance if variance > 0 else np.zeros(len(terms))
    explained = 1 - float(np.var(one.score - whole @ coefficients)) / variance if variance > 0 else 1.0
    names = [*SHARED_NAMES, *(("fit",) * 3 if fitted else OWN_NAMES[:3]), *OWN_NAMES[3:]]
    made = []
    for source in dict.fromkeys(names):
        own = {i for i, each in enumerate(names) if each == source}
        first = sum(float(s) for term, s in zip(terms, shares, strict=True) if own.issuperset(term))
        total = sum(float(s) for term, s in zip(terms, shares, strict=True) if own.intersection(term))
        made.append(Sensitivity(name, source, first, total))
    return tuple(sorted(made, key=lambda s: -s.total)), explained


def _hermite(normals: Array, term: tuple[int, ...]) -> Array:
    if len(term) == 2 and term[0] == term[1]:
        return np.asarray((normals[:, term[0]] ** 2 - 1) / np.sqrt(2))
    return np.asarray(np.prod(normals[:, list(term)], axis=1))
