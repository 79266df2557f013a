"""Nanostructured samples predicted from bulk parameters: each property apart, so that errors cannot cancel.

Nothing here was used to set a parameter. The committed table says how far off each figure is, and why.
Run this file as a script to write the table anew after an intended change.
"""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
from scipy.optimize import brentq

from legwright.base.units import CM2, MICRO, NM, PER_CM3
from legwright.candidate.library import load_candidate
from legwright.physics.crystal import crystal
from legwright.physics.lattice import crystal_rates, mode_heat, modes
from legwright.physics.properties import evaluate

TABLE = Path(__file__).with_name("nanostructured.csv")

# Published figures with their basis. Li, Wu, Kim, Shi, Yang & Majumdar, Appl. Phys. Lett. 83, 2934 (2003);
# Joshi et al., Nano Lett. 8, 4670 (2008); Poudel et al., Science 320, 634 (2008). "From memory" figures were
# read off remembered curves, to 10 to 25 %; derived ones follow from others of the same sample.
WIRE, SIGE, BISBTE = "silicon wire, {} nm", "p-Si0.8Ge0.2, {}", "p-Bi0.5Sb1.5Te3, {}"
KL, K, MU, S, ZT = (
    "lattice conductivity [W/m/K]",
    "thermal conductivity [W/m/K]",
    "mobility [cm^2/V/s]",
    "seebeck [uV/K]",
    "zT [1]",
)
SAMPLES = (
    (WIRE.format(37), "si-n", "wire", 37, 300, KL, 17.5, "li2003", "from memory"),
    (WIRE.format(56), "si-n", "wire", 56, 300, KL, 27.0, "li2003", "from memory"),
    (WIRE.format(115), "si-n", "wire", 115, 300, KL, 41.0, "li2003", "from memory"),
    (SIGE.format("20 nm"), "sige-p", "grain", 20, 300, K, 2.5, "joshi2008", "from memory"),
    (SIGE.format("20 nm"), "sige-p", "grain", 20, 300, KL, 1.9, "joshi2008", "derived: total less electronic"),
    (SIGE.format("20 nm"), "sige-p", "grain", 20, 300, MU, 24.0, "joshi2008", "from memory"),
    (SIGE.format("20 nm"), "sige-p", "grain", 20, 300, S, 115.0, "joshi2008", "from memory"),
    (SIGE.format("20 nm"), "sige-p", "grain", 20, 1173, S, 235.0, "joshi2008", "from memory"),
    (SIGE.format("20 nm"), "sige-p", "grain", 20, 1173, ZT, 0.95, "joshi2008", "abstract"),
    (SIGE.format("coarse"), "sige-p", "grain", np.inf, 1173, ZT, 0.575, "joshi2008", "0.50 to 0.65, abstract"),
    (BISBTE.format("20 nm"), "bisbte-p", "grain", 20, 300, K, 1.1, "poudel2008", "from memory"),
    (BISBTE.format("20 nm"), "bisbte-p", "grain", 20, 300, KL, 0.5, "poudel2008", "derived: total less electronic"),
    (BISBTE.format("20 nm"), "bisbte-p", "grain", 20, 300, MU, 250.0, "poudel2008", "derived: zT, S, κ, density"),
    (BISBTE.format("20 nm"), "bisbte-p", "grain", 20, 373, S, 205.0, "poudel2008", "from memory"),
    (BISBTE.format("20 nm"), "bisbte-p", "grain", 20, 300, ZT, 1.2, "poudel2008", "abstract"),
    (BISBTE.format("20 nm"), "bisbte-p", "grain", 20, 373, ZT, 1.4, "poudel2008", "abstract"),
    (BISBTE.format("coarse"), "bisbte-p", "grain", np.inf, 373, ZT, 1.0, "poudel2008", "abstract"),
)
#: the samples' active density: of the coarse reference (Joshi), or what gives the sample's own S at 300 K
DOPING_PER_CM3 = {"sige-p": 2.4e20}
OWN_SEEBECK_300K = {"bisbte-p": 185 * MICRO}
REASONS = {
    "li2003": "diffuse walls; the sine branch puts less heat in long waves than the wires show",
    "joshi2008": "same density as the coarse reference assumed; grain law and reflection are priors",
    "poudel2008": "density from S at 300 K; the samples hold precipitates and smaller grains inside the grains, "
    "which are not modelled, and few boundaries that turn carriers back",
}


def doping_of(name: str, size: float, shape: str) -> float:
    if name in OWN_SEEBECK_300K:
        candidate = load_candidate(name)

        def miss(log: float) -> float:
            return float(evaluate(candidate, 300.0, np.exp(log), size, shape).seebeck) - OWN_SEEBECK_300K[name]

        return float(np.exp(brentq(miss, np.log(1e25), np.log(1e26))))
    return DOPING_PER_CM3.get(name, 1e16) * PER_CM3


def predicted(name: str, shape: str, size_nm: float, temperature: float, quantity: str) -> float:
    size = size_nm * NM
    made = evaluate(load_candidate(name), float(temperature), doping_of(name, size, shape), size, shape)
    return {
        KL: float(made.lattice_thermal_conductivity),
        K: float(made.thermal_conductivity),
        MU: float(made.mobility) / CM2,
        S: float(made.seebeck) / MICRO,
        ZT: float(made.zt),
    }[quantity]


def row_of(sample: tuple) -> dict[str, str]:
    label, name, shape, size, temperature, quantity, published, source, basis = sample
    value = predicted(name, shape, size, temperature, quantity)
    return {
        "sample": label,
        "temperature [K]": str(temperature),
        "quantity": quantity,
        "published": f"{published:g}",
        "predicted": f"{value:.3g}",
        "deviation [%]": f"{100 * (value / published - 1):+.0f}",
        "source": source,
        "basis": basis,
        "reason": REASONS[source],
    }


@pytest.mark.parametrize("index", range(len(SAMPLES)))
def test_the_committed_table_is_what_the_model_gives(index):
    with TABLE.open(encoding="utf-8", newline="") as stream:
        then = list(csv.DictReader(stream))
    assert len(then) == len(SAMPLES)
    now = row_of(SAMPLES[index])
    # one unit of the last printed figure
    assert float(now.pop("predicted")) == pytest.approx(float(then[index].pop("predicted")), rel=1e-2)
    now.pop("deviation [%]"), then[index].pop("deviation [%]")
    assert now == then[index]


@pytest.mark.parametrize(("size_nm", "published"), [(37, 17.5), (56, 27.0), (115, 41.0)])
def test_silicon_wires_within_twenty_per_cent_without_a_fit_to_wires(size_nm, published):
    """Li et al., Appl. Phys. Lett. 83, 2934 (2003), from memory."""
    value = predicted("si-n", "wire", size_nm, 300.0, KL)
    assert value == pytest.approx(published, rel=0.20)


def test_half_of_silicon_heat_at_300_K_travels_further_than_half_a_micrometre():
    """Accumulation literature puts the median phonon mean free path of silicon at 0.5 to 1 µm."""
    phonons = crystal(load_candidate("si-n")).phonons
    mesh, t = modes(phonons, 64), np.array(300.0)
    rates = crystal_rates(phonons, mesh, t, np.array(0.0), None)
    path = (mesh.velocity / (rates.resistive + rates.normal)).ravel()
    heat = (mesh.weight * mode_heat(mesh.omega, t) * mesh.velocity).ravel() * path
    order = np.argsort(path)
    share = np.cumsum(heat[order]) / heat.sum()
    median = float(np.interp(0.5, share, path[order]))
    assert 0.5e-6 < median < 1.0e-6


if __name__ == "__main__":
    with TABLE.open("w", encoding="utf-8", newline="") as stream:
        rows = [row_of(sample) for sample in SAMPLES]
        writer = csv.DictWriter(stream, rows[0].keys(), lineterminator="\n")
        writer.writeheader()
        writer.writerows(rows)
