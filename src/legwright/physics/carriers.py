"""From bands and doping to the chemical potential and the transport integrals.

Axes: whatever temperature, doping and size broadcast to, then one axis of bands, then one of energies.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from legwright.base.units import E_CHARGE, K_B
from legwright.physics import bands as kane
from legwright.physics import carrier_scattering as scattering
from legwright.physics.barriers import barrier_conductance, barrier_suppression
from legwright.physics.boundaries import diffuse_walls, grain_suppression
from legwright.physics.fermi import softplus_mesh
from legwright.physics.hall import hall_anisotropy
from legwright.physics.moments import conductivity
from legwright.physics.short_legs import short_leg_suppression
from legwright.physics.spectra import PathMesh, through

Array = NDArray[np.float64]

ROOM = 300.0


@dataclass(frozen=True)
class Electrons:
    """Bands and scatterers in SI; one entry of each array a band.

    carrier: +1 electrons, −1 holes; side: +1 conduction, −1 valence. edge at 0 K (J) moves by edge_alpha (J/K) and
    edge_beta (K) after Varshni; valleys: how many; dos_mass of all and inertial_mass (kg) at 300 K, growing with
    mass_exponent, and mass_ratio along over across a valley; nonparabolicity (1/J).
    Scatterers: deformation_potential (J), intervalley_field (J/m) and intervalley_phonon (J), alloy_potential (J)
    at alloy_fraction of sites of alloy_volume (m³), elastic_constant (Pa), mass density (kg/m³), permittivity and
    high_frequency_permittivity (F/m; None: no polar-optical scattering), optical_phonon (J; 0: equipartition),
    reflection of grain boundaries (0 … 1) and barrier at them (J).
    lattice_scale multiplies acoustic and intervalley rates of the majority's bands and mass_scale their masses;
    impurity_knots are ln(doping) and ln(heavy-doping factor). Weights that double a process or switch it off:
    acoustic_weight, intervalley_weight, alloy_weight, impurity_weight, polar_weight.
    """

    carrier: int
    side: Array
    edge: Array
    edge_alpha: Array
    edge_beta: Array
    valleys: Array
    dos_mass: Array
    inertial_mass: Array
    mass_exponent: Array
    nonparabolicity: Array
    deformation_potential: Array
    intervalley_field: Array
    intervalley_phonon: Array
    alloy_potential: Array
    alloy_fraction: float
    alloy_volume: float
    elastic_constant: float
    density: float
    permittivity: float
    reflection: float
    mass_scale: float = 1.0
    lattice_scale: float = 1.0
    acoustic_weight: float = 1.0
    intervalley_weight: float = 1.0
    alloy_weight: float = 1.0
    impurity_weight: float = 1.0
    polar_weight: float = 1.0
    impurity_knots: tuple[tuple[float, float], ...] = ()
    mass_ratio: Array = field(default_factory=lambda: np.ones(1))
    high_frequency_permittivity: float | None = None
    optical_phonon: float = 0.0
    barrier: float = 0.0

    @property
    def majority(self) -> NDArray[np.bool_]:
        """Which bands hold the majority carriers."""
        return np.asarray(self.side == self.carrier)

    def heavy_doping_factor(self, doping: Array) -> Array:
        """Factor on the ionised-impurity rate: ln–ln interpolation between bulk anchors, level outside."""
        if not self.impurity_knots:
            return np.ones_like(doping)
        log_doping, log_factor = np.array(self.impurity_knots).T
        return np.asarray(np.exp(np.interp(np.log(doping), log_doping, log_factor)))


@dataclass(frozen=True)
class Filling:
    """State of the carriers at each (T, doping); last axis of the band arrays: bands.

    chemical_potential µ (J, no axis of bands); per band eta = ±(µ − edge)/k_B T (positive inside the band), density
    (1/m³) and compressibility ∂density/∂|µ| (1/(J m³)).
    """

    chemical_potential: Array
    eta: Array
    density: Array
    compressibility: Array


@dataclass(frozen=True)
class Integrals:
    """L_k = ∫ Ξ(E) (E − µ)^k (−∂f/∂E) dE per band, or summed.

    l0 (1/(J m s)), l1 (1/(m s)) and l2 (J/(m s)), Ξ = g v_x² τ; where bands are apart they are the last axis.
    """

    l0: Array
    l1: Array
    l2: Array

    def times(self, share: Array) -> Integrals:
        """Every energy held back alike."""
        return Integrals(self.l0 * share, self.l1 * share, self.l2 * share)

    def over(self, bands: NDArray[np.bool_]) -> Integrals:
        """Summed over the chosen bands."""
        return Integrals(*(np.sum(part[..., bands], axis=-1) for part in (self.l0, self.l1, self.l2)))


def masses(electrons: Electrons, temperature: Array) -> tuple[Array, Array]:
    """Density-of-states and inertial masses (kg) at T, with a last axis of bands: m(T) = s m_300 (T/300 K)^p.

    temperature T > 0 (K), any shape; s is `mass_scale` for the majority's bands and 1 for the others. Plain
    arithmetic: raises nothing of its own. Source: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides
    (1970) for masses that grow with T.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> of_states, inertial = masses(electrons, t)
    >>> of_states.shape == electrons.dos_mass.shape and bool(np.all(of_states >= inertial))
    True
    """
    growth = (temperature[..., None] / ROOM) ** electrons.mass_exponent
    growth = growth * np.where(electrons.majority, electrons.mass_scale, 1.0)
    return electrons.dos_mass * growth, electrons.inertial_mass * growth


def _occupied(electrons: Electrons, temperature: Array, mu: Array) -> tuple[Array, Array, Array]:
    """(η, density, ∂density/∂|µ|) per band. ∫ g f dε is taken as ∫ N(ε)(−∂f/∂ε) dε, so one mesh serves."""
    kt = K_B * temperature[..., None]
    edge = kane.band_edge(temperature[..., None], electrons.edge, electrons.edge_alpha, electrons.edge_beta)
    eta = electrons.side * (mu[..., None] - edge) / kt
    z, weight = softplus_mesh(eta)
    window = weight * thermal_window(z - eta[..., None])
    mass, _ = masses(electrons, temperature)
    energy = z * kt[..., None]
    alpha = electrons.nonparabolicity[:, None]
    density = np.sum(window * kane.states_below(energy, mass[..., None], alpha), axis=-1)
    states = np.sum(window * kane.density_of_states(energy, mass[..., None], alpha), axis=-1)
    return eta, density, states


def thermal_window(x: Array) -> Array:
    """−∂f/∂x of the Fermi function, 1/(4 cosh²(x/2)), dimensionless, without overflow.

    x = (E − µ)/k_B T, any shape. Raises nothing of its own. By definition of f = 1/(eˣ + 1) (Fermi 1926).

    >>> float(thermal_window(np.array(0.0)))
    0.25
    """
    fall = np.exp(-np.abs(x))
    return np.asarray(fall / (1 + fall) ** 2)


def fill(electrons: Electrons, temperature: Array, doping: Array) -> Filling:
    """Solve charge neutrality, majority = minority + N, for the chemical potential at each (T, doping).

    n = Σ ∫ g(ε) f dε over the conduction bands, p over the valence bands, N = |N_D − N_A| > 0 (1/m³) at
    temperature T (K); the two arrays have one shape, to which `Filling` adds a last axis of bands.
    The root is sought in ln(majority) − ln(minority + N), nearly straight in µ whether doping or pairs rule,
    by Newton steps that fall back to halving the bracket. Each point stops by its own step, so it does not
    matter which points are solved together.
    Raises ArithmeticError where there is no root within 30 eV of the bands.
    Source: the neutrality condition of Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (1970).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> found = fill(electrons, t, n)
    >>> surplus = found.density[electrons.side > 0].sum() - found.density[electrons.side < 0].sum()
    >>> bool(abs(surplus / n - 1) < 1e-9)
    True
    """
    t, n = (np.asarray(a, dtype=float) for a in np.broadcast_arrays(temperature, doping))
    sign, majority = electrons.carrier, electrons.majority
    edges = kane.band_edge(t[..., None], electrons.edge, electrons.edge_alpha, electrons.edge_beta) * sign
    low, high = np.min(edges, axis=-1) - _REACH, np.max(edges, axis=-1) + _REACH
    level, last = np.min(edges[..., majority], axis=-1), high - low
    settled = np.zeros(t.shape, dtype=bool)
    finest = _FEW_ROUNDINGS * np.max(np.abs(edges), axis=-1)
    for _ in range(_MOST_STEPS):
        _, density, states = _occupied(electrons, t, sign * level)
        many, few = np.sum(density[..., majority], axis=-1), np.sum(density[..., ~majority], axis=-1)
        rise = np.sum(states[..., majority], axis=-1) / many + np.sum(states[..., ~majority], axis=-1) / (few + n)
        miss = np.log(many / (few + n))
        low, high = np.where(miss < 0, level, low), np.where(miss < 0, high, level)
        step = -miss / rise
        trusted = (level + step >= low) & (level + step <= high) & (np.abs(step) < last)
        step = np.where(settled, 0.0, np.where(trusted, step, 0.5 * (low + high) - level))
        level, last = level + step, np.abs(step)
        settled = settled | (last < np.maximum(_SETTLED * K_B * t, finest + _FEW_ROUNDINGS * np.abs(level)))
        if np.all(settled):
            break
    else:
        raise ArithmeticError("charge neutrality has no root within 30 eV of the bands")
    mu = sign * level
    eta, density, states = _occupied(electrons, t, mu)
    return Filling(mu, eta, density, states)


_REACH = 30.0 * E_CHARGE
_MOST_STEPS = 80
#: steps below this share of k_B T no longer change a digit of the density
_SETTLED = 1e-13
#: nor, when it is cold, do those that µ and the edges cannot show
_FEW_ROUNDINGS = 4 * float(np.finfo(float).eps)


def _energy_mesh(electrons: Electrons, eta: Array, kt: Array) -> tuple[Array, Array]:
    """Reduced energies and weights per band, split at the onset of phonon emission where there is one."""
    if not np.any(electrons.intervalley_field):
        return softplus_mesh(eta)
    onset = np.where(electrons.intervalley_field > 0, electrons.intervalley_phonon / kt, 2.0)[..., None]
    nodes, weights = np.polynomial.legendre.leggauss(24)
    u = 0.5 * np.pi * (nodes + 1)
    below = onset * 0.5 * (1 - np.cos(u))  # square roots at both ends become smooth
    below_weight = onset * 0.25 * np.pi * np.sin(u) * weights
    above, above_weight = softplus_mesh(eta - onset[..., 0])
    shape = np.broadcast_shapes(eta.shape, onset.shape[:-1])
    z = np.concatenate([np.broadcast_to(below, (*shape, 24)), onset + above], axis=-1)
    weight = np.concatenate([np.broadcast_to(below_weight, (*shape, 24)), above_weight], axis=-1)
    return z, weight


@dataclass(frozen=True)
class Flow:
    """Bulk transport on the mesh at each (T, doping), SI; last axes: bands, energies.

    spectral: g v_x² τ (−∂f/∂E) dE, which sums to L_0 (1/(J m s)); mean_free_path Λ (m); excess E − µ (J); energy
    from the edge (J); rates of each process by name (1/s), which add up to v/Λ.
    """

    spectral: Array
    mean_free_path: Array
    excess: Array
    energy: Array
    rates: dict[str, Array] = field(default_factory=dict)


def bulk_flow(electrons: Electrons, temperature: Array, doping: Array, filling: Filling) -> Flow:
    """Everything about the carriers that does not depend on size: named rates 1/τ_i (1/s), Λ = v τ (m) and
    Ξ = g v_x² τ (−∂f/∂E) on the energy mesh of each band.

    1/τ = Σ_i 1/τ_i (Matthiessen) for each energy and band. temperature (K) and doping (1/m³) have one shape and
    `filling` is theirs; a last but one axis of bands and a last one of energies follow. ArithmeticError
    where a band has no scattering at all.
    Sources: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (1970); each rate names its own.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> flow = bulk_flow(electrons, t, n, fill(electrons, t, n))
    >>> sorted(flow.rates)[:2], bool(np.all(flow.mean_free_path > 0))
    (['acoustic phonons', 'intervalley phonons'], True)
    """
    t, n = temperature[..., None, None], doping[..., None, None]
    kt = K_B * t
    z, weight = _energy_mesh(electrons, filling.eta, kt[..., 0])
    energy = z * kt
    mass, inertia = (m[..., None] for m in masses(electrons, temperature))
    alpha = electrons.nonparabolicity[:, None]
    valleys = electrons.valleys[:, None]
    slope = kane.kane_slope(energy, alpha)
    states = kane.density_of_states(energy, mass, alpha)
    valley_states = states / valleys
    scale = np.where(electrons.majority, electrons.lattice_scale, 1.0)[:, None]

    rates = {
        "acoustic phonons": electrons.acoustic_weight
        * scale
        * scattering.acoustic_rate(
            valley_states, slope, t, electrons.deformation_potential[:, None], electrons.elastic_constant
        )
    }
    if np.any(electrons.intervalley_field):
        phonon = np.where(electrons.intervalley_field > 0, electrons.intervalley_phonon, E_CHARGE)[:, None]
        after = kane.density_of_states(energy + phonon, mass, alpha) / valleys
        left = np.maximum(energy - phonon, 0.0)
        before = kane.density_of_states(left, mass, alpha) / valleys
        coupling = electrons.intervalley_field[:, None]
        between = scattering.intervalley_rate(after, before, t, coupling, phonon, electrons.density)
        rates["intervalley phonons"] = electrons.intervalley_weight * scale * between
    if electrons.alloy_fraction:
        rates["alloy disorder"] = electrons.alloy_weight * scattering.alloy_rate(
            valley_states,
            electrons.alloy_fraction,
            electrons.alloy_volume,
            electrons.alloy_potential[:, None],
        )
    screening = scattering.screening_wave_number_squared(
        np.sum(filling.compressibility, axis=-1), electrons.permittivity
    )[..., None, None]
    centres = n * electrons.heavy_doping_factor(n) * electrons.impurity_weight
    wave2 = kane.wave_number_squared(energy, mass / valleys ** (2 / 3), alpha)
    rates["ionised impurities"] = scattering.ionised_impurity_rate(
        valley_states, wave2, screening, centres, electrons.permittivity
    )
    if electrons.high_frequency_permittivity is not None:
        rates["polar optical phonons"] = electrons.polar_weight * scattering.polar_rate(
            valley_states,
            slope,
            wave2,
            t,
            electrons.permittivity,
            electrons.high_frequency_permittivity,
            screening * electrons.permittivity / electrons.high_frequency_permittivity,
            electrons.optical_phonon,
        )
    rate = sum(rates.values(), start=np.zeros(1))
    if not np.all(rate > 0):
        raise ArithmeticError("a band has no scattering: its conductivity would be infinite")
    velocity2 = kane.velocity_squared(energy, inertia, alpha)
    window = weight * thermal_window(z - filling.eta[..., None])
    return Flow(
        spectral=states * velocity2 / rate * window,
        mean_free_path=np.sqrt(3 * velocity2) / rate,
        excess=electrons.side[:, None] * (z - filling.eta[..., None]) * kt,
        energy=energy,
        rates=rates,
    )


def transport_integrals(flow: Flow, size: Array, shape: str, reflection: float) -> Integrals:
    """L_k = ∫ Ξ(E) F(Λ/d) (E − µ)^k (−∂f/∂E) dE per band, k = 0, 1, 2: SI, last axis bands.

    F is what grains, a wire's wall or a film's faces leave of each energy (`held_back`); size d (m, may be inf)
    broadcasts with the states of `flow`. Energy by energy, a last axis of energies for each size: for few points,
    and the measure of `integrals_at`. shape, reflection and ValueError as `held_back`.
    Sources: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (1970); boundaries as `held_back`.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> flow = bulk_flow(electrons, t, n, fill(electrons, t, n))
    >>> sums = transport_integrals(flow, np.array([1e-8, np.inf]), "grain", 0.3)
    >>> bool(np.all(sums.l0[0] < sums.l0[1]))
    True
    """
    d = size[..., None, None]
    if not np.all(np.isinf(size)):
        flowing = flow.spectral * held_back(flow.mean_free_path, d, shape, reflection)
    else:
        flowing = np.broadcast_to(flow.spectral, np.broadcast_shapes(flow.spectral.shape, d.shape))
    first = flowing * flow.excess
    return Integrals(np.sum(flowing, axis=-1), np.sum(first, axis=-1), np.sum(first * flow.excess, axis=-1))


def short_leg_integrals(flow: Flow, length: Array) -> Integrals:
    """L_0, L_1, L_2 per band of a leg of `length` (m) between two contacts; e² L_0/length is its G per area.

    Every energy goes from diffusive to ballistic by itself, with the factor 1/(1 + 4Λ/3L) of
    `short_leg_suppression`; length > 0 broadcasts with (T, doping). ValueError for a length that is not above 0.
    Source: McKelvey, Longini & Brody, Physical Review 123, 51 (1961).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> flow = bulk_flow(electrons, t, n, fill(electrons, t, n))
    >>> sums = short_leg_integrals(flow, np.array([1e-9, 1e-6, 1e-3]))
    >>> bool(np.all(np.diff(sums.l0.sum(axis=-1)) > 0))
    True
    """
    flowing = flow.spectral * short_leg_suppression(flow.mean_free_path, length[..., None, None])
    first = flowing * flow.excess
    return Integrals(np.sum(flowing, axis=-1), np.sum(first, axis=-1), np.sum(first * flow.excess, axis=-1))


#: mean free paths that carriers of any candidate may have
PATHS = PathMesh(1e-12, 1e-4, 12)


def path_spectrum(electrons: Electrons, flow: Flow) -> Array:
    """L_0, L_1, L_2 of the conduction and then of the valence bands by mean free path: (..., 6, paths), SI units.

    W_j with Σ_j W_j F(Λ_j/d) = L_k(d) for every size d; what a boundary acts on is Λ/d alone (grains, walls).
    Raises nothing of its own. Source: the spectrum by mean free path of Dames & Chen, in Thermoelectrics Handbook,
    CRC Press (2006), gathered as `PathMesh.gather` says.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> flow = bulk_flow(electrons, t, n, fill(electrons, t, n))
    >>> bulk = transport_integrals(flow, np.array(np.inf), "grain", 0.3)
    >>> spectrum = path_spectrum(electrons, flow)
    >>> bool(abs(spectrum[..., 0, :].sum() / bulk.l0[electrons.side > 0].sum() - 1) < 1e-10)
    True
    """
    first = flow.spectral * flow.excess
    return _by_path(electrons, flow, flow.spectral, first, first * flow.excess)


def _by_path(electrons: Electrons, flow: Flow, *parts: Array) -> Array:
    """Parts on the energy mesh by mean free path, all of the conduction bands and then of the valence bands."""
    sides = []
    for side in (1.0, -1.0):
        bands = electrons.side == side
        path, *values = (
            part[..., bands, :].reshape(*part.shape[:-2], -1) for part in (flow.mean_free_path, *parts)
        )
        sides.append(PATHS.gather(path, np.stack(values, axis=-2)))
    return np.concatenate(sides, axis=-2)


def integrals_at(
    spectrum: Array, size: Array, shape: str, reflection: float, length: float = np.inf
) -> tuple[Integrals, Integrals]:
    """L_0, L_1, L_2 of the conduction and of the valence bands at each size: Σ_j W_j F(Λ_j/d), SI.

    In a leg of `length` L (m, one for all) between its contacts each path Λ F is held back once more, by the factor
    1/(1 + 4ΛF/3L) of `short_leg_suppression`; inf for a long leg.

    `spectrum` as `path_spectrum`; size d (m, may be inf) broadcasts with its states; shape 'grain', 'wire', 'film';
    reflection R of grain boundaries, 0 … 1. The sums of `transport_integrals` to 1e-9. Sources and ValueError as
    `held_back`.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> flow = bulk_flow(electrons, t, n, fill(electrons, t, n))
    >>> up, down = integrals_at(path_spectrum(electrons, flow), np.array([1e-8, np.inf]), "wire", 0.3)
    >>> bool(up.l0[0] < up.l0[1])
    True
    """
    kept = held_back(PATHS.paths, size[..., None], shape, reflection)
    if np.isfinite(length):
        kept = kept * short_leg_suppression(PATHS.paths * kept, length)
    sums = through(spectrum, kept)
    up, down = (Integrals(*np.moveaxis(sums[..., part], -1, 0)) for part in (slice(0, 3), slice(3, 6)))
    return up, down


def past_barriers(electrons: Electrons, temperature: Array, filling: Filling, l0: Array, size: Array) -> Array:
    """Share of the majority's L_0 that barriers between the grains leave, dimensionless: 1/(1 + ρ_b/ρ).

    The barrier (`Electrons.barrier`, J, over the majority's edge) stands in series with the grain, by the law of
    `barrier_suppression`. `l0` broadcasts with size d (m); temperature (K). ValueError as `barrier_conductance`.
    Source: Seto, Journal of Applied Physics 46, 5247 (1975).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> flow = bulk_flow(electrons, t, n, fill(electrons, t, n))
    >>> l0 = transport_integrals(flow, np.array(1e-8), "grain", 0.3).l0.sum(axis=-1)
    >>> from dataclasses import replace
    >>> walled = replace(electrons, barrier=8e-21)
    >>> bool(0 < past_barriers(walled, t, fill(walled, t, n), l0, np.array(1e-8)) < 1)
    True
    """
    most = electrons.majority
    mass, inertia = (part[..., most] for part in masses(electrons, temperature))
    band = (temperature[..., None], filling.eta[..., most], mass, inertia, electrons.nonparabolicity[most])
    over, without = (np.sum(barrier_conductance(height, *band), axis=-1) for height in (electrons.barrier, 0.0))
    return barrier_suppression(conductivity(l0), size, over, without)


def _deflected(electrons: Electrons, temperature: Array, flow: Flow) -> Array:
    """Weighted g v_x² τ²/(m_I (1 + 2αε)) on the energy mesh: the flow times Λ over the crystal momentum."""
    _, inertia = masses(electrons, temperature)
    gamma = kane.kane_gamma(flow.energy, electrons.nonparabolicity[:, None])
    long_valleys = hall_anisotropy(electrons.mass_ratio)[:, None]
    return np.asarray(flow.spectral * flow.mean_free_path * long_valleys / np.sqrt(2 * inertia[..., None] * gamma))


def hall_integrals(electrons: Electrons, temperature: Array, flow: Flow, size: Array, shape: str) -> Array:
    """K = ∫ g v_x² τ²/(m_I (1 + 2αε)) (−∂f/∂E) dE per band, 1/(J kg m); boundaries act on each τ.

    temperature (K) with the states of `flow`; size (m, may be inf) broadcasts; last axis bands.
    Energy by energy, as `transport_integrals`. In wires and films this takes the boundary's mean effect on τ
    at an energy for its effect on each carrier: exact for grains and for many carriers in wide bodies; the
    Hall coefficient of a film far thinner than Λ is larger. ValueError as `held_back` and as `hall_anisotropy`.
    Source: Sondheimer, Physical Review 80, 401 (1950); Ravich, Efimova & Smirnov (1970) for Kane bands.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> flow = bulk_flow(electrons, t, n, fill(electrons, t, n))
    >>> held = hall_integrals(electrons, t, flow, np.array([1e-8, np.inf]), "grain")
    >>> bool(np.all(held[0] < held[1]))
    True
    """
    held = held_back(flow.mean_free_path, size[..., None, None], shape, electrons.reflection)
    return np.asarray(np.sum(_deflected(electrons, temperature, flow) * held**2, axis=-1))


def hall_spectrum(electrons: Electrons, temperature: Array, flow: Flow) -> Array:
    """K of `hall_integrals` of the conduction and then of the valence bands by mean free path: (..., 2, paths).

    temperature (K) with the states of `flow`; units and sources as `hall_integrals`; ValueError as
    `hall_anisotropy`.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> flow = bulk_flow(electrons, t, n, fill(electrons, t, n))
    >>> bulk = hall_integrals(electrons, t, flow, np.array(np.inf), "grain")[electrons.side > 0]
    >>> bool(abs(hall_spectrum(electrons, t, flow)[..., 0, :].sum() / bulk.sum() - 1) < 1e-10)
    True
    """
    return _by_path(electrons, flow, _deflected(electrons, temperature, flow))


def hall_at(spectrum: Array, size: Array, shape: str, reflection: float) -> tuple[Array, Array]:
    """K of the conduction and of the valence bands at each size (m), from a Hall spectrum; 1/(J kg m).

    Grains, walls and faces shorten τ, which enters squared: Σ_j K_j F²(Λ_j/d). `size` broadcasts with the states;
    shape, reflection and ValueError as `held_back`; sources as `hall_integrals`.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> electrons = crystal(load_candidate("si-n")).electrons
    >>> t, n = np.array(300.0), np.array(1e25)
    >>> flow = bulk_flow(electrons, t, n, fill(electrons, t, n))
    >>> up, _ = hall_at(hall_spectrum(electrons, t, flow), np.array([1e-8, np.inf]), "grain", electrons.reflection)
    >>> bool(up[0] < up[1])
    True
    """
    sums = through(spectrum, held_back(PATHS.paths, size[..., None], shape, reflection) ** 2)
    return sums[..., 0], sums[..., 1]


def held_back(mean_free_path: Array, size: Array, shape: str, reflection: float) -> Array:
    """Conductivity over that of unbounded material for each mean_free_path (m): grains, a wire or a film, 0 … 1.

    F(Λ/d) of `grain_suppression` with reflection R, or of a wire or film with diffuse walls, by `shape`; `size` (m,
    may be inf) carries a last axis for the paths' own. ValueError for another shape, a reflection outside [0, 1),
    or a path over size below 0 in a wire or film.
    Sources: Mayadas & Shatzkes, Physical Review B 1, 1382 (1970); Dingle, Proceedings of the Royal Society A 201,
    545 (1950); Fuchs, Proceedings of the Cambridge Philosophical Society 34, 100 (1938).

    >>> [f"{float(held_back(np.array(1e-8), np.array(1e-8), shape, 0.3)):.3f}" for shape in ("wire", "film")]
    ['0.493', '0.684']
    """
    if shape == "grain":
        return grain_suppression(mean_free_path, size, reflection)
    return diffuse_walls(shape)(mean_free_path / size)
