"""Couples and segmented legs of a brief: who may join whom, and that each part is at its best."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from legwright.base.errors import InputError
from legwright.candidate.library import load_candidate
from legwright.candidate.straps import load_straps
from legwright.decide.brief import load_brief
from legwright.decide.couple import best_pairs, designed, join, pair, rank_with
from legwright.decide.rank import rank_one
from legwright.leg.segments import compatibility_factor
from legwright.physics.properties import evaluate

ROOT = Path(__file__).resolve().parents[2]
EXAMPLE = ROOT / "examples" / "drying-tunnel.toml"


@pytest.fixture(scope="module")
def job():
    return load_brief(EXAMPLE)


def test_a_couple_lies_between_its_legs(job):
    """With the brief's contacts; 1e-4: rank's own search of the current."""
    n, p = load_candidate("mg3sbbi-n"), load_candidate("mgagsb-p")
    found = pair(job, p, n)
    low, high = sorted(rank_one(job, one).score for one in (n, p))
    assert low * (1 - 1e-4) < found.running.efficiency < high * (1 + 1e-4)
    assert [leg[0].candidate.name for leg in found.legs] == ["mg3sbbi-n", "mgagsb-p"]
    assert found.running.efficiency < found.ideal.efficiency


def test_compatibility_is_that_of_the_parts(job):
    part = pair(job, load_candidate("mg3sbbi-n"), load_candidate("mgagsb-p")).legs[0][0]
    at = np.array([job.duty.hot_K])
    made = evaluate(part.candidate, at, part.doping, part.size, length=job.task.felt_length)
    expected = compatibility_factor(-made.seebeck, made.zt, made.temperature)
    assert part.compatibility[0] == pytest.approx(float(expected[0]), rel=1e-12)


def test_strains_are_differences_of_expansion_from_room_temperature(job):
    n, p = load_candidate("mg3sbbi-n"), load_candidate("mgagsb-p")
    found = pair(job, n, p)
    a, b = (one.data.cell.thermal_expansion.si for one in (n, p))
    rise = job.duty.hot_K - 300
    assert found.strains["parts"] == pytest.approx(abs(a - b) * rise, rel=1e-12, abs=1e-18)
    for strap, expansion in load_straps().items():
        assert found.strains[strap] == pytest.approx(max(abs(a - expansion), abs(b - expansion)) * rise, rel=1e-12)


def test_a_strained_couple_says_so():
    """Manganese silicide against silicon-germanium: 12 and 4.3 ppm/K over 550 K are 0.4 %."""
    brief = at_most_efficiency(850.0)
    found = pair(brief, load_candidate("sige-n"), load_candidate("mnsi-p"))
    assert found.strains["parts"] > 2e-3
    assert "expansion-mismatch" in found.flags


def test_legs_of_one_carrier_and_segments_of_two_are_refused(job):
    with pytest.raises(InputError, match="both n"):
        pair(job, load_candidate("mg3sbbi-n"), load_candidate("bitese-n"))
    with pytest.raises(InputError, match="of one carrier"):
        designed(job, [load_candidate("mg3sbbi-n"), load_candidate("bisbte-p")])


@pytest.mark.parametrize("change", [{"side_loss_W_per_m3_K": 1e4}, {"length_free_mm": (0.5, 5.0)}])
def test_what_couples_do_not_know_is_refused(job, change):
    brief = job.model_copy(update={"leg": job.leg.model_copy(update=change)})
    with pytest.raises(InputError, match="not for couples"):
        pair(brief, load_candidate("mg3sbbi-n"), load_candidate("mgagsb-p"))


def test_rank_with_a_partner_orders_couples(job):
    partner = load_candidate("mg3sbbi-n")
    rows = rank_with(job, EXAMPLE, partner)
    assert {row.candidate.data.carrier for row in rows} == {"p"}
    assert [row.rank for row in rows] == list(range(1, len(rows) + 1))
    assert [row.score for row in rows] == sorted((row.score for row in rows), reverse=True)
    best = rows[0]
    assert "score-of-couple" in best.flags
    found = pair(job, best.candidate, partner)
    assert best.score == pytest.approx(float(found.running.efficiency), rel=1e-9)


def test_the_best_pairs_are_those_of_single_pairs(job):
    use = job.candidates.model_copy(update={"use": ("mg3sbbi-n", "bitese-n", "mgagsb-p", "znsb-p")})
    brief = job.model_copy(update={"candidates": use})
    pairs = best_pairs(brief, EXAMPLE)
    assert len(pairs) == 4
    assert [one.score for one in pairs] == sorted((one.score for one in pairs), reverse=True)
    for one in pairs[:2]:
        found = pair(brief, one.n.candidate, one.p.candidate).running
        assert one.score == pytest.approx(float(found.efficiency), rel=1e-9)
        assert one.area_ratio == pytest.approx(float(found.area_ratio), rel=1e-6)
    assert best_pairs(brief, EXAMPLE, count=1)[0].score == pairs[0].score


def test_pairs_of_coolers_are_ordered_by_reach():
    brief = load_brief(ROOT / "examples" / "sensor-cooler.toml")
    duty = brief.duty.model_copy(update={"maximise": "delta_t"})
    use = brief.candidates.model_copy(update={"use": ("bitese-n", "bisbte-p", "bi2te3-n")})
    pairs = best_pairs(brief.model_copy(update={"duty": duty, "candidates": use}), "brief.toml")
    assert len(pairs) == 2
    assert pairs[0].score > pairs[1].score > 40
    assert pairs[0].area_ratio is None


def test_segments_do_better_than_the_better_material_alone():
    """Bismuth telluride under lead telluride, as in Snyder, Applied Physics Letters 84, 2436 (2004)."""
    brief = load_brief(ROOT / "examples" / "kiln-flue.toml")
    names = ("pbte-p", "bisbte-p")
    both = [load_candidate(name) for name in names]
    found = join(brief, [designed(brief, both)])
    (leg,) = found.legs
    assert [part.candidate.name for part in leg] == list(names)
    assert leg[0].cold == leg[1].hot <= both[1].data.service.highest_temperature.si * (1 + 1e-9)
    assert sum(part.share for part in leg) == pytest.approx(1.0)
    assert found.running.efficiency > 1.05 * rank_one(brief, both[0]).score


def test_segments_that_do_not_suit_each_other_say_so():
    """Silicon-germanium over bismuth antimony telluride: factors near 1.5 and 4 per volt where they meet."""
    brief = at_most_efficiency(1073.0)
    found = join(brief, [designed(brief, [load_candidate("sige-p"), load_candidate("bisbte-p")])])
    upper, lower = found.legs[0]
    assert lower.compatibility[0] > 2 * upper.compatibility[-1]
    assert "segments-fight" in found.flags


def at_most_efficiency(hot: float):
    """The furnace's brief at that hot side, for efficiency, any doping."""
    brief = load_brief(ROOT / "examples" / "enamel-furnace.toml")
    duty = brief.duty.model_copy(update={"maximise": "efficiency", "hot_K": hot})
    return brief.model_copy(update={"duty": duty, "doping": None})


def test_interfaces_follow_the_ends_when_exchangers_take_their_share():
    brief = load_brief(ROOT / "examples" / "kiln-flue.toml")
    hampered = brief.leg.model_copy(update={"hot_exchanger_K_cm2_per_W": 5.0, "contact_uohm_cm2": 10.0})
    brief = brief.model_copy(update={"leg": hampered})
    found = join(brief, [designed(brief, [load_candidate("pbte-p"), load_candidate("bisbte-p")])])
    (leg,) = found.legs
    assert brief.duty.cold_K < leg[0].cold < leg[0].hot < brief.duty.hot_K
    assert found.running.efficiency < found.ideal.efficiency
