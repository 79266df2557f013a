"""Where numbers came from: the library's sources.bib, and one that may lie beside a candidate of your own."""

from __future__ import annotations

import re
from functools import cache
from pathlib import Path

from legwright.base.files import datasets_folder


def _files(folder: Path) -> list[Path]:
    return [path for path in (datasets_folder() / "sources.bib", folder / "sources.bib") if path.is_file()]


@cache
def source_keys(folder: Path) -> frozenset[str]:
    """Keys that candidates in `folder` may cite. Read without a parser: every run needs them."""
    texts = (path.read_text(encoding="utf-8") for path in _files(folder))
    return frozenset(key for text in texts for key in re.findall(r"^@\w+\{([^,\s]+),", text, re.MULTILINE))


def plain_text(text: str) -> str:
    r"""BibTeX markup as it should read.

    >>> plain_text("545--552, Si{Ge} \\& more")
    '545–552, SiGe & more'
    """
    import bibtexparser.latexenc

    unicode = str(bibtexparser.latexenc.latex_to_unicode(text))
    return re.sub(r"[{}]", "", unicode.replace("--", "–").replace("\\&", "&"))


@cache
def bibliography(folder: Path) -> dict[str, str]:
    """Each source as one line: authors, title, where, year."""
    import bibtexparser

    found: dict[str, str] = {}
    for path in _files(folder):
        for marked_up in bibtexparser.loads(path.read_text(encoding="utf-8")).entries:
            entry = {key: plain_text(value) for key, value in marked_up.items()}
            home = entry.get("journal") or entry.get("booktitle") or entry.get("publisher") or ""
            volume = " ".join(filter(None, (home, entry.get("volume"))))
            pages = f", {entry['pages']}" if "pages" in entry else ""
            place = f"{volume}{pages}" + (f" ({entry['year']})" if "year" in entry else "")
            parts = (entry.get("author"), entry.get("title"), place, entry.get("note"))
            found[entry["ID"]] = "; ".join(" ".join(part.split()) for part in parts if part)
    return found
