"""Score of a candidate's leg over whole maps of doping and size."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.candidate.library import Candidate
from legwright.leg.balance import LegMaterial
from legwright.leg.duty import Duty, best_score
from legwright.physics.properties import Properties, evaluate

Array = NDArray[np.float64]


#: points of a finer axis around the best of a coarser one
_ZOOM_POINTS = 5


def around(axis: Array, best: int, count: int = _ZOOM_POINTS) -> Array:
    """A finer axis between the neighbours of the best point, evenly spaced in the logarithm."""
    return np.geomspace(axis[max(best - 1, 0)], axis[min(best + 1, axis.size - 1)], count)


def span_nodes(duty: Duty, count: int) -> Array:
    """Temperatures over the duty's span, K, as `nodes_between`."""
    return nodes_between(*duty.span, count)


def nodes_between(low: float, high: float, count: int) -> Array:
    """Chebyshev–Lobatto temperatures, K, ascending: splines through them do not wiggle."""
    return np.asarray(low + (high - low) * 0.5 * (1 - np.cos(np.pi * np.arange(count) / (count - 1))))


def properties_over_span(
    candidate: Candidate, duty: Duty, doping: ArrayLike, size: ArrayLike, shape: str, nodes: int
) -> Properties:
    """Properties at `nodes` temperatures (first axis) for doping and size that broadcast to the other axes.

    A length that the duty says is felt takes its share of every free path, wherever it counts: `evaluate`.
    """
    rank = max(np.ndim(doping), np.ndim(size))
    temperature = span_nodes(duty, nodes).reshape(-1, *(1,) * rank)
    return evaluate(candidate, temperature, doping, size, shape, duty.felt_length)


def leg_material(candidate: Candidate, made: Properties) -> LegMaterial:
    """The leg's S, ρ and κ as functions of temperature; S counted positive for the majority carrier."""
    sign = -1.0 if candidate.data.carrier == "n" else 1.0
    temperature = made.temperature.reshape(made.temperature.shape[0], -1)[:, 0]
    return LegMaterial.from_nodes(
        temperature, sign * made.seebeck, 1 / made.electrical_conductivity, made.thermal_conductivity
    )


def score(
    candidate: Candidate,
    duty: Duty,
    doping: ArrayLike,
    size: ArrayLike,
    shape: str,
    nodes: int = 9,
    rounds: int = 4,
) -> Array:
    """The duty's score for every (doping in 1/m³, size in m), which broadcast."""
    made = properties_over_span(candidate, duty, doping, size, shape, nodes)
    return best_score(leg_material(candidate, made), duty, rounds)
