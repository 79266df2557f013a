"""The leg verb, as a user types it."""

from __future__ import annotations

import pytest

COOLER = {"duty.kind": '"cooler"', "duty.hot_K": "300", "duty.cold_K": "280", "candidates.use": '["bisbte-p"]'}
REAL = {"leg.length_mm": "1.5", "leg.contact_uohm_cm2": "20", "leg.hot_exchanger_K_cm2_per_W": "5"}


def test_a_generating_leg_loses_to_contacts_and_exchangers(brief, legwright):
    ideal = legwright("leg", "sige-n", brief(name="ideal.toml"), "--json").json
    real = legwright("leg", "sige-n", brief(REAL, name="real.toml"), "--json").json
    row = legwright("rank", brief(name="ideal.toml"), "--json").json["rows"][0]
    assert ideal["efficiency"] == pytest.approx(row["score"], rel=1e-4)  # rank's own search of the current
    assert ideal["efficiency"] == ideal["efficiency_ideal_contacts"]
    row = legwright("rank", brief(REAL, name="real.toml"), "--json").json["rows"][0]
    assert real["efficiency"] == pytest.approx(row["score"], rel=1e-5)  # 9 and 17 nodes of temperature
    assert real["efficiency"] < 0.95 * ideal["efficiency"]
    assert real["hot_end_K"] < 700
    assert real["cold_end_K"] == pytest.approx(400, rel=1e-12)
    assert real["power_W_per_cm2"] > 0
    assert real["current_A_per_cm2"] > 0


def test_a_cooling_leg(brief, legwright):
    said = legwright("leg", "bisbte-p", brief({**COOLER, "duty.maximise": '"cop"'}), "--json").json
    assert 0 < said["cop"] < 280 / 20
    assert 40 < said["delta_t_max_K"] < 110  # ideal contacts; 70 to 75 K is what single stages of practice reach
    assert said["heat_lifted_W_per_cm2"] > 0


def test_a_generator_tells_its_matched_load_beside_its_best_efficiency(brief, legwright):
    economical = legwright("leg", "sige-n", brief(REAL), "--doping", "1e20", "--size", "bulk", "--json").json
    strongest = brief(REAL | {"duty.maximise": '"power"'}, name="power.toml")
    strong = legwright("leg", "sige-n", strongest, "--doping", "1e20", "--size", "bulk", "--json").json
    assert economical["power_matched_load_W_per_cm2"] == strong["power_W_per_cm2"] > economical["power_W_per_cm2"]
    assert economical["efficiency_matched_load"] == strong["efficiency"] < economical["efficiency"]


@pytest.mark.parametrize("maximise", ["cop", "heat_lifted"])
def test_rank_and_leg_give_a_cooler_the_same_figure_in_its_setting(maximise, brief, legwright):
    job = brief({**COOLER, **REAL, "duty.maximise": f'"{maximise}"', "leg.side_loss_W_per_m3_K": "1e4"})
    (row,) = legwright("rank", job, "--json").json["rows"]
    said = legwright("leg", "bisbte-p", job, "--json").json
    figure = said["cop"] if maximise == "cop" else said["heat_lifted_W_per_cm2"]
    assert figure == pytest.approx(row["score"], rel=1e-9)
    ideal = legwright("rank", brief({**COOLER, "duty.maximise": f'"{maximise}"'}, name="ideal.toml"), "--json").json
    assert row["score"] < ideal["rows"][0]["score"]


def test_a_given_design_is_kept(brief, legwright):
    said = legwright("leg", "sige-n", brief(), "--doping", "1e20", "--size", "bulk", "--json").json
    assert said["doping_per_cm3"] == pytest.approx(1e20, rel=1e-12)
    assert said["size_nm"] is None


def test_a_difference_out_of_reach_is_exit_3(brief, legwright):
    changes = {**COOLER, "duty.cold_K": "150", "duty.maximise": '"cop"'}
    said = legwright("leg", "bisbte-p", brief(changes), "--doping", "2e19", "--size", "bulk", "--json")
    assert said.code == 3
    assert said.json["cop"] is None
    assert "duty-out-of-reach" in said.json["flags"]
    reach = said.json["delta_t_max_K"]
    assert f"largest ΔT {reach:.3g} K from 300 K: cold_K at least" in said.err
    nearest = float(said.err.split()[-1])
    assert 0 <= nearest - (300 - reach) < 0.1001  # told to a tenth
    args = ("--doping", "2e19", "--size", "bulk", "--json")
    for cold, code in ((nearest, 0), (nearest - 0.2, 3)):  # the answer is the edge
        changed = brief(changes | {"duty.cold_K": str(cold)}, name=f"edge-{code}.toml")
        assert legwright("leg", "bisbte-p", changed, *args).code == code


def test_out_of_reach_without_a_design_names_what_the_best_one_reaches(brief, legwright):
    changes = {**COOLER, "duty.cold_K": "150", "duty.maximise": '"cop"'}
    said = legwright("leg", "bisbte-p", brief(changes), "--json")
    assert said.code == 3
    assert said.json["doping_per_cm3"] > 0
    assert "cold_K at least" in said.err


def test_a_hot_side_above_the_service_limit_is_exit_3(brief, legwright):
    said = legwright("leg", "bisbte-p", brief({"duty.hot_K": "900", "duty.cold_K": "300"}), "--json")
    assert said.code == 3
    assert "hot_K at most 500" in said.err
    assert said.json["efficiency"] is None
    assert said.json["flags"] == ["above-service-temperature"]


def test_side_loss_thermal_contacts_and_a_free_length(brief, legwright):
    design = ("--doping", "1e20", "--size", "bulk", "--json")
    plain = legwright("leg", "sige-n", brief(name="plain.toml"), *design).json
    lossy = brief({"leg.side_loss_W_per_m3_K": "1e5"}, name="lossy.toml")
    leaking = legwright("leg", "sige-n", lossy, *design).json
    assert leaking["efficiency"] < plain["efficiency"]
    assert leaking["heat_through_sides_W_per_cm2"] > 0 == plain["heat_through_sides_W_per_cm2"]
    exchangers = {"leg.hot_exchanger_K_cm2_per_W": "2", "leg.cold_exchanger_K_cm2_per_W": "1"}
    exchangers |= {"duty.maximise": '"power"', "leg.contact_uohm_cm2": "5"}
    fixed = legwright("leg", "sige-n", brief(exchangers, name="fixed.toml"), *design).json
    contacts = exchangers | {"leg.hot_exchanger_K_cm2_per_W": "1.5", "leg.cold_exchanger_K_cm2_per_W": "0.5"}
    contacts |= {"leg.contact_K_cm2_per_W": "0.5"}  # resistances to heat in a row add up
    same = legwright("leg", "sige-n", brief(contacts, name="contacts.toml"), *design).json
    assert same["power_W_per_cm2"] == pytest.approx(fixed["power_W_per_cm2"], rel=1e-12)
    free = exchangers | {"leg.length_free_mm": "[0.05, 50]"}
    best = legwright("leg", "sige-n", brief(free, name="free.toml"), *design).json
    assert best["power_W_per_cm2"] > fixed["power_W_per_cm2"]
    assert 0.05 < best["length_mm"] < 50


def test_the_table_names_each_figure(brief, legwright):
    said = legwright("leg", "sige-n", brief(REAL))
    assert said.code == 0
    for words in ("efficiency, ideal contacts", "power [W/cm²]", "hot end of the leg [K]", "each contact"):
        assert words in said.out


def test_free_paths_feel_a_length_that_is_named(brief, legwright):
    """Nothing moves at 3 mm; at 3 µm phonons of coarse silicon-germanium cross in flight, and zT gains by it."""
    design = ("--doping", "1e20", "--size", "bulk", "--json")
    by_length = [
        legwright("leg", "sige-n", brief(change, name=f"{k}.toml"), *design).json["efficiency"]
        for k, change in enumerate(({}, {"leg.length_mm": "3"}, {"leg.length_mm": "0.003"}))
    ]
    assert by_length[1] == pytest.approx(by_length[0], rel=1e-3)
    assert by_length[2] > 1.02 * by_length[0]
    thin, long = (
        legwright("rank", brief(change, name=f"{k}.toml"), "--json").json["rows"][0]["gain_over_bulk"]
        for k, change in enumerate(({"leg.length_mm": "0.003"}, {}))
    )
    assert 1 < thin < long  # grains gain less where the leg already stops the long paths


PARTNER = {"leg.partner": '"sige-p"'}


def test_a_partner_adds_the_couple_and_leaves_the_leg(brief, legwright):
    alone = legwright("leg", "sige-n", brief(name="alone.toml"), "--json").json
    said = legwright("leg", "sige-n", brief(PARTNER, name="couple.toml"), "--json").json
    assert {key: said[key] for key in ("efficiency", "power_W_per_cm2", "current_A_per_cm2", "hot_end_K")} == {
        key: alone[key] for key in ("efficiency", "power_W_per_cm2", "current_A_per_cm2", "hot_end_K")
    }
    assert said["partner"] == "sige-p"
    assert 0 < said["area_ratio"] < 10
    assert 0 < said["couple_efficiency"] < 1 - 400 / 700
    assert set(said["compatibility_per_V"]) == {"sige-n", "sige-p"}
    assert said["strain"] is not None
    assert {"copper", "nickel", "molybdenum"} <= set(said["strain_to_strap"])
    named = legwright("leg", "sige-n", brief(name="alone.toml"), "--partner", "sige-p", "--json").json
    assert named == said


def test_a_cooling_couple(brief, legwright):
    changes = {**COOLER, "duty.maximise": '"cop"', "leg.partner": '"bitese-n"'}
    said = legwright("leg", "bisbte-p", brief(changes), "--json").json
    assert 0 < said["couple_cop"] < 280 / 20
    assert 40 < said["couple_delta_t_max_K"] < 110
    assert said["couple_heat_lifted_W_per_cm2"] > 0


def test_segments_are_told_hot_to_cold(brief, legwright):
    said = legwright("leg", "pbte-p", brief({"duty.hot_K": "700"}), "--then", "bisbte-p", "--json").json
    assert said["candidate"] == "pbte-p > bisbte-p"
    upper, lower = said["segments"]
    assert upper["hot_K"] == 700
    assert upper["cold_K"] == lower["hot_K"]
    assert upper["length_share"] + lower["length_share"] == pytest.approx(1.0)
    assert said["efficiency"] > 0
    assert said["power_W_per_cm2"] > 0


def test_the_tables_of_couple_and_segments_name_their_figures(brief, legwright):
    said = legwright("leg", "pbte-p", brief({"duty.hot_K": "700"}), "--then", "bisbte-p", "--partner", "pbte-n")
    assert said.code == 0
    for words in ("Segments, hot to cold", "Couple with pbte-n", "cross-section of n over p", "strain to copper"):
        assert words in said.out


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("--partner", "si-n"), "both n"),
        (("--partner", "sige-q"), "no candidate"),
        (("--then", "sige-p"), "of one carrier"),
        (("--then", "si-n", "--doping", "1e20"), "several dopings"),
    ],
)
def test_legs_that_cannot_be_joined_are_refused(arguments, words, brief, legwright):
    said = legwright("leg", "sige-n", brief(), *arguments)
    assert said.code == 2
    assert said.out == ""
    assert words in said.err


def test_rank_with_a_partner_takes_the_other_carrier_and_no_draws(brief, legwright):
    changes = {**PARTNER, "candidates.use": '["sige-n", "sige-p", "si-n"]'}
    rows = legwright("rank", brief(changes), "--json").json["rows"]
    assert {row["candidate"] for row in rows} == {"sige-n", "si-n"}
    assert all("score-of-couple" in row["flags"] for row in rows)
    said = legwright("rank", brief(changes), "--draws", "8")
    assert said.code == 2
    assert "--draws" in said.err


def test_a_partner_that_is_not_there_is_refused_by_its_key(brief, legwright):
    said = legwright("rank", brief({"leg.partner": '"sige-x"'}))
    assert said.code == 2
    assert "leg.partner" in said.err


def test_hours_of_service_are_told_only_when_asked(brief, legwright, tmp_path):
    design = ("--doping", "2e20", "--size", "50")
    assert "service" not in legwright("leg", "sige-n", brief(), *design, "--json").json
    path, table = brief({"leg.hours": "40000", "leg.width_mm": "2.7"}), tmp_path / "rows.csv"
    said = legwright("leg", "sige-n", path, *design, "--json", "--csv", table).json
    service = said["service"]
    assert service["hours"] == 40000
    assert service["width_mm"] == pytest.approx(2.7, rel=1e-12)
    assert service["score_start"] == pytest.approx(said["efficiency"], rel=1e-6)
    assert service["score_end_counts"] == ["dopant loss"]
    assert service["size_hot_end_nm"] is None  # no annealing of this alloy is known whole
    assert service["along"]["temperature_K"][0] == pytest.approx(700, abs=1e-9)
    wears = service["hours_to_lose_a_tenth"]
    assert wears["grain growth"]["status"] == "unknown"
    assert wears["sublimation, under silicon nitride"]["status"] == "at least"
    assert wears["sublimation, under silicon nitride"]["hours"] > 1e5
    header, row = table.read_text(encoding="utf-8").splitlines()
    assert "service.score_end" in header
    assert "[" not in row
    out = legwright("leg", "sige-n", path, *design).out
    for words in ("After 40000 hours", "Hours until a tenth is lost", "at least", "unknown"):
        assert words in out


def test_a_candidate_past_its_service_limit_ranks_with_its_flags_when_the_brief_says_so(brief, legwright):
    hot = {"duty.hot_K": "900", "candidates.use": '["pbte-p"]'}
    refused = legwright("rank", brief(hot), "--json")
    assert refused.code == 3
    assert refused.json["rows"][0]["flags"] == ["above-service-temperature"]
    flagged = {**hot, "leg.beyond_service": '"flag"'}
    row = legwright("rank", brief(flagged), "--json").json["rows"][0]
    assert row["score"] > 0
    assert {"above-service-temperature", "volatile-near-service-limit"} <= set(row["flags"])
    said = legwright("leg", "pbte-p", brief(flagged), "--json")
    assert said.code == 0
    assert said.json["efficiency"] == pytest.approx(row["score"], rel=1e-3)  # rank's own search of the current
