"""What nature does: pure functions on arrays, then `evaluate`, a candidate at (temperature, doping, size)."""

from legwright.physics.bands import (
    band_edge,
    density_of_states,
    kane_gamma,
    kane_slope,
    states_below,
    velocity_squared,
    wave_number_squared,
)
from legwright.physics.barriers import barrier_conductance, barrier_suppression
from legwright.physics.boundaries import (
    film_suppression,
    film_suppression_rough,
    grain_mean_free_path,
    grain_suppression,
    wire_suppression,
    wire_suppression_rough,
)
from legwright.physics.carrier_scattering import (
    acoustic_rate,
    alloy_rate,
    intervalley_rate,
    ionised_impurity_rate,
    polar_rate,
    screening_wave_number_squared,
)
from legwright.physics.fermi import fermi_dirac_integral
from legwright.physics.hall import hall_anisotropy, hall_coefficient, hall_factor
from legwright.physics.moments import bipolar_heat, conductivity, electronic_heat, mobility, seebeck
from legwright.physics.phonon_scattering import (
    anharmonic_strength,
    carrier_rate,
    dislocation_core_rate,
    dislocation_strain_rate,
    normal_rate,
    point_defect_rate,
    precipitate_rate,
    umklapp_rate,
    vacancy_disorder,
)
from legwright.physics.quanta import (
    ballistic_wire_conductance,
    conductance_quantum_per_spin,
    thermal_conductance_quantum,
)
from legwright.physics.short_legs import modes_per_area, short_leg_conductance, short_leg_suppression
from legwright.physics.solubility import active_density, active_limit, atomic_percent, solubility
from legwright.physics.subbands import (
    WireBand,
    subband_density,
    subband_edges,
    subband_integrals,
    subband_level,
    thin_wire_diameter,
)

__all__ = [
    "WireBand",
    "acoustic_rate",
    "active_density",
    "active_limit",
    "alloy_rate",
    "anharmonic_strength",
    "atomic_percent",
    "ballistic_wire_conductance",
    "band_edge",
    "barrier_conductance",
    "barrier_suppression",
    "bipolar_heat",
    "carrier_rate",
    "conductance_quantum_per_spin",
    "conductivity",
    "density_of_states",
    "dislocation_core_rate",
    "dislocation_strain_rate",
    "electronic_heat",
    "fermi_dirac_integral",
    "film_suppression",
    "film_suppression_rough",
    "grain_mean_free_path",
    "grain_suppression",
    "hall_anisotropy",
    "hall_coefficient",
    "hall_factor",
    "intervalley_rate",
    "ionised_impurity_rate",
    "kane_gamma",
    "kane_slope",
    "mobility",
    "modes_per_area",
    "normal_rate",
    "point_defect_rate",
    "polar_rate",
    "precipitate_rate",
    "screening_wave_number_squared",
    "seebeck",
    "short_leg_conductance",
    "short_leg_suppression",
    "solubility",
    "states_below",
    "subband_density",
    "subband_edges",
    "subband_integrals",
    "subband_level",
    "thermal_conductance_quantum",
    "thin_wire_diameter",
    "umklapp_rate",
    "vacancy_disorder",
    "velocity_squared",
    "wave_number_squared",
    "wire_suppression",
    "wire_suppression_rough",
]
