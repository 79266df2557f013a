"""What this run stands on: versions, licence, and checksums of the shipped data."""

from __future__ import annotations

import hashlib
import platform
import re
from importlib import metadata
from pathlib import Path
from typing import Any

from legwright.base.files import datasets_folder
from legwright.base.version import VERSION

#: folders of shipped data, and the kind of file that counts in each
_DATA = {"candidates": "*.toml", "families": "*.toml", "measurements": "*.csv", ".": "*.*"}


def surroundings() -> dict[str, Any]:
    """Versions of the program, Python and each dependency (null: not installed); data sets with their checksums."""
    lines = [line for line in metadata.requires("legwright") or () if "extra ==" not in line]
    needed = {re.split(r"[<>=!~; ]", line)[0] for line in lines}
    return {
        "program": VERSION,
        "licence": metadata.metadata("legwright")["License-Expression"],
        "python": platform.python_version(),
        "platform": platform.platform(terse=True),
        "packages": [{"package": name, "version": _version(name)} for name in sorted(needed)],
        "data_sets": [_data_set(name, pattern) for name, pattern in _DATA.items()],
    }


def _version(package: str) -> str | None:
    try:
        return metadata.version(package)
    except metadata.PackageNotFoundError:
        return None


def _data_set(name: str, pattern: str) -> dict[str, Any]:
    files = sorted(path for path in (datasets_folder() / name).glob(pattern) if path.is_file())
    whole = hashlib.sha256()
    for path in files:
        whole.update(path.name.encode() + b"\0" + Path(path).read_bytes())
    title = "shared by all" if name == "." else name
    return {"data_set": title, "files": len(files), "sha256": whole.hexdigest()}
