"""The best score of a leg against Ioffe's closed forms and against an optimised boundary-value solution."""

import math
from functools import partial

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from legwright.leg.balance import LegMaterial
from legwright.leg.duty import GOALS, SCORE_NAMES, Duty, best_score

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

S, KAPPA, LENGTH = 2e-4, 1.6, 2e-3
#: rounds of zooming after which only rounding of a flat top is left
MANY = 16


def duty(maximise: str, hot: float, cold: float) -> Duty:
    kind = next(kind for kind, goals in GOALS.items() if maximise in goals)
    return Duty(kind, hot, cold, maximise, LENGTH)


def score(leg: object, maximise: str, hot: float, cold: float, rounds: int = MANY) -> float:
    job = duty(maximise, hot, cold)
    return float(best_score(leg.material(*job.span), job, rounds))


GENERATORS = pytest.mark.parametrize(
    ("z", "hot", "cold"),
    [(1 / 450, 600.0, 300.0), (2e-4, 500.0, 400.0), (1e-3, 1200.0, 350.0), (6e-3, 600.0, 300.0)],
)
COOLERS = pytest.mark.parametrize(
    ("z", "hot", "cold"), [(3e-3, 300.0, 270.0), (2e-3, 300.0, 299.0), (1e-3, 400.0, 360.0), (3e-3, 292.6, 222.0)]
)


@GENERATORS
def test_efficiency_is_ioffes(z, hot, cold, make_constant):
    # Ioffe (1957): η = (ΔT/T_h)(M − 1)/(M + T_c/T_h), M = √(1 + Z T̄)
    m = math.sqrt(1 + z * (hot + cold) / 2)
    exact = (hot - cold) / hot * (m - 1) / (m + cold / hot)
    leg = make_constant(S, S**2 / (z * KAPPA), KAPPA)
    assert score(leg, "efficiency", hot, cold) == near(exact, rel=1e-12)
    # as ranked: the bracket in ln w is 5/3⁵ wide at last, and the top is flat
    assert score(leg, "efficiency", hot, cold, 4) == near(exact, rel=5e-5)


def test_efficiency_at_mean_figure_of_merit_one(make_constant):
    # Ioffe (1957): ZT̄ = 1 between 600 and 300 K → 0.10819
    leg = make_constant(S, S**2 / (KAPPA / 450), KAPPA)
    assert round(score(leg, "efficiency", 600.0, 300.0), 5) == 0.10819


@GENERATORS
def test_power_is_a_quarter_of_the_short_circuit(z, hot, cold, make_constant):
    # matched load (Ioffe 1957): (S ΔT)²/(4 ρ L), in W/cm²; Simpson's rule over 24 steps leaves 2e-7
    rho = S**2 / (z * KAPPA)
    exact = (S * (hot - cold)) ** 2 / (4 * rho * LENGTH) / 1e4
    assert score(make_constant(S, rho, KAPPA), "power", hot, cold) == near(exact, rel=5e-7)


@COOLERS
def test_coefficient_of_performance_is_ioffes(z, hot, cold, make_constant):
    # Ioffe (1957): (T_c/ΔT)(M − T_h/T_c)/(M + 1)
    m = math.sqrt(1 + z * (hot + cold) / 2)
    exact = cold / (hot - cold) * (m - hot / cold) / (m + 1)
    leg = make_constant(S, S**2 / (z * KAPPA), KAPPA)
    assert score(leg, "cop", hot, cold) == near(exact, rel=1e-10)  # small difference near ΔT_max
    assert score(leg, "cop", hot, cold, 4) == near(exact, rel=5e-5)


@COOLERS
def test_lifted_heat_is_ioffes(z, hot, cold, make_constant):
    # Ioffe (1957): [S²T_c²/2ρ − κΔT]/L. A quartic through the best five trial peaks leaves 1e-6 of the Peltier
    # term (measured)
    peltier = KAPPA * z * cold**2 / 2
    exact = (peltier - KAPPA * (hot - cold)) / LENGTH / 1e4
    found = score(make_constant(S, S**2 / (z * KAPPA), KAPPA), "heat_lifted", hot, cold)
    assert found == near(exact, abs=1e-6 * peltier / LENGTH / 1e4)


def test_largest_difference_is_half_z_t_squared(make_constant):
    # Z = 3e-3/K, 220 K → 72.6 K (Ioffe 1957)
    leg = make_constant(S, S**2 / (3e-3 * KAPPA), KAPPA)
    assert score(leg, "delta_t", 292.6, 250.0) == near(72.6, abs=1e-6)


def test_areal_figures_go_as_one_over_length(make_constant):
    leg = make_constant(S, 1e-5, KAPPA)
    for maximise, hot, cold in (("power", 500.0, 300.0), ("heat_lifted", 300.0, 290.0)):
        job = duty(maximise, hot, cold)
        short = Duty(job.kind, hot, cold, maximise, LENGTH / 4)
        material = leg.material(*job.span)
        assert best_score(material, short) == near(4 * best_score(material, job), rel=1e-12)


# ---- properties that vary with temperature, Thomson heat included, against the optimised boundary-value solution


@pytest.mark.parametrize(("hot", "cold"), [(600.0, 300.0), (450.0, 320.0)])
def test_varying_generator_matches_the_boundary_value_solution(hot, cold, telluride, reference):
    short = float(telluride.seebeck(400) * (hot - cold) / telluride.resistivity(400))
    exact = reference(telluride).efficiency(hot, cold, (0.05 * short, 0.9 * short))
    assert score(telluride, "efficiency", hot, cold) == near(exact, rel=3e-7)  # 24 steps of the march
    exact = reference(telluride).power(hot, cold, (0.1 * short, 0.9 * short)) / LENGTH / 1e4
    assert score(telluride, "power", hot, cold) == near(exact, rel=2e-6)


@pytest.mark.parametrize(("hot", "cold"), [(320.0, 290.0), (300.0, 260.0)])
def test_varying_cooler_matches_the_boundary_value_solution(hot, cold, telluride, reference):
    pull = float(telluride.seebeck(300) * cold / telluride.resistivity(300))
    model = reference(telluride)
    assert score(telluride, "cop", hot, cold) == near(model.cop(hot, cold, (0.05 * pull, pull)), rel=3e-7)
    exact = model.lift(hot, cold, (0.3 * pull, 1.5 * pull)) / LENGTH / 1e4
    peltier = 0.5 * float(telluride.seebeck(cold)) * cold * pull / LENGTH / 1e4
    assert score(telluride, "heat_lifted", hot, cold) == near(exact, abs=2e-5 * peltier)  # 25 trial peaks
    exact = model.difference(hot, 40.0, (0.3 * pull, 1.5 * pull))
    assert score(telluride, "delta_t", hot, cold) == near(exact, abs=2e-5)  # K; 96 steps


def test_variation_matters_and_is_in(telluride, make_constant):
    # the same leg with its averages held constant scores otherwise: one that dropped the variation, Thomson heat
    # with it, would have failed the comparison above by four orders of magnitude
    t = np.linspace(300, 600, 2001)
    means = (float(np.mean(f(t))) for f in (telluride.seebeck, telluride.resistivity, telluride.conductivity))
    flat, real = (score(leg, "efficiency", 600.0, 300.0) for leg in (make_constant(*means), telluride))
    assert abs(flat / real - 1) > 0.01


# ---- what cannot serve


@pytest.mark.parametrize("maximise", SCORE_NAMES)
@pytest.mark.parametrize("seebeck", [0.0, -S])
def test_a_leg_without_pull_scores_zero(maximise, seebeck, make_constant):
    assert score(make_constant(seebeck, 1e-5, KAPPA), maximise, 400.0, 300.0, 4) == 0


@pytest.mark.parametrize("maximise", ["cop", "heat_lifted"])
def test_a_cooler_beyond_its_largest_difference_scores_zero(maximise, make_constant):
    # Z = 2e-3/K at 220 K spans 48.4 K
    leg = make_constant(S, S**2 / (2e-3 * KAPPA), KAPPA)
    assert score(leg, maximise, 220 + 47.9, 220.0) > 0
    assert score(leg, maximise, 220 + 48.9, 220.0) == 0


def test_each_leg_has_its_own_best_current(make_constant, telluride):
    job = duty("efficiency", 600.0, 300.0)
    legs = [telluride, make_constant(S, 1e-5, KAPPA), make_constant(-S, 1e-5, KAPPA), make_constant(S, 1e-7, KAPPA)]
    t = np.linspace(*job.span, 7)
    names = ("seebeck", "resistivity", "conductivity")
    nodes = [np.stack([getattr(leg, name)(t) for leg in legs], axis=-1) for name in names]
    stacked = LegMaterial.from_nodes(t, *nodes)
    alone = [score(leg, "efficiency", 600.0, 300.0, 4) for leg in legs]
    assert best_score(stacked, job) == near(alone, rel=1e-12)
    assert alone[2] == 0


@st.composite
def materials(draw: st.DrawFn, low: float, high: float) -> LegMaterial:
    """Smooth properties that vary by up to a factor of several, of zT from poor to beyond anything known."""
    t = np.linspace(low, high, 7)
    x = (t - low) / (high - low)

    def property_(scale: float, small: float, large: float) -> np.ndarray:
        size = math.exp(draw(st.floats(math.log(small), math.log(large))))
        return scale * size * np.exp(draw(st.floats(-1, 1)) * x + draw(st.floats(-0.5, 0.5)) * x * (1 - x))

    return LegMaterial.from_nodes(t, property_(2e-4, 0.1, 3), property_(1e-5, 0.1, 10), property_(1.5, 0.2, 10))


@given(data=st.data(), cold=st.floats(100, 800), ratio=st.floats(1.02, 3))
@settings(derandomize=True, deadline=None, max_examples=80)
def test_no_generator_passes_carnot(data, cold, ratio):
    hot = ratio * cold
    material = data.draw(materials(cold, hot))
    efficiency = float(best_score(material, duty("efficiency", hot, cold)))
    assert 0 < efficiency < 1 - cold / hot
    power = float(best_score(material, duty("power", hot, cold)))
    assert power > 0
    assert math.isfinite(power)


@given(data=st.data(), hot=st.floats(150, 500), ratio=st.floats(0.7, 0.995))
@settings(derandomize=True, deadline=None, max_examples=80)
def test_no_cooler_passes_carnot_and_both_goals_agree_on_what_is_feasible(data, hot, ratio):
    cold = ratio * hot
    material = data.draw(materials(0.5 * hot, 1.2 * hot))
    goals = ("cop", "heat_lifted", "delta_t")
    cop, lift, span = (float(best_score(material, duty(goal, hot, cold))) for goal in goals)
    assert 0 <= cop < cold / (hot - cold)
    assert 0 <= span <= 0.5 * hot
    assert lift >= 0
    # off the edge of feasibility, where the current found decides, all three goals say the same
    if abs(span / (hot - cold) - 1) > 0.02:
        assert (cop > 0) == (lift > 0) == (span > hot - cold)


@pytest.mark.parametrize("maximise", ["efficiency", "cop"])
def test_a_better_material_scores_better(maximise, make_constant):
    hot, cold = (600.0, 300.0) if maximise == "efficiency" else (300.0, 280.0)
    legs = [make_constant(S, S**2 / (z * KAPPA), KAPPA) for z in (8e-4, 1.6e-3, 3.2e-3)]
    scores = [score(leg, maximise, hot, cold, 4) for leg in legs]
    assert scores == sorted(scores)
    assert 0 < scores[0] < 0.8 * scores[-1]
