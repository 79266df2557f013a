"""What a candidate file holds: a material with its parameters, every number with its origin."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Literal

from pydantic import BaseModel, Field, model_validator

from legwright.base.reading import Table
from legwright.candidate.number import Measure, measure

Pure = Annotated[Measure, measure("1", 0)]
Ratio = Annotated[Measure, measure("1", 0, above=True)]
Dielectric = Annotated[Measure, measure("1", 1)]
Fraction = Annotated[Measure, measure("1", 0, 1)]
#: an opaque boundary would leave no conductivity at all
Reflected = Annotated[Measure, measure("1", 0, 0.99)]
Signed = Annotated[Measure, measure("1")]
Length = Annotated[Measure, measure("m", 0, above=True)]
Volume = Annotated[Measure, measure("m^3", 0, above=True)]
Mass = Annotated[Measure, measure("kg", 0, above=True)]
Energy = Annotated[Measure, measure("J")]
PhononEnergy = Annotated[Measure, measure("J", 0, above=True)]
BarrierEnergy = Annotated[Measure, measure("J", 0)]
EnergyPerKelvin = Annotated[Measure, measure("J/K")]
PerEnergy = Annotated[Measure, measure("1/J", 0)]
Kelvin = Annotated[Measure, measure("K", 0, above=True)]
Pressure = Annotated[Measure, measure("Pa", 0, above=True)]
Speed = Annotated[Measure, measure("m/s", 0, above=True)]
Mobility = Annotated[Measure, measure("m^2/V/s", 0, above=True)]
Seebeck = Annotated[Measure, measure("V/K")]
Conductivity = Annotated[Measure, measure("W/m/K", 0, above=True)]
Density = Annotated[Measure, measure("1/m^3", 0, above=True)]
PerArea = Annotated[Measure, measure("1/m^2", 0)]
MassDensity = Annotated[Measure, measure("kg/m^3", 0, above=True)]
PerKelvin = Annotated[Measure, measure("1/K")]
MolarEnergy = Annotated[Measure, measure("J/mol", 0, above=True)]
Duration = Annotated[Measure, measure("s", 0, above=True)]
MassFlow = Annotated[Measure, measure("kg/m^2/s", 0)]
ContactResistivity = Annotated[Measure, measure("ohm*m^2", 0, above=True)]
PhononField = Annotated[Measure, measure("J/m", 0, above=True)]

Carrier = Literal["n", "p"]
Side = Literal["conduction", "valence"]
Quantity = Literal["mobility", "seebeck", "lattice_conductivity"]
Fixes = Literal[
    "mass",
    "lattice scattering",
    "impurity scattering",
    "anharmonicity",
    "strain",
    "carrier scattering",
    "nothing",
]
AlloyForm = Literal["golden rule", "published 3 pi^2/8"]

FIXED_BY: dict[str, tuple[str, ...]] = {
    "mobility": ("lattice scattering", "impurity scattering", "nothing"),
    "seebeck": ("mass", "nothing"),
    "lattice_conductivity": ("anharmonicity", "strain", "carrier scattering", "nothing"),
}


class Site(Table):
    """One sublattice of the formula unit; unlike occupants scatter phonons by mass and by size."""

    count: float = Field(gt=0)
    occupants: dict[str, Annotated[float, Field(gt=0, le=1)]]
    sizes: dict[str, Length] = Field(default_factory=dict)

    @model_validator(mode="after")
    def _full(self) -> Site:
        if abs(sum(self.occupants.values()) - 1) > 1e-9:
            raise ValueError("occupants must add up to 1")
        if self.sizes and set(self.sizes) != set(self.occupants):
            raise ValueError("sizes must name each occupant")
        return self


class Cell(Table):
    """Room per atom, atoms per primitive cell, and linear thermal expansion (mean over the service range)."""

    volume_per_atom: Volume
    atoms: Pure
    thermal_expansion: PerKelvin | None = None


class Band(Table):
    """A Kane band. `edge` is its energy at 0 K; it moves by −edge_alpha T²/(T + edge_beta) (Varshni 1967).

    `mass_ratio` is the mass along a valley over that across it; it bears on the Hall effect alone.
    """

    label: str
    side: Side
    edge: Energy
    edge_alpha: EnergyPerKelvin | None = None
    edge_beta: Kelvin | None = None
    valleys: Pure
    dos_mass: Mass
    inertial_mass: Mass
    mass_ratio: Ratio | None = None
    mass_exponent: Signed | None = None
    nonparabolicity: PerEnergy | None = None
    deformation_potential: Energy
    intervalley_field: PhononField | None = None
    intervalley_phonon: Energy | None = None
    alloy_potential: Energy | None = None
    alloy_form: AlloyForm = "golden rule"

    @model_validator(mode="after")
    def _paired(self) -> Band:
        if (self.intervalley_field is None) != (self.intervalley_phonon is None):
            raise ValueError("intervalley_field and intervalley_phonon go together")
        return self


class Scattering(Table):
    """What the carriers of all bands share. With `high_frequency_dielectric` they feel polar-optical phonons.

    Deformation potentials fitted to mobility hold that scattering already: the two do not go together. `barrier`
    is the height over the band edge of the majority, at every grain boundary.
    """

    elastic_constant: Pressure
    dielectric_constant: Pure
    high_frequency_dielectric: Dielectric | None = None
    optical_phonon: PhononEnergy | None = None
    alloy_fraction: Fraction | None = None
    alloy_volume: Volume | None = None
    grain_reflection: Reflected | None = None
    barrier: BarrierEnergy | None = None

    @model_validator(mode="after")
    def _paired(self) -> Scattering:
        if (self.alloy_fraction is None) != (self.alloy_volume is None):
            raise ValueError("alloy_fraction and alloy_volume go together")
        high = self.high_frequency_dielectric
        if high is not None and high.si >= self.dielectric_constant.si:
            raise ValueError("high_frequency_dielectric must be below dielectric_constant")
        if high is None and self.optical_phonon is not None:
            raise ValueError("optical_phonon needs high_frequency_dielectric")
        return self


class Vacancies(Table):
    """Missing atoms: `share` of all atomic sites, from which atoms of `element` are gone.

    `in_anchors` here and below: the samples of the lattice anchors hold these defects too, so that their effect is
    not in the prefactors. Otherwise they come on top, brought in by the making.
    """

    share: Annotated[Measure, measure("1", 0, 0.3)]
    element: str
    in_anchors: bool


class Dislocations(Table):
    """Dislocation lines at random angles: their length per volume and Burgers vector."""

    density: PerArea
    burgers_vector: Length
    in_anchors: bool


class Precipitates(Table):
    """Round inclusions: share of the volume, median radius, spread of ln R (none: all alike), mass density."""

    volume_share: Annotated[Measure, measure("1", 0, 0.3)]
    radius: Length
    radius_spread: Annotated[Measure, measure("1", 0, 1.5)] | None = None
    mass_density: MassDensity
    in_anchors: bool


class Lattice(Table):
    """One longitudinal and two transverse branches, and what scatters them.

    `optical_share`: part of the first lattice anchor's conductivity that optical branches carry, where known.
    """

    sound_longitudinal: Speed
    sound_transverse: Speed
    grueneisen_longitudinal: Pure
    grueneisen_transverse: Pure
    umklapp_divisor: Pure
    normal_ratio: Pure
    strain_parameter: Pure
    carrier_deformation_potential: Energy
    vacancies: Vacancies | None = None
    dislocations: Dislocations | None = None
    precipitates: Precipitates | None = None
    optical_share: Annotated[Measure, measure("1", 0, 0.9)] | None = None


class Anchor(Table):
    """A measurement on coarse material, and the prefactor that it fixes."""

    quantity: Quantity
    fixes: Fixes
    temperature: Kelvin
    doping: Density | None = None
    mobility: Mobility | None = None
    seebeck: Seebeck | None = None
    lattice_conductivity: Conductivity | None = None

    @property
    def measured(self) -> Measure:
        """The measured figure itself."""
        number = getattr(self, self.quantity)
        assert isinstance(number, Measure)
        return number

    @model_validator(mode="after")
    def _whole(self) -> Anchor:
        if not isinstance(getattr(self, self.quantity), Measure):
            raise ValueError(f"an anchor of quantity '{self.quantity}' needs the key '{self.quantity}'")
        if self.fixes not in FIXED_BY[self.quantity]:
            allowed = ", ".join(FIXED_BY[self.quantity])
            raise ValueError(f"'{self.quantity}' can fix one of: {allowed}")
        if self.doping is None and self.quantity != "lattice_conductivity":
            raise ValueError("needs the key 'doping': the active density of the sample")
        return self


class Doping(Table):
    """Active densities that have been made, and the element that gives them.

    `carriers_per_dopant`: active carriers that one atom of dopant gives (1 where the file is silent). With
    `solution_enthalpy` the highest density belongs to `solution_temperature` and falls below it; dopants move above
    `mobile_temperature` (half of `solution_temperature` where the file is silent), and stay frozen in below.
    """

    lowest: Density
    highest: Density
    dopant: str
    replaces: str
    carriers_per_dopant: Ratio | None = None
    dopant_size: Length | None = None
    host_size: Length | None = None
    solution_enthalpy: Energy | None = None
    solution_temperature: Kelvin | None = None
    mobile_temperature: Kelvin | None = None

    @model_validator(mode="after")
    def _paired(self) -> Doping:
        if (self.solution_enthalpy is None) != (self.solution_temperature is None):
            raise ValueError("solution_enthalpy and solution_temperature go together")
        if self.mobile_temperature is not None and self.solution_temperature is None:
            raise ValueError("mobile_temperature needs solution_enthalpy and solution_temperature")
        return self


class Loss(Table):
    """A measured rate of sublimation, bare or under the coat that is named."""

    temperature: Kelvin
    rate: MassFlow
    coat: str | None = None


class Contact(Table):
    """A measured contact: the metal or joint, and its resistivity."""

    metal: str
    resistivity: ContactResistivity
    temperature: Kelvin | None = None


class Coarsening(Table):
    """Grain growth d^m − d_0^m = k_0 exp(−Q/RT) t (Burke & Turnbull 1952), from one annealing that was watched.

    The annealing took grains from `from_size` to `to_size` in `hours` at `temperature`, which gives k_0.
    """

    exponent: Annotated[Measure, measure("1", 1)]
    activation_energy: MolarEnergy
    temperature: Kelvin
    from_size: Length
    to_size: Length
    hours: Duration

    @model_validator(mode="after")
    def _grown(self) -> Coarsening:
        if self.to_size.si <= self.from_size.si:
            raise ValueError("to_size must be above from_size")
        return self


class Service(Table):
    """Where the candidate may be used, and what wears it there; in air it oxidises above `oxidation_onset`."""

    highest_temperature: Kelvin
    reason: str
    data_from: Kelvin
    data_to: Kelvin
    oxidation_onset: Kelvin | None = None
    sublimation: tuple[Loss, ...] = ()


class Making(Table):
    """What can be made, and how.

    `size_spread`: standard deviation of ln d; the size asked for is then the median grain. `porosity`: share of
    volume that is pores in what will be made; the anchors count as dense. `wall_roughness`: root mean square height
    of the walls of wires and films, for phonons; without it all that meets a wall is scattered.
    """

    smallest_grain: Length
    smallest_wire: Length | None = None
    smallest_film: Length | None = None
    route: str
    size_spread: Pure | None = None
    porosity: Annotated[Measure, measure("1", 0, 0.9)] | None = None
    wall_roughness: Length | None = None
    sintered_like_finer: bool = False

    def smallest(self, shape: str) -> float:
        """Smallest size of that shape that can be made, m; 0 where the file does not say."""
        size = {"grain": self.smallest_grain, "wire": self.smallest_wire, "film": self.smallest_film}[shape]
        return 0.0 if size is None else size.si


class Knot(Table):
    """The heavy-doping factor at one density."""

    doping: Density
    factor: Ratio


class Fitted(Table):
    """Prefactors fitted to measurements of one's own, in place of those that the anchors fix.

    `names` and `covariance` keep what the fit knows of the logarithms (of the gap: eV) for later draws.
    """

    mass: Ratio
    lattice_scattering: Ratio
    anharmonicity: Ratio
    strain: Ratio
    phonons_by_carriers: Ratio
    optical_excess: Annotated[Measure, measure("W/m/K", 0)]
    heavy_doping: tuple[Knot, ...] = ()
    names: tuple[str, ...]
    covariance: tuple[tuple[float, ...], ...]


class CandidateFile(Table):
    """A whole candidate file."""

    schema_: Literal[1] = Field(alias="schema")
    title: str
    formula: str
    carrier: Carrier
    direction: str
    site: tuple[Site, ...] = Field(min_length=1)
    cell: Cell
    band: tuple[Band, ...] = Field(min_length=1)
    scattering: Scattering
    lattice: Lattice
    anchor: tuple[Anchor, ...]
    doping: Doping
    service: Service
    making: Making
    contact: tuple[Contact, ...] = ()
    coarsening: Coarsening | None = None
    fitted: Fitted | None = None

    @model_validator(mode="after")
    def _consistent(self) -> CandidateFile:
        majority = "conduction" if self.carrier == "n" else "valence"
        if not any(band.side == majority for band in self.band):
            raise ValueError(f"carrier '{self.carrier}' needs a {majority} band")
        if self.scattering.high_frequency_dielectric is not None:
            for index, band in enumerate(self.band, start=1):
                if band.deformation_potential.basis == "calibrated on bulk":
                    raise ValueError(
                        f"band[{index}].deformation_potential is calibrated on bulk and holds polar-optical "
                        "scattering already: leave scattering.high_frequency_dielectric out, or take another one"
                    )
        if self.doping.lowest.si >= self.doping.highest.si:
            raise ValueError("doping.lowest must be below doping.highest")
        hosts = {element for site in self.site for element in site.occupants}
        if self.doping.replaces not in hosts:
            raise ValueError(f"doping.replaces '{self.doping.replaces}' is not in the formula")
        missing = self.lattice.vacancies
        if missing is not None and missing.element not in hosts:
            raise ValueError(f"lattice.vacancies.element '{missing.element}' is not in the formula")
        if self.lattice.optical_share is not None:
            if self.cell.atoms.si <= 1:
                raise ValueError("lattice.optical_share: one atom per primitive cell has no optical branch")
            if not any(anchor.quantity == "lattice_conductivity" for anchor in self.anchor):
                raise ValueError(
                    "lattice.optical_share is a part of the first lattice_conductivity anchor: none given"
                )
        return self


def numbers(table: BaseModel, prefix: str = "") -> Iterator[tuple[str, Measure]]:
    """Every Measure below `table`, with its key."""
    for name in type(table).model_fields:
        value = getattr(table, name)
        key = f"{prefix}.{name}" if prefix else name
        if isinstance(value, Measure):
            yield key, value
        elif isinstance(value, BaseModel):
            yield from numbers(value, key)
        elif isinstance(value, tuple):
            for index, item in enumerate(value):
                place = f"{key}[{index + 1}]"
                if isinstance(item, Measure):
                    yield place, item
                elif isinstance(item, BaseModel):
                    yield from numbers(item, place)
        elif isinstance(value, dict):
            for inner, item in value.items():
                if isinstance(item, Measure):
                    yield f"{key}.{inner}", item
