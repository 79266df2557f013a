"""Which one to make: brief, maps, ranking, peaks."""
