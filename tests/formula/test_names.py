"""Names: canonical text, and what a reader sees of them."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from loadpath.formula.names import (
    GREEK,
    RESERVED,
    canonical,
    is_letter,
    is_name_character,
    look,
    plain_symbol,
    symbol,
    words_in,
)


@pytest.mark.parametrize(
    ("typed", "name"),
    [
        ("σ", "sigma"),
        ("σ_b", "sigma_b"),
        ("M_Ed_φ", "M_Ed_phi"),
        ("b.λ", "b.lambda"),
        ("σ1", "sigma1"),
        ("σ'", "sigma'"),
        ("γ_M0", "gamma_M0"),
        ("A\u0308", "Ä"),
        ("\u00b5", "mu"),
        ("sigma_b", "sigma_b"),
        ("длина", "длина"),
        ("αβ", "αβ"),
    ],
)
def test_canonical(typed: str, name: str) -> None:
    assert canonical(typed) == name


@pytest.mark.parametrize(("word", "letter"), sorted(GREEK.items()))
def test_a_spelled_greek_name_and_its_letter_are_one(word: str, letter: str) -> None:
    assert canonical(letter) == word
    assert symbol(word).base == letter


@given(st.text(st.characters(categories=("L", "Nd", "Mn")) | st.sampled_from("_'."), min_size=1, max_size=12))
def test_canonical_text_is_its_own(name: str) -> None:
    assert canonical(canonical(name)) == canonical(name)
    assert look(canonical(canonical(name))) == look(canonical(name))


@pytest.mark.parametrize(
    ("name", "printed"),
    [
        ("sigma_b", "σ_b"),
        ("M_Ed_y", "M_Ed,y"),
        ("F1", "F1"),
        ("b.I_y", "b.I_y"),
        ("x'", "x'"),
        ("lambda_bar_z", "λ_bar,z"),
        ("epsilon", "ε"),
    ],
)
def test_symbols(name: str, printed: str) -> None:
    """As section 3 of the language says: `sigma_b` is σ with subscript b, `M_Ed_y` has subscript `Ed,y`."""
    assert plain_symbol(name) == printed


@pytest.mark.parametrize(
    ("a", "b"), [("F_1", "F__1"), ("P", "Ρ"), ("a", "а"), ("sigma_o", "sigma_ο"), ("B_1", "Β_1")]
)
def test_names_that_print_alike(a: str, b: str) -> None:
    assert canonical(a) != canonical(b)
    assert look(canonical(a)) == look(canonical(b))


@pytest.mark.parametrize(
    ("a", "b"), [("F_1", "F1"), ("F_1", "f_1"), ("x", "x'"), ("b.I", "c.I"), ("M_1_2", "M_12")]
)
def test_names_that_differ_in_print(a: str, b: str) -> None:
    assert look(a) != look(b)


def test_what_a_name_is_made_of() -> None:
    assert all(is_letter(c) for c in "aZσдé")
    assert not any(is_letter(c) for c in "1_²'%")
    assert all(is_name_character(c) for c in "aσ1_'٣")
    assert not any(is_name_character(c) for c in "²½-. ")


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("P/A + 2*b.I_y", ["P", "A", "b", "I_y"]),
        ("d²/4", ["d"]),
        ("12 kN/m", ["kN", "m"]),
        ("", []),
        ("2x", ["x"]),
    ],
)
def test_words_in(text: str, words: list[str]) -> None:
    assert list(words_in(text)) == words


def test_the_reserved_words_are_those_of_the_language() -> None:
    """source: the contract of the language, section 3, list of reserved words."""
    listed = (
        "cases when otherwise solve unknown use take beam plot tabulate figure for from to at as of by and "
    )
    assert set((listed + "or over between within steps").split()) == RESERVED
