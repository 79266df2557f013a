"""Results as plain records in trade units: the same names in JSON, in CSV and under the tables."""

from __future__ import annotations

import json
import math
from collections.abc import Iterable
from pathlib import Path
from typing import TYPE_CHECKING, Any

from legwright.base.flags import MEANINGS
from legwright.base.units import CM2, MICRO, NM, PER_CM3
from legwright.base.version import VERSION
from legwright.candidate.hazards import cautions
from legwright.candidate.model import numbers
from legwright.candidate.sources import bibliography
from legwright.candidate.supply import cost_per_kg, hazardous_elements, mass_density, supply_concentration
from legwright.physics.solubility import atomic_percent

if TYPE_CHECKING:
    import pandas as pd

    from legwright.candidate.family import Family
    from legwright.candidate.library import Candidate
    from legwright.decide.advise import Advice
    from legwright.decide.audit import Total, Verdict
    from legwright.decide.brief import Brief
    from legwright.decide.confidence import Confidence
    from legwright.decide.couple import Joined, Part
    from legwright.decide.devices import DeviceVerdict
    from legwright.decide.fit import Fit, Parameter
    from legwright.decide.installed import Delivered
    from legwright.decide.peak import Peak
    from legwright.decide.rank import Row
    from legwright.decide.search import Found
    from legwright.decide.service import Service
    from legwright.decide.why import Why
    from legwright.leg.couple import Operation
    from legwright.leg.installed import Running
    from legwright.physics.properties import Properties

SCHEMA = 1
Record = dict[str, Any]


def nanometres(size: float | None) -> float | None:
    """A size for JSON: null for none and for coarse material (infinite)."""
    return None if size is None or math.isinf(size) else size / NM


def rank_record(row: Row, sure: dict[str, Confidence] | None = None) -> Record:
    """One row of `rank`; with draws also how sure it is."""
    content: Record = {
        "rank": row.rank,
        "candidate": row.candidate.name,
        "formula": row.candidate.data.formula,
        "carrier": row.candidate.data.carrier,
        "shape": row.shape,
        "size_nm": nanometres(row.size),
        "window_nm": None if row.window is None else [end / NM for end in row.window],
        "doping_per_cm3": None if row.doping is None else row.doping / PER_CM3,
        "score": row.score,
        "score_name": row.score_name,
        "score_as_designed": row.score_as_designed,
        "zt_mean": row.zt_mean,
        "zt_peak": row.zt_peak,
        "gain_over_bulk": row.gain_over_bulk,
        "cost_USD_per_kg": cost_per_kg(row.candidate),
        "supply_concentration": supply_concentration(row.candidate),
        "hazardous_elements": list(hazardous_elements(row.candidate)),
        "flags": list(row.flags),
    }
    if sure is not None:
        known = sure.get(row.candidate.name)
        content |= {
            "score_low": known.low if known else 0.0,
            "score_high": known.high if known else 0.0,
            "win_share": known.win_share if known else 0.0,
            "first_three_share": known.first_three_share if known else 0.0,
            "size_low_nm": nanometres(known.size_low) if known else None,
            "size_high_nm": nanometres(known.size_high) if known else None,
            "nanostructuring_pays": known.nanostructuring_pays if known else None,
            "tied_with": list(known.tied_with) if known else [],
        }
    return content


def advice_record(found: Advice, score_name: str) -> Record:
    """The whole of `measure`."""
    return {
        "score_name": score_name,
        "chosen_now": found.chosen,
        "expected_score": found.expected,
        "gain_if_all_were_known": found.all_known,
        "rows": [
            {
                "candidate": one.candidate,
                "quantity": one.quantity,
                "expected_gain": one.gain,
                "standard_error": one.error,
                "effort": one.effort,
                "gain_per_effort": one.gain_per_effort,
            }
            for one in found.measurements
        ],
        "sensitivities": [
            {"candidate": one.candidate, "source": one.source, "first_order": one.first, "total": one.total}
            for one in found.sensitivities
        ],
        "variance_explained": found.explained,
    }


def peak_record(found: Peak, shape: str) -> Record:
    """The whole of `peak`."""
    return {
        "candidate": found.candidate.name,
        "shape": shape,
        "temperature_K": found.temperature,
        "doping_per_cm3": found.doping / PER_CM3,
        "size_nm": found.size / NM,
        "zt": found.zt,
        "zt_coarse": found.zt_coarse,
        "window_nm": [end / NM for end in found.window],
        "flags": list(found.flags),
        "curve": [
            {"size_nm": float(d) / NM, "zt": float(z)} for d, z in zip(found.sizes, found.curve, strict=True)
        ],
    }


def sheet_record(candidate: Candidate, made: Properties, flags: tuple[str, ...]) -> Record:
    """The whole of `sheet`, for one design point."""
    return {
        "candidate": candidate.name,
        "formula": candidate.data.formula,
        "temperature_K": float(made.temperature),
        "doping_per_cm3": float(made.doping) / PER_CM3,
        "size_nm": nanometres(float(made.size)),
        "shape": made.shape,
        "electrical_conductivity_S_per_m": float(made.electrical_conductivity),
        "seebeck_uV_per_K": float(made.seebeck) / MICRO,
        "electronic_thermal_conductivity_W_per_mK": float(made.electronic_thermal_conductivity),
        "bipolar_thermal_conductivity_W_per_mK": float(made.bipolar_thermal_conductivity),
        "lattice_thermal_conductivity_W_per_mK": float(made.lattice_thermal_conductivity),
        "thermal_conductivity_W_per_mK": float(made.thermal_conductivity),
        "lorenz_number_W_ohm_per_K2": float(made.lorenz_number),
        "power_factor_W_per_mK2": float(made.power_factor),
        "zt": float(made.zt),
        "mobility_cm2_per_Vs": float(made.mobility) / CM2,
        "hall_mobility_cm2_per_Vs": float(made.hall_mobility) / CM2,
        "hall_coefficient_cm3_per_C": float(made.hall_coefficient) * PER_CM3,
        "amorphous_minimum_W_per_mK": float(made.amorphous_minimum),
        "flags": list(flags),
    }


def why_record(found: Why) -> Record:
    """The whole of `why`."""
    law = found.zt_grain_law
    return {
        "candidate": found.candidate.name,
        "temperatures_K": list(found.temperatures),
        "doping_per_cm3": found.doping / PER_CM3,
        "size_nm": nanometres(found.size),
        "shape": found.shape,
        "verdict": found.verdict,
        "zt": found.zt,
        "zt_coarse": found.zt_coarse,
        "zt_grey_grain_law": None if law is None else law[0],
        "zt_grain_law_by_wavelength": None if law is None else law[1],
        "electrons_pay_below_nm": nanometres(found.electrons_pay_below),
        "electrical_resistance_shares": found.electrical_shares,
        "thermal_resistance_shares": found.thermal_shares,
        "free_paths": [
            {"path_nm": float(path) / NM, "electrons_within": float(e), "phonons_within": float(p)}
            for path, e, p in zip(found.paths, found.electrons_within, found.phonons_within, strict=True)
        ],
        "flags": list(found.flags),
    }


def candidate_record(candidate: Candidate) -> Record:
    """One line of `candidates`."""
    data = candidate.data
    expansion, yielded = data.cell.thermal_expansion, data.doping.carriers_per_dopant
    return {
        "candidate": candidate.name,
        "title": data.title,
        "formula": data.formula,
        "carrier": data.carrier,
        "direction": data.direction,
        "highest_temperature_K": data.service.highest_temperature.si,
        "doping_min_per_cm3": data.doping.lowest.si / PER_CM3,
        "doping_max_per_cm3": data.doping.highest.si / PER_CM3,
        "smallest_grain_nm": data.making.smallest_grain.si / NM,
        "density_g_per_cm3": mass_density(candidate) / 1e3,
        "thermal_expansion_ppm_per_K": None if expansion is None else expansion.si / MICRO,
        "cost_USD_per_kg": cost_per_kg(candidate),
        "supply_concentration": supply_concentration(candidate),
        "hazardous_elements": list(hazardous_elements(candidate)),
        "dopant": data.doping.dopant,
        "dopant_atomic_percent": [
            float(
                atomic_percent(density.si, data.cell.volume_per_atom.si, yielded.si if yielded is not None else 1.0)
            )
            for density in (data.doping.lowest, data.doping.highest)
        ],
        "numbers": sum(candidate.basis_counts.values()),
        "numbers_by_basis": dict(sorted(candidate.basis_counts.items())),
    }


def family_record(family: Family) -> Record:
    """One alloy line of `candidates`."""
    return {
        "family": family.name,
        "title": family.data.title,
        "carrier": family.carrier,
        "ends": list(family.ends),
        "largest_shares": [end.most for end in family.data.end],
        "nodes": [node.name for node in family.nodes],
    }


def verdict_record(one: Verdict) -> Record:
    """One published value of `audit`, in the unit that it names."""
    unit, factor = _AUDIT_UNITS[one.quantity]
    low, high = one.ends
    return {
        "material": one.material,
        "sample": one.sample,
        "quantity": one.quantity,
        "unit": unit,
        "shape": one.shape,
        "size_nm": nanometres(one.size),
        "temperature_K": one.temperature,
        "measured": one.measured / factor,
        "predicted": one.predicted / factor,
        "low": low / factor,
        "high": high / factor,
        "inside": one.inside,
        "fitted": one.fitted,
        "kind": one.kind,
        "half": one.half,
        "doping_per_cm3": one.doping.density / PER_CM3,
        "doping_from": one.doping.how,
        "source": one.source,
        "likely_cause": one.likely_cause,
    }


_AUDIT_UNITS = {
    "lattice_conductivity": ("W/m/K", 1.0),
    "thermal_conductivity": ("W/m/K", 1.0),
    "seebeck": ("uV/K", MICRO),
    "electrical_conductivity": ("S/m", 1.0),
    "mobility": ("cm^2/V/s", CM2),
    "power_factor": ("W/m/K^2", 1.0),
    "zt": ("1", 1.0),
}


def search_record(found: Found) -> Record:
    """The whole of `search`."""
    return {
        "candidate": found.candidate.name,
        "formula": found.candidate.data.formula,
        "shape": found.shape,
        "size_nm": nanometres(found.size),
        "doping_per_cm3": found.doping / PER_CM3,
        "score": found.score,
        "score_name": found.score_name,
        "evaluations": found.evaluations,
        "polish_evaluations": found.polish_evaluations,
        "score_before_polish": found.before_polish,
        "score_of_dense_map": found.map_score,
        "gap_to_dense_map": found.gap,
        "bounds_touched": list(found.touched),
        "complete": found.complete,
        "flags": list(found.flags),
    }


def leg_record(found: Delivered, brief: Brief) -> Record:
    """The whole of `leg`; areal figures per cm² of leg."""
    generates, leg = brief.duty.kind == "generator", brief.leg

    def figure(name: str, scale: float = 1.0, running: Running | None = found.running) -> float | None:
        return None if running is None else scale * float(getattr(running, name))

    content: Record = {
        "candidate": found.candidate.name,
        "formula": found.candidate.data.formula,
        "shape": found.shape,
        "size_nm": nanometres(found.size),
        "doping_per_cm3": None if found.doping is None else found.doping / PER_CM3,
        "length_mm": leg.length_mm if leg.length_free_mm is None else figure("length", 1e3),
        **_surroundings(brief),
    }
    if generates:
        content["efficiency"] = figure("efficiency")
        content["efficiency_ideal_contacts"] = figure("efficiency", running=found.ideal)
        content["power_W_per_cm2"] = figure("power", CM2)
        content["power_matched_load_W_per_cm2"] = figure("power", CM2, found.matched)
        content["efficiency_matched_load"] = figure("efficiency", running=found.matched)
    else:
        content["cop"] = figure("cop")
        content["cop_ideal_contacts"] = figure("cop", running=found.ideal)
        content["heat_lifted_W_per_cm2"] = figure("heat_cold", CM2)
        content["delta_t_max_K"] = found.largest_difference
    return content | {
        "current_A_per_cm2": figure("current", CM2),
        "heat_from_hot_W_per_cm2" if generates else "heat_to_hot_W_per_cm2": figure("heat_hot", CM2),
        "heat_through_sides_W_per_cm2": figure("side_heat", CM2),
        "hot_end_K": figure("hot_end"),
        "cold_end_K": figure("cold_end"),
        "flags": list(found.flags),
    }


def _surroundings(brief: Brief) -> Record:
    leg = brief.leg
    return {
        "contact_uohm_cm2": leg.contact_uohm_cm2,
        "contact_K_cm2_per_W": leg.contact_K_cm2_per_W,
        "hot_exchanger_K_cm2_per_W": leg.hot_exchanger_K_cm2_per_W,
        "cold_exchanger_K_cm2_per_W": leg.cold_exchanger_K_cm2_per_W,
        "side_loss_W_per_m3_K": leg.side_loss_W_per_m3_K,
    }


def segments_record(found: Joined, first: Candidate, brief: Brief) -> Record:
    """The whole of `leg` for a leg of several materials; the same fields, and its segments hot to cold."""
    leg = next(parts for parts in found.legs if parts[0].candidate.name == first.name)
    content: Record = {
        "candidate": " > ".join(part.candidate.name for part in leg),
        "shape": brief.size.shape,
        "length_mm": brief.leg.length_mm,
        **_surroundings(brief),
    }
    if len(found.legs) == 1:
        content |= {**_joined_figures(found, brief), "strain": found.strains["parts"]}
    return content | {"segments": [_part_record(part) for part in leg], "flags": list(found.flags)}


def couple_record(found: Joined, partner: Candidate, brief: Brief) -> Record:
    """What a couple adds to its leg's record; areal figures per cm² of both legs together, strains as fractions."""
    leg = next(parts for parts in found.legs if parts[0].candidate.name == partner.name)
    running = found.running
    return {
        "partner": partner.name,
        "partner_size_nm": nanometres(leg[0].size),
        "partner_doping_per_cm3": leg[0].doping / PER_CM3,
        "area_ratio": None if running is None else float(running.area_ratio),
        **{f"couple_{name}": value for name, value in _joined_figures(found, brief).items()},
        "compatibility_per_V": {
            " > ".join(part.candidate.name for part in parts): [
                float(s) for part in parts for s in part.compatibility
            ]
            for parts in found.legs
        },
        "strain": found.strains["parts"],
        "strain_to_strap": {name: strain for name, strain in found.strains.items() if name != "parts"},
        "flags": list(found.flags),
    }


def _joined_figures(found: Joined, brief: Brief) -> Record:
    """Figures of legs that share a current, as `leg_record` names them."""
    generates = brief.duty.kind == "generator"

    def figure(name: str, scale: float = 1.0, running: Operation | None = found.running) -> float | None:
        return None if running is None else scale * float(getattr(running, name))

    ratio = "efficiency" if generates else "cop"
    return {
        ratio: figure(ratio),
        f"{ratio}_ideal_contacts": figure(ratio, running=found.ideal),
        "power_W_per_cm2" if generates else "heat_lifted_W_per_cm2": figure(
            "power" if generates else "heat_cold", CM2
        ),
        **({} if generates else {"delta_t_max_K": found.largest_difference}),
        "current_A_per_cm2": figure("current", CM2),
        "hot_end_K": figure("hot_end"),
        "cold_end_K": figure("cold_end"),
    }


def _part_record(part: Part) -> Record:
    return {
        "candidate": part.candidate.name,
        "size_nm": nanometres(part.size),
        "doping_per_cm3": part.doping / PER_CM3,
        "hot_K": part.hot,
        "cold_K": part.cold,
        "length_share": None if math.isnan(part.share) else part.share,
        "compatibility_per_V": [float(s) for s in part.compatibility],
    }


def service_record(found: Service) -> Record:
    """What hours of service leave of a leg; null: not known."""
    sizes = None if found.size is None else [nanometres(float(size)) for size in found.size]
    return {
        "hours": found.hours,
        "width_mm": found.width * 1e3,
        "score_name": found.score_name,
        "score_start": found.score_start,
        "score_end": found.score_end,
        "score_end_counts": list(found.counted),
        "size_hot_end_nm": sizes and sizes[0],
        "size_cold_end_nm": sizes and sizes[-1],
        "best_starting_size_nm": nanometres(found.best_start),
        "starting_window_nm": None if found.start_window is None else [end / NM for end in found.start_window],
        "along": {
            "position_mm": (found.position * 1e3).tolist(),
            "temperature_K": found.temperature.tolist(),
            "size_nm": sizes,
        },
        "hours_to_lose_a_tenth": {
            wear.process: {
                "status": wear.status,
                "hours": wear.hours,
                "factor_1_sigma": wear.factor,
                "reason": wear.reason,
            }
            for wear in found.wear
        },
    }


def fit_record(found: Fit, into: Path | None) -> Record:
    """The whole of `fit`; densities in 1/cm³, other parameters as factors on the start's (gap: eV)."""

    def row(one: Parameter) -> Record:
        low, high = one.interval
        scale = PER_CM3 if one.name.startswith("density") else 1.0
        return {
            "parameter": one.name,
            "value": one.value / scale,
            "low": low / scale,
            "high": high / scale,
            "unit": "1/cm^3" if scale != 1 else "eV" if one.name == "gap" else "1",
            "determined": one.determined,
        }

    return {
        "start": found.start.name,
        "measurements": str(found.table.path),
        "file": None if into is None else str(into),
        "complete": found.complete,
        "reason": found.reason,
        "heat_capacity": found.heat_capacity,
        "parameters": [row(one) for one in found.parameters],
        "residuals": [
            {"quantity": quantity, "rows": rows, "rms_deviation": rms}
            for quantity, (rows, rms) in found.residuals.items()
        ],
        "covariance": found.covariance.tolist(),
    }


def total_record(one: Total) -> Record:
    """One line of the audit's totals; 95 % binomial intervals."""
    return {
        "material": one.material,
        "kind": one.kind,
        "half": one.half,
        "quantity": one.quantity,
        "values": one.values,
        "papers": one.papers,
        "median_error": one.median_error,
        "median_half_width": one.median_half_width,
        "coverage": one.cover,
        "coverage_95": list(one.cover_interval),
        "coverage_by_paper": one.paper_cover,
        "coverage_by_paper_95": list(one.paper_interval),
    }


def device_record(one: DeviceVerdict) -> Record:
    """One published leg, couple or module of `audit`; powers in W/cm²."""
    device = one.device
    unit, factor = {"efficiency": ("1", 1.0), "power": ("W/cm^2", 1 / CM2), "delta_t": ("K", 1.0)}[device.quantity]
    return {
        "device": device.device,
        "n": " > ".join(device.n) or None,
        "p": " > ".join(device.p) or None,
        "n_size_nm": nanometres(device.n_size),
        "p_size_nm": nanometres(device.p_size),
        "hot_K": device.hot,
        "cold_K": device.cold,
        "quantity": device.quantity,
        "unit": unit,
        "measured": device.measured / factor,
        "computed": one.computed / factor,
        "ratio": one.ratio,
        "fixed": one.fixed,
        "source": device.source,
        "basis": device.basis,
        "note": device.note,
    }


def number_records(candidate: Candidate) -> list[Record]:
    """Every number of a candidate with its origin."""
    return [{"key": key, **number.model_dump()} for key, number in numbers(candidate.data)]


def citations(candidate: Candidate) -> dict[str, str]:
    """The sources of a candidate's numbers, as one line each."""
    entries = bibliography(candidate.path.parent)
    used = sorted({number.source for _, number in numbers(candidate.data)})
    return {key: entries[key] for key in used}


def notes(flags: Iterable[str], candidates: Iterable[Candidate]) -> Record:
    """What goes under a table: the meaning of each flag used, and the cautions, once."""
    used = set(flags)
    return {
        "flag_meanings": {slug: text for slug, text in MEANINGS.items() if slug in used},
        "cautions": list(cautions(candidates)),
    }


def as_json(verb: str, content: Record, ascii_only: bool = False) -> str:
    """One strict JSON object: no NaN, no infinity."""
    whole = {"schema": SCHEMA, "legwright": VERSION, "verb": verb, **content}
    return json.dumps(whole, allow_nan=False, ensure_ascii=ascii_only, indent=2) + "\n"


def rank_frame(rows: Iterable[Row], sure: dict[str, Confidence] | None = None) -> pd.DataFrame:
    """A ranking as a frame, which notebooks show as a table; columns as in JSON, units in their names."""
    import pandas as pd

    return pd.DataFrame([rank_record(row, sure) for row in rows]).set_index("rank")


def as_csv(records: list[Record]) -> str:
    """Records as CSV; lists are joined by spaces, inner tables are spread over columns."""
    import pandas as pd

    flat = pd.json_normalize(records).map(
        lambda value: " ".join(map(str, value)) if isinstance(value, list) else value
    )
    return str(flat.to_csv(index=False, lineterminator="\n"))
