"""What every maker of legs knows must come out of the ranking.

Source of the claims: common practice. Bismuth tellurides from room temperature to about 500 K; silicon-germanium to
1200 K and more, where tellurides would melt or sublime; alloying silicon with germanium pays for legs.
"""

import pytest


def ranked(legwright, path):
    said = legwright("rank", path, "--json")
    assert said.code == 0
    return {row["candidate"]: row for row in said.json["rows"]}


def test_near_room_temperature_the_bismuth_tellurides_lead(legwright, brief):
    rows = ranked(legwright, brief({"candidates.use": '"all"', "duty.hot_K": "400", "duty.cold_K": "300"}))
    assert {rows["bisbte-p"]["rank"], rows["bitese-n"]["rank"]} == {1, 2}


@pytest.fixture
def radioisotope_heat(brief):
    use = '["bisbte-p", "bitese-n", "pbte-n", "pbte-p", "si-n", "si-p", "sige-n", "sige-p"]'
    return brief({"candidates.use": use, "duty.hot_K": "1200", "duty.cold_K": "300"})


def test_at_1200_kelvin_silicon_germanium_leads_and_tellurides_cannot_serve(legwright, radioisotope_heat):
    rows = ranked(legwright, radioisotope_heat)
    for carrier in "np":
        assert rows[f"sige-{carrier}"]["score"] > rows[f"si-{carrier}"]["score"] > 0
    for name in ("bisbte-p", "bitese-n", "pbte-n", "pbte-p"):
        assert rows[name]["score"] == 0
        assert rows[name]["flags"] == ["above-service-temperature"]


def test_fine_grains_help_silicon_more_than_its_alloy(legwright, radioisotope_heat):
    """Disorder already stops the short waves of the alloy, so boundaries have less left to do."""
    rows = ranked(legwright, radioisotope_heat)
    for carrier in "np":
        assert rows[f"si-{carrier}"]["gain_over_bulk"] > rows[f"sige-{carrier}"]["gain_over_bulk"] > 1
