"""A choice that bears the scatter of making: no furnace hits size and doping as asked."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline, RectBivariateSpline
from scipy.special import ndtri
from scipy.stats import qmc

from legwright.candidate.library import Candidate
from legwright.decide.score import around, score
from legwright.leg.duty import Duty
from legwright.physics.properties import DENSEST, LARGEST, SMALLEST, THINNEST

Array = NDArray[np.float64]
Take = Literal["expected", "tenth"]

#: Gauss–Hermite nodes of each variable; legs of the quantile, and which one counts
_NODES, _LEGS, _TENTH = 9, 512, 0.1
#: the map reaches so many standard deviations beyond the range, as the outermost node does; its widest steps
_REACH, _DOPING_STEP, _SIZE_STEP, _FEWEST = 4.6, 0.25, 0.2, 9
_MAP_DOPINGS, _MAP_SIZES, _ZOOMS = 25, 33, 5


@dataclass(frozen=True)
class Scatter:
    """How far a made leg's size and doping lie from those asked for: spreads of their ln; and what is maximised.

    The size asked for is the median; some legs come out finer than the smallest that can be asked for.
    """

    size: float
    doping: float
    take: Take


@dataclass(frozen=True)
class MadeMap:
    """What legs are worth as they are made, from a dense map of legs as designed, interpolated in ln n and ln d."""

    scatter: Scatter
    designed: RectBivariateSpline
    coarse_designed: CubicSpline

    @classmethod
    def of(
        cls,
        candidate: Candidate,
        duty: Duty,
        dopings: tuple[float, float],
        sizes: tuple[float, float],
        shape: str,
        scatter: Scatter,
    ) -> MadeMap:
        """From the direct path over the ranges (1/m³, m) and as far beyond as legs scatter."""
        log_doping = _beyond(dopings, scatter.doping, (THINNEST, DENSEST), _DOPING_STEP)
        log_size = _beyond(sizes, scatter.size, (SMALLEST, LARGEST), _SIZE_STEP)
        scores = score(candidate, duty, np.exp(log_doping)[:, None], np.append(np.exp(log_size), np.inf), shape)
        return cls(
            scatter,
            RectBivariateSpline(log_doping, log_size, scores[:, :-1]),
            CubicSpline(log_doping, scores[:, -1]),
        )

    def worth(self, doping: Array | float, size: Array | float) -> Array:
        """Expected score, or that which nine legs in ten reach, of legs asked for at doping (1/m³) and size (m)."""
        x, y, weights = _legs(self.scatter)
        n, d = (np.log(np.asarray(a, dtype=float))[..., None] for a in np.broadcast_arrays(doping, size))
        return self._taken(self.designed.ev(n + x, d + y), weights)

    def worth_coarse(self, doping: Array | float) -> Array:
        """The same of coarse material, whose doping alone scatters."""
        x, _, weights = _legs(self.scatter)
        low, high = self.coarse_designed.x[[0, -1]]
        at = np.clip(np.log(np.asarray(doping, dtype=float))[..., None] + x, low, high)
        return self._taken(self.coarse_designed(at), weights)

    def as_designed(self, doping: float, size: float) -> float:
        """Score of the leg that hits its design, as the map has it."""
        return float(self.designed.ev(np.log(doping), np.log(size)))

    def best(self, dopings: tuple[float, float], sizes: tuple[float, float]) -> tuple[float, float, float]:
        """(doping, size, worth) of the leg to ask for within the ranges."""
        density, length = np.geomspace(*dopings, _MAP_DOPINGS), np.geomspace(*sizes, _MAP_SIZES)
        for rounds_left in range(_ZOOMS, -1, -1):
            worth = self.worth(density[:, None], length)
            i, j = np.unravel_index(int(np.argmax(worth)), worth.shape)
            best = float(density[i]), float(length[j]), float(worth[i, j])
            if rounds_left:
                density, length = around(density, int(i)), around(length, int(j))
        return best

    def best_coarse(self, dopings: tuple[float, float]) -> float:
        """Worth of coarse material at the doping that is best to ask for."""
        density = np.geomspace(*dopings, _MAP_DOPINGS)
        for _ in range(_ZOOMS):
            density = around(density, int(np.argmax(self.worth_coarse(density))))
        return float(np.max(self.worth_coarse(density)))

    def _taken(self, scores: Array, weights: Array) -> Array:
        scores = np.maximum(scores, 0.0)  # the spline may dip below where legs begin to fail
        if self.scatter.take == "expected":
            return np.asarray(np.sum(scores * weights, axis=-1))
        return np.asarray(np.quantile(scores, _TENTH, axis=-1))


def _beyond(ends: tuple[float, float], spread: float, limits: tuple[float, float], step: float) -> Array:
    low, high = np.log(np.clip((ends[0] * np.exp(-_REACH * spread), ends[1] * np.exp(_REACH * spread)), *limits))
    return np.linspace(low, high, max(int(np.ceil((high - low) / step)) + 1, _FEWEST))


@cache
def _legs(scatter: Scatter) -> tuple[Array, Array, Array]:
    """Steps in ln doping and ln size, and weights, of the legs that are made."""
    if scatter.take == "expected":
        nodes, weights = np.polynomial.hermite_e.hermegauss(_NODES)
        x, y = (a.ravel() for a in np.meshgrid(scatter.doping * nodes, scatter.size * nodes, indexing="ij"))
        return x, y, np.outer(weights, weights).ravel() / (2 * np.pi)
    normals = ndtri(qmc.Sobol(2, rng=np.random.default_rng(0)).random(_LEGS))
    return scatter.doping * normals[:, 0], scatter.size * normals[:, 1], np.full(_LEGS, 1 / _LEGS)
