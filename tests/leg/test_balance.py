"""The march through a leg against closed forms and against a boundary-value solution."""

import math
from functools import partial

import numpy as np
import pytest
from scipy.optimize import minimize_scalar

from legwright.leg.balance import (
    LegMaterial,
    cool,
    cool_past_peak,
    generate,
    largest_difference,
    march_down,
    zoom,
)

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

S, RHO, KAPPA = 2e-4, 1e-5, 1.6
HOT, COLD = 600.0, 300.0


def test_with_constant_properties_w_squared_is_a_straight_line(make_constant):
    # d(w²)/dT = −2κρ: Runge–Kutta is exact on it
    material = make_constant(S, RHO, KAPPA).material(COLD, HOT)
    for start in (0.0, 0.02):
        along = march_down(material, HOT, COLD, +1, np.array(start), 8)
        exact = np.sqrt(start**2 + 2 * KAPPA * RHO * (HOT - along.temperature))
        assert along.w == near(exact, rel=1e-13)
        # ∫ κ/w dT = (w_cold − w_hot)/ρ
        finer = march_down(material, HOT, COLD, +1, np.array(start), 400)
        assert finer.current_length == near((exact[-1] - start) / RHO, rel=1e-7)


STEPS = (12, 24, 48, 96)


def orders_and_default_errors(leg: object, sign: int, start: float) -> tuple[list[float], list[float]]:
    """Measured order of |w| at the cold end and of ∫κ/w dT, and what the default of 24 steps leaves of each."""
    material = leg.material(COLD, HOT)
    exact = march_down(material, HOT, COLD, sign, np.array(start), 3072)
    runs = [march_down(material, HOT, COLD, sign, np.array(start), steps) for steps in STEPS]
    w = [abs(float(run.w[-1] / exact.w[-1] - 1)) for run in runs]
    length = [abs(float(run.current_length / exact.current_length - 1)) for run in runs]
    return [-np.polyfit(np.log(STEPS), np.log(errors), 1)[0] for errors in (w, length)], [w[1], length[1]]


@pytest.mark.parametrize("sign", [+1, -1])
def test_march_from_a_running_start_is_of_fourth_order(sign, telluride):
    # Runge–Kutta for w, Simpson for the length; 0.25 of slack for terms that are not yet small at 12 steps
    order, left = orders_and_default_errors(telluride, sign, 0.05)
    assert min(order) > 3.75
    assert left[0] < 1e-7
    assert left[1] < 3e-6


@pytest.mark.parametrize("sign", [+1, -1])
def test_march_from_rest_is_of_third_order_at_least_and_its_length_of_second(sign, telluride):
    # with Thomson heat at w = 0 the slope holds the root of w², whose derivative is infinite there
    order, left = orders_and_default_errors(telluride, sign, 0.0)
    assert order[0] > 2.75
    assert order[1] > 1.75
    assert left[0] < 5e-6
    assert left[1] < 1e-4


@pytest.mark.parametrize("w_hot", [0.02, 0.1, 0.5])
def test_generator_at_a_fixed_current_matches_the_boundary_value_solution(w_hot, telluride, reference):
    # solve_bvp is asked for 1e-9 of the residual
    made = generate(telluride.material(COLD, HOT), HOT, COLD, np.array(w_hot), steps=192)
    current = float(made.current_times_length)
    into, out = reference(telluride).between(current, HOT, COLD)
    assert made.efficiency == near(1 - out / into, rel=1e-7)
    assert made.power_times_length == near(into - out, rel=1e-7)


@pytest.mark.parametrize("w_hot", [0.002, 0.01, 0.02])
def test_cooler_at_a_fixed_current_matches_the_boundary_value_solution(w_hot, telluride, reference):
    made = cool(telluride.material(270.0, 300.0), 300.0, 270.0, np.array(w_hot), steps=192)
    current = float(made.current_times_length)
    rejected, lifted = (-flux for flux in reference(telluride).between(-current, 300.0, 270.0))
    assert made.heat_times_length == near(lifted, rel=1e-7)
    assert made.cop == near(lifted / (rejected - lifted), rel=1e-7)


@pytest.mark.parametrize("peak", [301.0, 310.0, 340.0])
def test_cooler_that_is_hottest_inside_matches_the_boundary_value_solution(peak, telluride, reference):
    # many steps, as the march from rest is of second order only
    made = cool_past_peak(telluride.material(270.0, 360.0), 300.0, 270.0, peak, steps=1536)
    current = float(made.current_times_length)
    rejected, lifted = (-flux for flux in reference(telluride).between(-current, 300.0, 270.0))
    assert made.heat_times_length == near(lifted, abs=1e-7 * rejected)
    assert made.cop == near(lifted / (rejected - lifted), abs=1e-7)


def test_a_peak_at_the_hot_end_joins_both_coolers(telluride):
    material = telluride.material(270.0, 360.0)
    inside = cool_past_peak(material, 300.0, 270.0, 300.0)
    at_end = cool(material, 300.0, 270.0, np.array(0.0))
    assert inside.heat_times_length == near(at_end.heat_times_length, rel=1e-12)
    assert inside.cop == near(at_end.cop, rel=1e-12)


@pytest.mark.parametrize("z", [1e-3, 2.5e-3])
def test_largest_lift_has_its_closed_form(z, make_constant):
    # Ioffe (1957): S²T_c²/2ρ − κΔT, times 1/L; here the peak is found by scipy, to 1e-8 of the flat top
    hot, cold = 300.0, 285.0
    leg = make_constant(S, S**2 / (z * KAPPA), KAPPA)
    material = leg.material(cold, 1.2 * hot)
    found = minimize_scalar(
        lambda peak: -float(cool_past_peak(material, hot, cold, peak, steps=384).heat_times_length),
        bounds=(hot, 1.2 * hot),
        method="bounded",
        options={"xatol": 1e-5},
    )
    assert -found.fun == near(KAPPA * (z * cold**2 / 2 - (hot - cold)), rel=1e-7)


@pytest.mark.parametrize(("z", "cold", "exact"), [(3e-3, 220.0, 72.6), (1e-3, 280.0, 39.2), (4e-3, 150.0, 45.0)])
def test_largest_difference_is_half_z_t_squared(z, cold, exact, make_constant):
    # Ioffe (1957): ΔT_max = ½ Z T_c²; Z = 3e-3/K and 220 K → 72.6 K. A cubic through the last steps: 1e-6 K
    hot = cold + exact
    material = make_constant(S, S**2 / (z * KAPPA), KAPPA).material(0.4 * hot, hot)
    assert largest_difference(material, hot) == near(exact, abs=1e-6)


def test_largest_difference_ends_at_the_lowest_node_and_is_zero_without_pull(make_constant):
    strong = make_constant(S, S**2 / (0.1 * KAPPA), KAPPA).material(200.0, 300.0)
    assert largest_difference(strong, 300.0) == 100
    for seebeck in (0.0, -S):
        assert largest_difference(make_constant(seebeck, RHO, KAPPA).material(200.0, 300.0), 300.0) == 0


def test_a_leg_that_runs_the_wrong_way_generates_nothing(make_constant):
    material = make_constant(-S, RHO, KAPPA).material(COLD, HOT)
    assert generate(material, HOT, COLD, np.array(0.01)).efficiency == -np.inf  # heat would enter at the cold end
    assert generate(material, HOT, COLD, np.array(10.0)).efficiency < 0
    assert cool(material, HOT, COLD, np.array(0.01)).cop < 0


def test_little_current_carries_heat_by_conduction_alone(make_constant):
    # w → ∞: J L = κ ΔT/w, power → S ΔT J (Ohmic loss is of second order in 1/w)
    made = generate(make_constant(S, RHO, KAPPA).material(COLD, HOT), HOT, COLD, np.array(1e4))
    assert made.current_times_length == near(KAPPA * 300 / 1e4, rel=1e-6)
    assert made.efficiency * 1e4 == near(S * 300, rel=1e-4)


def test_heat_balance_holds_with_thomson_heat(telluride):
    # what enters hot is what leaves cold and the electric power ∫(J S dT) − J²∫ρ dx: the latter from the march
    material = telluride.material(COLD, HOT)
    made = generate(material, HOT, COLD, np.array(0.06), steps=1536)
    along = march_down(material, HOT, COLD, +1, np.array(0.06), 1536)
    t, w = along.temperature[::-1], along.w[::-1]
    seebeck, joule = material.seebeck(t), material.resistivity(t) * material.thermal_conductivity(t) / w
    voltage = np.trapezoid(seebeck - joule, t)
    assert made.power_times_length == near(made.current_times_length * voltage, rel=1e-5)  # trapezoidal rule


def test_many_legs_at_once_are_each_leg_alone(telluride, make_constant):
    legs = [telluride, make_constant(S, RHO, KAPPA), make_constant(1e-4, 3e-5, 0.9)]
    t = np.linspace(COLD, 720.0, 7)
    stacked = LegMaterial.from_nodes(
        t,
        np.stack([leg.seebeck(t) for leg in legs], axis=-1),
        np.stack([leg.resistivity(t) for leg in legs], axis=-1),
        np.stack([leg.conductivity(t) for leg in legs], axis=-1),
    )
    assert (stacked.lowest, stacked.highest) == (COLD, 720.0)
    w = np.array([[0.03, 0.04, 0.05], [0.1, 0.2, 0.3]])
    together = generate(stacked, HOT, COLD, w)
    peaked = cool_past_peak(stacked, HOT, COLD, 650.0)
    for i, leg in enumerate(legs):
        alone = LegMaterial.from_nodes(t, leg.seebeck(t), leg.resistivity(t), leg.conductivity(t))
        for j in range(2):
            single = generate(alone, HOT, COLD, w[j, i])
            # splines of several legs are solved together: rounding apart
            assert together.efficiency[j, i] == near(single.efficiency, rel=1e-12)
            assert together.power_times_length[j, i] == near(single.power_times_length, rel=1e-12)
        assert peaked.cop[i] == near(cool_past_peak(alone, HOT, COLD, 650.0).cop, rel=1e-12)


def test_zoom_finds_the_top_of_each_leg():
    tops = np.array([0.2, math.pi / 4, 0.95])
    at, value = zoom(lambda x: 5 - (x - tops) ** 2, np.zeros(3), np.ones(3), 7, 20)
    # each round divides the bracket by three; the parabola is flat to √ε at its top
    assert at == near(tops, abs=1e-7)
    assert value == near(5, rel=1e-14)
    edge, _ = zoom(lambda x: x, np.zeros(1), np.ones(1), 7, 5)
    assert edge == 1
