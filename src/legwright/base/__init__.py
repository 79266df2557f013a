"""The cellar: units, flags and refusals, files. No physics."""
