"""Text for a stream that cannot show every character: our own words for units and signs, not question marks."""

from __future__ import annotations

import unicodedata
from typing import Any

#: longer marks first, since parts of them stand further down
_ASCII = {
    "10⁻⁸": "1e-8",
    "cm⁻³": "1/cm3",
    "m⁻³": "1/m3",
    "…": "..",
    "–": "-",
    "—": "-",
    "−": "-",
    "‐": "-",
    "·": " ",
    "×": "x",
    "±": "+-",
    "°": "deg",
    "µ": "u",
    "μ": "u",
    "Ω": "ohm",
    "Δ": "d",
    "Γ": "Gamma",
    "γ": "gamma",
    "η": "eta",
    "κ": "kappa",
    "λ": "lambda",
    "π": "pi",
    "ρ": "rho",
    "σ": "sigma",
    "τ": "tau",
    "ω": "omega",
    "∞": "inf",
    "∫": "integral ",
    "√": "sqrt ",
    "≤": "<=",
    "≥": ">=",
    "≈": "about ",
    "→": "->",
    "‘": "'",
    "’": "'",
    "“": '"',
    "”": '"',
    "ß": "ss",
    "ø": "o",
    "ł": "l",
    "─": "-",
}
#: one of each kind that the tables use
_SAMPLE = "…×–µΔΩ²³⁻κσ─"


def encodes(stream: Any) -> bool:
    """Whether the stream takes all that the tables use; one without an encoding of its own does."""
    try:
        _SAMPLE.encode(getattr(stream, "encoding", None) or "utf-8")
    except (UnicodeEncodeError, LookupError):
        return False
    return True


def plain(text: str) -> str:
    """The same in ASCII.

    >>> plain("0.04 … 0.06, 2e19 cm⁻³, ΔT 40 K, 3 µW/(cm K²), 90 °")
    '0.04 .. 0.06, 2e19 1/cm3, dT 40 K, 3 uW/(cm K2), 90 deg'
    """
    for mark, word in _ASCII.items():
        text = text.replace(mark, word)
    parts = unicodedata.normalize("NFKD", text)
    return "".join(each for each in parts if not unicodedata.combining(each)).encode("ascii", "replace").decode()
