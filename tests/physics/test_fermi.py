"""Fermi–Dirac integrals against mpmath, on both sides of every switch; the energy mesh against them."""

import math
from functools import partial

import mpmath
import numpy as np
import pytest

from legwright.physics.carriers import thermal_window
from legwright.physics.fermi import fermi_dirac_integral, softplus_mesh

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

ORDERS = (-0.5, 0.0, 0.3, 0.5, 1.0, 1.5, 2.0, 2.5, 3.0, 3.5, 4.0)
PIECE_SEAMS = tuple(float(seam) for seam in range(-2, 81, 2))
INSIDE = (-40.0, -25.0, -12.5, -7.3, -3.1, -1.37, -0.5, 0.61, 1.9, 3.3, 5.47, 11.2, 27.9, 46.6, 63.1, 79.3)


def straddled(points: tuple[float, ...]) -> list[float]:
    return [x for p in points for x in (np.nextafter(p, -np.inf), p, np.nextafter(p, np.inf))]


@pytest.mark.parametrize("order", ORDERS)
def test_integrals_match_mpmath_to_1e_12_on_both_sides_of_the_switches(order, exact_fermi):
    # 1e-12 is the accuracy that the function promises from −40 to 80
    for eta in (*INSIDE, *straddled((-2.0, 0.0, 2.0, 80.0)), 81.0):
        exact = exact_fermi(order, eta)
        assert abs(mpmath.mpf(float(fermi_dirac_integral(order, eta))) / exact - 1) < 1e-12, eta


@pytest.mark.parametrize("order", ORDERS)
def test_no_step_at_any_seam(order):
    # neighbouring doubles: all that may remain is rounding, a few parts in 1e15 for each of two values
    below, at, above = fermi_dirac_integral(order, np.reshape(straddled(PIECE_SEAMS), (-1, 3))).T
    assert np.max(np.abs(below / at - 1)) < 2e-14
    assert np.max(np.abs(above / at - 1)) < 2e-14


@pytest.mark.parametrize("order", ORDERS[3:])
def test_derivative_is_the_integral_of_one_order_less(order):
    # dF_j/dη = F_(j−1) (Blakemore 1982); a central difference of step 1e-3 is good to F'''/F' × 2e-7
    eta = np.linspace(-35, 78, 600)
    slope = (fermi_dirac_integral(order, eta + 1e-3) - fermi_dirac_integral(order, eta - 1e-3)) / 2e-3
    assert np.max(np.abs(slope / fermi_dirac_integral(order - 1, eta) - 1)) < 5e-7


def test_order_zero_is_the_softplus():
    eta = np.linspace(-40, 80, 1201)
    assert fermi_dirac_integral(0, eta) == near(np.logaddexp(0, eta), rel=1e-13)


@pytest.mark.parametrize("order", [-0.5, 0.5, 1.0, 4.0])
def test_limits(order):
    # first neglected terms: e^η/2^(j+1) below; (π²/6)(j+1) j/η² above
    assert fermi_dirac_integral(order, -700.0) == near(math.exp(-700), rel=1e-13)
    far = 1e6 ** (order + 1) / math.gamma(order + 2)
    assert fermi_dirac_integral(order, 1e6) == near(far, rel=1e-10)


def test_shape_is_kept_and_one_value_equals_its_place_in_an_array():
    eta = np.linspace(-45, 90, 24).reshape(2, 3, 4)
    whole = fermi_dirac_integral(0.5, eta)
    assert whole.shape == eta.shape
    alone = [fermi_dirac_integral(0.5, eta.ravel()[i : i + 1])[0] for i in range(eta.size)]
    assert np.array_equal(whole.ravel(), alone)
    assert fermi_dirac_integral(0.5, 0.0).shape == ()


@pytest.mark.parametrize("order", [-0.6, 4.001, float("nan")])
def test_order_outside_the_range_is_refused(order):
    with pytest.raises(ValueError, match=r"−1/2 … 4"):
        fermi_dirac_integral(order, 0.0)


@pytest.mark.parametrize("eta", [float("nan"), float("inf"), [0.0, -float("inf")]])
def test_level_that_is_not_finite_is_refused(eta):
    with pytest.raises(ValueError, match="finite"):
        fermi_dirac_integral(0.5, eta)


def mesh_error(power: float, eta: float, step: float) -> float:
    """Relative error of ∫ z^p (−∂f/∂z) dz = Γ(p+1) F_(p−1)(η) on the mesh."""
    nodes, weights = softplus_mesh(np.array(eta), round(72 / step), step)
    found = np.sum(nodes**power * weights * thermal_window(nodes - eta))
    return float(found / (math.gamma(power + 1) * fermi_dirac_integral(power - 1, eta)) - 1)


@pytest.mark.parametrize("step", [2.0, 1.5, 1.0])
@pytest.mark.parametrize("power", [1.0, 1.5, 3.0])
def test_mesh_error_far_above_the_edge_is_what_theory_says(power, step):
    # Poisson sum of a trapezoidal rule (Trefethen & Weideman 2014): the Fourier integral of −∂f/∂z at 2π/step
    # is a/sinh(a), a = 2π²/step, and both signs count; the power of z changes it by about power²/η at η = 60
    a = 2 * math.pi**2 / step
    largest = max(abs(mesh_error(power, 60 + shift * step, step)) for shift in (0.0, 0.25, 0.5))
    assert largest == near(2 * a / math.sinh(a), rel=0.1)


LEVELS = (-30.0, -3.0, 0.0, 1.0, 5.0, 40.0)


@pytest.mark.parametrize("power", [1.0, 1.5, 2.0, 3.0, 4.0])
def test_halving_the_step_squares_the_error(power):
    at_one, at_half = (max(abs(mesh_error(power, eta, step)) for eta in LEVELS) for step in (1.0, 0.5))
    # theory above 2.1e-7, and up to 2.5 times as much near the edge, where z starts as a power of eˢ;
    # its square is under the rounding of 144 terms
    assert 1e-7 < at_one < 6e-7
    assert at_half < 2e-14


@pytest.mark.parametrize("power", [0.5, 1.0, 1.5, 2.0, 3.0, 4.0])
def test_mesh_that_every_band_uses_is_good_to_a_few_parts_in_1e10(power):
    # step 0.75: a/sinh(a) × 2 = 4e-10, up to 2.5 times as much near the edge (as at step 1); the cut at
    # s = −15 adds e^(−15 (p+1)), 1e-10 at p = ½
    def error(eta: float) -> float:
        nodes, weights = softplus_mesh(np.array(eta))
        found = np.sum(nodes**power * weights * thermal_window(nodes - eta))
        return float(found / (math.gamma(power + 1) * fermi_dirac_integral(power - 1, eta)) - 1)

    assert max(abs(error(eta)) for eta in LEVELS) < 1.5e-9
