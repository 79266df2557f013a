"""At which size zT peaks at one temperature and doping."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from legwright.base.flags import ordered
from legwright.base.units import NM
from legwright.candidate.library import Candidate
from legwright.decide.rank import window_of
from legwright.decide.score import around
from legwright.decide.warnings import point_flags
from legwright.physics.properties import evaluate

Array = NDArray[np.float64]

SMALLEST, LARGEST = 1 * NM, 1e5 * NM
_SIZES, _DOPINGS, _ZOOMS = 201, 41, 6


@dataclass(frozen=True)
class Peak:
    """zT against size, SI; `window`: sizes that keep 95 % of the peak."""

    candidate: Candidate
    temperature: float
    doping: float
    size: float
    zt: float
    window: tuple[float, float]
    zt_coarse: float
    sizes: Array
    curve: Array
    flags: tuple[str, ...]


def peak(candidate: Candidate, temperature: float, doping: float | None, shape: str) -> Peak:
    """The zT curve over 1 nm to 0.1 mm and its peak; without a doping, at the best doping for that peak."""
    sizes = np.geomspace(SMALLEST, LARGEST, _SIZES)
    if doping is None:
        doping = _best_doping(candidate, temperature, sizes, shape)
    top = sizes
    for _ in range(_ZOOMS):
        zt = evaluate(candidate, temperature, doping, top, shape).zt
        i = int(np.argmax(zt))
        best, best_zt, top = float(top[i]), float(zt[i]), around(top, i)
    curve = evaluate(candidate, temperature, doping, sizes, shape).zt
    at = int(np.searchsorted(sizes, best))
    low, high, open_ended = window_of(np.insert(sizes, at, best), np.insert(curve, at, best_zt))
    coarse = evaluate(candidate, temperature, doping, np.inf, shape)
    flags = point_flags(candidate, evaluate(candidate, temperature, doping, best, shape), shape)
    return Peak(
        candidate,
        temperature,
        doping,
        best,
        best_zt,
        (low, high),
        float(coarse.zt),
        sizes,
        curve,
        ordered([*flags, *(["window-open"] if open_ended else [])]),
    )


def _best_doping(candidate: Candidate, temperature: float, sizes: Array, shape: str) -> float:
    limits = candidate.data.doping
    density = np.geomspace(limits.lowest.si, limits.highest.si, _DOPINGS)
    for _ in range(_ZOOMS):
        zt = evaluate(candidate, temperature, density[:, None], sizes[::2], shape).zt
        i = int(np.argmax(np.max(zt, axis=1)))
        best, density = float(density[i]), around(density, i)
    return best
