"""The direct path against the same physics as plain adaptive quadrature, one design point at a time.

`Plain` shares no function with the package: it reads the numbers of a crystal and integrates with scipy's quad.
Speeds are compared within one run; seconds are only printed.
"""

from __future__ import annotations

import itertools
import math
import time

import numpy as np
import pytest
from scipy import constants as c
from scipy.integrate import quad
from scipy.optimize import brentq

from legwright.candidate.library import load_candidate
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate

TIGHT = {"epsabs": 0.0, "epsrel": 1e-11, "limit": 400}


def pieces(function, points):
    return sum(quad(function, a, b, **TIGHT)[0] for a, b in itertools.pairwise(points) if b > a)


class Plain:
    """Textbook formulas, one (T, N, d) at a time; grains; no intervalley scattering."""

    def __init__(self, one, temperature, doping, size):
        self.e, self.p = one.electrons, one.phonons
        self.t, self.n, self.d, self.kt = temperature, doping, size, c.k * temperature
        e = self.e
        self.bands = range(len(e.side))
        self.scale = [e.mass_scale if e.side[b] == e.carrier else 1.0 for b in self.bands]
        grow = [(temperature / 300) ** e.mass_exponent[b] * self.scale[b] for b in self.bands]
        self.md = [e.dos_mass[b] * grow[b] for b in self.bands]
        self.mi = [e.inertial_mass[b] * grow[b] for b in self.bands]
        self.edge = [
            e.edge[b] - e.edge_alpha[b] * temperature**2 / (temperature + e.edge_beta[b]) for b in self.bands
        ]
        self.mu = brentq(
            self.charge, min(self.edge) - 1.5 * c.e, max(self.edge) + 1.5 * c.e, xtol=1e-36, rtol=1e-14
        )
        self.screening = c.e**2 / e.permittivity * sum(self.filled(b, self.mu)[1] for b in self.bands)
        x = math.log(doping)
        knots = e.impurity_knots or ((x, 0.0),)
        self.heavy = math.exp(float(np.interp(x, [k[0] for k in knots], [k[1] for k in knots])))

    def states(self, b, energy):
        a = self.e.nonparabolicity[b]
        gamma, slope = energy * (1 + a * energy), 1 + 2 * a * energy
        return math.sqrt(2) * self.md[b] ** 1.5 * math.sqrt(gamma) * slope / (math.pi**2 * c.hbar**3), gamma, slope

    def breaks(self, eta):
        return sorted({0.0, *(max(eta + step, 0.0) for step in (-45, -15, -5, 0, 5, 15, 60)), 60.0})

    def filled(self, b, mu):
        """Density and its derivative by η: in z = u² the root at the edge is smooth."""
        eta = self.e.side[b] * (mu - self.edge[b]) / self.kt

        def weigh(factor):
            def inner(u):
                z = u * u
                return self.states(b, z * self.kt)[0] * self.kt * factor(z - eta) * 2 * u

            return pieces(inner, [math.sqrt(z) for z in self.breaks(eta)])

        return weigh(lambda x: 1 / (math.exp(min(x, 700)) + 1)), weigh(window) / self.kt

    def charge(self, mu):
        net = sum(self.e.side[b] * self.filled(b, mu)[0] for b in self.bands)
        return math.asinh(net / self.n) - math.asinh(self.e.carrier)

    def rate(self, b, energy):
        e = self.e
        g, gamma, slope = self.states(b, energy)
        gv = g / e.valleys[b]
        scale = e.lattice_scale if e.side[b] == e.carrier else 1.0
        acoustic = math.pi * self.kt * e.deformation_potential[b] ** 2 * gv / (c.hbar * e.elastic_constant)
        acoustic *= scale * (slope**2 + 2) / (3 * slope**2)
        x = e.alloy_fraction
        alloy = math.pi / c.hbar * x * (1 - x) * e.alloy_volume * e.alloy_potential[b] ** 2 * gv
        k2 = 2 * self.md[b] / e.valleys[b] ** (2 / 3) * gamma / c.hbar**2
        ratio = 4 * k2 / self.screening
        bracket = math.log1p(ratio) - ratio / (1 + ratio) if ratio > 1e-3 else ratio**2 * (0.5 - 2 * ratio / 3)
        centres = self.n * self.heavy
        ionised = math.pi * c.e**4 * centres * gv * bracket / (8 * c.hbar * e.permittivity**2 * k2**2)
        return acoustic + alloy + ionised, 2 * gamma / (3 * self.mi[b] * slope**2), g

    def carried(self, b, power):
        eta = self.e.side[b] * (self.mu - self.edge[b]) / self.kt

        def inner(u):
            z = u * u
            rate, v2, g = self.rate(b, z * self.kt)
            a = math.sqrt(3 * v2) / rate / self.d * self.e.reflection / (1 - self.e.reflection)
            held = 3 * (1 / 3 - a / 2 + a**2 - a**3 * math.log1p(1 / a)) if a < 50 else series(a)
            return g * v2 / rate * held * (self.e.side[b] * (z - eta) * self.kt) ** power * window(z - eta) * 2 * u

        return pieces(inner, [math.sqrt(z) for z in self.breaks(eta)])

    def electronic(self):
        sums = [[self.carried(b, k) for k in range(3)] for b in self.bands]
        l0, l1, l2 = (sum(s[k] for s in sums) for k in range(3))
        return c.e**2 * l0, -l1 / (c.e * self.t * l0), (l2 - l1**2 / l0) / self.t

    def lattice(self):
        p = self.p
        q_top = (6 * math.pi**2 / (p.atoms * p.volume_per_atom)) ** (1 / 3)
        strain = p.strain_scale * p.strain_parameter
        per_atom = self.n * p.volume_per_atom
        gamma = p.mass_variance + strain * p.size_variance
        gamma += per_atom * (p.dopant_mass_variance + strain * p.dopant_size_variance)
        sums = [0.0, 0.0, 0.0]
        for v, gru, many in zip(p.speed, p.grueneisen, (1, 2), strict=True):
            w_top = 2 * v * q_top / math.pi
            theta = c.hbar * w_top / c.k
            a = p.anharmonic_scale * c.hbar * gru**2 / (p.mean_mass * v**2 * theta)

            def parts(q, v=v, w_top=w_top, theta=theta, a=a):
                phase = math.pi * q / (2 * q_top)
                w, vg = w_top * math.sin(phase), v * math.cos(phase)
                x = c.hbar * w / self.kt
                heat = q**2 / (6 * math.pi**2) * c.k * (x / 2 / math.sinh(x / 2)) ** 2
                resist = a * w**2 * self.t * math.exp(-theta / (p.umklapp_divisor * self.t))
                resist += math.pi / 6 * p.volume_per_atom * gamma * w**2 * 3 * q**2 / (2 * math.pi**2 * vg)
                resist += self.by_carriers(q, w, x)
                resist += vg / (p.grain_prefactor * self.d * (w_top / w) ** p.grain_exponent)
                normal = p.normal_ratio * a * w**2 * self.t
                tau = 1 / (resist + normal)
                return (
                    heat * vg**2 * tau,
                    heat * vg * q / w * tau * normal,
                    heat * (q / w) ** 2 * tau * normal * resist,
                )

            ends = [q_top * s for s in (1e-12, 1e-3, 0.03, 0.2, 0.6, 1 - 1e-12)]
            for k in range(3):
                sums[k] += many * pieces(lambda q, k=k, parts=parts: parts(q)[k], ends)
        drift = sums[1] ** 2 / sums[2] if sums[2] > 0 else 0.0
        return sums[0] + drift + self.optical()

    def by_carriers(self, q, w, x):
        p, e, total = self.p, self.e, 0.0
        for b in self.bands:
            if e.side[b] != e.carrier:
                continue
            m = self.md[b] / e.valleys[b] ** (2 / 3)
            eta = e.side[b] * (self.mu - self.edge[b]) / self.kt
            lowest = c.hbar**2 / (2 * m) * (q / 2 - m * w / (c.hbar * q)) ** 2 / self.kt
            overlap = math.log1p(math.exp(min(eta - lowest, 700))) - math.log1p(
                math.exp(min(eta - lowest - x, 700))
            )
            strength = e.valleys[b] * p.carrier_deformation_potential**2 * m**2 * q * self.kt
            total += p.carrier_weight * strength / (2 * math.pi * p.density * w * c.hbar**4) * overlap
        return total

    def optical(self):
        p, total = self.p, 0.0
        for v, many in zip(p.speed, (1, 2), strict=True):
            top = v * c.hbar / c.k * (6 * math.pi**2 / p.volume_per_atom) ** (1 / 3) / self.t
            value = quad(lambda x: x**3 / 4 / math.sinh(x / 2) ** 2, top * p.atoms ** (-1 / 3), top, **TIGHT)[0]
            total += many * v / top**2 * value
        least = (math.pi / 6) ** (1 / 3) * c.k * p.volume_per_atom ** (-2 / 3) * total
        highest = 2 * max(p.speed) / math.pi * (6 * math.pi**2 / (p.atoms * p.volume_per_atom)) ** (1 / 3)

        def held(t):
            x = c.hbar * highest / (c.k * t)
            return (x / 2 / math.sinh(x / 2)) ** 2

        known_at = p.optical_temperature
        return least + p.optical_excess * held(self.t) / held(known_at) * known_at / self.t


def window(x):
    fall = math.exp(-abs(x))
    return fall / (1 + fall) ** 2


def series(a):
    return 3 * sum((-1) ** k * a ** -(k + 1) / (k + 4) for k in range(14))


POINTS = [
    ("bisbte-p", 300.0, 2e25, 50e-9),
    ("bisbte-p", 450.0, 5e25, 5e-9),
    ("pbte-n", 700.0, 2e25, 1e-6),
    ("pbte-p", 700.0, 1e26, 30e-9),
    ("mg2sisn-n", 700.0, 2e26, 20e-9),
    ("hfzrnisn-n", 1000.0, 4e26, 100e-9),
]


@pytest.mark.parametrize(("name", "temperature", "doping", "size"), POINTS)
def test_direct_path_agrees_with_plain_quadrature(name, temperature, doping, size):
    candidate = load_candidate(name)
    plain = Plain(crystal(candidate), temperature, doping, size)
    made = evaluate(candidate, temperature, doping, size)
    sigma, seebeck, heat = plain.electronic()
    # 1e-8: gathering by path leaves 1e-9 of each integral, of which S and κ_e are differences
    assert float(made.electrical_conductivity) == pytest.approx(sigma, rel=1e-8, abs=0)
    assert float(made.seebeck) == pytest.approx(seebeck, rel=1e-8, abs=0)
    assert float(made.electronic_thermal_conductivity) == pytest.approx(heat, rel=1e-8, abs=0)
    assert float(made.lattice_thermal_conductivity) == pytest.approx(plain.lattice(), rel=1e-8, abs=0)


SPAN = np.linspace(250, 500, 32)[:, None, None]
DENSITY = np.geomspace(1e25, 1e26, 64)[:, None]
SIZE = np.geomspace(5e-9, 1e-5, 4096)


def seconds(kelvin: int, dopings: int, sizes: int) -> float:
    """Best of five on a map of bisbte-p with so many points a side."""
    candidate = load_candidate("bisbte-p")
    return min(timed(lambda: evaluate(candidate, SPAN[:kelvin], DENSITY[:dopings], SIZE[:sizes])) for _ in range(5))


def timed(call) -> float:
    """Processor time of this process: what else runs on the machine counts little."""
    start = time.process_time()
    call()
    return time.process_time() - start


def test_direct_path_is_two_thousand_times_plain_quadrature(capsys):
    name, temperature, doping, size = POINTS[0]
    one = crystal(load_candidate(name))

    def plainly() -> None:
        plain = Plain(one, temperature, doping, size)
        plain.electronic(), plain.lattice()

    slow = min(timed(plainly) for _ in range(3))
    rate = 8 * 24 * 1024 / seconds(8, 24, 1024)
    with capsys.disabled():
        print(f"\ndirect path {rate:,.0f} points/s; plain quadrature {1 / slow:,.1f}; ratio {rate * slow:,.0f}")
    assert rate * slow >= 2000


@pytest.mark.parametrize(
    ("less", "more"),
    [((8, 24, 512), (16, 24, 512)), ((8, 24, 512), (8, 48, 512)), ((8, 24, 512), (8, 24, 1024))],
    ids=["temperature", "doping", "size"],
)
def test_time_grows_no_faster_than_the_map(less, more, capsys):
    growth = seconds(*more) / seconds(*less)
    with capsys.disabled():
        print(f"\ntwice the points along one axis take {growth:.2f} times as long")
    assert growth < 3.0  # 1.5 to 2 measured on a quiet machine; a noisy one may lose half
