"""How the tests of this folder use the program: through its command line, as a user does."""

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any, NamedTuple

import pytest

from legwright.show.cli import run

#: a brief as TOML text, one dotted key a line; quick, since one candidate is asked
BRIEF = {
    "title": '"Test rig"',
    "duty.kind": '"generator"',
    "duty.hot_K": "700",
    "duty.cold_K": "400",
    "duty.maximise": '"efficiency"',
    "size.shape": '"grain"',
    "size.min_nm": "20",
    "size.max_nm": "2000",
    "candidates.use": '["sige-n"]',
    "candidates.carrier": '"either"',
}


class Said(NamedTuple):
    """What a call left behind."""

    code: int
    out: str
    err: str

    @property
    def json(self) -> Any:
        """Standard output as strict JSON: no NaN, no infinity, nothing around it."""

        def refuse(word: str) -> None:
            raise AssertionError(f"{word} is not JSON")

        return json.loads(self.out, parse_constant=refuse)


@pytest.fixture
def legwright(capsys: pytest.CaptureFixture[str]) -> Callable[..., Said]:
    """Call the command line in this process."""

    def call(*arguments: object) -> Said:
        code = run([str(argument) for argument in arguments])
        return Said(code, *capsys.readouterr())

    return call


@pytest.fixture
def brief(tmp_path: Path) -> Callable[..., Path]:
    """Write BRIEF with changes (dotted key: TOML text, or None to leave the key out), and say where."""

    def write(changes: dict[str, str | None] | None = None, name: str = "brief.toml") -> Path:
        lines = {**BRIEF, **(changes or {})}
        path = tmp_path / name
        path.write_text("".join(f"{key} = {text}\n" for key, text in lines.items() if text is not None))
        return path

    return write
