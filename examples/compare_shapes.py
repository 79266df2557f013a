"""Grain, wire or film: the same candidate at the same size, three ways to bound it.

The wall of the wire and the faces of the film are rough here: they reflect nothing like a mirror. Grain boundaries
let a share of the carriers through, and long waves more easily than short ones.

python examples/compare_shapes.py [CANDIDATE]
"""

import sys

import numpy as np

import legwright as lw

TEMPERATURE = 600.0  # K
DOPING = 1e26  # 1/m³
SIZES = np.array([20, 50, 100, 500]) * 1e-9  # m


def main(name: str = "si-n") -> None:
    """Print zT, and conductivities as shares of those of coarse material."""
    candidate = lw.load_candidate(name)
    coarse = lw.evaluate(candidate, TEMPERATURE, DOPING, np.inf)

    print(f"{name} at {TEMPERATURE:g} K, {DOPING * 1e-6:.0e} per cm3; zT of coarse material {coarse.zt:.3f}")
    print(f"{'shape':<6} {'size [nm]':>9} {'sigma/coarse':>12} {'kappa/coarse':>12} {'zT':>6}")
    for shape in ("grain", "wire", "film"):
        made = lw.evaluate(candidate, TEMPERATURE, DOPING, SIZES, shape)
        charge = made.electrical_conductivity / coarse.electrical_conductivity
        heat = made.thermal_conductivity / coarse.thermal_conductivity
        for row in zip(SIZES * 1e9, charge, heat, made.zt, strict=True):
            print(f"{shape:<6} {row[0]:>9.0f} {row[1]:>12.3f} {row[2]:>12.3f} {row[3]:>6.3f}")


if __name__ == "__main__":
    main(*sys.argv[1:2])
