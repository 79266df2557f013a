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
    assert "ideal-contacts" not in row["flags"]
    assert ideal["efficiency"] == ideal["efficiency_ideal_contacts"]
    row = legwright("rank", brief(REAL, name="real.toml"), "--json").json["rows"][0]
    assert "ideal-contacts" in row["flags"]
    assert real["efficiency"] < 0.95 * ideal["efficiency"]
    assert real["hot_end_K"] < 700
    assert real["cold_end_K"] == 400
    assert real["power_W_per_cm2"] > 0
    assert real["current_A_per_cm2"] > 0


def test_a_cooling_leg(brief, legwright):
    said = legwright("leg", "bisbte-p", brief({**COOLER, "duty.maximise": '"cop"'}), "--json").json
    assert 0 < said["cop"] < 280 / 20
    assert 40 < said["delta_t_max_K"] < 110  # ideal contacts; 70 to 75 K is what single stages of practice reach
    assert said["heat_lifted_W_per_cm2"] > 0


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


def test_the_table_names_each_figure(brief, legwright):
    said = legwright("leg", "sige-n", brief(REAL))
    assert said.code == 0
    for words in ("efficiency, ideal contacts", "power [W/cm²]", "hot end of the leg [K]", "each contact"):
        assert words in said.out
