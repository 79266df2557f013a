"""Long work in parts: each a file of its own, written whole with its checksum; nothing is lost or doubled."""

from __future__ import annotations

import fcntl
import hashlib
import json
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from legwright.base.errors import InputError
from legwright.base.files import write_whole


class Parts:
    """The parts of one question in a folder of their own: one JSON text each, with its SHA-256.

    `question` is what makes two runs the same (a checksum of all that the answers hang on).
    """

    def __init__(self, folder: Path, question: str) -> None:
        self.folder = folder
        self.question = question

    @contextmanager
    def held(self) -> Iterator[None]:
        """The folder to oneself; InputError where another run has it or it belongs to another question.

        The lock is the kernel's, so it ends with the process that holds it, however that ends.
        """
        try:
            self.folder.mkdir(exist_ok=True)
            lock = (self.folder / "lock").open("w", encoding="utf-8")
        except OSError as error:
            raise InputError(
                f"cannot be written ({error.strerror})", file=self.folder, slug="cannot-write"
            ) from error
        with lock:
            try:
                fcntl.flock(lock, fcntl.LOCK_EX | fcntl.LOCK_NB)
            except OSError as error:
                raise InputError("another run is at work on it", file=self.folder, slug="other-run") from error
            self._claim()
            yield

    def _claim(self) -> None:
        path = self.folder / "question"
        if not path.exists():
            write_whole(path, self.question + "\n")
        elif path.read_text(encoding="utf-8").strip() != self.question:
            raise InputError(
                "belongs to another question (brief, members or block size differ)",
                file=self.folder,
                slug="other-run",
            )

    def write(self, number: int, text: str) -> None:
        """Keep a part, whole or not at all."""
        sealed = {"sha256": hashlib.sha256(text.encode()).hexdigest(), "text": text}
        write_whole(self._path(number), json.dumps(sealed, ensure_ascii=False))

    def read(self, number: int) -> str | None:
        """A part; None where it is not there yet or is damaged, and has to be worked out again."""
        try:
            sealed = json.loads(self._path(number).read_text(encoding="utf-8"))
            text = str(sealed["text"])
            return text if hashlib.sha256(text.encode()).hexdigest() == sealed["sha256"] else None
        except (OSError, ValueError, KeyError, TypeError):
            return None

    def clear(self) -> None:
        """Take the folder away, when all that it holds is in the result."""
        for path in self.folder.iterdir():
            path.unlink()
        self.folder.rmdir()

    def _path(self, number: int) -> Path:
        return self.folder / f"{number:06d}.json"
