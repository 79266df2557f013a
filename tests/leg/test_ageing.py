"""Grains that grow and sides that evaporate, against closed forms; temperature along a leg against its balance."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import constants
from scipy.integrate import solve_ivp
from scipy.interpolate import CubicSpline
from scipy.optimize import brentq

from legwright.base.units import NM
from legwright.candidate.library import load_candidate
from legwright.candidate.model import Coarsening
from legwright.candidate.supply import mass_density
from legwright.leg.ageing import (
    Growth,
    grown_size,
    growth_of,
    most_sublimed,
    temperature_along,
    thinned_share,
    time_factor,
    time_to_thin,
)
from legwright.leg.balance import LegMaterial
from legwright.leg.duty import Duty, Setting
from legwright.leg.installed import running_at

ROUNDING = 1e-12
LAW = Growth(exponent=3.0, activation_energy=2.5e5, prefactor=1e-12)


def number(value: float, unit: str, spread: float = 0.0) -> dict[str, object]:
    return {"value": value, "unit": unit, "spread": spread, "source": "mine", "basis": "measured"}


def annealing(energy_spread: float = 0.0) -> Coarsening:
    return Coarsening.model_validate(
        {
            "exponent": number(3, "1"),
            "activation_energy": number(250, "kJ/mol", energy_spread),
            "temperature": number(1100, "K"),
            "from_size": number(40, "nm"),
            "to_size": number(90, "nm"),
            "hours": number(50, "hour"),
        }
    )


def test_parabolic_growth_at_one_temperature():
    """n = 2: d = √(d_0² + k_0 e^(−Q/RT) t)."""
    law = Growth(2.0, 1e5, 1e-14)
    times = np.array([0.0, 1e3, 1e6])
    exact = np.sqrt((20 * NM) ** 2 + 1e-14 * math.exp(-1e5 / (constants.R * 900)) * times)
    assert grown_size(20 * NM, 900.0, times, law) == pytest.approx(exact, rel=ROUNDING, abs=0)


def test_the_annealing_that_was_watched_comes_back():
    law = growth_of(annealing())
    assert grown_size(40 * NM, 1100.0, 50 * 3600, law) == pytest.approx(90 * NM, rel=ROUNDING, abs=0)


def test_limits():
    """No time, no mobility, no way over the barrier: nothing grows; coarse stays coarse."""
    for law, time in (
        (LAW, 0.0),
        (Growth(3.0, 2.5e5, 0.0), 1e9),
        (Growth(3.0, 1e9, 1e-12), 1e9),
    ):
        assert grown_size(30 * NM, 1000.0, time, law) == pytest.approx(30 * NM, rel=ROUNDING, abs=0)
    assert np.isposinf(grown_size(np.inf, 1000.0, 1e9, LAW))
    late = grown_size([10 * NM, 30 * NM], 1200.0, 1e20, LAW)
    assert late[0] == pytest.approx(late[1], rel=1e-6, abs=0)  # the start is forgotten


@settings(max_examples=60, derandomize=True)
@given(
    st.floats(2, 6),
    st.floats(5e4, 5e5),
    st.floats(-18, -8),
    st.floats(400, 1500),
    st.floats(0, 8),
    st.floats(0, 8),
)
def test_growth_never_shrinks_and_ageing_twice_is_ageing_once(n, energy, log_k, temperature, first, second):
    law = Growth(n, energy, 10.0**log_k * NM ** (n - 2))
    start = 25 * NM
    once = grown_size(start, temperature, 10**first + 10**second, law)
    between = grown_size(start, temperature, 10**first, law)
    twice = grown_size(between, temperature, 10**second, law)
    assert once == pytest.approx(twice, rel=1e-10, abs=0)  # logarithms of sizes, n times over
    assert start * (1 - ROUNDING) <= between <= once * (1 + ROUNDING)
    assert once <= grown_size(start, temperature + 50, 10**first + 10**second, law) * (1 + ROUNDING)
    assert once <= grown_size(2 * start, temperature, 10**first + 10**second, law)


def test_pure_zinc_oxide_between_two_sintering_temperatures():
    """n = 3 and Q = 224 kJ/mol (Senda & Bradt, Journal of the American Ceramic Society 73, 106 (1990)): what takes
    an hour at 1200 °C takes e^(Q/R (1/1373 K − 1/1473 K)) = 3.8 hours at 1100 °C. Their k_0 is not at hand."""
    law = Growth(3.0, 224e3, 1e-6)
    slow = math.exp(224e3 / constants.R * (1 / 1373 - 1 / 1473))
    assert slow == pytest.approx(3.8, abs=0.05)  # two digits
    hot = grown_size(1e-6, 1473.0, 3600.0, law)
    assert hot > 1.1e-6
    assert grown_size(1e-6, 1373.0, 3600.0 * slow, law) == pytest.approx(hot, rel=ROUNDING, abs=0)


@pytest.mark.parametrize("bad", [(0.0, 900.0, 1.0), (1e-8, -1.0, 1.0), (1e-8, 900.0, -1.0)])
def test_what_cannot_be_grown_is_refused(bad):
    with pytest.raises(ValueError, match="must be above 0"):
        grown_size(*bad, LAW)


def test_the_spread_of_q_matters_away_from_the_annealing():
    seen = annealing(0.1)
    expected = math.exp(0.1 * 250e3 / constants.R * (1 / 900 - 1 / 1100))
    assert time_factor(seen, [1100.0, 900.0]) == pytest.approx([1.0, expected], rel=ROUNDING, abs=0)


def test_rates_of_sublimation_between_below_and_above_what_was_measured():
    """An Arrhenius line is met everywhere between its points; 1e-10: logarithms of small numbers."""

    def arrhenius(t):
        return 1e3 * np.exp(-3e4 / np.asarray(t))

    measured = [1000.0, 1100.0, 1300.0]
    between = np.linspace(1000, 1300, 7)
    assert most_sublimed(measured, arrhenius(measured), between) == pytest.approx(arrhenius(between), rel=1e-10)
    assert most_sublimed(measured, arrhenius(measured), 500.0) == pytest.approx(arrhenius(1000.0), rel=1e-10)
    assert np.isnan(most_sublimed(measured, arrhenius(measured), 1301.0))


@pytest.mark.parametrize(("at", "rate"), [([2.0, 1.0], [1.0, 1.0]), ([1.0], [1.0, 2.0]), ([1.0, 2.0], [0.0, 1.0])])
def test_measured_rates_in_disorder_are_refused(at, rate):
    with pytest.raises(ValueError, match="must"):
        most_sublimed(at, rate, 1.0)


def test_an_even_leg_thins_by_the_closed_form():
    x, u, a = np.linspace(0.0, 1.0, 5), 3e-12, 2e-3
    exact = a * (1 - math.sqrt(0.9)) / (2 * u)
    assert time_to_thin(np.full(5, u), x, a, 0.9) == pytest.approx(exact, rel=1e-9, abs=0)  # the root search
    assert time_to_thin(np.zeros(5), x, a, 0.9) == math.inf
    assert thinned_share(np.full(5, u), x, a, 0.51 * a / u) == 0.0


def test_a_leg_that_thins_at_its_hot_end_delivers_what_its_shape_says():
    """A leg of cross-section A(x), its balance shot at from the hot end; its properties go with temperature."""
    hot, cold, length, area = 900.0, 400.0, 2e-3, 1e-6
    t = np.linspace(300.0, 1000.0, 9)
    material = LegMaterial.from_nodes(t, 1e-4 + 1.2e-7 * t, 4e-6 + 1.1e-8 * t, 3.5 - 2e-3 * t)
    x = np.linspace(0.0, length, 401)
    recession = 1e-12 * np.exp(-8 * x / length)
    width, time = area**0.5, 1e8
    share = thinned_share(recession, x, width, time)
    assert 0.9 < share < 0.99
    thinned = CubicSpline(x, area * (1 - 2 * recession * time / width) ** 2)

    def shot(current, heat, section):
        def slope(place, state):
            temperature, q = state
            s = float(material.seebeck(temperature))
            room = section(place)
            gradient = (current * s * temperature - q) / (float(material.thermal_conductivity(temperature)) * room)
            return [gradient, current * (current * float(material.resistivity(temperature)) / room + s * gradient)]

        return solve_ivp(slope, (0, length), [hot, heat], rtol=1e-10, atol=1e-12).y[:, -1]

    def power(current, section):
        first = area * 2.0 * (hot - cold) / length
        heat = brentq(lambda q: shot(current, q, section)[0] - cold, 0.3 * first, 3 * first, rtol=1e-12)
        return heat - shot(current, heat, section)[1]

    even = power(2.5, lambda _: area)
    uneven = power(2.5 * share, thinned)
    assert uneven / even == pytest.approx(share, rel=1e-5, abs=0)  # the trapezium rule over 400 steps


def test_nitride_keeps_silicon_germanium_through_a_mission_that_bare_legs_do_not_survive():
    """Legs some 2.7 mm wide at 1000 °C have served Voyager for more than 14 years since 1977 under silicon nitride
    (common practice of radioisotope generators, from memory); the library's rates must allow it, within their
    factor of 5, and rule out the first year for bare legs."""
    candidate = load_candidate("sige-n")
    x, year = np.linspace(0, 1, 3), 365.25 * 86400
    last = {
        loss.coat: time_to_thin(np.full(3, loss.rate.si / mass_density(candidate)), x, 2.7e-3, 0.9)
        for loss in candidate.data.service.sublimation
    }
    assert last["silicon nitride"] > 14 * year / 5
    assert last[None] < year


SETTINGS = (Setting(), Setting(2e-9, 4e-5, 2e-5, 3e5, 350.0))


@pytest.mark.parametrize("setting", SETTINGS)
@pytest.mark.parametrize(
    ("kind", "hot", "cold", "goal", "current"),
    [
        ("generator", 800.0, 400.0, "power", 1.2e6),
        ("cooler", 420.0, 400.0, "cop", 1e6),
        ("cooler", 420.0, 400.0, "heat_lifted", 6e6),
    ],
)
def test_temperature_along_a_leg_ends_where_the_leg_does_and_its_energy_closes(
    telluride, setting, kind, hot, cold, goal, current
):
    """From the hot end on, by another method than the leg's own; the last cooler is hottest inside."""
    material = telluride.material(250.0, 850.0)
    duty = Duty(kind, hot, cold, goal, 1e-3, setting)
    running = running_at(material, duty, current)
    assert running.serves
    x, t = temperature_along(material, duty, running, 401)
    assert t[0] == float(running.hot_end)
    assert t[-1] == pytest.approx(float(running.cold_end), abs=1e-4)  # the leg's own answer is good to 3e-7 of heat
    if current > 5e6:
        assert np.max(t) > t[0] + 1
    sense = 1 if kind == "generator" else -1
    gradient = CubicSpline(x, t)(x[-1], 1)
    seebeck, kappa = (float(f(t[-1])) for f in (material.seebeck, material.thermal_conductivity))
    reached = sense * (sense * current * seebeck * t[-1] - kappa * gradient) + sense * current**2 * setting.contact
    # 1e-4: the slope of a spline at its end
    assert reached == pytest.approx(float(running.heat_cold), rel=1e-4, abs=0)
