"""Legs to test on, and a boundary-value solution of the same physics that shares no code with the source."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import pytest
from numpy.polynomial import Polynomial
from scipy.integrate import solve_bvp
from scipy.optimize import minimize_scalar

from legwright.leg.balance import LegMaterial


@dataclass(frozen=True)
class Leg:
    """S, ρ, κ as cubics in T: a spline through any nodes is exact, so no interpolation error enters."""

    seebeck: Polynomial
    resistivity: Polynomial
    conductivity: Polynomial

    def material(self, low: float, high: float) -> LegMaterial:
        t = np.linspace(low, high, 7)
        return LegMaterial.from_nodes(t, self.seebeck(t), self.resistivity(t), self.conductivity(t))


def constant(seebeck: float, resistivity: float, conductivity: float) -> Leg:
    return Leg(*(Polynomial([value]) for value in (seebeck, resistivity, conductivity)))


def varying() -> Leg:
    """Properties that change by half and more over 500 K, like those of a telluride."""
    x = Polynomial([-1.0, 1 / 300.0])  # T/300 − 1
    return Leg(
        seebeck=1.6e-4 * (1 + 0.9 * x - 0.3 * x**2),
        resistivity=1e-5 * (1 + 0.9 * x + 0.2 * x**3),
        conductivity=1.6 * (1 - 0.4 * x + 0.2 * x**2),
    )


@pytest.fixture(scope="session")
def make_constant() -> Callable[[float, float, float], Leg]:
    return constant


@pytest.fixture(scope="session")
def telluride() -> Leg:
    return varying()


@dataclass(frozen=True)
class Reference:
    """Steady balance (κT')' = J T S'(T) T' − ρJ² on 0 … 1 m, hot at 0; heat flux q = J S T − κ T'.

    J > 0 runs from hot to cold: a generator; J < 0 a cooler. Domenicali, Reviews of Modern Physics 26, 237 (1954).
    """

    leg: Leg

    def solve(
        self, current: float, ends: Callable, guess: tuple[float, float]
    ) -> tuple[float, float, float, float]:
        """(T_hot, T_cold, q_hot, q_cold) at that current density with the given two conditions at the ends."""
        leg, slope = self.leg, self.leg.seebeck.deriv()

        def balance(_: np.ndarray, y: np.ndarray) -> np.ndarray:
            t, conducted = y  # conducted = −κT'
            gradient = -conducted / leg.conductivity(t)
            return np.array([gradient, leg.resistivity(t) * current**2 - current * t * slope(t) * gradient])

        def flux(t: float, conducted: float) -> float:
            return current * leg.seebeck(t) * t + conducted

        x = np.linspace(0, 1, 41)
        t0 = np.linspace(*guess, x.size)
        start = np.array([t0, leg.conductivity(t0) * (guess[0] - guess[1])])
        found = solve_bvp(
            balance, lambda a, b: ends(a[0], b[0], flux(*a), flux(*b)), x, start, tol=1e-9, max_nodes=20000
        )
        assert found.success, found.message
        (t_hot, t_cold), (k_hot, k_cold) = found.y[:, [0, -1]]
        return t_hot, t_cold, flux(t_hot, k_hot), flux(t_cold, k_cold)

    def between(self, current: float, hot: float, cold: float) -> tuple[float, float]:
        """Heat flux at the hot and at the cold end."""
        fluxes = self.solve(current, lambda a, b, *_: np.array([a - hot, b - cold]), (hot, cold))
        return fluxes[2], fluxes[3]

    def best(self, score: Callable[[float], float], bracket: tuple[float, float]) -> float:
        fine = {"xatol": 1e-6 * bracket[1]}
        found = minimize_scalar(lambda j: -score(j), bounds=bracket, method="bounded", options=fine)
        return -found.fun

    def efficiency(self, hot: float, cold: float, bracket: tuple[float, float]) -> float:
        def score(current: float) -> float:
            into, out = self.between(current, hot, cold)
            return 1 - out / into

        return self.best(score, bracket)

    def power(self, hot: float, cold: float, bracket: tuple[float, float]) -> float:
        return self.best(lambda j: -np.diff(self.between(j, hot, cold))[0], bracket)

    def cop(self, hot: float, cold: float, bracket: tuple[float, float]) -> float:
        def score(current: float) -> float:
            rejected, lifted = (-q for q in self.between(-current, hot, cold))
            return lifted / (rejected - lifted)

        return self.best(score, bracket)

    def lift(self, hot: float, cold: float, bracket: tuple[float, float]) -> float:
        return self.best(lambda j: -self.between(-j, hot, cold)[1], bracket)

    def difference(self, hot: float, guess: float, bracket: tuple[float, float]) -> float:
        def score(current: float) -> float:
            ends = self.solve(-current, lambda a, _, __, q: np.array([a - hot, q]), (hot, hot - guess))
            return ends[0] - ends[1]

        return self.best(score, bracket)


@pytest.fixture(scope="session")
def reference() -> type[Reference]:
    return Reference
