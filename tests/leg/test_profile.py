"""Profiles of many legs: how fast the collocation converges, and its sensitivities."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from legwright.leg.balance import LegMaterial
from legwright.leg.profile import Ends, Legs, Profiles, finer, profiles, straight

HOT, COLD = 600.0, 300.0
FLOWS = ("from_hot", "to_cold", "sideways", "power", "hot_end", "cold_end")


@pytest.fixture(scope="module")
def legs() -> Legs:
    """Properties that vary by a factor of three and more, as one cubic in T each: no knots between the nodes."""
    t = np.linspace(COLD, HOT, 7)[:, None]
    x = (t - COLD) / (HOT - COLD) * np.ones(4)
    bend = np.array([-0.7, -0.3, 0.4, 0.8])
    seebeck, resistivity, conductivity = (
        2e-4 * (1 + bend * x),
        1e-5 * (1 + x**3),
        1.6 / (1.0 + 0 * x) * (1 - bend * x),
    )
    return Legs(LegMaterial.from_nodes(t[:, 0], seebeck, resistivity, conductivity))


EVERY = np.arange(4)
J = np.array([1500.0, 2500.0, 3500.0, 4500.0])


def ends() -> Ends:
    one = np.ones(4)
    return Ends(HOT * one, COLD * one, 0.05 * one, 0.1 * one, 1e-6 * one, 0.4 * one, 350 * one, one < 0)


def made(legs: Legs, points: int, current: np.ndarray = J, around: Ends | None = None) -> Profiles:
    around = around or ends()
    return profiles(legs, EVERY, around, current, straight(legs, EVERY, around, points))


def test_smooth_properties_converge_geometrically(legs):
    # each two more Gauss points: at least five times closer; the power is a small difference of heats
    exact = made(legs, 48)
    assert exact.found.all()
    errors = np.array([np.abs(made(legs, n).power[0] / exact.power[0] - 1) for n in (2, 4, 6, 8, 10)])
    assert np.all(errors[1:] < errors[:-1] / 5)
    assert np.all(errors[-1] < 1e-6)


def test_knots_of_a_spline_leave_fourth_order_at_least():
    # S, ρ and κ have kinks of their third derivative at nodes that no Gauss point knows of
    rng = np.random.default_rng(3)
    t = np.linspace(COLD, HOT, 9)
    rough = np.exp(rng.uniform(-0.15, 0.15, (3, 9, 40)))
    legs = Legs(LegMaterial.from_nodes(t, 2e-4 * rough[0], 1e-5 * rough[1], 1.5 * rough[2]))
    every, one = np.arange(40), np.ones(40)
    around = Ends(HOT * one, COLD * one, 0 * one, 0 * one, 0 * one, 0 * one, one, one < 0)
    counts = np.array([8, 16, 32, 64])
    power = [
        profiles(legs, every, around, 2500 * one, straight(legs, every, around, n)).power[0] for n in (*counts, 160)
    ]
    errors = [np.sqrt(np.mean((each / power[-1] - 1) ** 2)) for each in power[:-1]]
    order = -np.polyfit(np.log(counts), np.log(errors), 1)[0]
    assert order > 3.75  # 0.25 of slack for the scatter of knots between Gauss points


@pytest.mark.parametrize("by", [1, 2])
def test_sensitivities_are_the_slopes_of_differences(by, legs):
    """By J, and by ln L at constant J: resistances go as 1/L, the side loss as L²."""
    h = 1e-5

    def at(step: float) -> Profiles:
        if by == 1:
            return made(legs, 12, J + 1e3 * step)
        at_length, here = np.exp(step), ends()
        names = ("hot_resistance", "cold_resistance", "contact")
        changed = {name: getattr(here, name) / at_length for name in names} | {"side": here.side * at_length**2}
        return made(legs, 12, around=replace(here, **changed))

    less, more, here = at(-h), at(h), made(legs, 12)
    for name in FLOWS:
        slope = (getattr(more, name)[0] - getattr(less, name)[0]) / (2 * h)
        told = getattr(here, name)[by] * (1e3 if by == 1 else 1.0)
        # differences of second order: h² of the curvature, and rounding over h
        assert told == pytest.approx(slope, rel=1e-6, abs=1e-7 * np.max(np.abs(here.flowing)))


def test_an_idle_cold_end_takes_in_nothing(legs):
    one = np.ones(4)
    around = replace(ends(), side=0 * one, idle=one > 0)
    cooling = made(legs, 16, -np.full(4, 400.0), around)
    assert cooling.found.all()
    assert cooling.to_cold[0] == pytest.approx(np.zeros(4), abs=1e-10 * np.min(cooling.flowing))
    assert np.all(cooling.cold_end[0] < cooling.hot_end[0])


def test_a_finer_state_is_the_same_profile(legs):
    few = made(legs, 8)
    many = profiles(legs, EVERY, ends(), J, finer(few.state, 24))
    assert many.power[0] == pytest.approx(few.power[0], rel=1e-5)
    assert finer(few.state, 8) == pytest.approx(few.state, rel=1e-10)


def test_where_there_is_no_steady_state_none_is_found(legs):
    assert not np.any(made(legs, 8, np.full(4, 1e7)).found)
