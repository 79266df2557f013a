"""Which flags a set of design points carries."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from legwright.candidate.hazards import evaporates
from legwright.candidate.library import Candidate
from legwright.physics.properties import Properties
from legwright.physics.solubility import beyond_solubility
from legwright.physics.subbands import thin_wire_diameter

Array = NDArray[np.float64]


def point_flags(candidate: Candidate, made: Properties, shape: str) -> list[str]:
    """What a reader must know about these design points, whatever they are for."""
    data, flags = candidate.data, []
    if np.any(made.size < data.making.smallest(shape) * (1 - 1e-9)):
        flags.append("below-smallest-makeable-size")
    if np.any(made.doping < data.doping.lowest.si * (1 - 1e-9)) or np.any(
        made.doping > data.doping.highest.si * (1 + 1e-9)
    ):
        flags.append("doping-outside-known-range")
    if np.any(beyond_solubility(data.doping, made.temperature, made.doping)):
        flags.append("dopant-beyond-solubility")
    if shape == "wire" and np.any(made.size < _subband_limit(made)):
        flags.append("thin-wire-subbands")
    if np.any(made.temperature < data.service.data_from.si) or np.any(made.temperature > data.service.data_to.si):
        flags.append("temperature-outside-data")
    if np.any(made.temperature > data.service.highest_temperature.si):
        flags.append("above-service-temperature")
    if evaporates(candidate, float(np.max(made.temperature))):
        flags.append("volatile-near-service-limit")
    if np.any(made.lattice_thermal_conductivity < made.amorphous_minimum):
        flags.append("lattice-below-amorphous-minimum")
    if np.any(made.bipolar_thermal_conductivity > 0.1 * made.electronic_thermal_conductivity):
        flags.append("mixed-minority-carriers")
    if data.making.porosity is not None and data.making.porosity.si > 0:
        flags.append("porous")
    if shape == "grain" and data.making.sintered_like_finer and np.any(np.isfinite(made.size)):
        flags.append("sintered-boundaries")
    if not data.direction.startswith("isotropic"):
        flags.append("direction")
    counts = candidate.basis_counts
    if counts.get("from memory", 0) > 0.5 * sum(counts.values()):
        flags.append("from-memory")
    return flags


def _subband_limit(made: Properties) -> Array:
    """Diameter at which the lightest of the majority's bands shows its subbands, m."""
    electrons = made.crystal.electrons
    return thin_wire_diameter(made.temperature, float(np.min(electrons.inertial_mass[electrons.majority])))
