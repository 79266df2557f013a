"""What hours of service leave of a leg, against legs made by hand; and what is unknown says so."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy import constants

from legwright.base.units import NM, PER_CM3
from legwright.candidate.hazards import evaporates
from legwright.candidate.library import candidates_folder, library_names, load_candidate
from legwright.decide.brief import load_brief
from legwright.decide.installed import deliver
from legwright.decide.rank import WINDOW_SHARE
from legwright.decide.score import leg_material
from legwright.decide.service import WORN, service
from legwright.leg.ageing import grown_size, growth_of
from legwright.leg.balance import LegMaterial
from legwright.leg.duty import score_of
from legwright.leg.installed import best_running
from legwright.physics.properties import evaluate
from legwright.physics.solubility import lasting_density

#: invented: grains of 20 nm become 200 nm in 100 hours at 1200 K
ANNEALING = """
[coarsening]
exponent = { value = 3, unit = "1", spread = 0.1, source = "this-library", basis = "from memory" }
activation_energy = { value = 300, unit = "kJ/mol", spread = 0.1, source = "this-library", basis = "from memory" }
temperature = { value = 1200, unit = "K", spread = 0.01, source = "this-library", basis = "from memory" }
from_size = { value = 20, unit = "nm", spread = 0.1, source = "this-library", basis = "from memory" }
to_size = { value = 200, unit = "nm", spread = 0.1, source = "this-library", basis = "from memory" }
hours = { value = 100, unit = "hour", spread = 0.05, source = "this-library", basis = "from memory" }
"""
BRIEF = """
title = "Test rig"
[duty]
kind = "generator"
hot_K = {hot}
cold_K = 500
maximise = "{maximise}"
[size]
shape = "{shape}"
min_nm = 10
max_nm = 5000
[leg]
{leg}
"""
DESIGN = (1.5e20 * PER_CM3, 40 * NM)


@pytest.fixture
def growing(tmp_path):
    """p-type silicon-germanium, whose dopant stays, with an annealing in its file."""
    path = tmp_path / "mine-p.toml"
    text = (candidates_folder() / "sige-p.toml").read_text(encoding="utf-8")
    path.write_text(text + ANNEALING, encoding="utf-8")
    return load_candidate(path)


@pytest.fixture
def job(tmp_path):
    def write(hot=1200, maximise="efficiency", shape="grain", leg="hours = 20000"):
        path = tmp_path / "brief.toml"
        path.write_text(BRIEF.format(hot=hot, maximise=maximise, shape=shape, leg=leg), encoding="utf-8")
        return load_brief(path)

    return write


def aged(candidate, brief, doping=DESIGN[0], size=DESIGN[1]):
    return service(deliver(candidate, brief, doping, size), brief)


def best_of(material, brief):
    return float(score_of(best_running(material, brief.task), brief.task))


def wear_of(found, process):
    return next(one for one in found.wear if one.process.startswith(process))


def by_hand(candidate, brief, doping, size, hours):
    """The aged leg, each node by itself."""
    law = growth_of(candidate.data.coarsening)
    nodes = np.linspace(brief.duty.cold_K, brief.duty.hot_K, 25)
    points = [
        evaluate(candidate, t, doping, grown_size(size, t, hours * 3600, law), brief.size.shape) for t in nodes
    ]
    columns = ([float(getattr(p, name)) for p in points] for name in ("seebeck", "electrical_conductivity"))
    seebeck, sigma = map(np.array, columns)
    heat = np.array([float(p.thermal_conductivity) for p in points])
    return LegMaterial.from_nodes(nodes, np.abs(seebeck), 1 / sigma, heat)


@pytest.mark.parametrize("maximise", ["efficiency", "power"])
@pytest.mark.parametrize("leg", ["hours = 20000", "hours = 20000\nhot_exchanger_K_cm2_per_W = 0.3"])
def test_the_aged_leg_is_a_leg_whose_size_goes_with_temperature(growing, job, maximise, leg):
    brief = job(maximise=maximise, leg=leg)
    found = aged(growing, brief)
    exact = best_of(by_hand(growing, brief, *DESIGN, 20000), brief)
    assert found.score_end == pytest.approx(exact, rel=1e-4, abs=0)  # 25 even nodes against 33 of Chebyshev
    assert found.counted == ("grain growth",)
    assert found.size[0] > 2 * DESIGN[1]
    assert found.size[-1] == pytest.approx(DESIGN[1], rel=1e-6, abs=0)  # 500 K: seven decades slower and more
    assert np.all(np.diff(found.size) < 0)
    assert np.all(np.diff(found.temperature) < 0)


def test_no_time_and_coarse_grains_change_nothing(growing, job):
    found = aged(growing, job(leg="hours = 1e-9"))
    assert found.score_end == pytest.approx(found.score_start, rel=1e-9, abs=0)
    coarse = aged(growing, job(), size=np.inf)
    assert coarse.score_end == coarse.score_start
    assert np.all(np.isinf(coarse.size))
    assert wear_of(coarse, "grain growth").status == "not expected"


def test_a_tenth_is_lost_when_it_says(growing, job):
    brief = job(maximise="efficiency")
    wear = wear_of(aged(growing, brief, size=15 * NM), "grain growth")
    assert wear.status == "known"
    assert wear.factor > 1
    later = aged(growing, job(leg=f"hours = {wear.hours}"), size=15 * NM)
    assert later.score_end / later.score_start == pytest.approx(WORN, rel=1e-3, abs=0)  # between ten times a decade


@pytest.mark.parametrize(("hours", "inside"), [(10, True), (20000, False)])
def test_the_best_start_is_the_best_of_all_that_were_aged(growing, job, hours, inside):
    brief = job(leg=f"hours = {hours}")
    found = aged(growing, brief)
    smallest, law = growing.data.making.smallest_grain.si, growth_of(growing.data.coarsening)
    sizes, nodes = np.geomspace(smallest, 5000 * NM, 40), np.linspace(500, 1200, 25)[:, None]

    def scores(start, time):
        size = grown_size(start, nodes, time * 3600, law)
        material = leg_material(growing, evaluate(growing, nodes, DESIGN[0], size))
        return score_of(best_running(material, brief.task), brief.task)

    best, fresh = np.max(scores(sizes, hours)), np.max(scores(sizes, 0.0))
    # 1e-3: the best of 65 sizes against that of 40, and what lies between them
    assert scores(np.array([found.best_start]), hours) == pytest.approx(best, rel=1e-3, abs=0)
    assert (found.start_window is not None) is inside is bool(best > WINDOW_SHARE * fresh)
    if inside:
        low, high = found.start_window
        assert low == pytest.approx(smallest, rel=1e-9, abs=0)
        assert scores(np.array([high]), hours) == pytest.approx(WINDOW_SHARE * fresh, rel=1e-3, abs=0)


def test_which_profile_the_grains_grew_in_hardly_matters(growing, job):
    """Held at the temperatures of the fresh leg instead, places would have other sizes: a second-order change."""
    brief = job(maximise="power")
    hours, law = 20000, growth_of(growing.data.coarsening)
    found = aged(growing, brief)
    fresh = aged(growing, job(maximise="power", leg="hours = 1e-9"))
    nodes = np.linspace(500, 1200, 25)
    now = np.interp(nodes, found.temperature[::-1], found.position[::-1])
    then = np.interp(now, fresh.position, fresh.temperature)
    made = evaluate(growing, nodes, DESIGN[0], grown_size(DESIGN[1], then, hours * 3600, law))
    other = best_of(leg_material(growing, made), brief)
    lost = found.score_start - found.score_end
    assert abs(other - found.score_end) < 0.1 * abs(lost)


def test_wires_and_silent_files_are_unknown(growing, job):
    silent = aged(load_candidate("sige-p"), job())
    assert silent.score_end is None
    assert silent.size is None
    assert silent.best_start is None
    for process in ("grain growth", "dopant loss", "oxidation"):
        assert wear_of(silent, process).status == "unknown"
        assert wear_of(silent, process).hours is None
    wire = aged(growing, job(shape="wire"))
    assert wear_of(wire, "grain growth").status == "unknown"
    assert wire.size is None
    assert aged(growing, job(leg="length_mm = 2")) is None


def test_a_dopant_beyond_its_solubility_is_lost_only_where_it_moves(job):
    candidate = load_candidate("sige-n")
    doping, much = candidate.data.doping, 3e20 * PER_CM3
    assert lasting_density(doping, [300.0, 770.0], much) == pytest.approx([much] * 2, rel=1e-12)
    at_1000 = much * np.exp(-0.37 * constants.e / constants.k * (1 / 1000 - 1 / 1200))
    assert lasting_density(doping, 1000.0, much) == pytest.approx(at_1000, rel=1e-12)
    assert lasting_density(doping, 1000.0, 0.5 * at_1000) == pytest.approx(0.5 * at_1000, rel=1e-12)
    found = aged(candidate, job(maximise="power"), doping=much)
    assert found.counted == ("dopant loss",)
    nodes = np.linspace(500, 1200, 61)
    made = evaluate(candidate, nodes, lasting_density(doping, nodes, much), DESIGN[1])
    exact = best_of(leg_material(candidate, made), job(maximise="power"))
    assert found.score_end == pytest.approx(exact, rel=1e-3, abs=0)  # nodes on the step
    assert "% of its score" in wear_of(found, "dopant loss").reason
    little = aged(candidate, job(), doping=1e19 * PER_CM3)
    assert little.score_end == pytest.approx(little.score_start, rel=1e-12, abs=0)
    assert wear_of(little, "dopant loss").status == "not expected"


def test_sublimation_is_a_bound_below_what_was_measured_and_unknown_above(job):
    candidate = load_candidate("sige-p")
    bare, coated = (wear_of(aged(candidate, job()), name) for name in ("sublimation, bare", "sublimation, under"))
    assert bare.status == coated.status == "at least"
    assert coated.hours == pytest.approx(100 * bare.hours, rel=1e-9, abs=0)
    wide = wear_of(aged(candidate, job(leg="hours = 20000\nwidth_mm = 3")), "sublimation, bare")
    assert wide.hours == pytest.approx(3 * bare.hours, rel=1e-9, abs=0)
    hotter = aged(candidate, job(hot=1300, leg='hours = 9\nbeyond_service = "flag"'))
    assert wear_of(hotter, "sublimation, bare").status == "unknown"
    assert wear_of(aged(load_candidate("pbte-n"), job(hot=800), 1e19 * PER_CM3), "sublimation").status == "unknown"


def test_sublimation_is_known_between_measured_rates(job, tmp_path):
    text = (candidates_folder() / "sige-p.toml").read_text(encoding="utf-8")
    measured = text[text.index("[[service.sublimation]]") : text.rindex("[[service.sublimation]]")]
    colder = measured.replace("{ value = 1273", "{ value = 400", 1)
    path = tmp_path / "mine-p.toml"
    path.write_text(text.replace("[making]", colder + "[making]", 1), encoding="utf-8")
    assert wear_of(aged(load_candidate(path), job()), "sublimation, bare").status == "known"


def test_oxidation_begins_where_the_file_says(job):
    candidate = load_candidate("cosb3-n")
    design = (3e20 * PER_CM3, 500 * NM)
    assert wear_of(aged(candidate, job(hot=640), *design), "oxidation").status == "not expected"
    hot = wear_of(aged(candidate, job(hot=800), *design), "oxidation")
    assert hot.status == "unknown"
    assert "653 K" in hot.reason


@pytest.mark.parametrize("name", library_names()[::3])
def test_every_candidate_has_an_answer(job, name):
    candidate = load_candidate(name)
    data = candidate.data
    brief = job(hot=550)
    design = deliver(candidate, brief, data.doping.highest.si, 300 * NM)
    found = service(design, brief)
    assert (found is None) == (design.running is None)
    for wear in found.wear if found else ():
        assert (wear.hours is None) == (wear.status in ("unknown", "not expected"))
        assert wear.reason


def test_a_leg_that_does_not_run_does_not_age(job):
    brief = job()
    design = deliver(load_candidate("sige-p"), brief, *DESIGN)
    assert service(replace(design, running=None), brief) is None


def test_vapour_matters_near_the_service_limit():
    telluride, silicon = load_candidate("pbte-n"), load_candidate("si-p")
    limit = telluride.data.service.highest_temperature.si
    assert evaporates(telluride, 0.91 * limit)
    assert not evaporates(telluride, 0.89 * limit)
    assert not evaporates(silicon, 2000.0)
    antimonide = load_candidate("bisbte-p")
    limit = antimonide.data.service.highest_temperature.si
    assert evaporates(antimonide, limit - 49.9)
