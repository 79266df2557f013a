"""Rough walls of wires and films: mirror-like for long waves and for glancing ones, diffuse for the rest.

The share of mirror reflections p(q, θ) = exp(−4 q²η² cos²θ) stands inside the integral over directions. A long wave
and a glancing one see a smooth wall, so a rough film or wire keeps far more heat than one average p would leave:
the conductivity of a thin film falls as Kn^(−1/3) and that of a thin wire as Kn^(−2/3), not as 1/Kn.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache, lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.physics.pieces import Pieces

Array = NDArray[np.float64]


@dataclass(frozen=True)
class RoughWalls:
    """Suppression for wave numbers that are fixed once: one table of ln Kn a wave number, all in one row.

    table of F, waves: how many, fall: the power with which a thin body's F falls with Kn (all dimensionless).
    """

    table: Pieces
    waves: int
    fall: float

    def __call__(self, knudsen: Array) -> Array:
        """F for Kn (..., waves). Below the table 1 − F ∝ Kn; above it F = [1 + c Kn]^(−1/3) film, ^(−2/3) wire.

        The law above the table is right where F nears 1 and where it nears 0.
        """
        log = np.log(np.clip(knudsen, _THICK, _THIN))
        inside = np.minimum(log, _LN_THIN - 1e-9) + (_LN_THIN - _LN_THICK) * np.arange(self.waves)
        factor = self.table(inside)
        thick = 1 - (1 - factor) * (np.minimum(knudsen, _THICK) / _THICK)
        if not np.any(knudsen > _THIN):
            return np.asarray(np.where(knudsen < _THICK, thick, factor))
        grown = np.maximum(factor ** (-1 / self.fall) - 1, 0.0) * np.maximum(knudsen / _THIN, 1.0)
        return np.asarray(np.where(knudsen < _THICK, thick, (1 + grown) ** -self.fall))


@lru_cache(maxsize=16)
def rough_walls(shape: str, waves_times_roughness: tuple[float, ...]) -> RoughWalls:
    """Tables for a wire or film, one for each qη, within 1e-8 of the integrals up to qη = 10. Takes a second.

    shape 'wire' or 'film'; waves_times_roughness qη ≥ 0, dimensionless. KeyError for another shape.
    Sources: Ziman, Electrons and Phonons (1960); Soffer, Journal of Applied Physics 38, 1710 (1967).

    >>> smooth = rough_walls("film", (0.0,))
    >>> bool(abs(smooth(np.array([1.0]))[0] - 1) < 1e-8)
    True
    """
    waves = len(waves_times_roughness)
    rough = np.array(waves_times_roughness)

    def each(log_kn: Array) -> Array:
        one = np.exp(log_kn[:_PIECES].ravel())  # the pieces of the first wave; the others repeat them
        return np.asarray(_integrate(shape, one, rough).reshape(log_kn.shape))

    span = (_LN_THIN - _LN_THICK) * waves
    table = Pieces.of(each, _LN_THICK, _LN_THICK + span, _PIECES * waves, _DEGREE)
    return RoughWalls(table, waves, _FALL[shape])


#: how a thin body's factor falls with Kn: as glancing waves that the wall mirrors
_FALL = {"film": 1 / 3, "wire": 2 / 3}
_LN_THICK, _LN_THIN, _PIECES, _DEGREE = -14.0, 46.0, 30, 11
_THICK, _THIN = float(np.exp(_LN_THICK)), float(np.exp(_LN_THIN))

_STEP = 0.25


@cache
def _film_paths() -> tuple[Array, Array, Array]:
    """Wall-to-wall paths in thicknesses, cosines from the normal, and how much of the current each carries.

    Trapezoids in y, µ = 1/(1 + e⁻ʸ): exponential ends resolve glancing directions at any Kn.
    """
    y = np.arange(-46.0, 16.0, _STEP)
    mu, rest = 1 / (1 + np.exp(-y)), 1 / (1 + np.exp(y))
    return 1 / mu, mu, 1.5 * rest * (1 + mu) * mu * rest * _STEP


@cache
def _wire_paths() -> tuple[Array, Array, Array]:
    """Wall-to-wall paths in diameters, cosines from the normal, and how much of the current each carries.

    Trapezoids in y and z, sin θ = sech y and cos β = sech z: even in both, so that only far ends are to be met.
    """
    y, z = np.arange(0.0, 28.0, _STEP)[:, None], np.arange(0.0, 11.0, _STEP)[None, :]
    sine, cosine = 1 / np.cosh(y), 1 / np.cosh(z)
    shares = (12 / np.pi) * (np.tanh(y) * sine) ** 2 * cosine**3 * _STEP**2
    shares = shares * np.where(y > 0, 1.0, 0.5) * np.where(z > 0, 1.0, 0.5)
    keep = shares > 1e-28
    return (cosine / sine)[keep], (cosine * sine)[keep], shares[keep]


_PATHS = {"film": _film_paths, "wire": _wire_paths}


def flight(x: Array) -> tuple[Array, Array]:
    """1 − e⁻ˣ, and 1 − (1 − e⁻ˣ)/x, dimensionless, expanded below 1e-2 where the second cancels; x > 0, any shape.

    x is the flight to the wall over the mean free path. Raises nothing of its own. By definition.

    >>> [round(float(part), 6) for part in flight(np.array(1.0))]
    [0.632121, 0.367879]
    """
    fall = -np.expm1(-x)
    y = np.where(x < 1e-2, x, 0.0)
    lack = y * (1 / 2 - y * (1 / 6 - y * (1 / 24 - y * (1 / 120 - y / 720))))
    return fall, np.where(x < 1e-2, lack, 1 - fall / np.maximum(x, 1e-2))


def _mean_kept(fall: Array, lack: Array, mirrored: Array, lost: Array, shares: Array) -> Array:
    """Mean of B(x, p) = [(1 − p) G + p (1 − e⁻ˣ)]/[(1 − p) + p (1 − e⁻ˣ)], G = 1 − (1 − e⁻ˣ)/x: no term cancels."""
    again = mirrored * fall
    return np.asarray(np.sum(shares * (lost * lack + again) / (lost + again), axis=-1))


def _integrate(shape: str, knudsen: Array, rough: Array) -> Array:
    """F of shape (rough, knudsen): the flights are shared by all waves, the mirrored shares by all paths."""
    paths, cosines, shares = _PATHS[shape]()
    exponents = 4 * (rough[:, None] * cosines) ** 2
    mirrored, lost = np.exp(-exponents), -np.expm1(-exponents)
    result = np.empty((rough.size, knudsen.size))
    for start in range(0, knudsen.size, 16):  # few enough to stay in the processor's cache
        part = slice(start, start + 16)
        fall, lack = flight(paths / knudsen[part, None])
        for wave in range(rough.size):
            result[wave, part] = _mean_kept(fall, lack, mirrored[wave], lost[wave], shares)
    return result


def rough_suppression(shape: str, knudsen: ArrayLike, rough: ArrayLike) -> Array:
    """The path integral of `film_suppression_rough` or `wire_suppression_rough` itself, 0 … 1.

    shape 'wire' or 'film'; knudsen Λ/d ≥ 0 and rough qη ≥ 0 broadcast. ValueError below 0, KeyError for another
    shape.
    Sources: Ziman, Electrons and Phonons (1960); Soffer, Journal of Applied Physics 38, 1710 (1967).

    >>> round(float(rough_suppression("film", 1.0, 1e3)), 5)  # diffuse: Fuchs (1938)
    0.68386
    """
    kn, waves = np.broadcast_arrays(np.asarray(knudsen, dtype=float), np.asarray(rough, dtype=float))
    if np.any(~(kn >= 0)) or np.any(~(waves >= 0)):
        raise ValueError("mean free path over size and roughness must be ≥ 0")
    paths, cosines, shares = _PATHS[shape]()
    flat, heights = np.clip(kn.ravel(), 1e-30, None), waves.ravel()
    total = np.empty_like(flat)
    block = max(1, 500_000 // paths.size)
    for start in range(0, flat.size, block):
        part = slice(start, start + block)
        fall, lack = flight(paths / flat[part, None])
        exponent = 4 * (heights[part, None] * cosines) ** 2
        total[part] = _mean_kept(fall, lack, np.exp(-exponent), -np.expm1(-exponent), shares)
    return np.asarray(np.where(waves == 0, 1.0, total.reshape(kn.shape)))
