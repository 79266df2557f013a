"""Best currents of legs by the quick ways against the boundary-value solver, in one run; seconds are printed."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import replace

import numpy as np

from legwright.leg.balance import LegMaterial
from legwright.leg.duty import GOALS, Duty, Setting, best_score
from legwright.leg.reference import best_at

LEGS = 1024
REAL = Setting(contact=1e-9, hot_resistance=5e-5, cold_resistance=5e-5, side_loss=1e4)
DUTIES = [
    Duty(kind, hot, cold, goal, 1e-3)
    for kind, hot, cold in (("generator", 600.0, 300.0), ("cooler", 300.0, 285.0))
    for goal in GOALS[kind]
]


def material(duty: Duty, legs: int) -> LegMaterial:
    """Legs that vary over temperature and from one to the next by a factor of two or so."""
    rng = np.random.default_rng(11)
    t = np.linspace(*duty.span, 9)
    x = ((t - t[0]) / (t[-1] - t[0]))[:, None]

    def values(scale: float) -> np.ndarray:
        return scale * np.exp(rng.uniform(-0.3, 0.3, legs) + rng.uniform(-0.4, 0.4, legs) * x)

    return LegMaterial.from_nodes(t, values(2e-4), values(1e-5), values(1.5))


def timed(call: Callable[[], object]) -> float:
    """Processor time of this process: what else runs on the machine counts little."""
    start = time.process_time()
    call()
    return time.process_time() - start


def test_the_best_current_takes_a_hundredth_of_the_boundary_value_solver_at_most(capsys):
    for duty in DUTIES:
        told = [duty.maximise]
        for setting in (Setting(), REAL):
            job = replace(duty, setting=setting)
            legs = material(job, LEGS)
            rate = LEGS / min(timed(lambda legs=legs, job=job: best_score(legs, job)) for _ in range(4))
            one = LegMaterial.from_nodes(*nodes_of(material(job, 1)))
            slow = min(timed(lambda one=one, job=job: best_at(one, job, (1e6, 5e6))) for _ in range(2))
            told.append(f"{'ideal' if setting.ideal else 'real'} {rate:,.0f} legs/s, {rate * slow:,.0f} times")
            assert rate * slow >= 100
        with capsys.disabled():
            print("\n" + "; ".join(told), end="")


def nodes_of(many: LegMaterial) -> tuple[np.ndarray, ...]:
    """The first leg's nodes and values, for the solver that takes one."""
    t = many.seebeck.x
    return t, *(spline(t)[:, 0] for spline in (many.seebeck, many.resistivity, many.thermal_conductivity))
