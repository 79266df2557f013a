"""Bodies to test on: electrons and phonons in round numbers, and Fermi–Dirac integrals to thirty digits."""

from collections.abc import Callable

import mpmath
import numpy as np
import pytest
from scipy import constants

from legwright.physics.carriers import Electrons, Filling, Integrals, bulk_flow, fill, transport_integrals
from legwright.physics.lattice import Phonons

PER_BAND = {
    "side": 1.0,
    "edge": 0.0,
    "edge_alpha": 0.0,
    "edge_beta": 0.0,
    "valleys": 4.0,
    "dos_mass": 0.8 * constants.m_e,
    "inertial_mass": 0.25 * constants.m_e,
    "mass_exponent": 0.0,
    "nonparabolicity": 0.0,
    "deformation_potential": 9 * constants.e,
    "intervalley_field": 0.0,
    "intervalley_phonon": 0.0,
    "alloy_potential": 0.0,
}
SHARED = {
    "carrier": 1,
    "alloy_fraction": 0.0,
    "alloy_volume": 2e-29,
    "elastic_constant": 1.5e11,
    "density": 3000.0,
    "permittivity": 12 * constants.epsilon_0,
    "reflection": 0.3,
    "impurity_weight": 0.0,
}


@pytest.fixture(scope="session")
def make_electrons() -> Callable[..., Electrons]:
    """One parabolic conduction band under acoustic scattering alone, unless keywords say otherwise."""

    def make(**changes: object) -> Electrons:
        bands = max((np.size(value) for key, value in changes.items() if key in PER_BAND), default=1)
        arrays = {
            key: np.broadcast_to(np.asarray(changes.pop(key, value), dtype=float), (bands,)).copy()
            for key, value in PER_BAND.items()
        }
        return Electrons(**arrays, **(SHARED | changes))

    return make


@pytest.fixture(scope="session")
def solve() -> Callable[..., tuple[Filling, Integrals]]:
    """Filling and transport integrals per band at (T, doping, size)."""

    def solved(
        electrons: Electrons, temperature: object, doping: object, size: object = np.inf, shape: str = "grain"
    ) -> tuple[Filling, Integrals]:
        t, n = np.broadcast_arrays(np.asarray(temperature, dtype=float), np.asarray(doping, dtype=float))
        filling = fill(electrons, t, n)
        flow = bulk_flow(electrons, t, n, filling)
        return filling, transport_integrals(flow, np.asarray(size, dtype=float), shape, electrons.reflection)

    return solved


@pytest.fixture(scope="session")
def make_phonons() -> Callable[..., Phonons]:
    """A heavy alloy-like crystal, two atoms a cell, unless keywords say otherwise."""

    def make(**changes: object) -> Phonons:
        standard = {
            "speed": np.array([6000.0, 4000.0]),
            "grueneisen": np.array([1.1, 0.8]),
            "umklapp_divisor": 3.0,
            "normal_ratio": 2.0,
            "volume_per_atom": 2e-29,
            "atoms": 2.0,
            "mean_mass": 6e-26,
            "mass_variance": 0.02,
            "size_variance": 1e-4,
            "dopant_mass_variance": 0.5,
            "dopant_size_variance": 0.01,
            "strain_parameter": 40.0,
            "carrier_deformation_potential": 3 * constants.e,
            "density": 3000.0,
            "grain_exponent": 0.5,
            "grain_prefactor": 1.0,
        }
        return Phonons(**(standard | changes))

    return make


@pytest.fixture(scope="session")
def exact_fermi() -> Callable[[float, float], mpmath.mpf]:
    """F_j(η): mpmath's polylogarithm up to η = 3.5, its quadrature of the defining integral above."""

    def integral(order: float, eta: float) -> mpmath.mpf:
        with mpmath.workdps(50):
            j, level = mpmath.mpf(order), mpmath.mpf(float(eta))
            if level < 3.5:
                return mpmath.re(-mpmath.polylog(j + 1, -mpmath.exp(level)))
        with mpmath.workdps(25):  # x = u² takes the root at the edge away; break points where the step is
            points = sorted({p for d in (-20, -5, -1, 0, 1, 5, 20, 60) if (p := level + d) > 0} | {0, level / 2})
            inner = mpmath.quad(
                lambda u: 2 * u ** (2 * j + 1) / (1 + mpmath.exp(u * u - level)),
                [mpmath.sqrt(p) for p in points],
            )
            return inner / mpmath.gamma(j + 1)

    return integral
