"""Masses, isotopes and disorder against tables and formulas this project did not make."""

import pytest

from legwright.base.errors import InputError
from legwright.base.units import ATOMIC_MASS
from legwright.candidate.composition import atomic_mass, disorder, dopant_disorder, isotope_variance
from legwright.candidate.library import load_candidate
from legwright.candidate.model import Site

#: sums and products of a handful of doubles
ROUNDING = 1e-13

# standard atomic weights, from memory of the IUPAC table (2013); Bi and P have one stable isotope each
WEIGHTS = {"Si": 28.085, "Ge": 72.630, "Bi": 208.980, "Te": 127.60, "Pb": 207.2, "Mg": 24.305, "P": 30.974}


@pytest.mark.parametrize(("symbol", "weight"), WEIGHTS.items())
def test_masses_are_the_standard_atomic_weights(symbol, weight):
    # natural material varies, and older tables differ in the last digit given
    assert atomic_mass(symbol) / ATOMIC_MASS == pytest.approx(weight, rel=5e-4)


# Tamura, Physical Review B 27, 858 (1983); 1 %: abundances have been measured anew since
@pytest.mark.parametrize(("symbol", "gamma"), [("Si", 2.00e-4), ("Ge", 5.87e-4)])
def test_isotope_disorder(symbol, gamma):
    assert isotope_variance(symbol) == pytest.approx(gamma, rel=0.01)


@pytest.mark.parametrize("symbol", ["P", "Bi", "As", "Na"])
def test_an_element_with_one_isotope_has_no_isotope_disorder(symbol):
    assert isotope_variance(symbol) == 0


def test_unknown_element_offers_the_nearest():
    with pytest.raises(InputError, match="'Sii' is not an element; did you mean 'Si'"):
        atomic_mass("Sii")


def test_an_unknown_element_has_no_isotopes_to_vary():
    with pytest.raises(ValueError, match="unknown element"):
        isotope_variance("Sii")


def test_pure_element_has_isotopes_only():
    made = disorder((Site(count=1, occupants={"Si": 1.0}),))
    assert made.mean_mass == atomic_mass("Si")
    assert made.mass_variance == pytest.approx(isotope_variance("Si"), rel=ROUNDING, abs=0)
    assert made.size_variance == 0


def test_silicon_germanium_by_hand():
    """x(1−x)(ΔM/M̄)² (Klemens 1955), and the isotopes of each element weighed by M²."""
    si, ge = atomic_mass("Si"), atomic_mass("Ge")
    mean = 0.8 * si + 0.2 * ge
    by_hand = 0.8 * 0.2 * ((ge - si) / mean) ** 2
    isotopes = (0.8 * si**2 * isotope_variance("Si") + 0.2 * ge**2 * isotope_variance("Ge")) / mean**2
    made = disorder((Site(count=1, occupants={"Si": 0.8, "Ge": 0.2}),))
    assert made.mean_mass == pytest.approx(mean, rel=ROUNDING, abs=0)
    assert made.mass_variance == pytest.approx(by_hand + isotopes, rel=ROUNDING, abs=0)
    # by pencil from 28.09 and 72.63: 0.16 × (44.54/37.00)² = 0.2319, and 0.0005 of isotopes; four digits
    assert made.mass_variance == pytest.approx(0.2324, rel=1e-3)


def test_silicon_germanium_strain_by_hand():
    """x(1−x)(Δa/ā)² with the lattice constants 5.431 and 5.658 Å: 0.16 × (0.227/5.4764)² = 2.749e-4."""
    made = load_candidate("sige-n").disorder
    assert made.size_variance == pytest.approx(2.749e-4, rel=1e-3)  # four digits by hand


def test_only_unlike_atoms_of_one_sublattice_count():
    """A perfect compound of light and heavy atoms has isotope disorder alone (Yang, Meisner & Chen 2004)."""
    pure = disorder((Site(count=1, occupants={"Pb": 1.0}), Site(count=1, occupants={"Te": 1.0})))
    mixed = disorder((Site(count=2, occupants={"Pb": 0.5, "Te": 0.5}),))
    assert pure.mean_mass == pytest.approx(mixed.mean_mass, rel=ROUNDING, abs=0)
    assert pure.mass_variance < 0.01 * mixed.mass_variance


def test_a_sublattice_counts_by_its_share_of_the_atoms():
    """(Mg₂)(Si₀.₄Sn₀.₆): one atom in three is random, over the mean mass of all."""
    si, sn, mg = atomic_mass("Si"), atomic_mass("Sn"), atomic_mass("Mg")
    mean = (2 * mg + 0.4 * si + 0.6 * sn) / 3
    sites = (Site(count=2, occupants={"Mg": 1.0}), Site(count=1, occupants={"Si": 0.4, "Sn": 0.6}))
    isotopes = (
        2 * mg**2 * isotope_variance("Mg")
        + 0.4 * si**2 * isotope_variance("Si")
        + 0.6 * sn**2 * isotope_variance("Sn")
    ) / (3 * mean**2)
    by_hand = 0.24 * (sn - si) ** 2 / (3 * mean**2) + isotopes
    assert disorder(sites).mass_variance == pytest.approx(by_hand, rel=ROUNDING, abs=0)


def test_the_most_disorder_is_where_the_masses_spread_most():
    """For one alloy line Γ is zero-like at the ends and has one maximum, on the light side."""
    shares = [0.02 * i for i in range(1, 50)]
    gamma = [disorder((Site(count=1, occupants={"Si": 1 - x, "Ge": x}),)).mass_variance for x in shares]
    top = gamma.index(max(gamma))
    assert gamma[: top + 1] == sorted(gamma[: top + 1])
    assert gamma[top:] == sorted(gamma[top:], reverse=True)
    # M̄² falls with the share of the light atom: the maximum of x(1−x)/(M_Si + xΔM)² is at M_Si/(M_Si + M_Ge)
    assert shares[top] == pytest.approx(atomic_mass("Si") / (atomic_mass("Si") + atomic_mass("Ge")), abs=0.02)


def test_a_dopant_that_is_its_host_disturbs_nothing():
    doping = load_candidate("si-n").data.doping
    own = doping.model_copy(update={"dopant": "Si", "dopant_size": doping.host_size})
    made = dopant_disorder(own, atomic_mass("Si"))
    assert (made.mass_variance, made.size_variance) == (0, 0)


def test_a_dopant_by_hand():
    """Phosphorus for silicon: ((30.974 − 28.085)/28.085)² = 0.01058 (Klemens 1955)."""
    made = dopant_disorder(load_candidate("si-n").data.doping, atomic_mass("Si"))
    assert made.mass_variance == pytest.approx(0.01058, rel=2e-3)  # weights with five digits, difference with four


@pytest.mark.parametrize(
    ("occupants", "sizes", "message"),
    [
        ({"Si": 0.8, "Ge": 0.3}, {}, "add up to 1"),
        ({"Si": 1.2, "Ge": -0.2}, {}, "less than or equal to 1"),
    ],
)
def test_impossible_sites_are_refused(occupants, sizes, message):
    with pytest.raises(ValueError, match=message):
        Site(count=1, occupants=occupants, sizes=sizes)
