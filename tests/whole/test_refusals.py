"""Bad input: exit code 2, one line on stderr that says where and what is allowed, nothing printed or written."""

from pathlib import Path

import pytest

DEMO = Path(__file__).resolve().parents[2] / "examples" / "candidates"

SHEET = {"--temperature": "300", "--doping": "1e20", "--size": "50"}

# changes to the brief of conftest.py (dotted key: TOML text, None leaves it out), and what the refusal must name
BRIEFS = {
    "unknown key at the top": ({"sizes.shape": '"grain"'}, ["sizes", "unknown key", "did you mean 'size'?"]),
    "unknown key inside": ({"duty.hot_k": "700"}, ["duty.hot_k", "unknown key", "did you mean 'hot_K'?"]),
    "missing key": ({"duty.cold_K": None}, ["duty.cold_K", "is missing"]),
    "missing table": ({"size.shape": None, "size.min_nm": None, "size.max_nm": None}, ["size", "is missing"]),
    "text for a number": ({"duty.hot_K": '"700"'}, ["duty.hot_K", "'700'", "number"]),
    "truth for a number": ({"duty.hot_K": "true"}, ["duty.hot_K", "True", "number"]),
    "number for text": ({"title": "7"}, ["title", "7", "string"]),
    "negative temperature": ({"duty.cold_K": "-3"}, ["duty.cold_K", "-3", "greater than or equal to 2"]),
    "zero temperature": ({"duty.cold_K": "0"}, ["duty.cold_K", "0", "greater than or equal to 2"]),
    "temperature of the sun": ({"duty.hot_K": "5772"}, ["duty.hot_K", "5772", "3000"]),
    "hot below cold": ({"duty.hot_K": "350"}, ["duty", "hot_K = 350", "above cold_K = 400"]),
    "hot equal to cold": ({"duty.hot_K": "400"}, ["duty", "hot_K = 400", "above cold_K = 400"]),
    "nan": ({"duty.hot_K": "nan"}, ["duty.hot_K", "nan", "finite"]),
    "inf": ({"size.max_nm": "inf"}, ["size.max_nm", "inf", "finite"]),
    "minus inf": ({"size.min_nm": "-inf"}, ["size.min_nm", "-inf", "finite"]),
    "unknown kind": ({"duty.kind": '"generater"'}, ["duty.kind", "'generater'", "did you mean 'generator'?"]),
    "unknown goal": ({"duty.maximise": '"eficiency"'}, ["duty.maximise", "did you mean 'efficiency'?"]),
    "goal of a cooler": ({"duty.maximise": '"cop"'}, ["duty", "'cop'", "'generator'", "efficiency, power"]),
    "goal of a generator": (
        {"duty.kind": '"cooler"'},
        ["duty", "'efficiency'", "'cooler'", "cop, delta_t, heat_lifted"],
    ),
    "shape misspelt": ({"size.shape": '"gran"'}, ["size.shape", "'gran'", "did you mean 'grain'?"]),
    "zero size": ({"size.min_nm": "0"}, ["size.min_nm", "0", "greater than or equal to 0.1"]),
    "negative size": ({"size.min_nm": "-20"}, ["size.min_nm", "-20", "greater than or equal to 0.1"]),
    "sizes turned round": ({"size.min_nm": "3000"}, ["size", "max_nm = 2000", "above min_nm = 3000"]),
    "one size": ({"size.min_nm": "2000"}, ["size", "max_nm = 2000", "above min_nm = 2000"]),
    "zero doping": (
        {"doping.min_per_cm3": "0", "doping.max_per_cm3": "1e20"},
        ["doping.min_per_cm3", "0", "greater than or equal to 1"],
    ),
    "dopings turned round": (
        {"doping.min_per_cm3": "1e20", "doping.max_per_cm3": "1e19"},
        ["doping", "max_per_cm3 = 1e+19", "above min_per_cm3 = 1e+20"],
    ),
    "half a doping range": ({"doping.min_per_cm3": "1e19"}, ["doping.max_per_cm3", "is missing"]),
    "unknown candidate": (
        {"candidates.use": '["sige-m"]'},
        ["candidates.use", "'sige-m'", "did you mean 'sige-", "bisbte-p, bitese-n"],
    ),
    "one of two unknown": ({"candidates.use": '["sige-n", "pbtee-n"]'}, ["candidates.use", "'pbte-n'"]),
    "nobody": ({"candidates.use": "[]"}, ["candidates.use", "at least one name"]),
    "number for a candidate": ({"candidates.use": "[7]"}, ["candidates.use"]),
    "no file of that name": ({"candidates.use": '["mine.toml"]'}, ["mine.toml", "no such file"]),
    "carrier misspelt": ({"candidates.carrier": '"N"'}, ["candidates.carrier", "'N'", "either, n, p"]),
    "nobody of that carrier": ({"candidates.carrier": '"p"'}, ["candidates.carrier", "'p'"]),
    "unknown element": ({"avoid.elements": '["Tx"]'}, ["avoid.elements", "'Tx'", "not an element", "Tl"]),
    "zero length": ({"leg.length_mm": "0"}, ["leg.length_mm", "0", "greater than or equal to 0.001"]),
    "leaks all its heat": ({"leg.side_loss_W_per_m3_K": "2e8"}, ["leg", "2e+08", "at most 1e+08", "1 mm"]),
    "lengths the wrong way": ({"leg.length_free_mm": "[5, 1]"}, ["leg", "[5, 1]", "[shortest, longest]"]),
    "length misspelt": ({"leg.lenght_mm": "1"}, ["leg.lenght_mm", "did you mean 'length_mm'?"]),
}

# whole contents that are no brief
FILES = {
    "not TOML": (b"this is not TOML\n", ["not valid TOML", "line 1"]),
    "the same table twice": (b"[duty]\n[duty]\n", ["not valid TOML", "line 2"]),
    "a line cut short": (b'title = "half\n', ["not valid TOML", "line 1"]),
    "binary": (bytes(range(128, 256)), ["not UTF-8"]),
    "zero bytes inside": (b'title = "a\0b"\n', ["not valid TOML"]),
    "nothing": (b"", ["is missing"]),
    "too large": (b"#" * 2_000_001, ["larger than 2000000 bytes"]),
}

# changes to the text of the demo candidate (old, new), and what the refusal must name
CANDIDATES = {
    "wrong unit": (
        'mobility = { value = 42, unit = "cm^2/V/s"',
        'mobility = { value = 42, unit = "cm/V/s"',
        ["anchor[1].mobility", "'cm/V/s'", "m^2/V/s"],
    ),
    "no unit of any kind": (
        'elastic_constant = { value = 183, unit = "GPa"',
        'elastic_constant = { value = 183, unit = "hardish"',
        ["scattering.elastic_constant", "'hardish'", "Pa"],
    ),
    "unit with a shifted zero": (
        'highest_temperature = { value = 1230, unit = "K"',
        'highest_temperature = { value = 957, unit = "degC"',
        ["service.highest_temperature", "'degC'", "shifted zero"],
    ),
    "number without a source": (
        'dielectric_constant = { value = 12.2, unit = "1", spread = 0.02, source = "workshop-notes", ',
        'dielectric_constant = { value = 12.2, unit = "1", spread = 0.02, ',
        ["scattering.dielectric_constant.source", "is missing"],
    ),
    "number without a spread": (
        'dielectric_constant = { value = 12.2, unit = "1", spread = 0.02, ',
        'dielectric_constant = { value = 12.2, unit = "1", ',
        ["scattering.dielectric_constant.spread", "is missing"],
    ),
    "unknown source": (
        'sound_longitudinal = { value = 8336, unit = "m/s", spread = 0.03, source = "workshop-notes"',
        'sound_longitudinal = { value = 8336, unit = "m/s", spread = 0.03, source = "workshop-note"',
        ["lattice.sound_longitudinal", "'workshop-note'", "did you mean 'workshop-notes'?"],
    ),
    "unknown basis": (
        'basis = "measured", note = "per primitive cell"',
        'basis = "measurd", note = "per primitive cell"',
        ["cell.atoms.basis", "'measurd'", "did you mean 'measured'?"],
    ),
    "unknown key": (
        "umklapp_divisor = {",
        "umklap_divisor = {",
        ["lattice.umklap_divisor", "did you mean 'umklapp_divisor'?"],
    ),
    "unknown key of a number": (
        'valleys = { value = 6, unit = "1", spread = 0.0,',
        'valleys = { valeu = 6, unit = "1", spread = 0.0,',
        ["band[1].valleys.valeu", "did you mean 'value'?"],
    ),
    "bare number": (
        "strain_parameter = {",
        "strain_parameter = 39 # {",
        ["lattice.strain_parameter", "39"],
    ),
    "nan": (
        "sound_transverse = { value = 4985",
        "sound_transverse = { value = nan",
        ["lattice.sound_transverse.value", "nan", "finite"],
    ),
    "negative mass": (
        "inertial_mass = { value = 0.28",
        "inertial_mass = { value = -0.28",
        ["band[1].inertial_mass", "-0.28", "above 0"],
    ),
    "share above one": (
        "alloy_fraction = { value = 0.1",
        "alloy_fraction = { value = 1.1",
        ["scattering.alloy_fraction", "1.1", "at most 1"],
    ),
    "zero temperature": (
        "data_from = { value = 300",
        "data_from = { value = 0",
        ["service.data_from", "value 0 K", "above 0"],
    ),
    "unknown element": (
        "occupants = { Si = 0.9, Ge = 0.1 }",
        "occupants = { Si = 0.9, Ga2 = 0.1 }\nsizes.Ga2 = {} #",
        ["site"],
    ),
    "shares that do not add up": (
        "occupants = { Si = 0.9, Ge = 0.1 }",
        "occupants = { Si = 0.9, Ge = 0.2 }",
        ["site[1]", "add up to 1"],
    ),
    "carrier without a band": (
        'side = "conduction"',
        'side = "valence"',
        ["carrier 'n' needs a conduction band"],
    ),
    "anchor that fixes what it cannot": (
        'fixes = "mass"',
        'fixes = "strain"',
        ["anchor[2]", "'seebeck'", "mass, nothing"],
    ),
    "anchor out of all reach": (
        "mobility = { value = 42,",
        "mobility = { value = 42000,",
        ["anchor[1]", "impurity scattering", "mobility"],
    ),
    "schema of the future": ("schema = 1", "schema = 2", ["schema", "2"]),
}

COMMANDS = {
    "unknown verb": (["peek"], ["'peek'", "did you mean 'peak'?"]),
    "unknown option": (["candidates", "--jsn"], ["--jsn", "--json"]),
    "missing brief": (["rank"], ["BRIEF"]),
    "missing temperature": (["peak", "si-n"], ["--temperature"]),
    "one word too many": (["candidates", "si-n", "si-p"], ["si-p"]),
    "unknown candidate": (["candidates", "sige"], ["'sige'", "did you mean 'sige-"]),
    "candidate of another carrier": (["peak", "mg2sisn-p", "--temperature", "300"], ["did you mean 'mg2sisn-n'?"]),
    "no such brief": (["rank", "nowhere.toml"], ["nowhere.toml", "no such file"]),
    "folder for a brief": (["rank", "."], [".: is a directory"]),
    "no workers": (["rank", "nowhere.toml", "--workers", "0"], ["--workers", "0"]),
    "half a worker": (["rank", "nowhere.toml", "--workers", "0.5"], ["--workers", "0.5"]),
}


def assert_refused(said, words):
    """Exit code 2; stdout empty; one line on stderr with these words in it."""
    assert said.code == 2, said
    assert said.out == ""
    assert said.err.startswith("legwright: ")
    assert said.err.endswith("\n")
    assert said.err.count("\n") == 1, "one message, on one line"
    assert "Traceback" not in said.err
    missing = [word for word in words if word not in said.err]
    assert not missing, said.err


@pytest.mark.parametrize(("changes", "words"), BRIEFS.values(), ids=BRIEFS.keys())
def test_brief_is_refused(changes, words, legwright, brief, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    path = brief(changes)
    said = legwright("rank", path.name, "--json", "--csv", "rows.csv")
    assert_refused(said, words)
    if "no such file" not in words:
        assert "brief.toml: " in said.err
    assert list(tmp_path.iterdir()) == [path], "nothing written"


@pytest.mark.parametrize(("content", "words"), FILES.values(), ids=FILES.keys())
@pytest.mark.parametrize("verb", [("rank",), ("sheet", *(word for pair in SHEET.items() for word in pair))])
def test_file_that_is_no_brief_and_no_candidate_is_refused(verb, content, words, legwright, tmp_path):
    path = tmp_path / "some.toml"
    path.write_bytes(content)
    said = legwright(verb[0], path, *verb[1:], "--json", "--csv", tmp_path / "rows.csv")
    assert_refused(said, ["some.toml: ", *words])
    assert list(tmp_path.iterdir()) == [path], "nothing written"


@pytest.mark.parametrize(("old", "new", "words"), CANDIDATES.values(), ids=CANDIDATES.keys())
def test_candidate_is_refused(old, new, words, legwright, tmp_path):
    text = (DEMO / "sige10-n.toml").read_text(encoding="utf-8")
    assert old in text, "the demo candidate has changed: bring this table up to date"
    (tmp_path / "mine.toml").write_text(text.replace(old, new, 1), encoding="utf-8")
    (tmp_path / "sources.bib").write_bytes((DEMO / "sources.bib").read_bytes())
    options = [word for pair in SHEET.items() for word in pair]
    said = legwright("sheet", tmp_path / "mine.toml", *options, "--json", "--csv", tmp_path / "rows.csv")
    assert_refused(said, ["mine.toml: ", *words])
    assert sorted(path.name for path in tmp_path.iterdir()) == ["mine.toml", "sources.bib"], "nothing written"


@pytest.mark.parametrize(("arguments", "words"), COMMANDS.values(), ids=COMMANDS.keys())
def test_command_is_refused(arguments, words, legwright, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    assert_refused(legwright(*arguments), words)
    assert not list(tmp_path.iterdir()), "nothing written"


@pytest.mark.parametrize("option", SHEET)
@pytest.mark.parametrize("value", ["nan", "inf", "-inf", "1e999", "-5", "0", "-0.0", "five", "", "0x10", "Bulk"])
def test_number_on_the_command_line_is_refused(option, value, legwright):
    asked = {**SHEET, option: value}
    said = legwright("sheet", "si-n", *(word for pair in asked.items() for word in pair), "--json")
    assert_refused(said, [option, f"'{value}'", "a finite number above 0"])


@pytest.mark.parametrize("verb", ["sheet", "peak"])
def test_shape_misspelt_on_the_command_line_is_refused(verb, legwright):
    asked = SHEET if verb == "sheet" else {"--temperature": "300"}
    options = [word for pair in asked.items() for word in pair]
    said = legwright(verb, "si-n", *options, "--shape", "wir", "--json")
    assert_refused(said, ["shape", "'wir'", "did you mean 'wire'?", "film, grain, wire"])


@pytest.mark.parametrize("target", ["missing/rows.csv", "folder"])
def test_csv_that_cannot_be_written_is_refused(target, legwright, brief, tmp_path):
    (tmp_path / "folder").mkdir()
    path = brief()
    said = legwright("rank", path, "--json", "--csv", tmp_path / target)
    assert_refused(said, [target, "cannot be written"])
    assert sorted(p.name for p in tmp_path.rglob("*")) == ["brief.toml", "folder"], "no half file left"


def test_unknown_key_is_told_before_what_it_causes(legwright, brief):
    """A misspelt key also leaves its right name missing; the message that helps is the first one."""
    said = legwright("rank", brief({"duty.cold_K": None, "duty.cold": "400"}))
    assert_refused(said, ["duty.cold: unknown key", "did you mean 'cold_K'?"])
