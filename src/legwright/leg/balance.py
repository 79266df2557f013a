"""One leg in steady state, by relative-current integration over temperature.

With w = (conducted heat flux)/(current density), W/A, the energy balance of a one-dimensional leg is
dw/dT = −κρ/w − T dS/dT: length and current drop out. w > 0 in a generator, w < 0 in a cooler whose temperature
rises all the way to the hot end. The heat per current through a face is Φ = S T + w.
Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003); w is the inverse of their u.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.integrate import simpson
from scipy.interpolate import CubicSpline

Array = NDArray[np.float64]


@dataclass(frozen=True)
class LegMaterial:
    """Smooth functions of temperature (K): seebeck S (V/K), resistivity ρ (Ω m), thermal_conductivity κ (W/(m K)).

    Of one or many legs: arrays are (temperature, legs …). S has the sign of the majority carrier, so S > 0 helps.
    """

    seebeck: CubicSpline
    resistivity: CubicSpline
    thermal_conductivity: CubicSpline

    @classmethod
    def from_nodes(
        cls, temperature: Array, seebeck: Array, resistivity: Array, thermal_conductivity: Array
    ) -> LegMaterial:
        """Cubic splines through ascending temperatures (axis 0)."""
        return cls(*(CubicSpline(temperature, values) for values in (seebeck, resistivity, thermal_conductivity)))

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the legs."""
        return self.seebeck.c.shape[2:]

    @property
    def lowest(self) -> float:
        """Lowest temperature of the nodes, K."""
        return float(self.seebeck.x[0])

    @property
    def highest(self) -> float:
        """Highest temperature of the nodes, K."""
        return float(self.seebeck.x[-1])


@dataclass(frozen=True)
class Along:
    """A march down in temperature (K): |w| at each step (W/A), and current_length, shape of the legs.

    current_length = ∫κ/|w| dT: current density × length covered (A/m).
    """

    temperature: Array
    w: Array
    current_length: Array


class Course:
    """The properties met on a march down in temperature, the same for any current.

    From `top` down to `bottom` (K) in θ = √(T_top − T), in `steps` of Runge–Kutta's fourth order, with w of the
    given sign. d(w²)/dT = −2κρ − 2wT dS/dT. For a material of one leg top and bottom may be arrays.
    """

    def __init__(
        self, material: LegMaterial, top: float | Array, bottom: float | Array, sign: int, steps: int
    ) -> None:
        self.steps = steps
        self.theta = np.multiply.outer(np.linspace(0.0, 1.0, 2 * steps + 1), np.sqrt(top - bottom))
        self.temperature = top - self.theta**2
        self.kappa = material.thermal_conductivity(self.temperature)
        self.joule = self.kappa * material.resistivity(self.temperature)
        self.thomson = self._beside(sign * self.temperature) * material.seebeck(self.temperature, 1)
        self.step = self.theta[2]

    def _beside(self, values: Array) -> Array:
        """Values along the march, shaped to go with those of the legs."""
        return np.reshape(values, (*values.shape, *(1,) * (self.kappa.ndim - values.ndim)))

    def march(self, w_top: Array) -> Along:
        """w at every step, and the length covered."""
        h, theta = self.step, self.theta
        from_rest = not np.any(w_top)

        def slope(i: int, y: Array) -> Array:
            if not from_rest:
                return np.asarray(4 * theta[i] * (self.joule[i] + np.sqrt(np.maximum(y, 0.0)) * self.thomson[i]))
            if i == 0:
                return np.asarray(np.sqrt(2 * self.joule[0]))
            return np.asarray(2 * theta[i] * (self.joule[i] / np.maximum(y, _SMALLEST_W) + self.thomson[i]))

        y = np.empty((self.steps + 1, *np.broadcast_shapes(self.kappa.shape[1:], np.shape(w_top))))
        y[0] = np.asarray(w_top, dtype=float) ** 2
        for k in range(self.steps):
            a = slope(2 * k, y[k])
            b = slope(2 * k + 1, y[k] + 0.5 * h * a)
            c = slope(2 * k + 1, y[k] + 0.5 * h * b)
            d = slope(2 * k + 2, y[k] + h * c)
            y[k + 1] = y[k] + h / 6 * (a + 2 * (b + c) + d)
        w = y if from_rest else np.sqrt(np.maximum(y, 0.0))
        at_rest = np.sqrt(2 * self.kappa[0] ** 2 / self.joule[0])  # limit of 2θκ/w at w = 0, θ = 0
        covered = np.empty_like(w)
        covered[0] = np.where(w[0] > 0, 0.0, at_rest)
        per_theta = self._beside(2 * theta[2::2]) * self.kappa[2::2]
        extra = (1,) * (w.ndim - self.kappa.ndim)
        covered[1:] = np.reshape(per_theta, (self.steps, *extra, *self.kappa.shape[1:])) / np.maximum(
            w[1:], _SMALLEST_W
        )
        return Along(self.temperature[::2], w, np.asarray(h * simpson(covered, axis=0)))

    def w_below(self, w_top: Array) -> Array:
        """|w| at the bottom alone, for currents that flow at the top: quick, as nothing on the way is kept."""
        return self._below(w_top, with_length=False)[0]

    def w_and_length_below(self, w_top: Array) -> tuple[Array, Array]:
        """|w| at the bottom and the length covered, as `w_below`."""
        return self._below(w_top, with_length=True)

    def _below(self, w_top: Array, with_length: bool) -> tuple[Array, Array]:
        shape = np.broadcast_shapes(self.kappa.shape[1:], np.shape(w_top))
        legs = int(np.prod(self.kappa.shape[1:]))
        joule, thomson, kappa = (each.reshape(-1, legs) for each in (self.joule, self.thomson, self.kappa))
        w = np.array(np.broadcast_to(w_top, shape), dtype=float).reshape(-1, legs)
        length = np.zeros_like(w)
        for part in (np.s_[:, k : k + _BLOCK] for k in range(0, legs, _BLOCK)):
            w[part], length[part] = self._block_below(joule[part], thomson[part], kappa[part], w[part], with_length)
        return w.reshape(shape), length.reshape(shape)

    def _block_below(
        self, joule: Array, thomson: Array, kappa: Array, w: Array, with_length: bool
    ) -> tuple[Array, Array | float]:
        """Both for a block of legs that fits into fast memory: to the bit as `march`, without keeping its steps."""
        h, theta, y = self.step, self.theta, w**2
        total, stage, middle, change = (np.empty_like(y) for _ in range(4))
        before, between, sum_of_threes = np.zeros_like(y), np.zeros_like(y), np.zeros_like(y)

        def slope(i: int, at: Array) -> Array:
            np.sqrt(np.maximum(at, 0.0, out=change), out=change)
            np.add(np.multiply(change, thomson[i], out=change), joule[i], out=change)
            return np.asarray(np.multiply(change, 4 * theta[i], out=change))

        for k in range(self.steps):
            np.copyto(total, slope(2 * k, y))
            np.add(y, np.multiply(change, 0.5 * h, out=stage), out=stage)
            np.copyto(middle, slope(2 * k + 1, stage))
            np.add(y, np.multiply(change, 0.5 * h, out=stage), out=stage)
            np.add(middle, slope(2 * k + 1, stage), out=middle)
            np.add(y, np.multiply(change, h, out=stage), out=stage)
            np.add(total, np.multiply(middle, 2.0, out=middle), out=total)
            np.add(total, slope(2 * k + 2, stage), out=total)
            np.add(y, np.multiply(total, h / 6, out=total), out=y)
            if with_length:  # by Simpson's rule
                np.maximum(np.sqrt(np.maximum(y, 0.0, out=stage), out=stage), _SMALLEST_W, out=stage)
                covered = 2 * theta[2 * k + 2] * kappa[2 * k + 2] / stage
                if k % 2 == 0:
                    between = covered
                else:
                    sum_of_threes += before + 4 * between + covered
                    before = covered
        return np.sqrt(np.maximum(y, 0.0)), sum_of_threes * (h / 3)


def march_down(
    material: LegMaterial, top: float | Array, bottom: float | Array, sign: int, w_top: Array, steps: int
) -> Along:
    """Integrate d(w²)/dT = −2κρ − 2wT dS/dT from `top` down to `bottom` (K) with w = ±√(w²) of the given sign.

    Fourth-order Runge–Kutta in θ = √(T_top − T): for w² where current flows at the top, for w itself from rest
    (a temperature maximum inside the leg), where it is w that is smooth in θ. The length follows by Simpson's
    rule on the same `steps`, an even number of them. From rest the length converges as steps^−2.5 only.
    w_top: |w| at the top (W/A), shape legs …; `w` has a first axis of steps + 1. A material of one leg also takes
    arrays of `top` and `bottom`, which broadcast with w_top. Raises nothing of its own.
    Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003), w being the inverse of their u.

    >>> nodes = np.linspace(280.0, 620.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 1.5 * same)  # ZT = 1.2 at 450 K
    >>> along = march_down(material, 600.0, 300.0, 1, np.array(0.05), 24)
    >>> bool(abs(along.w[-1] ** 2 - (0.05**2 + 2 * 1.5e-5 * 300)) < 1e-12)  # constant κρ: w² is linear in T
    True
    """
    return Course(material, top, bottom, sign, steps).march(w_top)


#: legs of one block of a march
_BLOCK = 512
#: guards the division where no current reaches; W/A
_SMALLEST_W = 1e-30


@dataclass(frozen=True)
class Generator:
    """A generating leg at one operating point, arrays of the legs' shape; areal figures are times the leg length.

    efficiency, a fraction; power_times_length and heat_times_length, the heat taken in (W/m); current_times_length
    (A/m).
    """

    efficiency: Array
    power_times_length: Array
    current_times_length: Array
    heat_times_length: Array


def generate(material: LegMaterial, hot: float, cold: float, w_hot: Array, steps: int = 24) -> Generator:
    """Efficiency 1 − Φ_c/Φ_h, and power and current density times length (W/m, A/m), for |w| at the hot end.

    Φ = S T + w is the heat per current (V) through a face; hot and cold in K, w_hot in W/A, any shape of legs.
    −inf efficiency where the leg would consume heat in the wrong sense (Φ_h ≤ 0). `steps`: of the march, even.
    Raises nothing of its own. Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003).

    >>> nodes = np.linspace(280.0, 620.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 1.5 * same)  # ZT = 1.2 at 450 K
    >>> made = generate(material, 600.0, 300.0, np.geomspace(0.01, 10, 400))
    >>> f"{float(np.max(made.efficiency)):.4f}"  # Ioffe (1957): ½ (√2.2 − 1)/(√2.2 + ½)
    '0.1218'
    """
    along = march_down(material, hot, cold, +1, w_hot, steps)
    phi_hot = material.seebeck(hot) * hot + w_hot
    phi_cold = material.seebeck(cold) * cold + along.w[-1]
    current = along.current_length
    return Generator(
        _efficiency(phi_hot, phi_cold, along.w[-1]), current * (phi_hot - phi_cold), current, current * phi_hot
    )


def efficiency_by_w(material: LegMaterial, hot: float, cold: float, steps: int = 24) -> Callable[[Array], Array]:
    """The efficiency of `generate` as a function of |w| at the hot end (W/A, > 0) alone, for many trials.

    hot and cold in K; any shape of legs; `steps`: of the march. Raises nothing of its own.
    Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003).

    >>> nodes = np.linspace(280.0, 620.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 1.5 * same)
    >>> quick, whole = efficiency_by_w(material, 600.0, 300.0), generate(material, 600.0, 300.0, np.array(0.1))
    >>> bool(abs(quick(np.array(0.1)) / whole.efficiency - 1) < 1e-12)
    True
    """
    course = Course(material, hot, cold, +1, steps)
    pull_hot, pull_cold = material.seebeck(hot) * hot, material.seebeck(cold) * cold

    def efficiency(w_hot: Array) -> Array:
        w_cold = course.w_below(w_hot)
        return _efficiency(pull_hot + w_hot, pull_cold + w_cold, w_cold)

    return efficiency


def power_by_w(material: LegMaterial, hot: float, cold: float, steps: int = 24) -> Callable[[Array], Array]:
    """The power times length of `generate` (W/m) as a function of |w| at the hot end (W/A, > 0), for many trials.

    −inf where the leg would consume heat in the wrong sense. hot and cold in K; any shape of legs; `steps`: of the
    march, even. Raises nothing of its own.
    Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003).

    >>> nodes = np.linspace(280.0, 620.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 1.5 * same)
    >>> quick, whole = power_by_w(material, 600.0, 300.0), generate(material, 600.0, 300.0, np.array(0.1))
    >>> bool(abs(quick(np.array(0.1)) / whole.power_times_length - 1) < 1e-12)
    True
    """
    course = Course(material, hot, cold, +1, steps)
    pull_hot, pull_cold = material.seebeck(hot) * hot, material.seebeck(cold) * cold

    def power(w_hot: Array) -> Array:
        w_cold, length = course.w_and_length_below(w_hot)
        phi_hot, phi_cold = pull_hot + w_hot, pull_cold + w_cold
        return np.where((phi_hot > 0) & (w_cold > 0), length * (phi_hot - phi_cold), -np.inf)

    return power


def _efficiency(phi_hot: Array, phi_cold: Array, w_cold: Array) -> Array:
    valid = (phi_hot > 0) & (w_cold > 0)
    return np.where(valid, 1 - phi_cold / np.where(valid, phi_hot, 1.0), -np.inf)


@dataclass(frozen=True)
class Cooler:
    """A cooling leg at one operating point, arrays of the legs' shape; areal figures are times the leg length.

    cop, dimensionless; heat_times_length, the heat lifted, and power_times_length, spent (W/m);
    current_times_length (A/m).
    """

    cop: Array
    heat_times_length: Array
    current_times_length: Array
    power_times_length: Array


def cool(material: LegMaterial, hot: float, cold: float, w_hot: Array, steps: int = 24) -> Cooler:
    """COP Φ_c/(Φ_h − Φ_c) and lifted heat density times length (W/m) for |w| at the hot end; monotonic leg.

    hot and cold in K, w_hot in W/A, any shape of legs. A leg that lifts nothing has a COP of zero or
    less. `steps`: of the march, even. Raises nothing of its own.
    Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003).

    >>> nodes = np.linspace(280.0, 320.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 4 / 3 * same)  # Z = 3e-3 / K
    >>> made = cool(material, 310.0, 300.0, np.geomspace(1e-3, 0.06, 400))
    >>> m = (1 + 3e-3 * 305) ** 0.5
    >>> f"{float(np.max(made.cop)):.2f}", f"{30 * (m - 310 / 300) / (m + 1):.2f}"  # Ioffe (1957)
    ('4.41', '4.41')
    """
    along = march_down(material, hot, cold, -1, w_hot, steps)
    phi_hot = material.seebeck(hot) * hot - w_hot
    phi_cold = material.seebeck(cold) * cold - along.w[-1]
    current = along.current_length
    return Cooler(_cop(phi_hot, phi_cold), current * phi_cold, current, current * (phi_hot - phi_cold))


def cop_by_w(material: LegMaterial, hot: float, cold: float, steps: int = 24) -> Callable[[Array], Array]:
    """The COP of `cool` as a function of |w| at the hot end (W/A) alone, for many trials.

    hot and cold in K; any shape of legs; `steps`: of the march. Raises nothing of its own.
    Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003).

    >>> nodes = np.linspace(280.0, 320.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 4 / 3 * same)
    >>> quick, whole = cop_by_w(material, 310.0, 300.0), cool(material, 310.0, 300.0, np.array(0.02))
    >>> bool(abs(quick(np.array(0.02)) / whole.cop - 1) < 1e-12)
    True
    """
    course = Course(material, hot, cold, -1, steps)
    pull_hot, pull_cold = material.seebeck(hot) * hot, material.seebeck(cold) * cold
    return lambda w_hot: _cop(pull_hot - w_hot, np.asarray(pull_cold - course.w_below(w_hot)))


def _cop(phi_hot: Array, phi_cold: Array) -> Array:
    spent = phi_hot - phi_cold
    return np.where(spent > 0, phi_cold / np.where(spent > 0, spent, 1.0), -np.inf)


def cool_past_peak(material: LegMaterial, hot: float, cold: float, peak: float, steps: int = 24) -> Cooler:
    """A cooling leg that is hottest inside, at `peak` ≥ `hot` (K): two marches down from w = 0 at the peak.

    Φ_c = S T_c − |w_c|, Φ_h = S T_h + |w_h|, COP = Φ_c/(Φ_h − Φ_c); j L is the sum of both marches. hot, cold and
    peak in K, one of each for all legs; fields as `Cooler`, shape of the legs; `steps`: of each march, even.
    Raises nothing of its own. Source: Snyder & Ursell, Physical Review Letters 91, 148301 (2003).

    >>> nodes = np.linspace(240.0, 360.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 4 / 3 * same)  # Z = 3e-3 / K
    >>> lifted = [cool_past_peak(material, 300.0, 280.0, t, 96).heat_times_length for t in np.arange(315.0, 335.0)]
    >>> f"{max(lifted):.1f}", f"{(2e-4 * 280) ** 2 / 2e-5 - 4 / 3 * 20:.1f}"  # S²T_c²/2ρ − κ ΔT: Ioffe (1957)
    ('130.1', '130.1')
    """
    at_rest = np.zeros(material.seebeck.c.shape[2:])
    to_cold = march_down(material, peak, cold, -1, at_rest, steps)
    to_hot = march_down(material, peak, hot, +1, at_rest, steps)
    phi_cold = material.seebeck(cold) * cold - to_cold.w[-1]
    phi_hot = material.seebeck(hot) * hot + to_hot.w[-1]
    current = to_cold.current_length + to_hot.current_length
    spent = phi_hot - phi_cold
    return Cooler(phi_cold / spent, current * phi_cold, current, current * spent)


def largest_difference(material: LegMaterial, hot: float, steps: int = 96) -> Array:
    """ΔT at which a cooler whose hot end is at `hot` (K) lifts nothing any more, K.

    At the best current the temperature has its maximum just at the hot end (w = 0 there) and the cold face
    takes in no heat (Φ_c = 0): one march down from w = 0 until S T = |w|. Limited by the lowest node.
    For constant properties ½ Z T_c². One `hot` for all legs, result of their shape; `steps`: of the march, even.
    Raises nothing of its own. Source: Ioffe, Semiconductor Thermoelements and Thermoelectric Cooling (1957).

    >>> nodes = np.linspace(150.0, 310.0, 9)
    >>> same = np.ones_like(nodes)
    >>> material = LegMaterial.from_nodes(nodes, 2e-4 * same, 1e-5 * same, 4 / 3 * same)  # Z = 3e-3 / K
    >>> f"{float(largest_difference(material, 292.6)):.1f}"  # ½ × 3e-3 × 220²
    '72.6'
    """
    along = march_down(material, hot, material.lowest, -1, np.zeros(material.seebeck.c.shape[2:]), steps)
    t = along.temperature.reshape(-1, *(1,) * (along.w.ndim - 1))
    left = material.seebeck(along.temperature) * t - along.w
    spent = left <= 0
    first = np.clip(np.argmax(spent, axis=0), 2, steps - 1)[None]
    near, at = (
        np.stack([np.take_along_axis(np.broadcast_to(a, left.shape), first + k, axis=0)[0] for k in (-2, -1, 0, 1)])
        for a in (left, t)
    )
    crossing = _lagrange(near, at)
    cold = np.where(spent[0], hot, np.where(np.any(spent, axis=0), crossing, material.lowest))
    return np.asarray(hot - cold)


def _lagrange(x: Array, y: Array) -> Array:
    """The polynomial through (x, y), points along axis 0, at x = 0."""
    total = np.zeros(x.shape[1:])
    for k in range(len(x)):
        others = [j for j in range(len(x)) if j != k]
        total += y[k] * np.prod([x[j] / (x[j] - x[k]) for j in others], axis=0)
    return total


def zoom(score: Callable[[Array], Array], low: Array, high: Array, points: int, rounds: int) -> tuple[Array, Array]:
    """Best argument and score of a single-peaked function per leg: a grid that shrinks around its best point.

    `score` takes the grid with its points along a first axis of its own; low and high, in units of the argument,
    have the legs' shape, dimensionless or not. Each of the `rounds` divides the bracket by (points − 1)/2.
    Raises nothing of its own. By definition a bracketing search (Kiefer, Proceedings of the American Mathematical
    Society 4, 502 (1953)).

    >>> where, best = zoom(lambda x: -((x - 0.3) ** 2), np.array(0.0), np.array(1.0), 7, 12)
    >>> round(float(where), 4)
    0.3
    """
    for _ in range(rounds):
        grid = low + (high - low) * np.linspace(0, 1, points).reshape(-1, *(1,) * np.ndim(low))
        values = score(grid)
        best = np.argmax(values, axis=0)[None]
        low = np.take_along_axis(grid, np.maximum(best - 1, 0), axis=0)[0]
        high = np.take_along_axis(grid, np.minimum(best + 1, points - 1), axis=0)[0]
    return np.take_along_axis(grid, best, axis=0)[0], np.take_along_axis(values, best, axis=0)[0]


#: coefficients of the quartic through five even points −2 … 2
_QUARTIC = np.linalg.inv(np.vander(np.arange(-2.0, 3.0), increasing=True))


def crest(five: Array) -> tuple[Array, Array]:
    """Where the quartic through `five` even points (first axis) is highest, and how high.

    The place is dimensionless, −2 … 2 in steps between points; the height in the unit of the points; both of the
    shape of the other axes. Newton's method on the slope, from the middle point. Raises nothing of its own.
    By definition.

    >>> x = np.arange(-2.0, 3.0)
    >>> where, top = crest(3 - (x - 0.4) ** 2)
    >>> f"{float(where):.6f} {float(top):.6f}"
    '0.400000 3.000000'
    """
    coefficients = np.tensordot(_QUARTIC, five, axes=1)
    x = np.zeros(five.shape[1:])
    for _ in range(4):
        slope = sum(k * coefficients[k] * x ** (k - 1) for k in range(1, 5))
        bend = sum(k * (k - 1) * coefficients[k] * x ** (k - 2) for k in range(2, 5))
        x = np.clip(x - np.where(bend < 0, slope / np.where(bend < 0, bend, 1.0), 0.0), -2.0, 2.0)
    return x, np.asarray(sum(coefficients[k] * x**k for k in range(5)))
