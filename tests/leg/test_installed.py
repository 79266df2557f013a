"""A leg with contacts and exchangers against Ioffe's closed forms, and against its own energy."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from legwright.leg.balance import LegMaterial
from legwright.leg.duty import Duty
from legwright.leg.installed import Setting, best_running, largest_reach, run_cooler, run_generator

S, KAPPA, LENGTH = 2e-4, 1.6, 1e-3


def constant(z: float, low: float, high: float) -> tuple[LegMaterial, float]:
    nodes = np.linspace(low, high, 9)
    one = np.ones_like(nodes)
    rho = S**2 / (z * KAPPA)
    return LegMaterial.from_nodes(nodes, S * one, rho * one, KAPPA * one), rho


GENERATORS = list(
    itertools.product(
        (2e-4, 1e-3, 1 / 450, 6e-3), ((600.0, 300.0), (500.0, 400.0), (1200.0, 350.0)), (0.0, 0.1, 1.0)
    )
)
COOLERS = list(itertools.product((1e-3, 3e-3), ((300.0, 280.0), (400.0, 370.0)), (0.0, 0.2)))


@pytest.mark.parametrize(("z", "span", "share"), GENERATORS)
def test_ioffes_generator_with_contacts(z, span, share):
    """Contacts whose resistance is `share` of the leg's act as a leg of Z/(1 + share): both halves of their heat
    fall where half of the leg's would (Ioffe 1957). 1e-8: the length by Simpson's rule over 96 steps."""
    hot, cold = span
    material, rho = constant(z, cold, hot)
    setting = Setting(contact=share * rho * LENGTH / 2)
    worse = z / (1 + share)
    m = math.sqrt(1 + worse * (hot + cold) / 2)
    found = best_running(material, Duty("generator", hot, cold, "efficiency", LENGTH), setting)
    assert found.efficiency == pytest.approx((hot - cold) / hot * (m - 1) / (m + cold / hot), rel=1e-8, abs=0)
    power = best_running(material, Duty("generator", hot, cold, "power", LENGTH), setting).power
    exact = (S * (hot - cold)) ** 2 / (4 * rho * (1 + share) * LENGTH)
    assert power == pytest.approx(exact, rel=1e-7, abs=0)


@pytest.mark.parametrize(("z", "span", "share"), COOLERS)
def test_ioffes_cooler_with_contacts(z, span, share):
    hot, cold = span
    material, rho = constant(z, 0.45 * hot, hot + 130)
    setting = Setting(contact=share * rho * LENGTH / 2)
    worse = z / (1 + share)
    m = math.sqrt(1 + worse * (hot + cold) / 2)
    exact = cold / (hot - cold) * (m - hot / cold) / (m + 1)
    found = best_running(material, Duty("cooler", hot, cold, "cop", LENGTH), setting)
    if exact <= 0:
        assert found is None
    else:
        assert found.cop == pytest.approx(exact, rel=1e-8, abs=0)
    reach = largest_reach(material, Duty("cooler", hot, cold, "delta_t", LENGTH), setting)
    low = (math.sqrt(1 + 2 * worse * hot) - 1) / worse  # T_c of ½ Z T_c² = T_h − T_c
    assert reach == pytest.approx(hot - low, rel=2e-5, abs=0)  # the bounded search's flat top


def test_exchangers_take_their_share_of_the_difference():
    """At matched conditions a leg gets half the difference, and power a quarter of that without exchangers would
    need: thermal resistances of leg and exchangers add up (constant properties, little current)."""
    material, _ = constant(1e-5, 300.0, 600.0)
    through = LENGTH / KAPPA
    setting = Setting(hot_resistance=through / 2, cold_resistance=through / 2)
    found = best_running(material, Duty("generator", 600.0, 300.0, "power", LENGTH), setting)
    assert found.hot_end == pytest.approx(525.0, abs=0.3)  # ZT = 0.005: the current's heat shifts it by less
    assert found.cold_end == pytest.approx(375.0, abs=0.3)
    free = best_running(material, Duty("generator", 600.0, 300.0, "power", LENGTH), Setting())
    assert found.power == pytest.approx(free.power / 4, rel=5e-3, abs=0)


BEST_LENGTH = np.geomspace(2e-4, 2e-2, 4)


def test_there_is_a_best_length_under_given_exchangers():
    powers = []
    for length in BEST_LENGTH:
        material, _ = constant(1e-3, 300.0, 600.0)
        setting = Setting(contact=1e-9, hot_resistance=1e-3, cold_resistance=1e-3)
        powers.append(best_running(material, Duty("generator", 600.0, 300.0, "power", length), setting).power)
    best = int(np.argmax(powers))
    assert 0 < best < len(powers) - 1


@settings(derandomize=True, max_examples=20, deadline=None)
@given(
    st.floats(1e-4, 6e-3),
    st.floats(5, 300),
    st.floats(0, 1e-8),
    st.floats(0, 1e-3),
    st.floats(-0.8, 0.8),
    st.floats(0.05, 5),
)
def test_energy_closes_and_carnot_holds(z, difference, contact, resistance, slope, w):
    cold, hot = 300.0, 300.0 + difference
    nodes = np.linspace(cold, hot, 9)
    bend = 1 + slope * (nodes - cold) / difference
    rho = S**2 / (z * KAPPA)
    material = LegMaterial.from_nodes(nodes, S * bend, rho / bend, KAPPA * (2 - bend))
    duty = Duty("generator", hot, cold, "efficiency", LENGTH)
    made = run_generator(material, duty, Setting(contact, resistance, resistance), w)
    # the same power from the electrical side: j ∫S dT − j² (∫ρ dx + 2ρ_c), by an own march
    t = np.linspace(made.cold_end, made.hot_end, 2001)
    s, r, k = (spline(t) for spline in (material.seebeck, material.resistivity, material.thermal_conductivity))
    w2 = np.empty_like(t)
    w2[-1] = w**2
    for i in range(t.size - 1, 0, -1):  # Heun's rule: d(w²)/dT = −2κρ − 2wT dS/dT
        h = t[i - 1] - t[i]
        ds = material.seebeck(t, 1)
        a = -2 * k[i] * r[i] - 2 * math.sqrt(w2[i]) * t[i] * ds[i]
        guess = max(w2[i] + h * a, 0.0)
        b = -2 * k[i - 1] * r[i - 1] - 2 * math.sqrt(guess) * t[i - 1] * ds[i - 1]
        w2[i - 1] = w2[i] + h * (a + b) / 2
    wide = np.sqrt(w2)
    per_current = np.trapezoid(k / wide, t)  # j L
    j = per_current / LENGTH
    joule = np.trapezoid(r * k / wide, t) / j  # ∫ρ dx, dx = κ dT/(j w)
    electrical = j * np.trapezoid(s, t) - j**2 * (joule + 2 * contact)
    assert j == pytest.approx(made.current, rel=1e-4, abs=0)  # Heun and trapezoids over 2000 steps
    scale = abs(made.heat_hot) + abs(made.power)
    assert abs(electrical - made.power) < 1e-4 * scale
    assert made.heat_hot - made.heat_cold == pytest.approx(made.power, rel=1e-9, abs=1e-9 * scale)
    if made.heat_hot > 0 and made.power > 0:
        assert made.efficiency < 1 - cold / hot


def test_both_regimes_of_a_cooler_join():
    material, _ = constant(2e-3, 150.0, 430.0)
    duty = Duty("cooler", 300.0, 280.0, "heat_lifted", LENGTH)
    setting = Setting(1e-10, 1e-5, 1e-5)
    below, above = (run_cooler(material, duty, setting, 1 + step) for step in (-1e-7, 1e-7))
    # a march that starts at nearly rest converges slowest of all: half a per cent of the length with 96 steps
    assert below.heat_cold == pytest.approx(above.heat_cold, rel=5e-3, abs=0)
    assert below.current == pytest.approx(above.current, rel=5e-3, abs=0)
