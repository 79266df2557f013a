"""Lattice conductivity: one longitudinal and two transverse sine branches, plus optical heat.

Axes: whatever temperature, doping and size broadcast to, then branches (longitudinal, transverse), then modes.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import HBAR, K_B
from legwright.physics import phonon_scattering as scattering
from legwright.physics.boundaries import diffuse_walls, grain_mean_free_path
from legwright.physics.rough_walls import rough_walls
from legwright.physics.short_legs import short_leg_suppression
from legwright.physics.spectra import PathMesh, through

Array = NDArray[np.float64]

#: one longitudinal branch, two transverse ones that are alike
DEGENERACY = np.array([1.0, 2.0])
_MODES = 128


@dataclass(frozen=True)
class Phonons:
    """Branches and scatterers in SI; arrays are (longitudinal, transverse).

    speed of sound (m/s), grueneisen γ, umklapp_divisor b in exp(−θ/bT), normal_ratio of normal to Umklapp rates;
    volume_per_atom (m³), atoms per primitive cell, mean_mass (kg), mass density (kg/m³).
    mass_variance and size_variance: Γ of the composition; dopant_mass_variance and dopant_size_variance: Γ per
    dopant atom per host atom; strain_parameter, the factor on Γ by size; carrier_deformation_potential (J);
    vacancy_disorder: Γ; dislocation_density (1/m²) and burgers_vector (m); precipitate_share of the volume,
    precipitate_radius (m), precipitate_spread of ln R, precipitate_contrast in mass density.
    grain_exponent s and grain_prefactor c of `grain_mean_free_path`; wall_roughness (m): root mean square height of
    the walls of wires and films; None: they scatter every wave. optical_excess (W/(m K)): what optical branches
    carry at optical_temperature (K) beyond the least that they can.
    anharmonic_scale multiplies Umklapp and normal rates, strain_scale the strain parameter. Weights that double a
    process or switch it off: umklapp_weight, normal_weight, defect_weight, carrier_weight, vacancy_weight,
    dislocation_weight, precipitate_weight.
    """

    speed: Array
    grueneisen: Array
    umklapp_divisor: float
    normal_ratio: float
    volume_per_atom: float
    atoms: float
    mean_mass: float
    mass_variance: float
    size_variance: float
    dopant_mass_variance: float
    dopant_size_variance: float
    strain_parameter: float
    carrier_deformation_potential: float
    density: float
    grain_exponent: float
    grain_prefactor: float
    wall_roughness: float | None = None
    vacancy_disorder: float = 0.0
    dislocation_density: float = 0.0
    burgers_vector: float = 0.0
    precipitate_share: float = 0.0
    precipitate_radius: float = 0.0
    precipitate_spread: float = 0.0
    precipitate_contrast: float = 0.0
    optical_excess: float = 0.0
    optical_temperature: float = 300.0
    anharmonic_scale: float = 1.0
    strain_scale: float = 1.0
    umklapp_weight: float = 1.0
    normal_weight: float = 1.0
    defect_weight: float = 1.0
    carrier_weight: float = 1.0
    vacancy_weight: float = 1.0
    dislocation_weight: float = 1.0
    precipitate_weight: float = 1.0

    @property
    def zone_edge(self) -> float:
        """q_D = (6π²/(n V))^(1/3), 1/m, n atoms per primitive cell (Slack 1973)."""
        return float((6 * np.pi**2 / (self.atoms * self.volume_per_atom)) ** (1 / 3))

    @property
    def top_frequency(self) -> Array:
        """ω_max = 2 v q_D/π of each branch, rad/s (Born & von Kármán 1912)."""
        return np.asarray(2 * self.speed * self.zone_edge / np.pi)

    @property
    def branch_temperature(self) -> Array:
        """θ = ħ ω_max/k_B of each branch, K."""
        return np.asarray(HBAR * self.top_frequency / K_B)


@dataclass(frozen=True)
class Carriers:
    """What phonons need to know of the majority carriers; last axis: bands.

    eta: Fermi level over the band edge (k_B T), valley_mass: density-of-states mass of one valley (kg), valleys.
    """

    eta: Array
    valley_mass: Array
    valleys: Array


@dataclass(frozen=True)
class Modes:
    """The modes on the mesh of wave numbers q (1/m), which all branches share; the others are (branches, modes).

    omega (rad/s), group velocity (m/s), and weight of the quadrature, q² dq/(6π²) × degeneracy (1/m³).
    """

    q: Array
    omega: Array
    velocity: Array
    weight: Array

    @property
    def states(self) -> Array:
        """q²/(2π² v_g): states per frequency and volume of one branch, s/m³."""
        return np.asarray(self.q**2 / (2 * np.pi**2 * self.velocity))


@cache
def _unit_mesh(count: int) -> tuple[Array, Array]:
    """Gauss–Legendre in u with q = q_D (1 − cos πu)/2: close where long waves and standing waves sit.

    With 128 nodes κ of every library candidate is within 1.3e-6 from 300 K up, for any size and grain law, and of
    most within 1e-9; below, the edge of carrier scattering at twice the Fermi wave number sharpens: 3e-5 at 200 K,
    2e-4 at 150 K, 1 % at 50 K. Without carriers 64 nodes give 4e-10 and 96 nodes rounding at every temperature
    from 50 K.
    """
    nodes, weights = np.polynomial.legendre.leggauss(count)
    angle = 0.5 * np.pi * (nodes + 1)
    return 0.5 * (1 - np.cos(angle)), 0.25 * np.pi * np.sin(angle) * weights


def modes(phonons: Phonons, count: int = _MODES) -> Modes:
    """ω = ω_max sin(π q/2q_D), v = dω/dq and weights q² dq/(6π²) on the mesh: (branches, modes), SI units.

    `count`: Gauss–Legendre nodes (see `_unit_mesh` for what they are good to). Raises nothing of its own.
    Source: Born & von Kármán, Physikalische Zeitschrift 13, 297 (1912).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> mesh = modes(phonons)
    >>> bool(abs(mesh.weight[0].sum() / (phonons.zone_edge**3 / (18 * np.pi**2)) - 1) < 1e-12)
    True
    """
    share, weight = _unit_mesh(count)
    q = phonons.zone_edge * share
    phase = 0.5 * np.pi * share
    return Modes(
        q=q,
        omega=phonons.top_frequency[:, None] * np.sin(phase),
        velocity=phonons.speed[:, None] * np.cos(phase),
        weight=DEGENERACY[:, None] * q**2 * phonons.zone_edge * weight / (6 * np.pi**2),
    )


def mode_heat(omega: Array, temperature: Array) -> Array:
    """Heat capacity of one mode, J/K: k_B x² eˣ/(eˣ − 1)², x = ħω/k_B T.

    omega (rad/s, > 0) and temperature (K, > 0) broadcast. Raises nothing of its own.
    Source: Einstein, Annalen der Physik 22, 180 (1907).

    >>> f"{float(mode_heat(np.array(1e10), np.array(300.0))) / K_B:.6f}"
    '1.000000'
    """
    return np.asarray(K_B * _excited(0.5 * HBAR * omega / (K_B * temperature)) ** 2)


def _excited(half: Array) -> Array:
    """h/sinh h, which is 0 where sinh would overflow."""
    return np.asarray(half / np.sinh(np.minimum(half, 700.0)))


@dataclass(frozen=True)
class Rates:
    """Rates 1/τ (1/s) inside an unbounded crystal at each (T, doping); last axes: branches, modes.

    umklapp, defects (points, with vacancies), carriers, dislocations and precipitates resist, and boundaries where
    `bounded` has put them; normal processes do not. None: the crystal has none of these.
    """

    umklapp: Array
    defects: Array
    carriers: Array
    normal: Array
    dislocations: Array | None = None
    precipitates: Array | None = None
    boundaries: Array | None = None

    @property
    def resistive(self) -> Array:
        """All that destroys crystal momentum."""
        total = self.umklapp + self.defects + self.carriers
        for extended in (self.dislocations, self.precipitates, self.boundaries):
            if extended is not None:
                total = total + extended
        return total


def crystal_rates(
    phonons: Phonons, mesh: Modes, temperature: Array, doping: Array, carriers: Carriers | None
) -> Rates:
    """Rates 1/τ (1/s) per mode that do not depend on size, for each (T, doping): (..., branches, modes).

    temperature (K) and doping (1/m³, adds dopant atoms to Γ) have one shape; carriers None: none scatter phonons.
    Umklapp, normal, point defects (Γ = mass + ε × strain + dopants + vacancies), carriers, dislocations and
    precipitates; each rate's function names its law and source. Raises nothing of its own.
    Source: Callaway, Physical Review 113, 1046 (1959) for adding them.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> mesh, t = modes(phonons), np.array(300.0)
    >>> rates = crystal_rates(phonons, mesh, t, np.array(0.0), None)
    >>> bool(np.all(rates.resistive > 0)) and rates.umklapp.shape == mesh.omega.shape
    True
    """
    t = temperature[..., None, None]
    theta = phonons.branch_temperature
    strength = phonons.anharmonic_scale * scattering.anharmonic_strength(
        phonons.grueneisen, phonons.mean_mass, phonons.speed, theta
    )[:, None]  # fmt: skip
    strain = phonons.strain_scale * phonons.strain_parameter
    per_atom = doping[..., None, None] * phonons.volume_per_atom
    gamma = (
        phonons.mass_variance
        + strain * phonons.size_variance
        + per_atom * (phonons.dopant_mass_variance + strain * phonons.dopant_size_variance)
        + phonons.vacancy_weight * phonons.vacancy_disorder
    )
    umklapp = scattering.umklapp_rate(mesh.omega, t, strength, theta[:, None], phonons.umklapp_divisor)
    normal = scattering.normal_rate(mesh.omega, t, strength, phonons.normal_ratio)
    defects = scattering.point_defect_rate(mesh.omega, mesh.states, phonons.volume_per_atom, gamma)
    by_carriers = np.zeros(1)
    if carriers is not None and phonons.carrier_weight and phonons.carrier_deformation_potential:
        by_band = scattering.carrier_rate(
            mesh.omega,
            mesh.q,
            t[..., None],
            carriers.eta[..., None, None],
            carriers.valley_mass[..., None, None],
            carriers.valleys[:, None, None],
            phonons.carrier_deformation_potential,
            phonons.density,
        )
        by_carriers = phonons.carrier_weight * np.sum(by_band, axis=-3)
    return Rates(
        phonons.umklapp_weight * umklapp,
        phonons.defect_weight * defects,
        by_carriers,
        phonons.normal_weight * normal,
        *_extended_defects(phonons, mesh),
    )


def _extended_defects(phonons: Phonons, mesh: Modes) -> tuple[Array | None, Array | None]:
    """Rates of dislocations, cores and strain together, and of precipitates; None where there are none."""
    lines = inclusions = None
    if phonons.dislocation_density:
        density, speed = phonons.dislocation_density, phonons.speed[:, None]
        cores = scattering.dislocation_core_rate(mesh.omega, speed, density, phonons.volume_per_atom)
        strain = scattering.dislocation_strain_rate(
            mesh.omega, density, phonons.burgers_vector, phonons.grueneisen[:, None]
        )
        lines = phonons.dislocation_weight * (cores + strain)
    if phonons.precipitate_share:
        inclusions = phonons.precipitate_weight * scattering.precipitate_rate(
            mesh.q,
            mesh.velocity,
            phonons.precipitate_share,
            phonons.precipitate_radius,
            phonons.precipitate_contrast,
            phonons.precipitate_spread,
        )
    return lines, inclusions


def wall_suppression(phonons: Phonons, mesh: Modes, shape: str) -> Callable[[Array], Array]:
    """What the wall of a wire or film leaves of each mode, 0 … 1, as a function of path over size (..., modes).

    Diffuse walls without `wall_roughness`; else p = exp(−4 q²η² cos²θ) inside the angular integral, for each q of
    `mesh`. ValueError for another shape; what it returns raises it for a path over size below 0 where walls are
    diffuse.
    Sources: Dingle, Proc. Royal Society A 201, 545 (1950); Fuchs, Proc. Cambridge Phil. Soc. 34, 100 (1938); Ziman,
    Electrons and Phonons (Oxford, 1960); Soffer, Journal of Applied Physics 38, 1710 (1967).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> mesh, t = modes(phonons), np.array(300.0)
    >>> kept = wall_suppression(phonons, mesh, "wire")(np.array([0.0, 1e3]))
    >>> bool(kept[0] == 1.0 and kept[1] < 2e-3)
    True
    """
    diffuse = diffuse_walls(shape)
    if phonons.wall_roughness is None:
        return diffuse
    return rough_walls(shape, tuple((mesh.q * phonons.wall_roughness).tolist()))


def grain_path(phonons: Phonons, mesh: Modes, size: ArrayLike) -> Array:
    """`grain_mean_free_path` of each mode, m: Λ_gb = c d (ω_max/ω)^s; size d (m) has axes for branches and modes.

    Raises nothing of its own. Source: Wang, Alaniz, Jang, Garay & Dames, Nano Letters 11, 2206 (2011).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> mesh, t = modes(phonons), np.array(300.0)
    >>> path = grain_path(phonons, mesh, 1e-8)
    >>> bool(np.all(path >= phonons.grain_prefactor * 1e-8))
    True
    """
    ratio = mesh.omega / phonons.top_frequency[:, None]
    return grain_mean_free_path(size, ratio, phonons.grain_exponent, phonons.grain_prefactor)


def acoustic_conductivity(
    phonons: Phonons, mesh: Modes, rates: Rates, temperature: Array, size: Array, shape: str
) -> Array:
    """Heat carried by the acoustic branches, W/(m K), with Callaway's correction for normal processes.

    κ = Σ∫ w C v² τ_C + [Σ∫ w C (v q/ω) τ_C/τ_N]²/Σ∫ w C (q/ω)² τ_C/(τ_N τ_R),  w = q² dq/6π²,
    1/τ_C = 1/τ_N + 1/τ_R; one drift velocity is shared by the branches. Grains add v/Λ_gb to 1/τ_R; walls
    of wires and films multiply τ_C by the exact kinetic factor (with `wall_roughness`, that of the mode's wave
    number), and 1/τ_R is what then is left of 1/τ_C.
    temperature T (K) has the shape of the states of `rates`; size d (m, may be inf) of a 'grain', 'wire' or 'film'
    broadcasts with it. ValueError for a size below 0 of a wire or film with diffuse walls.
    Sources: Callaway, Physical Review 113, 1046 (1959); Allen, Physical Review B 88, 144302 (2013).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> mesh, t = modes(phonons), np.array(300.0)
    >>> rates = crystal_rates(phonons, mesh, t, np.array(0.0), None)
    >>> kept = acoustic_conductivity(phonons, mesh, rates, t, np.array([1e-8, 1e-6, np.inf]), "grain")
    >>> bool(np.all(np.diff(kept) > 0))
    True
    """
    heat = mesh.weight * mode_heat(mesh.omega, temperature[..., None, None])
    resistive, normal = rates.resistive, rates.normal
    d = size[..., None, None]
    if shape == "grain":
        resistive = resistive + mesh.velocity / grain_path(phonons, mesh, d)
        combined = 1 / (resistive + normal)
    else:
        bulk = 1 / (resistive + normal)
        combined = bulk * wall_suppression(phonons, mesh, shape)(mesh.velocity * bulk / d)
        resistive = 1 / combined - normal
    direct = np.sum(heat * mesh.velocity**2 * combined, axis=(-2, -1))
    slowness = mesh.q / mesh.omega
    shared = heat * slowness * combined * normal
    drift = np.sum(shared * mesh.velocity, axis=(-2, -1))
    lost = np.sum(shared * slowness * resistive, axis=(-2, -1))
    with np.errstate(invalid="ignore"):
        carried = np.where(drift > 0, drift**2 / np.where(lost > 0, lost, np.inf), 0.0)
    return np.asarray(direct + carried)


def bounded(phonons: Phonons, mesh: Modes, rates: Rates, size: Array, shape: str) -> Rates:
    """The rates (1/s) with those of the body's boundaries, as `acoustic_conductivity` takes them.

    Grains: v/Λ_gb; walls: what their kinetic factor F adds, (1/F − 1)/τ_C. size d (m, may be inf) of a 'grain',
    'wire' or 'film' broadcasts with the states of `rates`. ValueError and sources as `acoustic_conductivity`.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> mesh, t = modes(phonons), np.array(300.0)
    >>> rates = crystal_rates(phonons, mesh, t, np.array(0.0), None)
    >>> walled = bounded(phonons, mesh, rates, np.array(1e-8), "wire")
    >>> long = short_leg_conductivity(mesh, walled, t, np.array(np.inf))
    >>> bool(abs(long / acoustic_conductivity(phonons, mesh, rates, t, np.array(1e-8), "wire") - 1) < 1e-12)
    True
    """
    d = size[..., None, None]
    if shape == "grain":
        return replace(rates, boundaries=mesh.velocity / grain_path(phonons, mesh, d))
    free = rates.resistive + rates.normal
    kept = wall_suppression(phonons, mesh, shape)(mesh.velocity / free / d)
    return replace(rates, boundaries=(1 / kept - 1) * free)


def short_leg_conductivity(mesh: Modes, rates: Rates, temperature: Array, length: Array) -> Array:
    """Conductivity G L of a leg so short that phonons cross it in flight, W/(m K); optical heat is not in it.

    G = Σ∫ ¼ C v/(1 + 3L/4Λ) per area, so G L = Σ∫ w C v Λ/(1 + 4Λ/3L) with w = q² dq/6π². Λ is a mode's path in
    Callaway's solution for `rates` (from `bounded`, of a body), Λ = v τ_C + U (q/ω) τ_C/τ_N with the shared drift
    U = Σ∫ w C (v q/ω) τ_C/τ_N / Σ∫ w C (q/ω)² τ_C/(τ_N τ_R): L → ∞ is `acoustic_conductivity`.
    L → 0 is L Σ∫ ¾ w C v, the ballistic leg between contacts that absorb all that comes: nothing is capped.

    temperature T (K) and length L > 0 (m, may be inf) broadcast with the states of `rates`. ValueError for L ≤ 0.
    Good to 4 % for one mode between black contacts; normal processes are taken as in the bulk, which overstates
    the drift where L is shorter than their own path.
    Sources: McKelvey, Longini & Brody, Physical Review 123, 51 (1961); Callaway, Physical Review 113, 1046 (1959).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> mesh, t = modes(phonons), np.array(300.0)
    >>> rates = crystal_rates(phonons, mesh, t, np.array(0.0), None)
    >>> kept = short_leg_conductivity(mesh, rates, t, np.array([1e-9, 1e-6, np.inf]))
    >>> [f"{value:.2g}" for value in kept / kept[-1]]
    ['0.0037', '0.52', '1']
    """
    heat = mesh.weight * mode_heat(mesh.omega, temperature[..., None, None])
    resistive, normal = rates.resistive, rates.normal
    lifetime = 1 / (resistive + normal)
    slowness = mesh.q / mesh.omega
    given = slowness * lifetime * normal
    drift = np.sum(heat * mesh.velocity * given, axis=(-2, -1))
    lost = np.sum(heat * slowness * given * resistive, axis=(-2, -1))
    shared = np.divide(drift, lost, out=np.zeros_like(drift), where=(drift > 0) & (lost > 0))
    path = mesh.velocity * lifetime + shared[..., None, None] * given
    kept = short_leg_suppression(path, length[..., None, None])
    return np.asarray(np.sum(heat * mesh.velocity * path * kept, axis=(-2, -1)))


#: mean free paths of phonons, down to the standing waves of the zone edge
PATHS = PathMesh(1e-15, 1e2, 19)


@dataclass(frozen=True)
class HeatSpectrum:
    """Callaway's three sums by mean free path, SI, and the part of the third that no boundary touches.

    sums (..., 3, paths): direct (W/(m K)), drift (J/(m³ K)) and held (J s/(m⁵ K)); untouched, in units of held.
    """

    sums: Array
    untouched: Array


def heat_spectrum(phonons: Phonons, mesh: Modes, rates: Rates, temperature: Array, shape: str) -> HeatSpectrum:
    """What `acoustic_conductivity` sums over modes, gathered by path; in the third sum 1/τ_R = 1/τ_C − 1/τ_N.

    Three sums by mean free path (..., 3, paths), SI, for the states of `rates` at `temperature` (K). For grains
    the paths are over Λ_gb/d, which depends on the mode; for walls they are the modes'. Raises nothing of its own.
    Sources as `acoustic_conductivity`.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> mesh, t = modes(phonons), np.array(300.0)
    >>> rates = crystal_rates(phonons, mesh, t, np.array(0.0), None)
    >>> direct, drift, held = heat_spectrum(phonons, mesh, rates, t, "wire").sums.sum(axis=-1)
    >>> heat = mesh.weight * mode_heat(mesh.omega, t)
    >>> bool(abs(direct / (heat * mesh.velocity**2 / (rates.resistive + rates.normal)).sum() - 1) < 1e-10)
    True
    """
    heat = mesh.weight * mode_heat(mesh.omega, temperature[..., None, None])
    normal = rates.normal
    lifetime = 1 / (rates.resistive + normal)
    slowness = mesh.q / mesh.omega
    path = mesh.velocity * lifetime
    if shape == "grain":
        path = path / grain_path(phonons, mesh, 1.0)
    shared = heat * slowness * lifetime * normal
    parts = [heat * mesh.velocity**2 * lifetime, shared * mesh.velocity, shared * slowness * normal]
    values = np.stack(parts, axis=-3)
    flat = values.reshape(*values.shape[:-2], -1)
    untouched = np.sum((heat * slowness**2 * normal).reshape(*flat.shape[:-2], -1), axis=-1)
    return HeatSpectrum(PATHS.gather(path.reshape(*flat.shape[:-2], -1), flat), untouched)


def conductivity_at(spectrum: HeatSpectrum, size: Array, shape: str) -> Array:
    """`acoustic_conductivity` at each size d (m, may be inf), W/(m K), from a heat spectrum; diffuse walls.

    κ = A + B²/(D − E) with A, B, E the spectrum's sums held back by F(Λ/d) and D its untouched part. size
    broadcasts with the states of `spectrum`. Errors and sources as `acoustic_conductivity`.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> mesh, t = modes(phonons), np.array(300.0)
    >>> rates = crystal_rates(phonons, mesh, t, np.array(0.0), None)
    >>> quick = conductivity_at(heat_spectrum(phonons, mesh, rates, t, "grain"), np.array(1e-8), "grain")
    >>> full = acoustic_conductivity(phonons, mesh, rates, t, np.array(1e-8), "grain")
    >>> bool(abs(quick / full - 1) < 1e-8)
    True
    """
    crossed = PATHS.paths / size[..., None]
    kept = 1 / (1 + crossed) if shape == "grain" else diffuse_walls(shape)(crossed)
    direct, drift, held = np.moveaxis(through(spectrum.sums, kept), -1, 0)
    lost = spectrum.untouched - held
    carried = np.divide(drift**2, lost, out=np.zeros_like(direct), where=(drift > 0) & (lost > 0))
    return np.asarray(direct + carried)


def conductivity_by_size(
    phonons: Phonons, mesh: Modes, rates: Rates, temperature: Array, size: Array, shape: str
) -> Array:
    """`acoustic_conductivity` by the quickest way, W/(m K).

    Arguments, shapes, errors and sources as `acoustic_conductivity`.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> mesh, t = modes(phonons), np.array(300.0)
    >>> rates = crystal_rates(phonons, mesh, t, np.array(0.0), None)
    >>> f"{float(conductivity_by_size(phonons, mesh, rates, t, np.array(np.inf), 'grain')):.0f}"
    '148'
    """
    if phonons.wall_roughness is not None and shape != "grain":
        return acoustic_conductivity(phonons, mesh, rates, temperature, size, shape)
    return conductivity_at(heat_spectrum(phonons, mesh, rates, temperature, shape), size, shape)


@cache
def _gauss(count: int) -> tuple[Array, Array]:
    return np.polynomial.legendre.leggauss(count)


def _glass_integral(phonons: Phonons, temperature: Array, from_share: float) -> Array:
    """Cahill's integral, W/(m K), over wave numbers from `from_share` of the full Debye sphere to its edge."""
    atoms_per_volume = 1 / phonons.volume_per_atom
    edge = phonons.speed * HBAR / K_B * (6 * np.pi**2 * atoms_per_volume) ** (1 / 3)
    nodes, weights = _gauss(24)
    share = from_share + (1 - from_share) * 0.5 * (nodes + 1)
    x = edge[:, None] * share / temperature[..., None, None]
    kernel = x * _excited(0.5 * x) ** 2 * (edge[:, None] / temperature[..., None, None])
    integral = np.sum(kernel * weights * 0.5 * (1 - from_share), axis=-1)
    by_branch = DEGENERACY * phonons.speed * (temperature[..., None] / edge) ** 2 * integral
    return np.asarray((np.pi / 6) ** (1 / 3) * K_B * atoms_per_volume ** (2 / 3) * np.sum(by_branch, axis=-1))


def amorphous_minimum(phonons: Phonons, temperature: Array) -> Array:
    """Conductivity if every oscillation lived half its period, W/(m K); temperature T > 0 (K), any shape.

    κ_min = (π/6)^(1/3) k_B n^(2/3) Σ v (T/θ)² ∫₀^{θ/T} x³ eˣ/(eˣ−1)² dx. Raises nothing of its own.
    Source: Cahill, Watson & Pohl, Physical Review B 46, 6131 (1992).

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> phonons = crystal(load_candidate("si-n")).phonons
    >>> f"{float(amorphous_minimum(phonons, np.array(300.0))):.1f}"
    '1.1'
    """
    return _glass_integral(phonons, temperature, 0.0)


def optical_conductivity(phonons: Phonons, temperature: Array) -> Array:
    """Heat of the modes above the acoustic branches, W/(m K), at a temperature (K) of any shape.

    κ_o = κ_tail(T) + κ_x [c(T)/c(T_x)] (T_x/T). κ_tail is the part of Cahill's integral beyond q_D, the least that
    such modes carry; κ_x, where optical heat is known, is what they carry beyond it at T_x, with lifetimes that
    fall as 1/T (three phonons, hot crystal) and c the heat capacity of modes of the acoustic branches' top
    frequency. Such modes hardly travel, so boundaries leave them alone. Zero with one atom per primitive cell.
    Sources: Toberer, Zevalkink & Snyder, Journal of Materials Chemistry 21, 15843 (2011) for the split; Klemens,
    Physical Review 148, 845 (1966) for the lifetimes.

    >>> from legwright.candidate.library import load_candidate
    >>> from legwright.physics.crystal import crystal
    >>> one = crystal(load_candidate("si-n")).phonons
    >>> 0.1 < float(optical_conductivity(one, np.array(300.0))) < float(amorphous_minimum(one, np.array(300.0)))
    True
    """
    least = _glass_integral(phonons, temperature, float(phonons.atoms ** (-1 / 3)))
    if not phonons.optical_excess:
        return least

    top = np.asarray(np.max(phonons.top_frequency))

    def held(t: ArrayLike) -> Array:
        return mode_heat(top, np.asarray(t))

    known_at = phonons.optical_temperature
    return np.asarray(least + phonons.optical_excess * held(temperature) / held(known_at) * known_at / temperature)
