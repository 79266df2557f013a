"""legwright: which thermoelectric material, at which size and doping, is worth making into a leg."""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

from legwright.base.version import VERSION as __version__

if TYPE_CHECKING:
    from legwright import physics as physics
    from legwright.candidate.library import Candidate as Candidate
    from legwright.candidate.library import load_candidate as load_candidate
    from legwright.physics.compressed import CompressedMap as CompressedMap
    from legwright.physics.compressed import compress as compress
    from legwright.physics.properties import Properties as Properties
    from legwright.physics.properties import evaluate as evaluate

_HOMES = {
    "physics": ("legwright.physics", None),
    "load_candidate": ("legwright.candidate.library", "load_candidate"),
    "Candidate": ("legwright.candidate.library", "Candidate"),
    "CompressedMap": ("legwright.physics.compressed", "CompressedMap"),
    "compress": ("legwright.physics.compressed", "compress"),
    "evaluate": ("legwright.physics.properties", "evaluate"),
    "Properties": ("legwright.physics.properties", "Properties"),
}
__all__ = [
    "Candidate",
    "CompressedMap",
    "Properties",
    "__version__",
    "compress",
    "evaluate",
    "load_candidate",
    "physics",
]


def __getattr__(name: str) -> Any:
    if name not in _HOMES:
        raise AttributeError(f"module 'legwright' has no attribute '{name}'")
    module, attribute = _HOMES[name]
    home = import_module(module)
    return home if attribute is None else getattr(home, attribute)


def __dir__() -> list[str]:
    return sorted(__all__)
