"""The job to be decided, as the user wrote it."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Annotated, Literal

from pydantic import BeforeValidator, Field, model_validator

from legwright.base.errors import InputError, nearest
from legwright.base.files import read_toml
from legwright.base.reading import Table, read_as
from legwright.base.units import CM2, MICRO, NM, PER_CM3
from legwright.candidate.library import Candidate, library_names, load_candidate
from legwright.decide.robust import Scatter, Take
from legwright.leg.duty import GOALS, Duty, Goal, Kind, Setting
from legwright.physics.properties import COLDEST, DENSEST, HOTTEST, LARGEST, SMALLEST, THINNEST, Shape

Temperature = Annotated[float, Field(ge=COLDEST, le=HOTTEST)]
Size = Annotated[float, Field(ge=round(SMALLEST / NM, 6), le=round(LARGEST / NM, 6))]
Length = Annotated[float, Field(ge=1e-3, le=1e3)]
Active = Annotated[float, Field(ge=THINNEST / PER_CM3, le=DENSEST / PER_CM3)]

#: leg length when the brief gives none: common practice for bulk legs is 1 to 5 mm
DEFAULT_LENGTH_MM = 1.0
#: side loss times length squared, W/(m K): against conductivities of about 1 that is a fin ten times its own reach
LEAKIEST = 100.0


class DutyTable(Table):
    """What the leg is for."""

    kind: Kind
    hot_K: Temperature
    cold_K: Temperature
    maximise: Goal

    @model_validator(mode="after")
    def _possible(self) -> DutyTable:
        if self.hot_K <= self.cold_K:
            raise ValueError(f"hot_K = {self.hot_K:g} must be above cold_K = {self.cold_K:g}")
        if self.maximise not in GOALS[self.kind]:
            raise ValueError(
                f"maximise = '{self.maximise}' does not fit kind = '{self.kind}' "
                f"(allowed: {', '.join(GOALS[self.kind])})"
            )
        return self


class SizeTable(Table):
    """The sizes to consider."""

    shape: Shape
    min_nm: Size
    max_nm: Size

    @model_validator(mode="after")
    def _ordered(self) -> SizeTable:
        if self.max_nm <= self.min_nm:
            raise ValueError(f"max_nm = {self.max_nm:g} must be above min_nm = {self.min_nm:g}")
        return self


class DopingTable(Table):
    """Active densities to consider, where narrower than each candidate's own range."""

    min_per_cm3: Active
    max_per_cm3: Active

    @model_validator(mode="after")
    def _ordered(self) -> DopingTable:
        if self.max_per_cm3 <= self.min_per_cm3:
            raise ValueError(f"max_per_cm3 = {self.max_per_cm3:g} must be above min_per_cm3 = {self.min_per_cm3:g}")
        return self


def _all_or_names(value: object) -> object:
    if value == "all" or (isinstance(value, tuple) and value and all(isinstance(name, str) for name in value)):
        return value
    raise ValueError('must be "all" or a list of at least one name or path')


class CandidatesTable(Table):
    """Who is considered."""

    use: Annotated[Literal["all"] | tuple[str, ...], BeforeValidator(_all_or_names)] = "all"
    carrier: Literal["n", "p", "either"] = "either"


class AvoidTable(Table):
    """What must not be in the leg."""

    elements: tuple[str, ...] = ()
    hazardous: bool = False
    cost_above_USD_per_kg: Annotated[float, Field(gt=0)] | None = None
    supply_concentration_above: Annotated[float, Field(gt=0, le=10_000)] | None = None


class MakingTable(Table):
    """How far made legs scatter about what was asked for (standard deviation as a factor), and what counts then."""

    size_scatter: Annotated[float, Field(ge=1, le=3)] = 1.0
    doping_scatter: Annotated[float, Field(ge=1, le=3)] = 1.0
    maximise: Take = "expected"

    @model_validator(mode="after")
    def _scattered(self) -> MakingTable:
        if self.size_scatter == self.doping_scatter == 1:
            raise ValueError(
                "size_scatter or doping_scatter must be above 1; without [making] legs are as designed"
            )
        return self


class LegTable(Table):
    """The leg itself and what surrounds it; ideal where nothing is said.

    Free paths of carriers and phonons feel a length that is named; else, and where it is free, the leg is long.
    Contacts, electric and thermal, are those of one end, alike at both. side_loss is a heat-transfer coefficient
    times the leg's perimeter over its area: 10 W/(m² K) on a leg 2 mm square is 2e4 W/(m³ K).
    hours of service: not looked at where none are said. width, of a square leg, bears on sublimation: as its length
    where it is not said (common practice has both at 1 to 5 mm). beyond_service: what is done with a candidate
    hotter than it may be used.
    """

    length_mm: Length = DEFAULT_LENGTH_MM
    length_free_mm: tuple[Length, Length] | None = None
    contact_uohm_cm2: Annotated[float, Field(ge=0, le=1e6)] = 0.0
    contact_K_cm2_per_W: Annotated[float, Field(ge=0, le=1e4)] = 0.0
    hot_exchanger_K_cm2_per_W: Annotated[float, Field(ge=0, le=1e4)] = 0.0
    cold_exchanger_K_cm2_per_W: Annotated[float, Field(ge=0, le=1e4)] = 0.0
    side_loss_W_per_m3_K: Annotated[float, Field(ge=0, le=1e9)] = 0.0
    ambient_K: Temperature | None = None
    partner: Annotated[str, Field(min_length=1)] | None = None
    hours: Annotated[float, Field(gt=0, le=1e7)] | None = None
    width_mm: Length | None = None
    beyond_service: Literal["refuse", "flag"] = "refuse"

    @model_validator(mode="after")
    def _ordered(self) -> LegTable:
        if self.length_free_mm is not None and not self.length_free_mm[0] < self.length_free_mm[1]:
            low, high = self.length_free_mm
            raise ValueError(f"length_free_mm = [{low:g}, {high:g}] must be [shortest, longest]")
        longest = max(self.length_free_mm or (self.length_mm,)) * 1e6 * NM
        if self.side_loss_W_per_m3_K * longest**2 > LEAKIEST:
            most = LEAKIEST / longest**2
            raise ValueError(
                f"side_loss_W_per_m3_K = {self.side_loss_W_per_m3_K:g} is not allowed; at most {most:.3g} "
                f"in a leg of {longest * 1e3:g} mm: its heat would all leave through its sides"
            )
        return self


class Brief(Table):
    """A whole brief."""

    title: str
    duty: DutyTable
    size: SizeTable
    doping: DopingTable | None = None
    candidates: CandidatesTable = CandidatesTable()
    avoid: AvoidTable = AvoidTable()
    making: MakingTable | None = None
    leg: LegTable = LegTable()

    @property
    def scatter(self) -> Scatter | None:
        """Scatter of made legs, as spreads of the logarithm; None where legs count as designed."""
        making = self.making
        if making is None:
            return None
        return Scatter(math.log(making.size_scatter), math.log(making.doping_scatter), making.maximise)

    @property
    def task(self) -> Duty:
        """The duty in SI, with what surrounds the leg."""
        duty, leg = self.duty, self.leg
        free = leg.length_free_mm
        setting = Setting(
            leg.contact_uohm_cm2 * MICRO * CM2,
            (leg.hot_exchanger_K_cm2_per_W + leg.contact_K_cm2_per_W) * CM2,
            (leg.cold_exchanger_K_cm2_per_W + leg.contact_K_cm2_per_W) * CM2,
            leg.side_loss_W_per_m3_K,
            leg.ambient_K,
        )
        return Duty(
            duty.kind,
            duty.hot_K,
            duty.cold_K,
            duty.maximise,
            leg.length_mm * 1e6 * NM,
            setting,
            None if free is None else (free[0] * 1e6 * NM, free[1] * 1e6 * NM),
            leg.length_mm * 1e6 * NM if free is None and "length_mm" in leg.model_fields_set else math.inf,
        )


def load_brief(path: str | Path) -> Brief:
    """The brief in that file; InputError naming file, key, value and what is allowed when it cannot be used."""
    brief = read_as(Brief, read_toml(Path(path)), path)
    _check_elements(brief, path)
    return brief


def _check_elements(brief: Brief, path: str | Path) -> None:
    if not brief.avoid.elements:
        return
    from pymatgen.core.periodic_table import Element

    symbols = [element.value for element in Element]
    for symbol in brief.avoid.elements:
        if symbol not in symbols:
            raise InputError(
                f"'{symbol}' is not an element; {nearest(symbol, symbols)}",
                file=path,
                key="avoid.elements",
                slug="unknown-name",
            )


def candidates_of(brief: Brief, path: str | Path) -> list[Candidate]:
    """The brief's candidates in a fixed order, whatever order the brief lists them in."""
    wanted = library_names() if brief.candidates.use == "all" else brief.candidates.use
    found: dict[tuple[Path, str], Candidate] = {}
    for name in wanted:
        one = _named(name, path, "candidates.use")
        found[one.path, one.name] = one
    chosen = [c for c in found.values() if brief.candidates.carrier in ("either", c.data.carrier)]
    if not chosen:
        raise InputError(
            f"none of the candidates has carrier '{brief.candidates.carrier}'",
            file=path,
            key="candidates.carrier",
            slug="bad-field",
        )
    return sorted(chosen, key=lambda c: (c.name, str(c.path)))


def partner_of(brief: Brief, path: str | Path) -> Candidate | None:
    """The candidate of the other leg of a couple; None where the brief names none."""
    return None if brief.leg.partner is None else _named(brief.leg.partner, path, "leg.partner")


def _named(name: str, path: str | Path, key: str) -> Candidate:
    """A candidate of the library, or one whose path is written from the brief on."""
    try:
        return load_candidate(Path(path).parent / name if name.endswith(".toml") else name)
    except InputError as error:
        raise InputError(str(error), file=path, key=key, slug=error.slug) from error
