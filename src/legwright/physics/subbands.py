"""Thin wires: carriers on the subbands of a round wire with hard walls, from one subband to the bulk.

In units of E_R = ħ²/(2 m_t R²) a parabolic wire is always the same: its edges are squares of zeros of Bessel
functions, and acoustic scattering between all of them makes one function W(E/E_R) of the transport.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import expit, jn_zeros, jv

from legwright.base.units import HBAR, K_B
from legwright.physics.carriers import Integrals, thermal_window
from legwright.physics.fermi import fermi_dirac_integral, softplus_mesh

Array = NDArray[np.float64]


@dataclass(frozen=True)
class WireBand:
    """A parabolic band whose valleys are all alike and round about the axis of the wire; SI.

    along_mass, across_mass: of one valley, along the wire and across it (kg); valleys: how many;
    deformation_potential Ξ_d (J); elastic_constant C_l (Pa).
    """

    along_mass: float
    across_mass: float
    valleys: float
    deformation_potential: float
    elastic_constant: float


def confinement_energy(diameter: ArrayLike, across_mass: ArrayLike) -> Array:
    """E_R = ħ²/(2 m_t R²), J: the unit of a round wire's subbands.

    diameter 2R > 0 (m), across_mass m_t (kg); broadcast. ValueError for another diameter.
    Source: Hicks & Dresselhaus, Physical Review B 47, 16631 (1993).

    >>> from scipy import constants as c
    >>> round(float(confinement_energy(10e-9, 0.1 * c.m_e)) / c.e, 5)
    0.01524
    """
    d = np.asarray(diameter, dtype=float)
    if not np.all(d > 0):
        raise ValueError("the diameter must be above 0")
    return np.asarray(2 * HBAR**2 / (np.asarray(across_mass) * d**2))


def subband_edges(highest: float) -> tuple[NDArray[np.intp], Array]:
    """Angular orders m and zeros χ_mn of J_m up to `highest`, by rising χ; edges lie at χ² E_R, twofold for m > 0.

    highest and zeros are dimensionless; two arrays of one shape, empty where no zero is so low.
    Source: Hicks & Dresselhaus, Physical Review B 47, 16631 (1993) for the one-dimensional subbands; a hard wall
    at the surface makes them those of a drum (Abramowitz & Stegun 1964, section 9.5).

    >>> subband_edges(4.0)[1].round(4).tolist()
    [2.4048, 3.8317]
    """
    orders: list[NDArray[np.intp]] = []
    zeros: list[Array] = []
    while True:
        order = len(orders)
        found = jn_zeros(order, int(highest / np.pi) + 2)
        found = found[found <= highest]
        if not found.size:
            break
        orders.append(np.full(found.size, order, dtype=np.intp))
        zeros.append(np.asarray(found, dtype=float))
    if not zeros:
        return np.empty(0, dtype=np.intp), np.empty(0)
    order_of, zero = np.concatenate(orders), np.concatenate(zeros)
    rising = np.argsort(zero)
    return order_of[rising], zero[rising]


def thin_wire_diameter(temperature: ArrayLike, across_mass: ArrayLike) -> Array:
    """Diameter below which the first two subbands are more than k_B T apart, m: the criterion `thin-wire-subbands`.

    d = 2ħ √[(χ₁₁² − χ₀₁²)/(2 m_t k_B T)]. temperature (K), across_mass m_t (kg); broadcast. Thicker wires are
    bulk with rough or smooth walls (`wire_suppression`); thinner ones want the functions of this module.
    Source: from the edges of Hicks & Dresselhaus, Physical Review B 47, 16631 (1993).

    >>> from scipy import constants as c
    >>> round(float(thin_wire_diameter(300.0, 0.1 * c.m_e)) * 1e9, 1)
    22.9
    """
    first, second = subband_edges(4.0)[1]
    heat = 2 * np.asarray(across_mass) * K_B * np.asarray(temperature, dtype=float)
    return np.asarray(2 * HBAR * np.sqrt((second**2 - first**2) / heat))


#: subbands are taken one by one up to this χ (476 different edges); beyond it the wire is nearly bulk
_TOP = 62.0
_DEGREE, _NODES = 16, 12
#: break points of the energy integral in k_B T from µ: between them −∂f/∂E is a polynomial to 1e-9
_BREAKS = np.array([-40.0, -25.0, -16.0, -10.0, -6.0, -3.0, 0.0, 3.0, 6.0, 10.0, 16.0, 25.0, 40.0])


@dataclass(frozen=True)
class _Wire:
    """Edges χ² up to the last, their degeneracy, and W as Chebyshev series in √(s − edge) from each to the next."""

    edges: Array
    degeneracy: Array
    series: Array
    tail: float

    @property
    def last(self) -> float:
        return float(self.edges[-1])

    def carried(self, s: Array, piece: NDArray[np.intp]) -> Array:
        """W(s) on the given pieces, by Clenshaw's rule."""
        low, high = self.edges[piece], self.edges[piece + 1]
        twice = 2 * (2 * np.sqrt(np.clip((s - low) / (high - low), 0.0, 1.0)) - 1)
        upper, lower = np.zeros_like(s), np.zeros_like(s)
        for row in self.series[:0:-1]:
            upper, lower = row[piece] + twice * upper - lower, upper
        return np.asarray(self.series[0][piece] + 0.5 * twice * upper - lower)

    def beyond(self, s: Array) -> Array:
        """W(s) after the last edge: (π/3)(s − a √s), the bulk less a layer at the wall."""
        return np.asarray(np.pi / 3 * (s - self.tail * np.sqrt(s)))


@cache
def _wire() -> _Wire:
    orders, zeros = subband_edges(_TOP)
    edges, degeneracy = zeros**2, np.where(orders > 0, 2.0, 1.0)
    nodes, weights = np.polynomial.legendre.leggauss(220)  # |φ|⁴ oscillates 4χ/π = 80 times over the diameter
    radius = 0.5 * (nodes + 1)
    presence = jv(orders[:, None], zeros[:, None] * radius) ** 2
    presence = presence / (np.pi * jv(orders + 1, zeros)[:, None] ** 2)
    rings = np.pi * radius * weights

    local = np.cos(np.pi * (np.arange(_DEGREE) + 0.5) / _DEGREE)
    u = 0.5 * (local + 1)
    s = (edges[:-1, None] + np.diff(edges)[:, None] * u**2).ravel()
    open_ = s[:, None] > edges
    root = np.sqrt(np.where(open_, s[:, None] - edges, 1.0))
    states_here = np.where(open_, degeneracy / root, 0.0) @ presence
    rate = (states_here * rings) @ presence.T
    carried = np.sum(np.where(open_, degeneracy * root / rate, 0.0), axis=-1)
    series = np.polynomial.chebyshev.chebfit(local, carried.reshape(-1, _DEGREE).T, _DEGREE - 1)
    share = (np.diff(edges)[:, None] * u * np.sqrt(1 - local**2)).ravel()  # of ∫ ds, at Chebyshev's nodes
    share = share * (s > 0.5 * edges[-1])
    tail = float(np.sum(share * (s - 3 / np.pi * carried)) / np.sum(share * np.sqrt(s)))
    return _Wire(edges, degeneracy, np.asarray(series, dtype=float), tail)


def subband_density(band: WireBand, temperature: ArrayLike, eta: ArrayLike, diameter: ArrayLike) -> Array:
    """Carriers per volume of a round wire, 1/m³: n = N_v/(πR²) √(2 m_x k_B T/π)/ħ Σ F_(−1/2)(η − χ² E_R/k_B T).

    temperature (K), eta: Fermi level over the edge that the band would have in bulk (k_B T), diameter (m); all
    broadcast. Where edges that carriers reach are more than the 900 tabulated ones the sum is replaced by its
    expansion for thick wires, bulk less surface plus curvature, F_½/4ε − √π F₀/(4√ε) + F_(−½)/6 +
    √(πε) F₋₁/128 with ε = E_R/k_B T, exact to a share of ε²; oscillations of cold thick wires are left out.
    ValueError for a level η that is not finite or a diameter that is not above 0.
    Sources: Hicks & Dresselhaus, Physical Review B 47, 16631 (1993); Stewartson & Waechter, Proc. Cambridge
    Phil. Soc. 69, 353 (1971) for the expansion.

    >>> from scipy import constants as c
    >>> band = WireBand(0.2 * c.m_e, 0.2 * c.m_e, 1.0, 9 * c.e, 1.5e11)
    >>> thin, thick = subband_density(band, 300.0, 0.0, [5e-9, 1e-3])
    >>> bool(thin < 0.2 * thick)
    True
    """
    t, level, d = np.broadcast_arrays(*(np.asarray(a, dtype=float) for a in (temperature, eta, diameter)))
    kt = K_B * t
    ratio = confinement_energy(d, band.across_mass) / kt
    per_length = np.sqrt(2 * band.along_mass * kt / np.pi) / HBAR
    return np.asarray(band.valleys * per_length * 4 / (np.pi * d**2) * _lines(level, ratio))


def _lines(level: Array, ratio: Array) -> Array:
    """Σ deg F_(−1/2)(η − χ² ε) over all subbands."""
    wire = _wire()
    thick = np.maximum(level, 0.0) + 40.0 > wire.last * ratio
    coarse = np.where(thick, 1.0, ratio)
    each = fermi_dirac_integral(-0.5, np.where(thick, 0.0, level)[..., None] - wire.edges * coarse[..., None])
    one_by_one = np.sum(wire.degeneracy * each, axis=-1)
    volume = fermi_dirac_integral(0.5, level) / (4 * ratio)
    surface = np.sqrt(np.pi) * fermi_dirac_integral(0, level) / (4 * np.sqrt(ratio))
    curved = fermi_dirac_integral(-0.5, level) / 6 + np.sqrt(np.pi * ratio) / 128 * expit(level)
    expanded = volume - surface + curved
    return np.asarray(np.where(thick, expanded, one_by_one))


def subband_level(band: WireBand, temperature: ArrayLike, density: ArrayLike, diameter: ArrayLike) -> Array:
    """Fermi level η over the bulk band edge (k_B T) at which the wire holds `density` (1/m³, > 0).

    temperature (K), diameter (m); all broadcast. The root of `subband_density` in ln n, between the level of the
    bulk (a wire never has more states: Pólya) and that of its first subband alone. ValueError for a density
    or diameter that is not above 0.
    Source: Hicks & Dresselhaus, Physical Review B 47, 16631 (1993).

    >>> from scipy import constants as c
    >>> band = WireBand(0.2 * c.m_e, 0.2 * c.m_e, 1.0, 9 * c.e, 1.5e11)
    >>> eta = subband_level(band, 300.0, 1e25, 8e-9)
    >>> f"{float(subband_density(band, 300.0, eta, 8e-9)):.6e}"
    '1.000000e+25'
    """
    t, n, d = np.broadcast_arrays(*(np.asarray(a, dtype=float) for a in (temperature, density, diameter)))
    if not np.all(n > 0):
        raise ValueError("the density must be above 0")
    kt = K_B * t
    ratio = confinement_energy(d, band.across_mass) / kt
    line = band.valleys * np.sqrt(2 * band.along_mass * kt / np.pi) / HBAR * 4 / (np.pi * d**2)
    filled = n / line
    low = np.log(filled * 4 * ratio) - 1
    high = _wire().edges[0] * ratio + np.maximum(np.log(filled) + 2, (1.2 * filled) ** 2 + 2)

    def miss(level: Array, ratio: Array, filled: Array) -> Array:
        return np.log(np.maximum(_lines(level, ratio), 1e-300)) - np.log(filled)

    from scipy.optimize.elementwise import find_root

    return np.asarray(find_root(miss, (low, high), args=(ratio, filled)).x)


def subband_integrals(band: WireBand, temperature: ArrayLike, eta: ArrayLike, diameter: ArrayLike) -> Integrals:
    """L_0, L_1, L_2 of a round wire under acoustic scattering: L_k = ∫ Ξ (E − µ)^k (−∂f/∂E) dE, SI.

    Ξ = N_v (2 E_R/(π m_x C)) W(E/E_R), C = π k_B T Ξ_d²/(ħ C_l),
    W(s) = Σ_i √(s − χ_i²) / Σ_j f_ij (s − χ_j²)^(−1/2) over the open subbands, f_ij = R² ∫ |φ_i|² |φ_j|² dA:
    every subband scatters into all open ones by their overlap; the process has no preferred direction, so the
    rate is that of momentum too. W → πs/3, which is the bulk: g v_x² τ = 2E/(3 m_x C).
    temperature (K), eta: Fermi level over the bulk band edge (k_B T), diameter (m); all broadcast.

    Parabolic bands, a hard smooth wall, elastic acoustic phonons of the bulk, levels sharper than they are apart
    (ħ/τ below the spacing: else steps are washed out). Up to 900 subbands integrals are good to 1e-5; beyond them
    W goes on as (π/3)(s − a √s), its mean within 0.3 %. The bulk is reached as the wall's share of the section
    falls: at given density σ and S are within 1 % of it from kd = 140, with k the wave number at k_B T over the
    edge or at the Fermi level (0.3 m_e, 300 K, few carriers: d = 310 nm), and closer as 1/d. ValueError for a
    level η that is not finite or a diameter that is not above 0.
    Source: Hicks & Dresselhaus, Physical Review B 47, 16631 (1993) for the subbands; Lee & Vassell, Journal of
    Physics C 17, 2525 (1984) for scattering between those of a wire.

    >>> from scipy import constants as c
    >>> band = WireBand(0.2 * c.m_e, 0.2 * c.m_e, 1.0, 9 * c.e, 1.5e11)
    >>> sums = subband_integrals(band, 300.0, 2.0, [6e-9, 60e-9])
    >>> seebeck = -sums.l1 / (c.e * 300.0 * sums.l0)
    >>> bool(abs(seebeck[0]) > abs(seebeck[1]))
    True
    """
    t, level, d = np.broadcast_arrays(*(np.asarray(a, dtype=float) for a in (temperature, eta, diameter)))
    if not np.all(np.isfinite(level)):
        raise ValueError("η must be finite")
    kt = K_B * t
    unit = confinement_energy(d, band.across_mass)
    ratio = unit / kt
    x, weight = _energies(level, ratio)
    capacity = np.pi * kt * band.deformation_potential**2 / (HBAR * band.elastic_constant)
    scale = band.valleys * 2 * unit / (np.pi * band.along_mass * capacity)
    flowing = weight * thermal_window(x) * scale[..., None]
    excess = x * kt[..., None]
    l0, l1, l2 = (np.sum(flowing * excess**k, axis=-1) for k in range(3))
    return Integrals(l0, l1, l2)


def _energies(level: Array, ratio: Array) -> tuple[Array, Array]:
    """(E − µ)/k_B T and weight × W over edges, break points and the tail: Gauss nodes in √(E − edge) between."""
    wire = _wire()
    mu = level / ratio
    breaks = np.clip(mu[..., None] + _BREAKS / ratio[..., None], wire.edges[0], wire.last)
    ends = np.sort(np.concatenate([np.broadcast_to(wire.edges, (*mu.shape, wire.edges.size)), breaks], axis=-1))
    low, high = ends[..., :-1], ends[..., 1:]
    piece = np.clip(np.searchsorted(wire.edges, 0.5 * (low + high)) - 1, 0, wire.edges.size - 2)
    edge = wire.edges[piece]
    first, last = np.sqrt(np.maximum(low - edge, 0.0)), np.sqrt(np.maximum(high - edge, 0.0))
    nodes, weights = np.polynomial.legendre.leggauss(_NODES)
    half = 0.5 * (last - first)[..., None]
    u = 0.5 * (last + first)[..., None] + half * nodes
    s = edge[..., None] + u**2
    carried = wire.carried(s, np.broadcast_to(piece[..., None], s.shape)) * 2 * u * half * weights
    tail, tail_weight = softplus_mesh(level - wire.last * ratio)
    beyond = wire.last + tail / ratio[..., None]
    flat = (*mu.shape, -1)
    where = np.concatenate([s.reshape(flat), beyond], axis=-1)
    weight = np.concatenate(
        [(carried * ratio[..., None, None]).reshape(flat), tail_weight * wire.beyond(beyond)], axis=-1
    )
    return where * ratio[..., None] - level[..., None], weight
