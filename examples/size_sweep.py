"""zT of one candidate against grain size, and where the change comes from.

python examples/size_sweep.py [CANDIDATE [KELVIN]]
"""

import sys

import numpy as np

import legwright as lw

SIZES = np.array([10, 20, 50, 100, 200, 500, 1000, 5000, np.inf]) * 1e-9  # m
COLUMNS = ["size [nm]", "seebeck [uV/K]", "mobility [cm^2/V/s]", "lattice thermal conductivity [W/m/K]", "zT [1]"]


def main(name: str = "sige-n", kelvin: str = "900") -> None:
    """Print the sweep at the geometric mean of the candidate's doping range."""
    candidate = lw.load_candidate(name)
    limits = candidate.data.doping
    doping = np.sqrt(limits.lowest.si * limits.highest.si)  # 1/m³

    made = lw.evaluate(candidate, float(kelvin), doping, SIZES)

    print(f"{name} at {kelvin} K, {doping * 1e-6:.2e} per cm3, grains")
    print(made.to_frame()[COLUMNS].round(3).to_string(index=False))


if __name__ == "__main__":
    main(*sys.argv[1:])
