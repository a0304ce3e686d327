"""Names: canonical text, and how a name is split for printing.

`sigma_b` and `σ_b` are one name; its canonical text spells the Greek letter.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

GREEK = {
    "alpha": "α", "beta": "β", "gamma": "γ", "delta": "δ", "epsilon": "ε", "zeta": "ζ", "eta": "η",
    "theta": "θ", "iota": "ι", "kappa": "κ", "lambda": "λ", "mu": "μ", "nu": "ν", "xi": "ξ",
    "omicron": "ο", "pi": "π", "rho": "ρ", "sigma": "σ", "tau": "τ", "upsilon": "υ", "phi": "φ",
    "chi": "χ", "psi": "ψ", "omega": "ω",
    "Alpha": "Α", "Beta": "Β", "Gamma": "Γ", "Delta": "Δ", "Epsilon": "Ε", "Zeta": "Ζ", "Eta": "Η",
    "Theta": "Θ", "Iota": "Ι", "Kappa": "Κ", "Lambda": "Λ", "Mu": "Μ", "Nu": "Ν", "Xi": "Ξ",
    "Omicron": "Ο", "Pi": "Π", "Rho": "Ρ", "Sigma": "Σ", "Tau": "Τ", "Upsilon": "Υ", "Phi": "Φ",
    "Chi": "Χ", "Psi": "Ψ", "Omega": "Ω",
}  # fmt: skip
_SPELLED = {letter: word for word, letter in GREEK.items()} | {
    "µ": "mu", "ϑ": "theta", "ϕ": "phi", "ϵ": "epsilon", "ς": "sigma", "ϱ": "rho", "ϰ": "kappa",
}  # fmt: skip

RESERVED = frozenset(
    [
        "cases", "when", "otherwise", "solve", "unknown", "use", "take", "beam", "plot", "tabulate", "figure",
        "for", "from", "to", "at", "as", "of", "by", "and", "or", "over", "between", "within", "steps",
    ]
)  # fmt: skip
"""Words of the language that are never names (function names are reserved besides)."""

KINDS = ("strength", "stiffness", "stability", "limit")
"""Words that begin a criterion, when a colon follows."""


def is_letter(character: str) -> bool:
    """True for what may begin a name: any Unicode letter."""
    return character.isalpha()


def is_name_character(character: str) -> bool:
    """True for what may go on a name: letters, digits, `_`, marks that combine with a letter, and a prime."""
    return character.isalpha() or character in "_'" or unicodedata.category(character) in ("Nd", "Mn", "Mc")


def words_in(text: str) -> Iterator[str]:
    """Whatever in a text could be a name, as typed, dots left out."""
    start = -1
    for index, character in enumerate(text + " "):
        if start < 0 and is_letter(character):
            start = index
        elif start >= 0 and not is_name_character(character):
            yield text[start:index]
            start = index if is_letter(character) else -1


@lru_cache(maxsize=65536)
def canonical(name: str) -> str:
    """The one text of a name: NFC, each part between `_` and `.` that is a Greek letter spelled out."""
    text = unicodedata.normalize("NFC", name)
    if text.isascii():
        return text
    return ".".join("_".join(_spell(part) for part in piece.split("_")) for piece in text.split("."))


def _spell(part: str) -> str:
    body = part.rstrip("'")
    head = "".join(_SPELLED.get(character, character) for character in body)
    # one Greek letter alone, or followed by digits, is spelled; inside a word of letters it stays
    letters = [c for c in body if c in _SPELLED]
    if len(letters) == 1 and body.startswith(letters[0]) and body[1:].isdigit() | (len(body) == 1):
        return head + part[len(body) :]
    return part


@dataclass(frozen=True, slots=True)
class Symbol:
    """A name as it prints: `b.` σ with subscript `b,max` and primes."""

    prefix: str
    """What a `use`, a `beam` or a table puts before the dot, dots included; "" mostly."""
    base: str
    subscript: str
    """Parts joined by commas; "" where there is none."""
    primes: int


def _letter(part: str) -> str:
    """A spelled Greek letter as its letter, digits after it kept: `sigma1` is σ1."""
    head = part.rstrip("0123456789")
    return GREEK[head] + part[len(head) :] if head in GREEK else part


@lru_cache(maxsize=65536)
def symbol(name: str) -> Symbol:
    """How a canonical name prints; two names with one `Symbol` print alike."""
    prefix, _, last = name.rpartition(".")
    body = last.rstrip("'")
    parts = body.split("_")
    base, subscripts = parts[0] or "_", [p for p in parts[1:] if p]
    return Symbol(
        prefix + "." if prefix else "",
        _letter(base),
        ",".join(_letter(part) for part in subscripts),
        len(last) - len(body),
    )


def plain_symbol(name: str) -> str:
    """A name in one line of plain text: `σ_b,max`."""
    s = symbol(name)
    return s.prefix + s.base + (f"_{s.subscript}" if s.subscript else "") + "'" * s.primes


_LOOK = str.maketrans("ΑΒΕΖΗΙΚΜΝΟΡΤΥΧοАВЕЗКМНОРСТУХаеорсухі", "ABEZHIKMNOPTYXoABE3KMHOPCTYXaeopcyxi")


def look(name: str) -> tuple[str, str, str, int]:
    """What a reader sees of a name: equal for two names that print alike, as Greek `Α` and Latin `A` do."""
    s = symbol(name)
    return s.prefix.translate(_LOOK), s.base.translate(_LOOK), s.subscript.translate(_LOOK), s.primes
