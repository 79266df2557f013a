"""How a published sample is anchored, judged and counted; and that a spoiled model is found out."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from scipy.stats import binomtest

from legwright.base.units import MICRO, NM, PER_CM3
from legwright.candidate.library import load_candidate
from legwright.candidate.priors import load_priors
from legwright.decide.audit import (
    COVER,
    HALVES,
    UNSTATED,
    Doping,
    Verdict,
    audit,
    discrepancies,
    half_of,
    judge,
    samples,
    totals,
)
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate

HEADER = (
    "sample,candidate,source,shape,size [nm],temperature [K],hall_density [1/cm^3],seebeck [uV/K],"
    "electrical_conductivity [S/m],thermal_conductivity [W/m/K],zt [1],basis,role,note\n"
)


def table_of(
    folder: Path,
    name: str,
    density: float,
    size_nm: float = math.inf,
    given: tuple[str, ...] = ("seebeck", "sigma", "kappa", "zt"),
    hall: str = "",
    role: str = "",
    source: str = "nobody",
) -> Path:
    """A published table that the model itself would give for a sample of that density (1/cm³)."""
    size = size_nm * NM
    made = evaluate(load_candidate(name), np.array([300.0, 500.0]), density * PER_CM3, size)
    lines = [HEADER]
    for i, temperature in enumerate((300, 500)):
        figures = {
            "seebeck": made.seebeck[i] / MICRO,
            "sigma": made.electrical_conductivity[i],
            "kappa": made.thermal_conductivity[i],
            "zt": made.zt[i],
        }
        cells = [repr(float(value)) if key in given else "" for key, value in figures.items()]
        shown = "bulk" if math.isinf(size_nm) else f"{size_nm:g}"
        lines.append(f"A,{name},{source},grain,{shown},{temperature},{hall},{','.join(cells)},abstract,{role},\n")
    path = folder / "mine.csv"
    path.write_text("".join(lines), encoding="utf-8")
    return path


def test_a_sample_is_anchored_on_its_own_seebeck_coefficient_which_is_then_not_judged(tmp_path):
    found = audit([table_of(tmp_path, "pbte-n", 2.5e19)]).verdicts
    assert found[0].doping.density / PER_CM3 == pytest.approx(
        2.5e19, rel=0.01
    )  # straight lines between 61 densities
    assert found[0].doping.how == "own Seebeck coefficient at 300 K"
    judged = {(v.quantity, v.temperature) for v in found}
    assert ("seebeck", 300.0) not in judged
    assert ("seebeck", 500.0) in judged
    assert ("electrical_conductivity", 300.0) in judged
    assert all(abs(v.deviation) < 0.02 and v.inside for v in found)


def test_without_seebeck_coefficient_the_conductivity_anchors_and_is_not_judged_there(tmp_path):
    found = audit([table_of(tmp_path, "mg2sisn-n", 2e20, given=("sigma", "zt"))]).verdicts
    assert found[0].doping.density / PER_CM3 == pytest.approx(2e20, rel=0.01)
    assert {(v.quantity, v.temperature) for v in found} == {
        ("electrical_conductivity", 500.0),
        ("zt", 300.0),
        ("zt", 500.0),
    }


def test_a_published_density_is_taken_and_everything_judged(tmp_path):
    found = audit([table_of(tmp_path, "pbte-n", 2.5e19, hall="2e19")]).verdicts
    assert found[0].doping.density == pytest.approx(2e25)
    assert (found[0].doping.how, found[0].doping.anchor) == ("published density", None)
    assert len(found) == 8


def test_an_unstated_density_is_that_of_the_best_zt_and_is_said_to_be(tmp_path):
    (v, _) = audit([table_of(tmp_path, "pbte-n", 2.5e19, given=("zt",))]).verdicts
    assert v.doping.how == UNSTATED
    assert "density of the sample not published" in v.likely_cause
    best = [evaluate(load_candidate("pbte-n"), np.array([300.0, 500.0]), n, np.inf).zt.mean() for n in (1e24, 1e26)]
    at_it = evaluate(load_candidate("pbte-n"), np.array([300.0, 500.0]), v.doping.density, np.inf).zt.mean()
    assert at_it > max(best)


def test_an_undoped_sample_conducts_heat_by_its_lattice(tmp_path):
    found = audit([table_of(tmp_path, "si-n", 1e14, given=("kappa",), role="undoped")]).verdicts
    assert all(abs(v.deviation) < 1e-3 for v in found)


def test_a_material_without_candidate_is_counted_not_judged(tmp_path):
    path = table_of(tmp_path, "si-n", 1e19)
    path.write_text(path.read_text(encoding="utf-8").replace("si-n", "nothing-n"), encoding="utf-8")
    assert audit([path]).without_candidate == {"nothing-n": 8}


@pytest.mark.parametrize(("size_nm", "fitted"), [(math.inf, True), (20, False)])
def test_only_coarse_samples_of_an_anchors_source_count_as_fitted(tmp_path, size_nm, fitted):
    path = table_of(tmp_path, "bisbte-p", 3e19, size_nm, source="poudel2008")
    assert {v.fitted for v in audit([path]).verdicts} == {fitted}


def test_the_grain_law_widens_fine_grains_alone(tmp_path):
    wide = {}
    for size in (20, 1e6):
        path = table_of(tmp_path, "sige-n", 2e20, size, given=("kappa",), hall="2e20")
        wide[size] = audit([path]).verdicts[0].spread
    path = table_of(tmp_path, "sige-n", 2e20, given=("kappa",), hall="2e20")
    bulk = audit([path]).verdicts[0].spread
    assert wide[20] > 1.1 * bulk
    # other draws of the same spreads
    assert wide[1e6] == pytest.approx(bulk, rel=0.05)


def test_the_spread_is_no_less_than_that_between_laboratories():
    laboratory = load_priors().laboratory
    assert all(
        v.spread >= laboratory.zt.si if v.quantity == "zt" else v.spread >= laboratory.seebeck.si
        for sample in samples()[0][:20]
        for v in judge(sample)
    )


def test_the_same_verdicts_in_any_order():
    some = samples()[0][::9]
    forwards = [judge(sample) for sample in some]
    assert forwards == [judge(sample) for sample in reversed(some)][::-1]


def spoiled(sample):
    """The candidate with phonons that collide five times as often and carriers a third as often."""
    one = crystal(sample.candidate)
    phonons = replace(one.phonons, anharmonic_scale=5 * one.phonons.anharmonic_scale)
    electrons = replace(
        one.electrons,
        lattice_scale=3 * one.electrons.lattice_scale,
        impurity_knots=tuple((place, log + math.log(3)) for place, log in one.electrons.impurity_knots),
    )
    return replace(one, phonons=phonons, electrons=electrons)


def test_a_spoiled_library_is_rejected_by_its_cover():
    """Negative control: with honest parameters the same samples are covered, with spoiled ones they are not."""
    some = [s for s in samples()[0] if not any("unlike" in role for role in s.roles)][::2]
    honest = [v.inside for s in some for v in judge(s) if v.kind == "blind"]
    wrong = [v.inside for s in some for v in judge(s, spoiled(s)) if v.kind == "blind"]
    assert binomtest(sum(honest), len(honest), COVER).pvalue > 0.05
    assert binomtest(sum(wrong), len(wrong), COVER, alternative="less").pvalue < 1e-6


def verdict(quantity="zt", source="a", ratio=1.0, spread=0.2, missed=0.0, fitted=False, size=math.inf) -> Verdict:
    return Verdict(
        "s", "m", quantity, "grain", size, 300.0, Doping(1e25, UNSTATED), 1.0, ratio, spread, missed, fitted,
        False, False, source, "",
    )  # fmt: skip


def test_an_interval_is_ninety_per_cent_of_a_log_normal():
    one = verdict(ratio=2.0, spread=0.3, missed=0.4)
    low, high = one.ends
    assert math.log(high / 2) == pytest.approx(1.6449 * 0.5, rel=1e-4)
    assert low * high == pytest.approx(4.0)
    assert one.inside == (low <= 1.0)
    assert not verdict(ratio=-1.0).inside


def test_both_halves_hold_papers():
    sources = {source for sample in samples()[0] for source in sample.sources}
    share = sum(half_of(source) == HALVES[0] for source in sources) / len(sources)
    assert 0.3 < share < 0.7


def test_the_discrepancy_is_found_again_from_the_setting_half_alone():
    """400 papers that miss by 0.3 beyond their spread of 0.2: found within three standard errors."""
    rng = np.random.default_rng(5)
    made = [
        verdict(quantity, f"paper{i}", math.exp(rng.normal(0, math.hypot(0.3, 0.2))), size=size)
        for i in range(400)
        for quantity in ("zt", "seebeck", "thermal_conductivity", "electrical_conductivity")
        for size in (20 * NM, math.inf)
    ]
    found = discrepancies(made)
    assert all(abs(value - 0.3) < 0.06 for value in found.values())
    worse = [replace(v, predicted=50.0) if v.half == "testing" else v for v in made]
    assert discrepancies(worse) == found
    assert set(found) == {
        "zt",
        "seebeck",
        "electrical_conductivity",
        "thermal_conductivity",
        "thermal_conductivity_sized",
    }
    good = [replace(v, predicted=1.0) for v in made]
    assert set(discrepancies(good).values()) == {0.1}


def test_a_total_counts_values_and_gives_each_paper_one_vote():
    """Nine values of one paper inside, one of another outside."""
    made = [verdict(source="a") for _ in range(9)] + [verdict(source="b", ratio=9.0)]
    total = next(t for t in totals(made) if (t.material, t.quantity, t.half) == ("all", "zt", "both"))
    assert (total.values, total.papers, total.cover, total.paper_cover) == (10, 2, 0.9, 0.5)
    assert total.median_error == 0.0
    low, high = total.cover_interval
    # Clopper & Pearson (1934), 9 of 10
    assert (low, high) == pytest.approx((0.5550, 0.9975), abs=1e-4)
