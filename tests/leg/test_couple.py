"""Couples against Ioffe's closed forms, against each leg alone, and against their own energy."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import minimize_scalar

from legwright.leg.balance import LegMaterial, largest_difference
from legwright.leg.couple import best_couples, best_operation, largest_difference_of, largest_differences
from legwright.leg.duty import Duty, Setting
from legwright.leg.installed import best_running
from legwright.leg.stream import Segments, drive_range, stream

LENGTH = 1e-3
#: S (V/K), ρ (Ω m), κ (W/(m K)): like a telluride, a silicide, a metal
N = ((1e-4, 2e-5, 4.0), (2e-4, 1e-5, 1.5), (2.2e-4, 3e-5, 0.7))
P = ((3e-4, 2e-5, 1.0), (1e-5, 1e-7, 50.0))
PAIRS = list(itertools.product(range(len(N)), range(len(P))))


def constant(seebeck: float, resistivity: float, conductivity: float) -> Segments:
    nodes = np.linspace(140.0, 720.0, 9)
    one = np.ones_like(nodes)
    return Segments((LegMaterial.from_nodes(nodes, seebeck * one, resistivity * one, conductivity * one),))


def couples(duty: Duty):
    return best_couples([constant(*n) for n in N], [constant(*p) for p in P], duty)


def figure_of_merit(n: tuple[float, ...], p: tuple[float, ...]) -> float:
    """Z of a couple at its best areas: Ioffe (1957)."""
    return (n[0] + p[0]) ** 2 / (math.sqrt(n[1] * n[2]) + math.sqrt(p[1] * p[2])) ** 2


@pytest.mark.parametrize(("hot", "cold"), [(600.0, 300.0), (320.0, 300.0)])
def test_ioffes_generating_couple(hot, cold):
    """Efficiency and A_n/A_p = √(ρ_n κ_p/(ρ_p κ_n)) to 1e-8: w is exact for constant properties."""
    made = couples(Duty("generator", hot, cold, "efficiency", LENGTH))
    for i, j in PAIRS:
        n, p = N[i], P[j]
        m = math.sqrt(1 + figure_of_merit(n, p) * (hot + cold) / 2)
        assert made.score[i, j] == pytest.approx((hot - cold) / hot * (m - 1) / (m + cold / hot), rel=1e-8, abs=0)
        areas = math.sqrt(n[1] * p[2] / (p[1] * n[2]))
        assert made.area_ratio[i, j] == pytest.approx(areas, rel=1e-8, abs=0)


def test_ioffes_couple_of_most_power():
    """Per area of both legs: (S ΔT)²/(4 L (√ρ_n + √ρ_p)²) with A_n/A_p = √(ρ_n/ρ_p). 1e-7: Simpson's rule and the
    quartic's crest."""
    made = couples(Duty("generator", 600.0, 300.0, "power", LENGTH))
    for i, j in PAIRS:
        n, p = N[i], P[j]
        exact = ((n[0] + p[0]) * 300) ** 2 / (4 * LENGTH * (math.sqrt(n[1]) + math.sqrt(p[1])) ** 2)
        assert made.score[i, j] == pytest.approx(exact, rel=1e-8, abs=0)
        assert made.area_ratio[i, j] == pytest.approx(math.sqrt(n[1] / p[1]), rel=1e-7, abs=0)


def test_ioffes_cooling_couple():
    hot, cold = 300.0, 285.0
    made = couples(Duty("cooler", hot, cold, "cop", LENGTH))
    for i, j in PAIRS:
        n, p = N[i], P[j]
        m = math.sqrt(1 + figure_of_merit(n, p) * (hot + cold) / 2)
        exact = cold / (hot - cold) * (m - hot / cold) / (m + 1)
        assert made.score[i, j] == pytest.approx(max(exact, 0.0), rel=1e-8, abs=0)
        areas = math.sqrt(n[1] * p[2] / (p[1] * n[2]))
        assert exact < 0 or made.area_ratio[i, j] == pytest.approx(areas, rel=1e-8, abs=0)


def test_the_couple_that_lifts_most():
    """Ioffe (1957): at given areas the best current lifts S² T_c²/2R − K ΔT; the best areas by a search of its own.
    1e-5: from rest the length converges as steps^−2.5."""
    hot, cold = 300.0, 290.0
    made = couples(Duty("cooler", hot, cold, "heat_lifted", LENGTH))
    for i, j in PAIRS:
        n, p = N[i], P[j]

        def lifted(a: float, n=n, p=p) -> float:
            resistance = LENGTH * (n[1] / a + p[1] / (1 - a))
            conductance = (n[2] * a + p[2] * (1 - a)) / LENGTH
            return ((n[0] + p[0]) * cold) ** 2 / (2 * resistance) - conductance * (hot - cold)

        fine = {"xatol": 1e-10}
        best = minimize_scalar(lambda a: -lifted(a), bounds=(1e-6, 1 - 1e-6), method="bounded", options=fine)
        assert made.score[i, j] == pytest.approx(max(-best.fun, 0.0), rel=1e-5, abs=1e-6)


def test_the_largest_difference_of_a_couple_is_half_z_t_squared():
    """Ioffe (1957): ½ Z T_c². 1e-6: the spline over cold temperatures."""
    duty = Duty("cooler", 300.0, 290.0, "delta_t", LENGTH)
    made = largest_differences([constant(*n) for n in N], [constant(*p) for p in P], duty)
    for i, j in PAIRS:
        z = figure_of_merit(N[i], P[j])
        cold = (math.sqrt(1 + 2 * z * 300) - 1) / z
        assert made[i, j] == pytest.approx(300 - cold, rel=1e-6, abs=0)


def test_contacts_act_on_a_couple_as_more_resistance():
    """Contacts of `share` of both legs' resistance make Z/(1 + share) of it: Ioffe (1957). 1e-7: Simpson's rule."""
    n = p = (2e-4, 1e-5, 1.5)
    for share in (0.1, 1.0):
        setting = Setting(contact=share * n[1] * LENGTH / 2)
        duty = Duty("generator", 600.0, 300.0, "efficiency", LENGTH, setting)
        m = math.sqrt(1 + figure_of_merit(n, p) / (1 + share) * 450)
        found = best_operation([constant(*n), constant(*p)], duty)
        assert found.efficiency == pytest.approx(0.5 * (m - 1) / (m + 0.5), rel=1e-7, abs=0)


SETTINGS = (Setting(), Setting(2e-9), Setting(2e-9, 3e-4, 1e-4))
DUTIES = (
    ("generator", 600.0, 300.0, "efficiency"),
    ("generator", 600.0, 300.0, "power"),
    ("cooler", 300.0, 285.0, "cop"),
    ("cooler", 300.0, 290.0, "heat_lifted"),
)


@pytest.mark.parametrize("setting", SETTINGS)
@pytest.mark.parametrize(("kind", "hot", "cold", "goal"), DUTIES)
def test_two_like_legs_are_one_leg(kind, hot, cold, goal, setting, telluride):
    """A couple of mirror images per area is its leg: against the leg's own solution along x, which shares no code.
    The score to 1e-5 where lengths count from a peak inside (steps^−2.5), else 1e-8."""
    material = telluride.material(0.45 * hot, 1.25 * hot)
    leg, duty = Segments((material,)), Duty(kind, hot, cold, goal, LENGTH, setting)
    made, alone = best_operation([leg, leg], duty), best_running(material, duty)
    exact = {
        "efficiency": alone.efficiency,
        "power": alone.power,
        "cop": alone.cop,
        "heat_lifted": alone.heat_cold,
    }[goal]
    assert made.score == pytest.approx(float(exact), rel=1e-5 if goal == "heat_lifted" else 1e-7, abs=0)
    # with exchangers the last grid has steps of 1e-4
    assert made.area_ratio == pytest.approx(1.0, rel=1e-4 if setting.hot_resistance else 1e-9)
    # the ends move with the current, which the flat goal knows to a part in 1e5
    assert made.hot_end == pytest.approx(float(alone.hot_end), rel=1e-5)
    assert made.cold_end == pytest.approx(float(alone.cold_end), rel=1e-5)


def test_two_like_legs_reach_as_far_as_one(telluride):
    material = telluride.material(135.0, 400.0)
    leg, duty = Segments((material,)), Duty("cooler", 300.0, 285.0, "delta_t", LENGTH)
    exact = float(largest_difference(material, 300.0))
    assert largest_difference_of([leg, leg], duty) == pytest.approx(exact, rel=1e-6)
    held = Duty("cooler", 300.0, 285.0, "delta_t", LENGTH, Setting(2e-9, 3e-4, 1e-4))
    alone = 300.0 - float(best_running(material, held).cold_end)
    assert largest_difference_of([leg, leg], held) == pytest.approx(alone, rel=1e-5)


def bent(z: float, share: float, slope: float, ratio: float, hot: float, cold: float) -> Segments:
    """A leg of about that Z at mid-span whose properties vary linearly."""
    nodes = np.linspace(0.4 * cold, 1.3 * hot, 13)
    x = np.clip((nodes - cold) / (hot - cold), -0.5, 1.5) - 0.5
    s = 2e-4 * share * (1 + slope * x)
    kappa = 1.5 * ratio * (1 - 0.5 * slope * x)
    rho = (2e-4 * share) ** 2 / z / (1.5 * ratio) * (1 + 0.3 * x)
    return Segments((LegMaterial.from_nodes(nodes, s, rho, kappa),))


LEGS = st.tuples(st.floats(1e-4, 6e-3), st.floats(0.3, 3), st.floats(-0.6, 0.6), st.floats(0.2, 5))


@settings(derandomize=True, max_examples=25, deadline=None)
@given(LEGS, LEGS, st.floats(20, 500), st.sampled_from(["efficiency", "power"]))
def test_a_generating_couple_lies_between_its_legs_and_under_carnot(n, p, difference, goal):
    """A ratio of sums at its best lies between the best ratios (Dinkelbach, Management Science 13, 492 (1967)).
    1e-6: the best currents of the legs alone are sought likewise."""
    cold, hot = 300.0, 300.0 + difference
    duty = Duty("generator", hot, cold, goal, LENGTH)
    legs = [bent(*one, hot, cold) for one in (n, p)]
    both = best_operation(legs, duty)
    alone = [float(best_operation([leg], duty).score) for leg in legs]
    assert min(alone) * (1 - 1e-6) <= both.score <= max(alone) * (1 + 1e-6)
    assert 0 < both.efficiency < 1 - cold / hot
    assert both.heat_hot - both.heat_cold == pytest.approx(float(both.power), rel=1e-9)


@settings(derandomize=True, max_examples=15, deadline=None)
@given(LEGS, LEGS, st.floats(0.5, 20))
def test_a_cooling_couple_lies_between_its_legs_and_under_carnot(n, p, difference):
    hot, cold = 300.0, 300.0 - difference
    duty = Duty("cooler", hot, cold, "cop", LENGTH)
    legs = [bent(*one, hot, cold) for one in (n, p)]
    both = best_operation(legs, duty)
    alone = [float(best_operation([leg], duty).score) for leg in legs]
    assert both.score <= max(alone) * (1 + 1e-6)
    assert both.score >= min(alone) * (1 - 1e-6)
    assert both.score < cold / difference


def test_no_other_drives_do_better(telluride):
    """The price's optimum against a plain map of both drives, legs unlike each other."""
    legs = [Segments((telluride.material(250.0, 720.0),)), constant(1e-4, 2e-5, 4.0)]
    duty = Duty("generator", 600.0, 300.0, "efficiency", LENGTH)
    drives = np.linspace(*drive_range(duty), 200)
    n, p = (stream(leg, duty, drives, 600.0, 300.0, 96).parts("efficiency") for leg in legs)
    map_of_both = (n[0][:, None] + p[0]) / (n[1][:, None] + p[1])
    best = best_operation(legs, duty).score
    # 200 points over 8.5 miss a crest of curvature 1 by up to (0.02)²
    assert np.max(map_of_both) <= best <= np.max(map_of_both) * (1 + 1e-3)


def test_pairs_together_are_each_pair_alone():
    duty = Duty("generator", 600.0, 300.0, "efficiency", LENGTH, Setting(1e-9))
    made = couples(duty)
    for i, j in PAIRS:
        alone = best_operation([constant(*N[i]), constant(*P[j])], duty)
        assert made.score[i, j] == pytest.approx(float(alone.score), rel=1e-14)
        assert made.current[i, j] == pytest.approx(float(alone.current), rel=1e-9)


def test_a_couple_that_reaches_nothing_scores_nothing():
    leg = constant(1e-5, 1e-5, 5.0)
    duty = Duty("cooler", 300.0, 250.0, "cop", LENGTH)
    assert best_operation([leg, leg], duty).score == 0
    weak = constant(1e-9, 1e-5, 5.0)
    assert largest_difference_of([weak, weak], duty) < 1e-4
