"""At which size zT peaks at one temperature and doping."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from legwright.base.flags import ordered
from legwright.base.units import NM
from legwright.candidate.library import Candidate
from legwright.decide.rank import window_of
from legwright.decide.warnings import point_flags
from legwright.physics.properties import evaluate

Array = NDArray[np.float64]

SMALLEST, LARGEST = 1 * NM, 1e5 * NM
_SIZES, _DOPINGS, _ZOOMS = 201, 41, 8


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
    log_d = np.linspace(np.log(SMALLEST), np.log(LARGEST), _SIZES)
    if doping is None:
        doping = _best_doping(candidate, temperature, np.exp(log_d), shape)
    top = log_d
    for _ in range(_ZOOMS):
        zt = evaluate(candidate, temperature, doping, np.exp(top), shape).zt
        i = int(np.argmax(zt))
        best, best_zt = float(np.exp(top[i])), float(zt[i])
        top = np.linspace(top[max(i - 1, 0)], top[min(i + 1, top.size - 1)], 9)
    made = evaluate(candidate, temperature, doping, np.exp(log_d), shape)
    at = np.searchsorted(log_d, np.log(best))
    low, high, open_ended = window_of(np.insert(log_d, at, np.log(best)), np.insert(made.zt, at, best_zt))
    here = evaluate(candidate, temperature, doping, [best, np.inf], shape)
    flags = point_flags(candidate, evaluate(candidate, temperature, doping, best, shape), shape)
    return Peak(
        candidate,
        temperature,
        doping,
        best,
        best_zt,
        (low, high),
        float(here.zt[1]),
        np.exp(log_d),
        made.zt,
        ordered([*flags, *(["window-open"] if open_ended else [])]),
    )


def _best_doping(candidate: Candidate, temperature: float, sizes: Array, shape: str) -> float:
    limits = candidate.data.doping
    log_n = np.linspace(np.log(limits.lowest.si), np.log(limits.highest.si), _DOPINGS)
    for _ in range(5):
        zt = evaluate(candidate, temperature, np.exp(log_n)[:, None], sizes[::2], shape).zt
        i = int(np.argmax(np.max(zt, axis=1)))
        best = float(np.exp(log_n[i]))
        log_n = np.linspace(log_n[max(i - 1, 0)], log_n[min(i + 1, log_n.size - 1)], 9)
    return best
