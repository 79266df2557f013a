"""Masses, isotopes and disorder from the formula."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from legwright.base.errors import InputError, nearest
from legwright.base.units import ATOMIC_MASS
from legwright.candidate.model import Doping, Site


@cache
def atomic_mass(symbol: str) -> float:
    """Mean mass M = Σ c_i m_i of the natural element's isotopes, kg; symbol 'Si', 'Ge', …

    InputError for a symbol that no element has. By definition of the atomic weight; figures as pymatgen ships them.

    >>> round(atomic_mass("Si") / ATOMIC_MASS, 3)
    28.085
    """
    from pymatgen.core.periodic_table import Element

    try:
        return float(Element(symbol).atomic_mass) * ATOMIC_MASS
    except ValueError as error:
        raise InputError(
            f"'{symbol}' is not an element; {nearest(symbol, [e.value for e in Element])}", slug="unknown-name"
        ) from error


@cache
def isotope_variance(symbol: str) -> float:
    """Σ c_i (1 − m_i/m̄)² of the natural isotopes, dimensionless; 0 where they are not known; symbol 'Si', ….

    ValueError for a symbol that no element has.
    Source: Tamura, Physical Review B 27, 858 (1983); abundances from the periodictable package.

    >>> f"{isotope_variance('Si'):.2e}"
    '2.00e-04'
    """
    import periodictable

    element = periodictable.elements.symbol(symbol)
    shares = [(element[i].abundance, element[i].mass) for i in element.isotopes if element[i].abundance > 0]
    total = sum(share for share, _ in shares)
    if not total:
        return 0.0
    mean = sum(share * mass for share, mass in shares) / total
    return float(sum(share * (1 - mass / mean) ** 2 for share, mass in shares) / total)


@dataclass(frozen=True)
class Disorder:
    """What the composition does to phonons, per atom, one number each.

    mean_mass M̄ (kg); mass_variance: Γ by mass; size_variance: Γ by size for a strain parameter of 1
    (dimensionless).
    """

    mean_mass: float
    mass_variance: float
    size_variance: float


def disorder(sites: tuple[Site, ...]) -> Disorder:
    """Mean atomic mass (kg) and scattering parameters (dimensionless) of a formula with random sublattices.

    Γ_mass = Σ_s c_s Σ_i f_i [(M_i − M_s)² + M_i² g_i]/M̄²,  Γ_size = Σ_s c_s (M_s/M̄)² Σ_i f_i (1 − r_i/r_s)².
    sites: sublattices s with the share c_s of all atoms, occupants i of fractions f_i, masses M_i, isotopes g_i and
    sizes r_i (none: no strain). InputError for an occupant that is no element.
    Sources: Klemens, Proc. Physical Society A 68, 1113 (1955); Abeles, Physical Review 131, 1906 (1963);
    Yang, Meisner & Chen, Applied Physics Letters 85, 1140 (2004) for several sublattices.

    >>> made = disorder((Site(count=1, occupants={"Si": 0.8, "Ge": 0.2}),))
    >>> round(made.mass_variance, 2)  # 0.16 × (44.54/37.00)² and a little by isotopes
    0.23
    """
    atoms = sum(site.count for site in sites)
    means = [sum(f * atomic_mass(e) for e, f in site.occupants.items()) for site in sites]
    mean = sum(site.count * m for site, m in zip(sites, means, strict=True)) / atoms
    by_mass = by_size = 0.0
    for site, site_mean in zip(sites, means, strict=True):
        share = site.count / atoms
        for element, fraction in site.occupants.items():
            mass = atomic_mass(element)
            spread = (mass - site_mean) ** 2 + mass**2 * isotope_variance(element)
            by_mass += share * fraction * spread / mean**2
        if site.sizes:
            size = sum(f * site.sizes[e].si for e, f in site.occupants.items())
            strain = sum(f * (1 - site.sizes[e].si / size) ** 2 for e, f in site.occupants.items())
            by_size += share * strain * (site_mean / mean) ** 2
    return Disorder(mean, by_mass, by_size)


def dopant_disorder(doping: Doping, mean_mass: float) -> Disorder:
    """Γ per dopant atom per host atom, dimensionless: multiply by (dopants per atom).

    Γ_mass = (M_d − M_h)²/M̄², Γ_size = (1 − r_d/r_h)² (M_h/M̄)² for a strain parameter of 1, 0 without both sizes.
    doping: the dopant d and the host h that it replaces; mean_mass M̄ of the crystal (kg), one of each. InputError
    for a dopant that is no element. Source: Klemens, Proc. Physical Society A 68, 1113 (1955).

    >>> from legwright.candidate.library import load_candidate
    >>> made = dopant_disorder(load_candidate("si-n").data.doping, atomic_mass("Si"))
    >>> round(made.mass_variance, 4)  # phosphorus for silicon: (2.889/28.085)²
    0.0106
    """
    host = atomic_mass(doping.replaces)
    by_mass = (atomic_mass(doping.dopant) - host) ** 2 / mean_mass**2
    by_size = 0.0
    if doping.dopant_size is not None and doping.host_size is not None:
        by_size = (1 - doping.dopant_size.si / doping.host_size.si) ** 2 * (host / mean_mass) ** 2
    return Disorder(mean_mass, by_mass, by_size)
