"""Which doping and grain size to aim at when both scatter from batch to batch?

A compressed map gives zT of half a million designs; its mean over log-normal scatter around each shows where
to aim, and what the scatter costs.

python examples/batch_scatter.py [CANDIDATE [KELVIN]]
"""

import sys

import numpy as np
from scipy.ndimage import gaussian_filter1d

import legwright as lw

SIZES = (5e-9, 5e-6)  # m
SCATTER = (0.0, 0.1, 0.2, 0.4, 0.8)  # standard deviation of ln(size) and of ln(doping)
DOPINGS, LENGTHS = 500, 1000  # points a side, even in the logarithms


def main(name: str = "bisbte-p", kelvin: str = "350") -> None:
    """Print the design of the highest mean zT for each scatter; beyond a limit the map counts as level."""
    candidate = lw.load_candidate(name)
    limits = candidate.data.doping
    dopings = (limits.lowest.si, limits.highest.si)  # 1/m³
    quick = lw.compress(candidate, float(kelvin), dopings, SIZES)
    doping, size = np.geomspace(*dopings, DOPINGS), np.geomspace(*SIZES, LENGTHS)

    zt = quick.zt(doping, size)

    print(f"{name} at {kelvin} K, grains; {zt.size:,} designs, each within {quick.error:.0e} of the direct path")
    print(f"{'scatter of ln':>13} {'doping [1/cm^3]':>15} {'size [nm]':>9} {'mean zT':>8}")
    for scatter in SCATTER:
        mean = zt
        for axis, points in enumerate((doping, size)):
            steps = scatter / np.log(points[1] / points[0])
            mean = gaussian_filter1d(mean, steps, axis, mode="nearest") if scatter else mean
        i, j = np.unravel_index(np.argmax(mean), mean.shape)
        print(f"{scatter:>13.1f} {doping[i] * 1e-6:>15.2e} {size[j] * 1e9:>9.1f} {mean[i, j]:>8.4f}")


if __name__ == "__main__":
    main(*sys.argv[1:])
