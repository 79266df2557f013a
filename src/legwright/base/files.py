"""Where shipped data lies, TOML with positions in its messages, and writes that never leave half a file."""

from __future__ import annotations

import os
import tempfile
from collections.abc import Callable
from importlib import resources
from pathlib import Path
from typing import Any

from legwright.base.errors import InputError

LARGEST_INPUT_BYTES = 2_000_000


def datasets_folder() -> Path:
    """The shipped data: `legwright/datasets` of an installed wheel, else `datasets/` of the checkout."""
    shipped = Path(str(resources.files("legwright"))) / "datasets"
    if shipped.is_dir():
        return shipped
    checkout = Path(__file__).resolve().parents[3] / "datasets"
    if checkout.is_dir():
        return checkout
    raise FileNotFoundError("legwright is installed without its datasets; install it again")


def read_toml(path: Path, shown: Path | str | None = None) -> dict[str, Any]:
    """The parsed file; InputError that names the file (as `shown`) and the line where it is not readable TOML."""
    import tomli

    name = path if shown is None else shown
    try:
        return tomli.loads(read_text(path, shown))
    except tomli.TOMLDecodeError as error:
        raise InputError(f"is not valid TOML: {error}", file=name, slug="unreadable-file") from error
    except RecursionError as error:
        raise InputError(
            "is nested too deeply for a TOML file of ours", file=name, slug="unreadable-file"
        ) from error
    except ValueError as error:
        if isinstance(error, InputError):
            raise
        raise InputError(f"is not valid TOML: {error}", file=name, slug="unreadable-file") from error


def read_text(path: Path, shown: Path | str | None = None) -> str:
    """The text of a file; InputError that names it (as `shown`) where it cannot be read or is no UTF-8."""
    name = path if shown is None else shown
    needed = f"a {path.suffix[1:].upper() or 'text'} file is needed"
    try:
        if path.is_dir():
            raise InputError(f"is a directory; {needed}", file=name, slug="unreadable-file")
        if path.stat().st_size > LARGEST_INPUT_BYTES:
            raise InputError(f"is larger than {LARGEST_INPUT_BYTES} bytes", file=name, slug="unreadable-file")
        return path.read_text(encoding="utf-8-sig")
    except FileNotFoundError as error:
        raise InputError("no such file", file=name, slug="unreadable-file") from error
    except UnicodeDecodeError as error:
        raise InputError(f"is not UTF-8 text; {needed}", file=name, slug="unreadable-file") from error
    except OSError as error:
        raise InputError(f"cannot be read ({error.strerror})", file=name, slug="unreadable-file") from error
    except ValueError as error:
        if isinstance(error, InputError):
            raise
        raise InputError(f"is not a path ({error})", file=repr(str(name)), slug="unreadable-file") from error


def write_whole(path: Path, content: str | bytes) -> None:
    """Write text (as UTF-8) or bytes to `path` completely or not at all."""

    def write(temporary: Path) -> None:
        temporary.write_bytes(content.encode() if isinstance(content, str) else content)

    write_by(path, write)


def write_by(path: Path, write: Callable[[Path], None]) -> None:
    """Let `write` fill a file of a temporary name; it takes the place of `path` when it is whole and on the disk.

    InputError where it cannot be written; whatever ends `write`, no other file is left.
    """
    if path.is_dir():
        raise InputError("cannot be written (is a directory)", file=path, slug="cannot-write")
    try:
        handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.")
    except OSError as error:
        raise InputError(f"cannot be written ({error.strerror})", file=path, slug="cannot-write") from error
    try:
        with os.fdopen(handle, "rb") as kept:
            write(Path(temporary))
            os.fsync(kept.fileno())
        os.chmod(temporary, 0o666 & ~_umask())  # mkstemp's files are for their maker alone
        os.replace(temporary, path)
    except OSError as error:
        os.unlink(temporary)
        raise InputError(f"cannot be written ({error.strerror})", file=path, slug="cannot-write") from error
    except BaseException:
        os.unlink(temporary)
        raise


def _umask() -> int:
    """What the user keeps from others in new files; it can only be read by setting it."""
    mask = os.umask(0o077)
    os.umask(mask)
    return mask
