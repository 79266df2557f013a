"""What a figure shows of one candidate: what it is worth over size and doping, and on what that hangs."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from legwright.candidate.library import Candidate
from legwright.candidate.model import Anchor
from legwright.candidate.number import Measure
from legwright.candidate.priors import load_priors
from legwright.decide.draws import MOST_REFLECTED, own_normals, own_spread, rounded, with_each_law
from legwright.decide.score import span_nodes
from legwright.leg.balance import LegMaterial
from legwright.leg.duty import SCORE_NAMES, Duty, best_score
from legwright.physics.crystal import Crystal, crystal
from legwright.physics.properties import Properties, evaluate_crystal

Array = NDArray[np.float64]
#: what is asked of a leg: the score of a duty, or zT at one temperature (K)
Aim = Duty | float

_NODES, _ROUNDS, _SIZES, _MAP = 9, 4, 65, (33, 41)
#: how far beyond the known dopings a map looks, to show where they end
_BEYOND = 2.0
#: step of a derivative, in standard deviations: small against the bend of any of these curves
_STEP = 0.25
_AS_IS = np.ones(3)


def aim_name(aim: Aim) -> str:
    """What is counted: a score's name, or zT."""
    return SCORE_NAMES[aim.maximise] if isinstance(aim, Duty) else "zt"


@dataclass(frozen=True)
class SizeCurve:
    """Worth against size at one doping, SI: `low` and `high` hold 90 % of the draws (None without draws).

    `grey`, `by_wavelength`: under both ends of the grain law (None but for grains); `coarse`: size without end.
    """

    sizes: Array
    values: Array
    low: Array | None
    high: Array | None
    grey: Array | None
    by_wavelength: Array | None
    coarse: float


def size_curve(
    candidate: Candidate, aim: Aim, doping: float, limits: tuple[float, float], shape: str, draws: int, seed: int
) -> SizeCurve:
    """The curve over sizes (m) between the limits; doping in 1/m³. `draws` is rounded up to a power of two."""
    one, sizes = crystal(candidate), np.geomspace(*limits, _SIZES)

    def curve(of: Crystal, at: Array = sizes) -> Array:
        return _worth(candidate, aim, _over(of, aim, doping, at, shape))

    low = high = None
    if draws:
        low, high = np.quantile(
            _drawn(candidate, one, aim, doping, sizes, shape, draws, seed), (0.05, 0.95), axis=0
        )
    grey = by_wavelength = None
    if shape == "grain":
        grey, by_wavelength = (
            curve(replace(one, phonons=replace(one.phonons, grain_exponent=s))) for s in (0.0, 1.0)
        )
    return SizeCurve(sizes, curve(one), low, high, grey, by_wavelength, float(curve(one, np.array([np.inf]))[0]))


def worth_of(candidate: Candidate, aim: Aim, doping: float, size: float, shape: str) -> float:
    """The aim's figure at one design (1/m³, m)."""
    return float(_worth(candidate, aim, _over(crystal(candidate), aim, doping, size, shape)))


@dataclass(frozen=True)
class Surface:
    """Worth over dopings (1/m³, first axis) and sizes (m), partly where nobody makes it."""

    doping: Array
    size: Array
    values: Array


def surface(candidate: Candidate, aim: Aim, limits: tuple[float, float], shape: str) -> Surface:
    """The map over sizes (m) between the limits and somewhat more than the candidate's own dopings."""
    known = candidate.data.doping
    doping = np.geomspace(known.lowest.si / _BEYOND, known.highest.si * _BEYOND, _MAP[0])
    size = np.geomspace(*limits, _MAP[1])
    made = _over(crystal(candidate), aim, doping[:, None], size, shape)
    return Surface(doping, size, _worth(candidate, aim, made))


@dataclass(frozen=True)
class Lean:
    """How the worth of a design moves when one assumption moves up by its standard deviation.

    doping: of the sample that an anchor was measured on, 1/m³; None where there is none.
    """

    name: str
    doping: float | None
    source: str
    change: float


def leans(candidate: Candidate, aim: Aim, doping: float, size: float, shape: str) -> list[Lean]:
    """Derivative × spread for each anchor that fixes something, the shared laws and what the model misses.

    At one design (1/m³, m), by central differences; prefactors are solved anew for each anchor. Largest first.
    """

    def worth(of: Crystal, factors: Array = _AS_IS) -> float:
        return float(_worth(candidate, aim, _over(of, aim, doping, size, shape), factors))

    def slope(up: float, down: float) -> float:
        return (up - down) / (2 * _STEP)

    found = [
        Lean(*_anchor_name(anchor), anchor.measured.source, slope(*(worth(crystal(moved)) for moved in both)))
        for anchor, both in _moved_anchors(candidate)
    ]
    one, priors = crystal(candidate), load_priors()
    own = candidate.data.scattering.grain_reflection or priors.reflection.electrons
    if shape == "grain":
        found += [
            Lean(
                name,
                None,
                number.source,
                slope(*(worth(_law(one, name, number, s)) for s in (1, -1))),
            )
            for name, number in (
                ("grain law's exponent", priors.grain_law.exponent),
                ("grain law's prefactor", priors.grain_law.prefactor),
                ("share of carriers turned back", own),
            )
        ]
    for k, (name, number) in enumerate(_missed()):
        up, down = (np.exp(sign * _STEP * number.si * np.eye(3)[k]) for sign in (1, -1))
        found.append(Lean(f"model's {name}", None, number.source, slope(worth(one, up), worth(one, down))))
    return sorted(found, key=lambda one: -abs(one.change))


def _over(one: Crystal, aim: Aim, doping: Array | float, size: Array | float, shape: str) -> Properties:
    """Properties at the temperatures of the aim, which come first."""
    length = aim.felt_length if isinstance(aim, Duty) else np.inf
    ranks = max(np.ndim(doping), np.ndim(size))
    return evaluate_crystal(one, _nodes(aim).reshape(-1, *(1,) * ranks), doping, size, shape, length)


def _nodes(aim: Aim) -> Array:
    return span_nodes(aim, _NODES) if isinstance(aim, Duty) else np.array([aim])


def _worth(
    candidate: Candidate,
    aim: Aim,
    made: Properties,
    factors: Sequence[Array] | Array = _AS_IS,
) -> Array:
    """The aim's figure with mobility, S and κ_L off by factors that broadcast after temperature and design."""
    mobility, thermopower, lattice = factors
    sigma = made.electrical_conductivity * mobility
    heat = made.electronic_thermal_conductivity * mobility + made.lattice_thermal_conductivity * lattice
    seebeck = made.seebeck * thermopower
    if not isinstance(aim, Duty):
        return np.asarray((seebeck**2 * sigma * aim / heat)[0])
    nodes = made.temperature.reshape(made.temperature.shape[0], -1)[:, 0]
    sign = -1.0 if candidate.data.carrier == "n" else 1.0
    return best_score(LegMaterial.from_nodes(nodes, sign * seebeck, 1 / sigma, heat), aim, _ROUNDS)


def _drawn(
    candidate: Candidate, one: Crystal, aim: Aim, doping: float, sizes: Array, shape: str, draws: int, seed: int
) -> Array:
    """Worth over sizes in each draw, as the ranking draws: laws for all alike, the rest the candidate's own."""
    count = rounded(draws)
    spread = own_spread(candidate, _nodes(aim), doping, float(np.sqrt(sizes[0] * sizes[-1])), shape)
    factors = np.exp(own_normals(candidate, count, seed) @ spread.T)
    laws = with_each_law(candidate, one, count, seed)
    return np.stack(
        [
            _worth(candidate, aim, _over(law, aim, doping, sizes, shape), own)
            for law, own in zip(laws, factors, strict=True)
        ]
    )


def _missed() -> tuple[tuple[str, Measure], ...]:
    model = load_priors().discrepancy
    return (
        ("electrical conductivity", model.electrical_conductivity),
        ("Seebeck coefficient", model.seebeck),
        ("lattice conductivity", model.thermal_conductivity_sized),
    )


def _law(one: Crystal, name: str, number: Measure, sign: int) -> Crystal:
    """The crystal with one of the shared laws moved by a step."""
    step = sign * _STEP
    if "exponent" in name:
        return replace(one, phonons=replace(one.phonons, grain_exponent=number.si + step * number.spread))
    factor = float(np.exp(step * number.relative_spread))
    if "prefactor" in name:
        return replace(one, phonons=replace(one.phonons, grain_prefactor=number.si * factor))
    return replace(one, electrons=replace(one.electrons, reflection=min(number.si * factor, MOST_REFLECTED)))


def _anchor_name(anchor: Anchor) -> tuple[str, float | None]:
    doping = None if anchor.doping is None else anchor.doping.si
    return f"{_ANCHORED[anchor.quantity]} anchor, {anchor.temperature.si:.0f} K", doping


_ANCHORED = {"mobility": "mobility", "seebeck": "Seebeck", "lattice_conductivity": "lattice"}


def _moved_anchors(candidate: Candidate) -> Iterator[tuple[Anchor, tuple[Candidate, Candidate]]]:
    """Each anchor that fixes something, and the candidate with its figure a step up and a step down."""
    for place, (relative, weight) in enumerate(candidate.relatives):
        for anchor, both in _moved_anchors(relative) if weight else ():
            others = candidate.relatives
            up, down = (
                replace(candidate, relatives=(*others[:place], (moved, weight), *others[place + 1 :]))
                for moved in both
            )
            yield anchor, (up, down)
    if candidate.relatives or candidate.data.fitted is not None:
        return
    for place, anchor in enumerate(candidate.data.anchor):
        if anchor.fixes != "nothing":
            up, down = (_with_anchor(candidate, place, sign * _STEP) for sign in (1, -1))
            yield anchor, (up, down)


def _with_anchor(candidate: Candidate, place: int, steps: float) -> Candidate:
    """The candidate with one anchor's figure moved by so many standard deviations."""
    anchors = candidate.data.anchor
    anchor, number = anchors[place], anchors[place].measured
    value = number.value * float(np.exp(steps * number.relative_spread))
    moved = Measure(**{**number.model_dump(), "value": value, "si_unit": number.si_unit})
    changed = (*anchors[:place], anchor.model_copy(update={anchor.quantity: moved}), *anchors[place + 1 :])
    return replace(candidate, data=candidate.data.model_copy(update={"anchor": changed}))
