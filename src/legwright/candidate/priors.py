"""What is assumed for every candidate alike: of grain boundaries, of laboratories, of what the model misses."""

from __future__ import annotations

from functools import cache
from typing import Literal

from pydantic import Field

from legwright.base.files import datasets_folder, read_toml
from legwright.base.reading import Table, read_as
from legwright.candidate.model import Pure, Ratio, Reflected


class GrainLaw(Table):
    """Λ_gb = c d (ω_max/ω)^s."""

    exponent: Pure
    prefactor: Pure


class Reflection(Table):
    """Share of carriers that a grain boundary turns back."""

    electrons: Reflected


class ByQuantity(Table):
    """One standard deviation of the logarithm for each quantity; both thermal conductivities share theirs."""

    seebeck: Pure
    electrical_conductivity: Pure
    thermal_conductivity: Pure
    zt: Pure


class Laboratory(ByQuantity):
    """Between laboratories that measure one sample; and of a density that is published, or that is not stated."""

    hall_density: Pure
    unstated_doping: Pure


class Discrepancy(ByQuantity):
    """Of the model; heat in bodies of a stated size, which may be strained, porous or oxidised, has its own."""

    thermal_conductivity_sized: Pure


class Effort(Table):
    """Of making one sample, and of measuring one quantity on it, in units of one Seebeck coefficient."""

    sample: Ratio
    seebeck: Ratio
    electrical_conductivity: Ratio
    thermal_conductivity: Ratio


class Priors(Table):
    """The whole of priors.toml."""

    schema_: Literal[1] = Field(alias="schema")
    grain_law: GrainLaw
    reflection: Reflection
    laboratory: Laboratory
    discrepancy: Discrepancy
    effort: Effort


@cache
def load_priors() -> Priors:
    """The shipped priors."""
    return read_as(Priors, read_toml(datasets_folder() / "priors.toml"), "priors.toml")
