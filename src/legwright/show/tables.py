"""Tables for people, from the same records as the JSON. Rounded here and only here."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from operator import itemgetter
from typing import Any

from legwright.base.flags import word
from legwright.show.layout import (
    SPARE,
    Column,
    Record,
    Screen,
    counts,
    figure,
    figures,
    given,
    intervals,
    numbers,
    scores,
    shares,
    span,
    spans,
)

#: titles and units of the scores
SCORE_TITLES = {
    "efficiency": ("efficiency", ""),
    "cop": ("COP", ""),
    "delta_t_max_K": ("ΔT max", "K"),
    "power_W_per_cm2": ("power", "W/cm²"),
    "heat_lifted_W_per_cm2": ("lift", "W/cm²"),
}


def _ranked(row: Record) -> str:
    return f"{row['rank']:>2}. {row['candidate']}"


def _score(row: Record) -> tuple[Any, ...]:
    return row["score"], row.get("score_low"), row.get("score_high")


def rank_columns(score_name: str) -> list[Column]:
    """The ranking's columns, most important first; those that need draws appear with draws."""
    title, unit = SCORE_TITLES[score_name]
    return [
        Column("candidate", _ranked),
        Column(title, _score, unit, scores),
        Column("5 to 95 %", "interval", unit, intervals),
        Column("wins", "win_share", "%", shares(), 1),
        Column("size", "size_nm", "nm", figures(2)),
        Column("window", "window_nm", "nm", spans(2)),
        Column("doping", "doping_per_cm3", "cm⁻³", figures(2)),
        Column("gain over\ncoarse", "gain_over_bulk", "×", numbers(3), 1),
        Column("zT mean", "zt_mean", "", numbers(3), 2),
        Column("zT peak", "zt_peak", "", numbers(3), 2),
        Column("formula", "formula", matters=SPARE),
        Column("carrier", "carrier", matters=SPARE),
        Column("flags", "own_flags", matters=1),
    ]


def rank(out: Screen, content: Record, trade_offs: bool = False) -> None:
    """Those that can serve, best first; what all of them have to say once; then those that cannot, by reason."""
    able = [row for row in content["rows"] if row["score"]]
    duty, shared = content["duty"], _nearly_all(able)
    what = f"couple with {content['partner']}" if content.get("partner") else "leg"
    what = f"{duty['kind']} {what}, {duty['cold_K']:g} to {duty['hot_K']:g} K, {content['rows'][0]['shape']} size"
    title = f"{content['title']}: {what}"
    if able:
        rows = [
            {
                **row,
                "own_flags": [word(flag) for flag in row["flags"] if flag not in shared] or None,
                **({"interval": (row["score_low"], row["score_high"])} if "score_low" in row else {}),
            }
            for row in able
        ]
        out.table(title, rank_columns(rows[0]["score_name"]), rows)
        if "win_share" in rows[0]:
            _sureness(out, rows)
        if trade_offs:
            _trade_offs(out, rows, content["trade_offs"])
    else:
        out.say(title, len(title))
    cannot: dict[str, list[str]] = {}
    for row in content["rows"]:
        if not row["score"]:
            cannot.setdefault(word(row["flags"][0]), []).append(row["candidate"])
    if cannot:
        out.gap()
    for reason, names in cannot.items():
        lead = f"Cannot serve, {reason}:"
        out.say(f"{lead} {', '.join(names)}.", len(lead))
    notes(out, content, shared)


def _sureness(out: Screen, rows: Sequence[Record]) -> None:
    """Of each candidate: places over the draws, best size, and whether a small one pays."""
    out.table(
        "How sure (draws; tied: neither is twice as likely to be the better)",
        [
            Column("candidate", _ranked),
            Column("in first\nthree", "first_three_share", "%", shares()),
            Column("best size,\n5 to 95 %", itemgetter("size_low_nm", "size_high_nm"), "nm", spans(2)),
            Column("small size\npays", "nanostructuring_pays", "%", shares()),
            Column("tied with", "tied_with", matters=1, least=30),
        ],
        [{**row, "tied_with": row["tied_with"] or None} for row in rows],
    )


#: what is weighed against the score: title, unit, key
_TRADE_OFFS = (
    ("element cost", "USD/kg", "cost_USD_per_kg"),
    ("supply", "", "supply_concentration"),
    ("hazards", "", "hazardous_elements"),
    ("largest size", "nm", "largest_size_nm"),
)


def _trade_offs(out: Screen, rows: Sequence[Record], fronts: Mapping[str, Sequence[str]]) -> None:
    """Candidates on a front of score against another count; a star where nobody beats them on both."""
    title, unit = SCORE_TITLES[rows[0]["score_name"]]

    def starred(key: str) -> Callable[[Record], str]:
        def text(row: Record) -> str:
            value = row["window_nm"][1] if key == "largest_size_nm" else row[key]
            shown = (" ".join(value) or "none") if isinstance(value, list) else figure(value, 2)
            return f"* {shown}" if row["candidate"] in fronts[key] else f"  {shown}"

        return text

    on_a_front = {name for names in fronts.values() for name in names}
    out.table(
        "Trade-offs (*: nobody has both a better score and a better figure here)",
        [
            Column("candidate", _ranked),
            Column(title, _score, unit, scores),
            *(Column(name, starred(key), its_unit) for name, its_unit, key in _TRADE_OFFS),
        ],
        [row for row in rows if row["candidate"] in on_a_front],
    )


#: lines of advice, and a share of the doubt that is worth a line
_MOST_ADVICE, _DOUBT = 10, 0.05


def measure(out: Screen, content: Record) -> None:
    """The measurements worth most, and where the doubt about the scores comes from."""
    title, unit = SCORE_TITLES[content["score_name"]]
    name = Column("candidate", "candidate")
    out.table(
        f"What to measure next: expected gain of the chosen candidate's {title}",
        [
            name,
            Column("measure", lambda row: row["quantity"].replace("_", " ")),
            Column("expected\ngain", "expected_gain", unit, figures(2)),
            Column("standard\nerror", "standard_error", unit, figures(2), 1),
            Column("effort", "effort", show=given),
            Column("gain per\neffort", "gain_per_effort", unit, figures(2)),
        ],
        content["rows"][:_MOST_ADVICE],
    )
    out.table(
        f"Where the doubt comes from (shares of the score's variance, from {100 * _DOUBT:.0f} % on)",
        [
            name,
            Column("source", lambda row: row["source"].replace("_", " ")),
            Column("by itself", "first_order", "%", shares()),
            Column("with others", "total", "%", shares()),
        ],
        [row for row in content["sensitivities"] if row["total"] >= _DOUBT],
    )
    out.gap()
    out.say(
        f"Chosen now: {content['chosen_now']}, expected {figure(content['expected_score'])}; if all were known the "
        f"choice would gain {figure(content['gain_if_all_were_known'], 2)}."
    )


def _nearly_all(rows: Sequence[Record]) -> dict[str, str]:
    """Flags that all rows carry, or all but one in eight, in words: told once under the table."""
    found: dict[str, str] = {}
    for flag in dict.fromkeys(flag for row in rows for flag in row["flags"]):
        others = [row["candidate"] for row in rows if flag not in row["flags"]]
        if len(rows) > 1 and len(others) <= len(rows) // 8:
            found[flag] = "all" if not others else f"all but {', '.join(others)}"
    return found


def notes(out: Screen, content: Record, shared: Mapping[str, str] | None = None) -> None:
    """What each flag means, unless hushed; then cautions. Flags that no table shows are named all the same.

    `shared`: of a ranking, the flags that stand in no row, and who carries them; None where there are no rows.
    """
    meanings = content["flag_meanings"]
    told = [flag for flag in meanings if flag not in out.hushed or shared is None or flag in shared]
    if told:
        out.gap()
    for flag in told:
        who = (shared or {}).get(flag, "")
        slug = "" if word(flag) == flag.replace("-", " ") else f" ({flag})"
        name = f"{word(flag)}{slug}{who and ', '}{who}"
        out.say(f"{name}." if flag in out.hushed else f"{name}: {meanings[flag]}", len(name) + 1)
    if content["cautions"]:
        out.gap()
        out.say(f"Cautions: {' '.join(content['cautions'])}", len("Cautions:"))


def _size(nm: float | None) -> str:
    return "coarse" if nm is None else figure(nm)


def peak(out: Screen, content: Record, best_doping: bool) -> None:
    """The size at the peak, and how wide it is."""
    at = "at the best doping" if best_doping else "at this doping"
    out.pairs(
        f"{content['candidate']} at {content['temperature_K']:g} K",
        [
            ("zT at the peak", figure(content["zt"]), ""),
            (f"{content['shape']} size at the peak", figure(content["size_nm"], 2), "nm"),
            ("sizes that keep 95 % of it", span(content["window_nm"], 2), "nm"),
            (f"zT of coarse material {at}", figure(content["zt_coarse"]), ""),
            ("doping, the best" if best_doping else "doping", figure(content["doping_per_cm3"], 2), "cm⁻³"),
        ],
    )
    notes(out, content)


#: key, label, unit, factor; what matters first, parts under their whole
_SHEET = (
    ("zt", "zT", "", 1.0),
    ("power_factor_W_per_mK2", "power factor", "µW/(cm K²)", 1e4),
    ("seebeck_uV_per_K", "Seebeck coefficient", "µV/K", 1.0),
    ("electrical_conductivity_S_per_m", "electrical conductivity", "S/cm", 1e-2),
    ("thermal_conductivity_W_per_mK", "thermal conductivity", "W/(m K)", 1.0),
    ("lattice_thermal_conductivity_W_per_mK", "  lattice", "W/(m K)", 1.0),
    ("electronic_thermal_conductivity_W_per_mK", "  electronic", "W/(m K)", 1.0),
    ("bipolar_thermal_conductivity_W_per_mK", "    of it bipolar", "W/(m K)", 1.0),
    ("amorphous_minimum_W_per_mK", "amorphous minimum", "W/(m K)", 1.0),
    ("lorenz_number_W_ohm_per_K2", "Lorenz number", "10⁻⁸ W Ω/K²", 1e8),
    ("mobility_cm2_per_Vs", "mobility", "cm²/(V s)", 1.0),
    ("hall_mobility_cm2_per_Vs", "Hall mobility", "cm²/(V s)", 1.0),
    ("hall_coefficient_cm3_per_C", "Hall coefficient", "cm³/C", 1.0),
)


def sheet(out: Screen, content: Record) -> None:
    """Every property at one design point."""
    where = "coarse" if content["size_nm"] is None else f"{content['size_nm']:.4g} nm {content['shape']}"
    at = f"{content['temperature_K']:g} K, {figure(content['doping_per_cm3'], 2)} cm⁻³, {where}"
    out.pairs(
        f"{content['candidate']} ({content['formula']}) at {at}",
        [(label, figure(content[key] * factor), unit) for key, label, unit, factor in _SHEET if key in content],
    )
    notes(out, content)


def why(out: Screen, content: Record) -> None:
    """The verdict, the shares of the two resistances, and the flow by free path, coarse."""
    out.say(content["verdict"])
    pays = content["electrons_pay_below_nm"]
    reach = "not down to 1 nm" if pays is None else f"below {figure(pays, 2)} nm"
    out.say(f"Carriers start to pay (5 % of mobility) {reach}.")
    for kind in ("electrical", "thermal"):
        parts = content[f"{kind}_resistance_shares"]
        rows = [{"process": name, "share": parts[name]} for name in sorted(parts, key=parts.get, reverse=True)]
        title = f"Shares of the {'lattice thermal' if kind == 'thermal' else kind} resistance"
        out.table(title, [Column("process", "process"), Column("share", "share", "%", shares(1))], rows)
    out.table(
        f"Carried inside a {content['shape']} on free paths up to",
        [
            Column("free path", "path_nm", "nm", figures(2)),
            Column("charge", "electrons_within", "%", shares()),
            Column("lattice heat", "phonons_within", "%", shares()),
        ],
        content["free_paths"][::5],
    )
    notes(out, content)


#: where numbers came from, and how much that matters in a table
_BASES = {
    "from memory": 0,
    "measured": 0,
    "published model": SPARE,
    "calibrated on bulk": SPARE,
    "common practice": SPARE,
}


def library(out: Screen, content: Record) -> None:
    """One line a candidate, what it weighs, costs and holds; then one line an alloy line."""
    rows = content["candidates"]
    name = Column("candidate", "candidate")
    out.table(
        "Library (per cent of the numbers by where they came from)",
        [
            name,
            Column("formula", "formula"),
            Column("up to", "highest_temperature_K", "K", given),
            Column("doping", itemgetter("doping_min_per_cm3", "doping_max_per_cm3"), "cm⁻³", spans(2)),
            Column("numbers", "numbers", show=counts),
            *(
                Column(basis.replace(" ", "\n", 1), _basis(basis), "%", shares(), matters)
                for basis, matters in _BASES.items()
            ),
            Column("direction", "direction", matters=1, least=20),
        ],
        rows,
    )
    out.table(
        "Make-up (element prices of 2013; supply: Herfindahl–Hirschman, up to 10 000)",
        [
            name,
            Column("density", "density_g_per_cm3", "g/cm³", numbers(3)),
            Column("elements", "cost_USD_per_kg", "USD/kg", figures(2)),
            Column("supply", "supply_concentration", show=figures(2)),
            Column("dopant", "dopant"),
            Column("dopant at", "dopant_atomic_percent", "at. %", spans(2)),
            Column(
                "hazards", lambda row: " ".join(row["hazardous_elements"]) or "none listed", matters=1, least=11
            ),
        ],
        rows,
    )
    out.table(
        "Alloy lines (x: the share of each)",
        [
            Column("member", lambda row: f"{row['family']}:{','.join('x' for _ in row['ends'][1:])}"),
            Column("share of", lambda row: row["ends"][1:]),
            Column("up to", lambda row: [figure(share, 2) for share in row["largest_shares"][1:]]),
            Column("through", "nodes", matters=1, least=16),
        ],
        content["families"],
    )


def _basis(name: str) -> Any:
    return lambda row: row["numbers_by_basis"].get(name, 0) / row["numbers"]


def one_candidate(out: Screen, content: Record) -> None:
    """Every number of a candidate, and its sources."""
    out.table(
        f"{content['candidate']}: {content['title']}, {content['direction']}",
        [
            Column("key", "key"),
            Column("value", "value", show=given),
            Column("unit", "unit"),
            Column("spread\n(1 σ)", _spread),
            Column("basis", "basis", matters=1),
            Column("source", "source", matters=2),
            Column("note", "note", matters=3, least=24),
        ],
        content["values"],
    )
    out.gap()
    for key, text in content["sources"].items():
        out.say(f"{key}: {text}", len(key) + 1)


def _spread(row: Record) -> str:
    return f"{row['spread']:g} {row['spread_unit']}" if row["spread_unit"] else f"{100 * row['spread']:.3g} %"


def search(out: Screen, content: Record) -> None:
    """The best design, and what certifies it."""
    title, unit = SCORE_TITLES[content["score_name"]]
    out.pairs(
        f"Best found{'' if content['complete'] else ' before the interrupt'}: "
        f"{content['candidate']} ({content['formula']})",
        [
            (title, figure(content["score"]), unit),
            (f"{content['shape']} size", _size(content["size_nm"]), "" if content["size_nm"] is None else "nm"),
            ("doping", figure(content["doping_per_cm3"]), "cm⁻³"),
            (f"{title} before the polish", figure(content["score_before_polish"]), unit),
            (f"{title} of dense maps", figure(content["score_of_dense_map"]), unit),
            ("dense maps better by", f"{100 * content['gap_to_dense_map']:.4f}", "%"),
            ("costly evaluations", str(content["evaluations"]), ""),
            ("of the polish", str(content["polish_evaluations"]), ""),
        ],
    )
    if content["bounds_touched"]:
        out.gap()
        out.say(f"At a bound: {', '.join(content['bounds_touched'])}.", len("At a bound:"))
    notes(out, content)


#: key: label, unit
_LEG = {
    "efficiency": ("efficiency", ""),
    "efficiency_ideal_contacts": ("efficiency, ideal contacts and exchangers", ""),
    "power_W_per_cm2": ("power", "W/cm²"),
    "power_matched_load_W_per_cm2": ("power at the matched load", "W/cm²"),
    "efficiency_matched_load": ("efficiency there", ""),
    "cop": ("COP", ""),
    "cop_ideal_contacts": ("COP, ideal contacts and exchangers", ""),
    "heat_lifted_W_per_cm2": ("heat lifted", "W/cm²"),
    "delta_t_max_K": ("largest ΔT", "K"),
    "current_A_per_cm2": ("current", "A/cm²"),
    "heat_from_hot_W_per_cm2": ("heat taken in", "W/cm²"),
    "heat_to_hot_W_per_cm2": ("heat given off", "W/cm²"),
    "heat_through_sides_W_per_cm2": ("lost through the sides", "W/cm²"),
    "hot_end_K": ("hot end of the leg", "K"),
    "cold_end_K": ("cold end of the leg", "K"),
    "length_mm": ("length", "mm"),
    "contact_uohm_cm2": ("each contact", "µΩ cm²"),
    "contact_K_cm2_per_W": ("each thermal contact", "K cm²/W"),
    "hot_exchanger_K_cm2_per_W": ("hot exchanger", "K cm²/W"),
    "cold_exchanger_K_cm2_per_W": ("cold exchanger", "K cm²/W"),
    "side_loss_W_per_m3_K": ("side loss", "W/(m³ K)"),
}
#: of these, 0 is ideal and told in a sentence
_SURROUNDINGS = (
    "contact_uohm_cm2",
    "contact_K_cm2_per_W",
    "hot_exchanger_K_cm2_per_W",
    "cold_exchanger_K_cm2_per_W",
    "side_loss_W_per_m3_K",
)
_COUPLE = {"area_ratio": ("cross-section of n over p", "")} | {
    f"couple_{key}": (f"couple's {label.replace(' of the leg', '')}", unit)
    for key, (label, unit) in _LEG.items()
    if not key.startswith(("heat_from", "heat_to", "heat_through"))
}


def leg(out: Screen, content: Record) -> None:
    """What a leg delivers; then, where it has them, its segments, its couple and what hours of service leave."""
    title = content["candidate"] + (f" ({content['formula']})" if "formula" in content else "")
    if content.get("doping_per_cm3") is not None:
        size = _size(content["size_nm"]) + (" nm" if content["size_nm"] is not None else "")
        title += f", {content['shape']} {size}, {figure(content['doping_per_cm3'])} cm⁻³"
    ideal = [key for key in _SURROUNDINGS if content[key] == 0]
    told = {key: _LEG[key] for key in _LEG if key in content and key not in ideal}
    out.pairs(title, [(label, figure(content[key]), unit) for key, (label, unit) in told.items()])
    if ideal:
        out.gap()
        out.say(f"Ideal: {', '.join(_LEG[key][0] for key in ideal)}.", len("Ideal:"))
    if "segments" in content:
        _segments(out, content["segments"])
    if "partner" in content:
        _couple(out, content)
    if "service" in content:
        _service(out, content["service"], content["size_nm"])
    notes(out, content)


def _segments(out: Screen, rows: Sequence[Record]) -> None:
    out.table(
        "Segments, hot to cold",
        [
            Column("segment", "candidate"),
            Column("hot", "hot_K", "K", figures(3)),
            Column("cold", "cold_K", "K", figures(3)),
            Column("length", "length_share", "%", shares()),
            Column("size", lambda row: _size(row["size_nm"]), "nm"),
            Column("doping", "doping_per_cm3", "cm⁻³", figures(3)),
            Column("compatibility", lambda row: _first_and_last(row["compatibility_per_V"]), "1/V", spans(2)),
        ],
        rows,
    )


def _first_and_last(values: Sequence[float]) -> tuple[float, float]:
    return values[0], values[-1]


def _couple(out: Screen, content: Record) -> None:
    size = _size(content["partner_size_nm"]) + (" nm" if content["partner_size_nm"] is not None else "")
    pairs = [(label, figure(content[key]), unit) for key, (label, unit) in _COUPLE.items() if key in content]
    pairs += [
        (f"compatibility of {name}, hot to cold", span(_first_and_last(values), 2), "1/V")
        for name, values in content["compatibility_per_V"].items()
    ]
    strains = {"strain between the legs": content["strain"]}
    strains |= {f"strain to {strap}": value for strap, value in content["strain_to_strap"].items()}
    pairs += [(what, figure(None if share is None else 100 * share, 2), "%") for what, share in strains.items()]
    doping = figure(content["partner_doping_per_cm3"])
    out.pairs(f"Couple with {content['partner']}, {size}, {doping} cm⁻³", pairs)


def _service(out: Screen, found: Record, start_nm: float | None) -> None:
    """What hours of service leave, and how long each process takes."""
    title, unit = SCORE_TITLES[found["score_name"]]
    sizes, best = found["along"]["size_nm"], found["best_starting_size_nm"]
    counted = " and ".join(found["score_end_counts"])
    out.pairs(
        f"After {found['hours']:g} hours",
        [
            (f"{title} at the start", figure(found["score_start"]), unit),
            (f"at the end (counts {counted} alone)", _known(found["score_end"]), unit),
            ("size at the start", _size(start_nm), "nm"),
            (
                "at the end, hot … cold",
                "unknown" if sizes is None else f"{_size(sizes[0])} … {_size(sizes[-1])}",
                "nm",
            ),
            ("best size to start with", _known(best), "nm"),
            ("starts that end inside the window", span(found["starting_window_nm"]), "nm"),
        ],
    )
    out.table(
        "Hours until a tenth is lost",
        [
            Column("process", "process"),
            Column("hours", lambda row: figure(row["hours"], 2) if row["status"] == "known" else _unsure(row)),
            Column("within\na factor", "factor_1_sigma", show=figures(2)),
            Column("why", "reason", matters=1, least=30),
        ],
        [{"process": process, **wear} for process, wear in found["hours_to_lose_a_tenth"].items()],
    )


def _known(value: float | None) -> str:
    return "unknown" if value is None else figure(value)


def _unsure(wear: Record) -> str:
    return str(wear["status"]) if wear["hours"] is None else f"{wear['status']} {figure(wear['hours'], 2)}"


def fit(out: Screen, content: Record) -> None:
    """Parameters with their intervals, and how well each quantity is met."""
    parameters = content["parameters"]
    out.table(
        f"Fitted to {content['measurements']}, starting from {content['start']} (factors on the start's; 90 %)",
        [
            Column("parameter", "parameter"),
            Column("value", _parameter, show=scores),
            Column("interval", itemgetter("low", "high"), show=intervals),
            Column("unit", "unit"),
            Column("data decide", lambda row: "yes" if row["determined"] else "no"),
        ],
        parameters,
    )
    out.table(
        "How well the data are met",
        [
            Column("quantity", lambda row: row["quantity"].replace("_", " ")),
            Column("rows", "rows", show=counts),
            Column("rms off", "rms_deviation", "%", shares(1)),
        ],
        content["residuals"],
    )
    out.gap()
    out.say(f"Fit: {content['reason']}. Heat capacity: {content['heat_capacity']}.")
    left_open = [row["parameter"] for row in parameters if not row["determined"]]
    if left_open:
        out.say(f"These data do not determine: {', '.join(left_open)}.")
    if content["file"] is not None:
        out.say(f"Written: {content['file']}")


_parameter = itemgetter("value", "low", "high")

#: short names of what the audit compares; the others by their own
_QUANTITIES = {
    "lattice_conductivity": "lattice κ",
    "thermal_conductivity": "whole κ",
    "electrical_conductivity": "σ",
    "seebeck": "Seebeck",
    "zt": "zT",
}
_AUDIT_WORDS = {
    "blind": "nobody looked at it, and nothing like it fixed the candidate.",
    "unlike": (
        "blind too, but the sample holds what the candidate's file does not describe (pores, other phases, another "
        "composition or direction)."
    ),
    "seen": "looked at while parameters were chosen.",
    "fitted": "it fixed the candidate, or repeats what did.",
    "setting": "papers that set the model discrepancy; testing: the others.",
    "doping": (
        "a sample's doping is published, or follows from its own Seebeck coefficient or conductivity at one "
        "temperature, which is then not judged, or is that of the best zT."
    ),
    "computed": (
        "the best that legs of these materials could do between those temperatures, at their best doping, areas, "
        "interfaces and current, with nothing lost outside them; contacts, straps, radiation and the rest of a "
        "generator take from it."
    ),
    "own paper": "the device's paper also stands behind a number of one of its candidates.",
    "could be": "95 % binomial interval, as if values were independent; by paper: one vote a paper.",
}


def _measured(row: Record) -> str:
    return f"{figure(row['measured'])} {row['unit']}".removesuffix(" 1").replace("^2", "²")


def audit(out: Screen, content: Record) -> None:
    """How far off, and how often inside; then every value outside by name, but those that fixed a candidate."""
    quantity = Column("quantity", lambda row: _QUANTITIES.get(row["quantity"], row["quantity"].replace("_", " ")))
    out.table(
        "Predictions against published samples (90 % intervals)",
        [
            Column("material", "material"),
            Column("kind", "kind"),
            Column("papers'\nhalf", "half"),
            quantity,
            Column("inside", "coverage", "%", shares()),
            Column("could be", lambda row: [100 * end for end in row["coverage_95"]], "%", spans(2), 1),
            Column("median\noff", "median_error", "%", shares()),
            Column("half-width", "median_half_width", "%", shares(), 1),
            Column("values", "values", show=counts),
            Column("papers", "papers", show=counts, matters=1),
            Column("inside\nby paper", "coverage_by_paper", "%", shares(), 2),
        ],
        content["totals"],
        keys=4,
    )
    out.table(
        "Outside their interval",
        [
            Column("sample", "sample"),
            Column("T", "temperature_K", "K", given),
            Column("measured", _measured),
            Column("interval", lambda row: span((row["low"], row["high"]))),
            quantity,
            Column("size", lambda row: _size(row["size_nm"]), "nm", matters=1),
            Column("material", "material", matters=2),
            Column("kind", "kind", matters=2),
            Column("likely cause", "likely_cause", matters=1, least=24),
        ],
        [row for row in content["samples"] if not row["inside"] and not row["fitted"]],
        keys=2,
    )
    out.gap()
    out.table(
        "Published legs, couples and modules: measured over computed",
        [
            Column("device", "device"),
            Column("ratio", "ratio", show=numbers(3)),
            Column("quantity", lambda row: row["quantity"].replace("_", " ")),
            Column("measured", _measured),
            Column("computed", lambda row: figure(row["computed"])),
            Column("hot", "hot_K", "K", figures(3)),
            Column("cold", "cold_K", "K", figures(3)),
            Column("legs", lambda row: " with ".join(filter(None, (row["n"], row["p"]))), matters=1),
            Column("own\npaper", lambda row: "yes" if row["fixed"] else "no", matters=1),
            Column("note", "note", matters=2, least=24),
        ],
        content["devices"],
    )
    out.gap()
    for name, meaning in _AUDIT_WORDS.items():
        out.say(f"{name}: {meaning}", len(name) + 1)
    waiting = ", ".join(f"{name} ({count})" for name, count in content["without_candidate"].items())
    out.say(f"Published values without a candidate: {waiting or 'none'}.")


def about(out: Screen, content: Record) -> None:
    """Versions and data sets."""
    out.table(
        f"legwright {content['program']} ({content['licence']}), Python {content['python']}, {content['platform']}",
        [Column("package", "package"), Column("version", lambda row: row["version"] or "not installed")],
        content["packages"],
    )
    out.table(
        "Data sets",
        [
            Column("data set", "data_set"),
            Column("files", "files", show=counts),
            Column("SHA-256 begins", lambda row: row["sha256"][:16]),
        ],
        content["data_sets"],
    )


def screen(out: Screen, content: Record) -> None:
    """The best of a screening."""
    rows = content["rows"]
    title, unit = SCORE_TITLES[rows[0]["score_name"]] if rows else ("score", "")
    out.table(
        f"{content['title']}: best of {content['done']} screened, of {content['asked']}",
        [
            Column("candidate", "candidate"),
            Column(title, "score", unit, numbers(3)),
            Column("size", "size_nm", "nm", figures(2)),
            Column("doping", "doping_per_cm3", "cm⁻³", figures(2)),
            Column("formula", "formula", matters=1),
        ],
        rows,
    )
    if content["file"] is not None:
        out.gap()
        out.say(f"All {content['asked']} rows: {content['file']}")
