"""Legs of several materials: one material is itself, two do best where they should, and unlike ones fight."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

from legwright.leg.balance import LegMaterial, cool, cool_past_peak, generate
from legwright.leg.couple import best_operation
from legwright.leg.duty import Duty
from legwright.leg.segments import best_interfaces, compatibility_factor, reduced_efficiency
from legwright.leg.stream import Segments, stream, through, through_past_peak

HOT, COLD, LENGTH = 700.0, 300.0, 1e-3
FREE = [1e4, 1e4, 1e4]  # K: no material's limit
DUTY = Duty("generator", HOT, COLD, "efficiency", LENGTH)


def of(seebeck, resistivity, conductivity) -> LegMaterial:
    t = np.linspace(COLD - 100, HOT + 150, 41)
    return LegMaterial.from_nodes(
        t, *(value(t) * np.ones_like(t) for value in (seebeck, resistivity, conductivity))
    )


def constant(seebeck: float, resistivity: float, conductivity: float) -> LegMaterial:
    return of(*(lambda t, value=value: value for value in (seebeck, resistivity, conductivity)))


@pytest.mark.parametrize("interfaces", [(500.0,), (650.0, 320.0)])
def test_segments_of_one_material_are_the_leg(interfaces, telluride):
    """To 1e-9: both marches have converged to less, fourth order in 1/192."""
    material = telluride.material(200.0, 850.0)
    leg = Segments((material,) * (len(interfaces) + 1), interfaces)
    w = np.array([0.05, 0.1, 0.3])
    parts, whole = through(leg, HOT, COLD, +1, w, LENGTH, 192), generate(material, HOT, COLD, w, 192)
    assert 1 - parts.cold / parts.hot == pytest.approx(whole.efficiency, rel=1e-9, abs=1e-12)
    assert parts.current_length == pytest.approx(whole.current_times_length, rel=1e-9)
    risen, cooled = through(leg, HOT, COLD, -1, w, LENGTH, 192), cool(material, HOT, COLD, w, 192)
    assert risen.current_length * risen.cold == pytest.approx(cooled.heat_times_length, rel=1e-9)
    peak = 760.0
    inside = through_past_peak(leg, HOT, COLD, np.array(peak), LENGTH, 768)
    alone = cool_past_peak(material, HOT, COLD, peak, 768)
    assert inside.cold / (inside.hot - inside.cold) == pytest.approx(float(alone.cop), rel=1e-9)
    # from rest lengths converge as steps^−2.5
    assert inside.current_length == pytest.approx(float(alone.current_times_length), rel=1e-6)


def test_constant_properties_in_two_segments_have_a_closed_form():
    """w² grows by 2κρΔT in each segment and w by (S_above − S_below) T_i at the interface; lengths by ∫κ/w dT."""
    a, b, middle, w = (2e-4, 1e-5, 1.5), (1.6e-4, 2e-5, 1.0), 480.0, 0.08
    made = through(Segments((constant(*a), constant(*b)), (middle,)), HOT, COLD, +1, np.array(w), LENGTH, 48)
    above = math.sqrt(w**2 + 2 * a[1] * a[2] * (HOT - middle))
    start = above + (a[0] - b[0]) * middle
    below = math.sqrt(start**2 + 2 * b[1] * b[2] * (middle - COLD))
    assert made.hot == pytest.approx(a[0] * HOT + w, rel=1e-14)
    assert made.cold == pytest.approx(b[0] * COLD + below, rel=1e-12)
    # ∫κ dT/√(w² + 2κρ(T_top − T)) = (w_bottom − w_top)/ρ; 1e-7: Simpson's rule in 48 steps
    lengths = (above - w) / a[1], (below - start) / b[1]
    assert made.current_lengths == pytest.approx(lengths, rel=1e-7)


def test_a_joint_heats_where_it_stands():
    """Against a march along x of its own, κ dT/dx = j S T − q, with the joint's j² ρ in between."""
    a, b, middle, joint = (2e-4, 1e-5, 1.5), (1.6e-4, 2e-5, 1.0), 480.0, 3e-9
    leg = Segments((constant(*a), constant(*b)), (middle,), joint)
    made = through(leg, HOT, COLD, +1, np.array(0.08), LENGTH, 96)
    j = float(made.current_length) / LENGTH
    flux, t = j * float(made.hot), HOT
    for (s, rho, kappa), part in zip((a, b), made.current_lengths, strict=True):
        span = float(part) / j

        def slopes(_: float, y: np.ndarray, s=s, rho=rho, kappa=kappa) -> list[float]:
            gradient = -(y[1] - j * s * y[0]) / kappa
            return [gradient, j**2 * rho + j * s * gradient]

        found = solve_ivp(slopes, (0.0, span), [t, flux], rtol=1e-10, atol=1e-9)
        t, flux = found.y[:, -1]
        flux += j**2 * joint if kappa == a[2] else 0.0
    assert t == pytest.approx(COLD, abs=1e-4)  # Simpson's rule for the lengths
    assert flux == pytest.approx(j * float(made.cold), rel=1e-6)


def test_the_best_interface_is_where_both_materials_do_the_same():
    """Per current dΦ/dT = S − κρ/w, so of two materials of one S the lesser κρ wins: they cross at 500 K, whatever
    the current. To the share of the last grid; the goal is flat there."""
    hot = of(lambda t: 2e-4, lambda t: 5e-3 / t, lambda t: 2.0)
    cold = of(lambda t: 2e-4, lambda t: 2e-8 * t, lambda t: 2.0)
    leg = best_interfaces([hot, cold], DUTY, FREE[:2])
    assert leg.interfaces[0] == pytest.approx(500.0, abs=0.05)
    joined, one, other = (
        float(best_operation([part], DUTY).score) for part in (leg, Segments((hot,)), Segments((cold,)))
    )
    assert joined > max(one, other) * 1.05


def test_three_segments_take_what_helps():
    """A third material that is never better gets no length, and three are as good as two."""
    hot = of(lambda t: 2e-4, lambda t: 5e-3 / t, lambda t: 2.0)
    cold = of(lambda t: 2e-4, lambda t: 2e-8 * t, lambda t: 2.0)
    poor = constant(1.5e-4, 3e-5, 2.0)
    two, three = (best_interfaces(parts, DUTY, FREE[: len(parts)]) for parts in ([hot, cold], [hot, poor, cold]))
    assert three.interfaces[0] - three.interfaces[1] < 0.1
    scores = [float(best_operation([leg], DUTY).score) for leg in (two, three)]
    assert scores[1] == pytest.approx(scores[0], rel=1e-6)


def test_a_ceiling_is_kept():
    hot = of(lambda t: 2e-4, lambda t: 5e-3 / t, lambda t: 2.0)
    cold = of(lambda t: 2e-4, lambda t: 2e-8 * t, lambda t: 2.0)
    leg = best_interfaces([hot, cold], DUTY, [1e4, 430.0])
    assert leg.interfaces[0] == pytest.approx(430.0, abs=1e-3)


def test_an_incompatible_segment_costs_efficiency_though_its_zt_is_higher():
    """Snyder, Applied Physics Letters 84, 2436 (2004): SiGe on a TAGS leg lowers the efficiency although its zT is
    higher than nothing, as its compatibility factor is a fraction of that of the rest. Here in two made-up halves:
    zT = 1 below 500 K, and above it either like material or one of a quarter of the factor at the same zT."""
    middle, factor = 500.0, 4.0

    def of_zt_one(seebeck: float) -> LegMaterial:
        return of(lambda t: seebeck, lambda t: seebeck**2 * t / 1.5, lambda t: 1.5)

    below = of_zt_one(2e-4)
    like = Segments((below, below), (middle,))
    unlike = Segments((of_zt_one(factor * 2e-4), below), (middle,))
    s_like, s_unlike = (compatibility_factor(s, 1.0, middle) for s in (2e-4, factor * 2e-4))
    assert s_like / s_unlike == pytest.approx(factor)
    lower = Duty("generator", middle, COLD, "efficiency", LENGTH)
    scores = [float(best_operation([leg], DUTY).score) for leg in (like, unlike)]
    alone = float(best_operation([Segments((below,))], lower).score)
    assert scores[1] < 0.75 * scores[0]
    # of its own the upper half is as good as the like one
    upper = Duty("generator", HOT, middle, "efficiency", LENGTH)
    halves = [float(best_operation([Segments((part,))], upper).score) for part in (below, unlike.materials[0])]
    assert halves[0] == pytest.approx(halves[1], rel=1e-6)
    assert scores[1] < alone + halves[1] * (1 - alone)


def test_reduced_efficiency_is_the_leg_of_a_thin_slice():
    """Snyder & Ursell (2003): η = η_r ΔT/T for a small difference; 1e-3: half a kelvin's share of the slope."""
    s, zt, t = 2e-4, 0.8, 500.0
    material = constant(s, s**2 * t / zt / 1.5, 1.5)
    best = compatibility_factor(s, zt, t)
    for u in (0.5 * best, best, 1.5 * best):
        made = generate(material, t + 0.5, t - 0.5, np.array(1 / u))
        assert made.efficiency == pytest.approx(float(reduced_efficiency(u, s, zt, t)) / t, rel=2e-3)
    assert reduced_efficiency(0.99 * best, s, zt, t) < reduced_efficiency(best, s, zt, t)
    assert reduced_efficiency(1.01 * best, s, zt, t) < reduced_efficiency(best, s, zt, t)


@settings(derandomize=True, max_examples=15, deadline=None)
@given(
    st.tuples(st.floats(1e-4, 3e-4), st.floats(3e-6, 5e-5), st.floats(0.5, 4)),
    st.tuples(st.floats(1e-4, 3e-4), st.floats(3e-6, 5e-5), st.floats(0.5, 4)),
)
def test_a_segmented_leg_is_never_worse_than_its_better_material_and_obeys_carnot(a, b):
    """An interface at an end leaves one material; 1e-4: the last grid does not stand quite at the end."""
    parts = [constant(*a), constant(*b)]
    leg = best_interfaces(parts, DUTY, FREE[:2])
    joined = best_operation([leg], DUTY)
    alone = [float(best_operation([Segments((part,))], DUTY).score) for part in parts]
    assert joined.score >= max(alone) * (1 - 1e-4)
    assert joined.score < 1 - COLD / HOT
    shares = stream(leg, DUTY, joined.drives[0], HOT, COLD).shares
    assert sum(map(float, shares)) == pytest.approx(1.0, rel=1e-12)
