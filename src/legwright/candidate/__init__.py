"""Who is considered: composition, bands, lattice, doping, making, and where every number came from."""
