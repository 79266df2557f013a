"""Legs with contacts, exchangers and side loss against closed forms, and against their own energy."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.optimize import minimize_scalar

from legwright.leg.balance import LegMaterial
from legwright.leg.duty import Duty, Setting, best_score, score_of
from legwright.leg.installed import best_running, running_at

S, KAPPA, LENGTH = 2e-4, 1.6, 1e-3


def constant(z: float, low: float, high: float) -> tuple[LegMaterial, float]:
    nodes = np.linspace(low, high, 9)
    one = np.ones_like(nodes)
    rho = S**2 / (z * KAPPA)
    return LegMaterial.from_nodes(nodes, S * one, rho * one, KAPPA * one), rho


#: Z of the legs (1/K), reservoirs (K), and contacts as a share of the resistance of a leg of Z = 1e-3/K
Z = np.array([2e-4, 5e-4, 1e-3, 1.5e-3, 2e-3, 1 / 450, 2.5e-3, 3e-3, 4e-3, 6e-3])
HEATED = ((600.0, 300.0), (500.0, 400.0), (1200.0, 350.0), (310.0, 300.0))
COOLED = ((300.0, 280.0), (400.0, 370.0), (300.0, 299.0), (250.0, 230.0))
SHARES = (0.0, 0.1, 1.0, 4.0)


def against_ioffe(goal: str, span: tuple[float, float], share: float) -> tuple[np.ndarray, np.ndarray]:
    """Scores of legs of every Z, all at once, and the Z that each has with its contacts.

    Contacts whose resistance is x times the leg's make it a leg of Z/(1 + x): half of their heat falls where half
    of the leg's would (Ioffe 1957). A leak too small for the last digit takes the way past the march of ideal legs.
    At the largest lift a leg of Z = 6e-3/K is far hotter inside than its ends: properties reach that far.
    """
    kind = "generator" if goal in ("efficiency", "power") else "cooler"
    setting = Setting(contact=share * S**2 / (1e-3 * KAPPA) * LENGTH / 2, side_loss=1e-30)
    duty = Duty(kind, *span, goal, LENGTH, setting)
    nodes, one = np.linspace(duty.reach[0], 1.5 * duty.reach[1], 9), np.ones((9, Z.size))
    material = LegMaterial.from_nodes(nodes, S * one, S**2 / (Z * KAPPA) * one, KAPPA * one)
    return best_score(material, duty), Z / (1 + share * Z / 1e-3)


@pytest.mark.parametrize("share", SHARES)
@pytest.mark.parametrize("span", HEATED)
def test_ioffes_generators(span, share):
    # 1e-8: the current is found to 1e-6, the goal to its square; rounding where ΔT is small
    hot, cold = span
    found, z = against_ioffe("efficiency", span, share)
    m = np.sqrt(1 + z * (hot + cold) / 2)
    assert found == pytest.approx((hot - cold) / hot * (m - 1) / (m + cold / hot), rel=1e-8, abs=0)
    found, z = against_ioffe("power", span, share)
    exact = z * KAPPA * (hot - cold) ** 2 / (4 * LENGTH) / 1e4  # (S ΔT)²/4ρL
    assert found == pytest.approx(exact, rel=1e-8, abs=0)


@pytest.mark.parametrize("share", SHARES)
@pytest.mark.parametrize("span", COOLED)
def test_ioffes_coolers(span, share):
    hot, cold = span
    found, z = against_ioffe("cop", span, share)
    m = np.sqrt(1 + z * (hot + cold) / 2)
    exact = cold / (hot - cold) * (m - hot / cold) / (m + 1)
    assert found == pytest.approx(np.maximum(exact, 0), rel=1e-8, abs=0)
    found, z = against_ioffe("heat_lifted", span, share)
    exact = KAPPA * (z * cold**2 / 2 - (hot - cold)) / LENGTH / 1e4
    assert found == pytest.approx(np.maximum(exact, 0), rel=1e-8, abs=0)
    found, z = against_ioffe("delta_t", span, share)
    exact = hot - (np.sqrt(1 + 2 * z * hot) - 1) / z  # T_c of ½ Z T_c² = T_h − T_c
    assert found == pytest.approx(exact, rel=1e-8, abs=0)


def test_an_ideal_setting_has_the_same_scores_by_both_ways():
    """The march over temperature and the collocation share no step; the march leaves 3e-6 with 24 steps."""
    for goal, hot, cold in (("efficiency", 600.0, 300.0), ("power", 600.0, 300.0), ("cop", 300.0, 285.0)):
        kind = "cooler" if goal == "cop" else "generator"
        duty = Duty(kind, hot, cold, goal, LENGTH)
        nodes = np.linspace(*duty.reach, 9)[:, None]
        bend = (nodes - cold) / (hot - cold) * np.linspace(-0.5, 0.5, 40)
        material = LegMaterial.from_nodes(
            nodes[:, 0], S * (1 + bend) * np.ones(40), 1e-5 * np.exp(bend), KAPPA * np.exp(-bend)
        )
        ideal = score_of(best_running(material, duty), duty)
        assert np.min(ideal) > 0
        assert ideal == pytest.approx(best_score(material, duty, 16), rel=1e-5, abs=0)


def test_exchangers_take_their_share_of_the_difference():
    """At matched conditions a leg gets half the difference, and power a quarter of that without exchangers would
    need: thermal resistances of leg and exchangers add up (constant properties, little current)."""
    material, _ = constant(1e-5, 300.0, 600.0)
    through = LENGTH / KAPPA
    free = Duty("generator", 600.0, 300.0, "power", LENGTH)
    duty = replace(free, setting=Setting(hot_resistance=through / 2, cold_resistance=through / 2))
    found = best_running(material, duty)
    assert found.hot_end == pytest.approx(525.0, abs=0.3)  # ZT = 0.005: the current's heat shifts it by less
    assert found.cold_end == pytest.approx(375.0, abs=0.3)
    assert found.power == pytest.approx(float(best_running(material, free).power) / 4, rel=5e-3, abs=0)


def test_a_leg_that_only_conducts_and_leaks_is_a_fin():
    """κ T'' = a (T − T_a): T − T_a = combinations of sinh m x, m² = a/κ (Fourier; fin with both ends held)."""
    nodes = np.linspace(290.0, 610.0, 9)
    one = np.ones_like(nodes)
    material = LegMaterial.from_nodes(nodes, 1e-12 * one, 1e-5 * one, KAPPA * one)
    loss = 4e6
    duty = Duty("generator", 600.0, 300.0, "power", 2e-3, Setting(side_loss=loss, ambient=320.0))
    made = running_at(material, duty, 1e-6)
    m = math.sqrt(loss / KAPPA)
    top, low, span = 280.0, -20.0, m * 2e-3
    into = KAPPA * m * (top * math.cosh(span) - low) / math.sinh(span)
    out = KAPPA * m * (top - low * math.cosh(span)) / math.sinh(span)
    assert made.heat_hot == pytest.approx(into, rel=1e-10, abs=0)
    assert made.heat_cold == pytest.approx(out, rel=1e-10, abs=0)
    assert made.side_heat == pytest.approx(into - out, rel=1e-10, abs=0)


def test_side_loss_costs_efficiency_and_its_ambient_is_what_the_setting_says():
    material, _ = constant(2e-3, 300.0, 600.0)
    plain = Duty("generator", 600.0, 300.0, "efficiency", LENGTH)
    figures = [
        float(best_score(material, replace(plain, setting=Setting(side_loss=loss, ambient=ambient))))
        for loss, ambient in ((1e-9, None), (1e5, None), (1e5, 300.0), (1e5, 450.0))
    ]
    assert figures[0] > figures[1]
    assert figures[1] == figures[2]  # the cold side's unless said otherwise
    assert figures[3] > figures[2]  # warm air leaks less
    cold, _ = constant(2e-3, 150.0, 360.0)
    cooler = Duty("cooler", 300.0, 280.0, "cop", LENGTH)
    by = [
        best_score(cold, replace(cooler, setting=Setting(side_loss=1e5, ambient=t))) for t in (None, 300.0, 280.0)
    ]
    assert by[0] == by[1] < by[2]


def test_the_best_length_under_exchangers_is_the_best_of_many_lengths():
    setting = Setting(contact=1e-9, hot_resistance=1e-3, cold_resistance=1e-3)
    z = np.array([3e-4, 1e-3, 2e-3])
    nodes, one = np.linspace(300.0, 600.0, 9), np.ones((9, 3))
    material = LegMaterial.from_nodes(nodes, S * one, S**2 / (z * KAPPA) * one, KAPPA * one)
    duty = Duty("generator", 600.0, 300.0, "power", LENGTH, setting)
    free = best_running(material, replace(duty, lengths=(1e-5, 1e-1)))
    for leg in range(3):

        def loss(log_length: float, leg: int = leg) -> float:
            return -float(best_running(material, replace(duty, length=math.exp(log_length))).power[leg])

        found = minimize_scalar(loss, bounds=(math.log(1e-5), math.log(1e-1)), method="bounded")
        assert free.length[leg] == pytest.approx(math.exp(found.x), rel=1e-3)  # Brent on a flat top
        assert free.power[leg] == pytest.approx(-found.fun, rel=1e-7)
    assert np.all((free.length > 1e-4) & (free.length < 1e-2))


def test_a_best_length_is_found_where_most_lengths_do_not_serve():
    """Exchangers leave short legs of a cooler no difference, side loss long ones no lift; both ranges hold 2 mm."""
    material, _ = constant(3e-3, 150.0, 420.0)
    setting = Setting(1e-9, 1e-4, 1e-4, 3e4)
    duty = Duty("cooler", 300.0, 270.0, "cop", 2e-3, setting)
    assert best_running(material, duty).serves
    assert not best_running(material, replace(duty, length=2e-5)).serves
    assert not best_running(material, replace(duty, length=1.0)).serves
    found = [
        best_running(material, replace(duty, lengths=ends)) for ends in ((2e-6, 4e-3), (1e-3, 1.0), (1e-3, 1e-2))
    ]
    assert all(one.serves for one in found)
    assert [float(one.cop) for one in found[1:]] == pytest.approx([float(found[2].cop)] * 2, rel=1e-9)
    assert found[0].cop >= best_running(material, duty).cop


@pytest.mark.parametrize(("goal", "end"), [("efficiency", 1), ("power", 0)])
def test_a_free_length_goes_to_its_better_end(goal, end):
    # with contacts alone efficiency grows with length; with nothing at all power falls as 1/L
    lengths = (1e-3, 1e-2)
    setting = Setting(contact=1e-9) if goal == "efficiency" else Setting()
    material, _ = constant(1e-3, 300.0, 600.0)
    duty = Duty("generator", 600.0, 300.0, goal, 5e-3, setting, lengths)
    assert best_running(material, duty).length == pytest.approx(lengths[end], rel=1e-12)


@st.composite
def surroundings(draw: st.DrawFn) -> Setting:
    return Setting(
        draw(st.floats(0, 1e-8)), draw(st.floats(0, 1e-3)), draw(st.floats(0, 1e-3)), draw(st.floats(0, 1e6))
    )


def bent(z: float, low: float, high: float, slope: float) -> LegMaterial:
    nodes = np.linspace(low, high, 9)
    bend = 1 + slope * (nodes - low) / (high - low)
    return LegMaterial.from_nodes(nodes, S * bend, S**2 / (z * KAPPA) / bend, KAPPA * (2 - bend))


@settings(derandomize=True, max_examples=60, deadline=None)
@given(st.floats(1e-4, 6e-3), st.floats(5, 300), surroundings(), st.floats(-0.8, 0.8), st.floats(0.05, 1.5))
def test_energy_closes_and_no_generator_passes_carnot(z, difference, setting, slope, load):
    cold, hot = 300.0, 300.0 + difference
    material = bent(z, cold, hot, slope)
    duty = Duty("generator", hot, cold, "efficiency", LENGTH, setting)
    best = best_running(material, duty)
    assert 0 < best.efficiency < 1 - cold / hot
    made = running_at(material, duty, load * float(best.current))
    if not made.serves:
        return
    flow = abs(float(made.heat_hot)) + abs(float(made.heat_cold))
    assert abs(float(made.heat_hot - made.heat_cold - made.side_heat - made.power)) < 1e-9 * flow
    # the exchangers carry what flows
    assert made.hot_end == pytest.approx(hot - made.heat_hot * setting.hot_resistance, rel=1e-9)
    assert made.cold_end == pytest.approx(cold + made.heat_cold * setting.cold_resistance, rel=1e-9)
    # Ohmic loss by the heat that the current makes: no more power than voltage across the ends times current
    volts = quad(material.seebeck, float(made.cold_end), float(made.hot_end))[0]
    assert made.power < made.current * volts - 2 * made.current**2 * setting.contact + 1e-9 * flow
    # the best is the best
    if made.heat_hot > 0:
        assert made.efficiency <= best.efficiency * (1 + 1e-9)


@settings(derandomize=True, max_examples=60, deadline=None)
@given(st.floats(5e-4, 6e-3), st.floats(1, 60), surroundings(), st.floats(-0.5, 0.5), st.floats(0.3, 1.5))
def test_no_cooler_passes_carnot_and_its_goals_agree(z, difference, setting, slope, drive):
    hot, cold = 300.0, 300.0 - difference
    duty = Duty("cooler", hot, cold, "cop", LENGTH, setting)
    material = bent(z, *duty.reach, slope)
    best = best_running(material, duty)
    lift = float(
        best_score(material, replace(duty, maximise="heat_lifted", setting=replace(setting, side_loss=1.0)))
    )
    reach = float(best_score(material, replace(duty, maximise="delta_t")))
    if not best.serves:
        assert reach < difference + 0.5  # a sliver where the best current is all but none
        return
    assert 0 < best.cop < cold / difference
    assert reach > difference
    made = running_at(material, duty, drive * float(best.current))
    if not made.serves:
        return
    flow = abs(float(made.heat_hot)) + abs(float(made.heat_cold))
    assert abs(float(made.heat_hot + made.side_heat - made.heat_cold - made.power)) < 1e-9 * flow
    if setting.side_loss < 1:
        assert made.heat_cold / 1e4 <= lift * (1 + 1e-9)
    if made.power > 0:
        assert made.cop <= best.cop * (1 + 1e-9)


def test_what_would_leave_the_nodes_or_has_no_steady_state_does_not_serve():
    material, _ = constant(2e-3, 250.0, 310.0)
    duty = Duty("cooler", 300.0, 280.0, "heat_lifted", LENGTH)
    currents = np.array([1e5, 1e7, 1e9])
    made = running_at(material, duty, currents)
    assert made.serves.tolist() == [True, False, False]
    assert np.isnan(made.power[1:]).all()
    # the best within the nodes is where the inside just reaches the last of them
    best = best_running(material, duty)
    wider, _ = constant(2e-3, 250.0, 400.0)
    assert 0 < best.heat_cold < best_running(wider, duty).heat_cold


@pytest.mark.parametrize("goal", ["efficiency", "power", "cop", "heat_lifted", "delta_t"])
@pytest.mark.parametrize("seebeck", [-S, 0.0])
def test_a_leg_without_pull_scores_zero_in_any_setting(goal, seebeck):
    kind = "generator" if goal in ("efficiency", "power") else "cooler"
    duty = Duty(kind, 400.0, 380.0, goal, LENGTH, Setting(1e-9, 1e-5, 1e-5, 1e3))
    nodes = np.linspace(*duty.reach, 9)
    one = np.ones_like(nodes)
    assert best_score(LegMaterial.from_nodes(nodes, seebeck * one, 1e-5 * one, KAPPA * one), duty) == 0


def test_each_leg_has_the_same_bits_alone_and_among_any_others():
    rng = np.random.default_rng(5)
    nodes = np.linspace(300.0, 600.0, 9)
    bends = rng.uniform(-0.5, 0.5, (3, 1100)) * ((nodes - 300) / 300)[:, None, None]
    values = [scale * np.exp(bend) for scale, bend in zip((S, 1e-5, KAPPA), np.moveaxis(bends, 1, 0), strict=True)]
    duty = Duty("generator", 600.0, 300.0, "power", LENGTH, Setting(1e-9, 5e-5, 5e-5, 1e4))
    whole = best_score(LegMaterial.from_nodes(nodes, *values), duty)
    order = rng.permutation(1100)
    shuffled = best_score(LegMaterial.from_nodes(nodes, *(each[:, order] for each in values)), duty)
    assert np.array_equal(shuffled, whole[order])
    shaped = best_score(LegMaterial.from_nodes(nodes, *(each.reshape(9, 11, 100) for each in values)), duty)
    assert np.array_equal(shaped.ravel(), whole)
