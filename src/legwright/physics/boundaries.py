"""Boundary scattering: grains, round wires and films, for phonons and for electrons.

Every suppression factor is the ratio of a conductivity to that of unbounded material, for one mean free path.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.physics.pieces import Pieces
from legwright.physics.rough_walls import flight, rough_suppression

Array = NDArray[np.float64]


def grain_mean_free_path(
    size: ArrayLike, frequency_ratio: ArrayLike, exponent: float = 0.5, prefactor: float = 1.0
) -> Array:
    """Phonon mean free path set by grain boundaries alone, in m.

    Λ_gb = c d (ω_max/ω)^s: s = 0 is the grey law (Λ = c d), s = 1 grows with the wavelength.

    size: grain diameter d (m, > 0, may be inf); frequency_ratio: ω/ω_max in (0, 1]; the two broadcast; exponent s
    and prefactor c > 0, one each. Raises nothing of its own.
    Source: Wang, Alaniz, Jang, Garay & Dames, Nano Letters 11, 2206 (2011).

    >>> float(grain_mean_free_path(100e-9, 0.25, exponent=0.5))
    2e-07
    """
    d = np.asarray(size, dtype=float)
    return np.asarray(prefactor * d * np.asarray(frequency_ratio, dtype=float) ** -exponent)


def grain_suppression(mean_free_path: ArrayLike, size: ArrayLike, reflection: ArrayLike) -> Array:
    """Electron conductivity with partly reflecting grain boundaries over that of the grain's interior.

    F = 3 [1/3 − a/2 + a² − a³ ln(1 + 1/a)],  a = (Λ/d) R/(1 − R).

    mean_free_path Λ and size d in m (d may be inf), reflection R in [0, 1); all broadcast; F in (0, 1].
    ValueError for a reflection outside its range.
    Source: Mayadas & Shatzkes, Physical Review B 1, 1382 (1970).

    >>> round(float(grain_suppression(10e-9, 100e-9, 0.3)), 4)
    0.9405
    """
    r = np.asarray(reflection, dtype=float)
    if np.any(~((r >= 0) & (r < 1))):
        raise ValueError("reflection must lie within 0 … 1, 1 left out")
    a = np.asarray(mean_free_path, dtype=float) * (r / (1 - r)) / np.asarray(size, dtype=float)
    small = np.minimum(a, _SWITCH)
    with np.errstate(divide="ignore"):
        logarithm = np.where(small > 0, np.log1p(1 / small), 0.0)
    direct = 1 - small * (1.5 - small * (3 - 3 * small * logarithm))
    if not np.any(a > _SWITCH):
        return np.asarray(direct)
    u = 1 / np.maximum(a, _SWITCH)
    series = np.zeros_like(u)
    for k in range(_TERMS, -1, -1):
        series = 1 / (k + 4) - u * series
    return np.asarray(np.where(a > _SWITCH, 3 * u * series, direct))


def diffuse_walls(shape: str) -> Callable[[ArrayLike], Array]:
    """`wire_suppression` or `film_suppression` with diffuse walls, as a function of mean free path over size.

    Path over size and what is left of the conductivity are dimensionless, of one shape. ValueError for a `shape`
    that is neither 'wire' nor 'film'.
    Sources: Dingle, Proceedings of the Royal Society A 201, 545 (1950); Fuchs, Proceedings of the Cambridge
    Philosophical Society 34, 100 (1938).

    >>> round(float(diffuse_walls("film")(1.0)), 3)
    0.684
    """
    if shape not in ("wire", "film"):
        raise ValueError(f"the shape must be grain, wire or film, not '{shape}'")
    return wire_suppression if shape == "wire" else film_suppression


#: above this the closed form loses digits by cancellation (a² ε/F: 1e-13 at 8) and the series in 1/a takes over
_SWITCH = 8.0
_TERMS = 16


def film_suppression(mfp_over_thickness: ArrayLike, specularity: ArrayLike = 0.0) -> Array:
    """In-plane conductivity of a film over that of unbounded material, 0 … 1.

    F = (3/2) ∫₀¹ (1 − µ²) B(1/(Kn µ), p) dµ with B the share of a path kept between two walls.

    mfp_over_thickness Kn ≥ 0; specularity p in [0, 1], the share of mirror reflections; both broadcast.
    Limits, p = 0: 1 − ⅜ Kn (thick), ¾ (ln Kn + 0.423)/Kn (thin). ValueError outside the ranges.
    Sources: Fuchs, Proc. Cambridge Phil. Soc. 34, 100 (1938); Sondheimer, Advances in Physics 1, 1 (1952).

    >>> round(float(film_suppression(1.0)), 6)
    0.683857
    """
    return _suppression(_film_paths, mfp_over_thickness, specularity)


def wire_suppression(mfp_over_diameter: ArrayLike, specularity: ArrayLike = 0.0) -> Array:
    """Conductivity along a round wire over that of unbounded material, 0 … 1.

    F = (12/π) ∫₀^{π/2} cos²θ sinθ dθ ∫₀^{π/2} cos²β dβ B(cos β/(Kn sin θ), p).

    mfp_over_diameter Kn ≥ 0; specularity p in [0, 1]; both broadcast.
    Limits, p = 0: 1 − ¾ Kn (thick), 1/Kn (thin: Casimir 1938; times (1+p)/(1−p) for partly specular walls).
    ValueError outside the ranges. Source: Dingle, Proc. Royal Society A 201, 545 (1950).

    >>> round(float(wire_suppression(1.0)), 6)
    0.492863
    """
    return _suppression(_wire_paths, mfp_over_diameter, specularity)


def film_suppression_rough(mfp_over_thickness: ArrayLike, roughness: ArrayLike) -> Array:
    """In-plane conductivity of a film with rough faces over that of unbounded material, 0 … 1, for one q.

    As `film_suppression` with p(θ) = exp(−4 (qη)² cos²θ) inside the integral, θ from the face's normal: waves
    that graze it see a smoother one. Averaging p first is off by a factor of two near qη = 1 in a thin film.

    mfp_over_thickness Kn ≥ 0; roughness qη ≥ 0, wave number times root mean square height; both broadcast.
    qη → 0: no suppression; qη → ∞: diffuse faces; thin films fall as Kn^(−1/3). Within 1e-9 for qη up to 3 and
    5e-9 up to 10, whatever Kn. Valid for heights uncorrelated over a wavelength. ValueError outside the ranges.
    Sources: Ziman, Electrons and Phonons (Oxford, 1960); Soffer, Journal of Applied Physics 38, 1710 (1967).

    >>> [round(float(film_suppression_rough(1.0, q_eta)), 4) for q_eta in (0.1, 1.0, 1e3)]
    [0.9951, 0.8068, 0.6839]
    """
    return rough_suppression("film", mfp_over_thickness, roughness)


def wire_suppression_rough(mfp_over_diameter: ArrayLike, roughness: ArrayLike) -> Array:
    """Conductivity along a round wire with a rough wall over that of unbounded material, 0 … 1, for one q.

    As `wire_suppression` with p = exp(−4 (qη)² cos²α) inside the integral, cos α = cos β sin θ the incidence on
    the wall, the same at each bounce; thin wires fall as Kn^(−2/3). mfp_over_diameter Kn ≥ 0; roughness qη ≥ 0;
    both broadcast. Limits, errors and sources as `film_suppression_rough`.

    >>> [round(float(wire_suppression_rough(1.0, q_eta)), 4) for q_eta in (0.1, 1.0, 1e3)]
    [0.9902, 0.6534, 0.4929]
    """
    return rough_suppression("wire", mfp_over_diameter, roughness)


def _path_kept(x: Array, p: ArrayLike) -> Array:
    """B(x, p) = 1 − (1 − p)(1 − e⁻ˣ)/(x (1 − p e⁻ˣ)): mean share of a mean free path kept, wall to wall x."""
    fall, lack = flight(np.maximum(x, 1e-300))
    mirrored = np.asarray(p, dtype=float)
    return np.asarray(((1 - mirrored) * lack + mirrored * fall) / (1 - mirrored + mirrored * fall))


@cache
def _double_exponential(count: int) -> tuple[Array, Array]:
    """Nodes and weights of the tanh-sinh rule on [0, π/2]: exact at endpoint layers of any width."""
    t = np.linspace(-3.4, 3.4, count)
    step = t[1] - t[0]
    inner = 0.5 * np.pi * np.sinh(t)
    angle = 0.5 * np.pi / (1 + np.exp(-2 * inner))
    weight = step * 0.5 * np.pi * 0.5 * (0.5 * np.pi * np.cosh(t)) / np.cosh(inner) ** 2
    return angle, weight


@cache
def _film_paths() -> tuple[Array, Array]:
    """Wall-to-wall paths in thicknesses, and how much of the current each carries."""
    angle, weight = _double_exponential(321)
    mu = np.sin(angle)
    return 1 / mu, 1.5 * np.cos(angle) ** 3 * weight


@cache
def _wire_paths() -> tuple[Array, Array]:
    """Wall-to-wall paths in diameters, and how much of the current each carries."""
    angle, weight = _double_exponential(131)
    theta, beta = angle[:, None], angle[None, :]
    paths = np.cos(beta) / np.sin(theta)
    shares = (12 / np.pi) * np.cos(theta) ** 2 * np.sin(theta) * np.cos(beta) ** 2
    shares = shares * weight[:, None] * weight[None, :]
    keep = shares > 1e-30
    return paths[keep], shares[keep]


_Paths = Callable[[], tuple[Array, Array]]


def _integrate(paths_and_shares: _Paths, knudsen: Array, specularity: Array) -> Array:
    """The path integral itself, in blocks, for flat arrays."""
    paths, shares = paths_and_shares()
    total = np.empty_like(knudsen)
    block = max(1, 2_000_000 // paths.size)
    for start in range(0, knudsen.size, block):
        part = slice(start, start + block)
        x = paths / knudsen[part, None]
        total[part] = np.sum(shares * _path_kept(x, specularity[part, None]), axis=-1)
    return total


#: the table spans ln Kn from thick to thin: below it 1 − F is proportional to Kn, above it F is to 1/Kn
_LN_THICK, _LN_THIN, _PIECES, _DEGREE = -14.0, 46.0, 120, 9


@cache
def _table(paths_and_shares: _Paths, specularity: float) -> Pieces:
    """F (1 + Kn) against ln Kn; held against the integral in the tests."""

    def scaled(log_kn: Array) -> Array:
        kn = np.exp(log_kn)
        factor = _integrate(paths_and_shares, kn.ravel(), np.full(kn.size, specularity))
        return np.asarray(factor.reshape(kn.shape) * (1 + kn))

    return Pieces.of(scaled, _LN_THICK, _LN_THIN, _PIECES, _DEGREE)


def _suppression(paths_and_shares: _Paths, knudsen: ArrayLike, specularity: ArrayLike) -> Array:
    kn, p = np.asarray(knudsen, dtype=float), np.asarray(specularity, dtype=float)
    if np.any(~(kn >= 0)) or np.any(~((p >= 0) & (p <= 1))):
        raise ValueError("mean free path over size must be ≥ 0, specularity within 0 … 1")
    if p.ndim:
        kn, p = np.broadcast_arrays(kn, p)
        return _by_integral(paths_and_shares, kn, p)
    if p == 1:
        return np.ones_like(kn)
    bounded = np.clip(kn, _THICK, _THIN)
    factor = _table(paths_and_shares, float(p))(np.log(bounded)) / (1 + bounded)
    thick = 1 - (1 - factor) * (kn / _THICK)
    return np.asarray(np.where(kn < _THICK, thick, factor / np.maximum(kn / _THIN, 1.0)))


_THICK, _THIN = float(np.exp(_LN_THICK)), float(np.exp(_LN_THIN))


def _by_integral(paths_and_shares: _Paths, kn: Array, p: Array) -> Array:
    bounded = np.clip(kn.ravel(), 1e-30, 1e30)
    factor = _integrate(paths_and_shares, bounded, np.minimum(p.ravel(), 1 - 1e-16))
    return np.asarray(np.where(p == 1, 1.0, factor.reshape(kn.shape)))
