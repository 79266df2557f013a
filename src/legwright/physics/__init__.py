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
from legwright.physics.boundaries import (
    film_suppression,
    grain_mean_free_path,
    grain_suppression,
    wire_suppression,
)
from legwright.physics.carrier_scattering import (
    acoustic_rate,
    alloy_rate,
    intervalley_rate,
    ionised_impurity_rate,
    screening_wave_number_squared,
)
from legwright.physics.fermi import fermi_dirac_integral
from legwright.physics.moments import bipolar_heat, conductivity, electronic_heat, mobility, seebeck
from legwright.physics.phonon_scattering import (
    anharmonic_strength,
    carrier_rate,
    normal_rate,
    point_defect_rate,
    umklapp_rate,
)
from legwright.physics.quanta import conductance_quantum_per_spin, thermal_conductance_quantum

__all__ = [
    "acoustic_rate",
    "alloy_rate",
    "anharmonic_strength",
    "band_edge",
    "bipolar_heat",
    "carrier_rate",
    "conductance_quantum_per_spin",
    "conductivity",
    "density_of_states",
    "electronic_heat",
    "fermi_dirac_integral",
    "film_suppression",
    "grain_mean_free_path",
    "grain_suppression",
    "intervalley_rate",
    "ionised_impurity_rate",
    "kane_gamma",
    "kane_slope",
    "mobility",
    "normal_rate",
    "point_defect_rate",
    "screening_wave_number_squared",
    "seebeck",
    "states_below",
    "thermal_conductance_quantum",
    "umklapp_rate",
    "velocity_squared",
    "wave_number_squared",
    "wire_suppression",
]
