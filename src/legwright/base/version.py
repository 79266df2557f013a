"""The version, for the package and for what it prints. pyproject.toml says the same; a test holds them together."""

VERSION = "0.1.0"
