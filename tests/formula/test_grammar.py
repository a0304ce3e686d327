"""The grammar on one page against the parser by hand: both take the same lines and refuse the same.

source: the grammar file beside the parser, made a second parser by Lark, a general library.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from functools import cache
from importlib.resources import files
from pathlib import Path
from random import Random

import lark
import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

import loadpath
from loadpath.formula.lines import groups, indent_of
from loadpath.formula.names import RESERVED
from loadpath.formula.parser import parse_block
from loadpath.formula.statements import (
    Definition,
    Faulty,
    FunctionDefinition,
    Solution,
    Statement,
    Unknown,
)
from loadpath.formula.tree import As, Quantity, walk
from loadpath.functions import NAMES as FUNCTION_NAMES
from loadpath.resolve import expressions
from loadpath.sheet.model import Formulas, Sheet
from loadpath.text import Source, Span
from loadpath.units import BadUnit, parse_unit
from loadpath.units.unit import FEET_AND_INCHES

GRAMMAR = (files("loadpath.formula") / "grammar.lark").read_text("utf-8")
ROOT = Path(__file__).parents[2]
FOLDERS = ("tests/published", "calcsheets", "templates/sheets")
SHEETS = sorted(path for folder in FOLDERS for path in (ROOT / folder).glob("*.sheet.md"))
MISTYPED = sorted((ROOT / "tests" / "cases" / "mistakes").glob("*.case"))
PAGES = sorted((ROOT / "engine" / "loadpath" / "guide").rglob("*.md"))


@cache
def grammar() -> lark.Lark:
    return lark.Lark(GRAMMAR, parser="lalr", lexer="basic")


# --- the two parsers ----------------------------------------------------------------------------------------


def laid_out(typed: str) -> str:
    """A statement's lines put together as the grammar's comment says; a note stays where its line ends."""
    lines = [line for line in typed.replace("\t", "    ").split("\n") if line.strip()]
    split = [re.split(r"(?<=\s)--(?=\s|$)", line, maxsplit=1) for line in lines]
    head, *deeper = [(len(body) - len(body.lstrip()), body.strip(), note) for body, *note in split]
    if not re.search(r"\bcases$", head[1]) and not re.match(r"solve\b", head[1]):
        whole = " ".join(body for _, body, _ in (head, *deeper))
        return whole + "".join(f" --{text}" for text in head[2])
    rows = [head]
    level = min(indent for indent, _, _ in deeper) if deeper else 0
    for indent, body, note in deeper:
        if indent > level and len(rows) > 1:
            rows[-1] = (indent, f"{rows[-1][1]} {body}", rows[-1][2])
        else:
            level = indent
            rows.append((indent, body, note))
    return "\n".join(body + "".join(f" --{text}" for text in note) for _, body, note in rows)


def by_grammar(typed: str) -> bool:
    try:
        grammar().parse(laid_out(typed))
    except lark.exceptions.LarkError:
        return False
    return True


ELSEWHERE = ("over-limit", "defined-twice")
"""Mistakes that the grammar leaves to others, as its comment says."""


def by_hand(typed: str) -> bool | None:
    """None where what is wrong is none of the grammar's business."""
    text = "\n".join("    " + line for line in typed.split("\n"))
    source = Source("", text)
    if len(groups(source, Span(0, len(text)))) != 1:
        return None
    statements, findings = parse_block(source, Span(0, len(text)))
    if findings:
        named_like_a_function = findings[0].slug == "reserved-word" and (
            "function" in findings[0].message or source.cut(findings[0].span or Span(0, 0)) in FUNCTION_NAMES
        )
        built_in = re.match(r"\s*\w+", typed)
        at_a_function = built_in is not None and built_in.group().strip() in FUNCTION_NAMES
        return None if findings[0].slug in ELSEWHERE or named_like_a_function or at_a_function else False
    assert not any(isinstance(statement, Faulty) for statement in statements)
    return all(is_well_formed(unit) for statement in statements for unit in units_of(statement))


def units_of(statement: Statement) -> list[str]:
    found = [n.unit for tree in expressions(statement) for n in walk(tree) if isinstance(n, As)]
    quantities = [n for tree in expressions(statement) for n in walk(tree) if isinstance(n, Quantity)]
    found += [part.unit for quantity in quantities for part in quantity.parts]
    asked = [statement.unit] if isinstance(statement, Definition | FunctionDefinition | Unknown) else []
    asked += [s.unit for s in statement.together.sought] if isinstance(statement, Solution) else []
    asked += [p.unit for p in statement.parameters] if isinstance(statement, FunctionDefinition) else []
    return found + [unit.text for unit in asked if unit is not None]


def is_well_formed(unit: str) -> bool:
    """With each name in it taken for a metre: whether a unit is known is not for the grammar to say."""
    if FEET_AND_INCHES.fullmatch(unit):
        return True
    try:
        parse_unit(re.sub(r"[^\W\d²³¹][^\W²³¹]*", "m", unit))
    except BadUnit as bad:
        return "too large" in bad.message or "out of range" in bad.message
    return True


def agree(typed: str) -> None:
    hand = by_hand(typed)
    assume(hand is not None)
    assert by_grammar(typed) == hand, typed


def without_indent(typed: str) -> str:
    return typed.replace("\n    ", "\n").removeprefix("    ")


# --- what sheets hold ---------------------------------------------------------------------------------------


def statements_of(sheet: Sheet) -> tuple[list[str], list[str]]:
    """The lines of each statement that was read, and of those that were not; tables are not lines."""
    read: list[str] = []
    faulty: list[str] = []
    for block in sheet.blocks:
        if (
            isinstance(block, Formulas)
            and indent_of(sheet.source.line(line_of(sheet, block.span.start))) >= 4
        ):
            bad = [s.span.start for s in block.statements if isinstance(s, Faulty)]
            for group in groups(sheet.source, block.span):
                start = sheet.source.line_starts[line_of(sheet, group.span.start) - 1]
                typed = sheet.source.text[start : group.span.end]
                (faulty if group.span.start in bad else read).append(typed)
    return read, faulty


def line_of(sheet: Sheet, place: int) -> int:
    return sheet.source.line_number(place)


def sheet_of_a_case(path: Path) -> Sheet:
    return loadpath.read_text(re.split(r"^=====\n", path.read_text("utf-8"), flags=re.MULTILINE)[1])


def sheets_of_a_page(path: Path) -> list[Sheet]:
    """The sheets and the fragments of sheets that a page of the guide shows."""
    fences = re.findall(r"^```sheet[^\n]*\n(.*?)^```$", path.read_text("utf-8"), re.MULTILINE | re.DOTALL)
    front = "---\ntitle: Fragment\n---\n\n"
    return [loadpath.read_text(text if text.startswith("---\n") else front + text) for text in fences]


@cache
def corpus() -> tuple[str, ...]:
    """Every statement of the sheets, the cases and the guide that the parser takes."""
    sheets = [loadpath.read(path) for path in SHEETS] + [sheet_of_a_case(path) for path in MISTYPED]
    sheets += [sheet for path in PAGES for sheet in sheets_of_a_page(path)]
    return tuple(typed for sheet in sheets for typed in statements_of(sheet)[0])


def test_there_are_sheets_to_read() -> None:
    assert len(SHEETS) > 60 and len(MISTYPED) > 200 and len(PAGES) > 80
    assert len(corpus()) > 3000


@pytest.mark.parametrize("path", SHEETS, ids=lambda path: path.name.removesuffix(".sheet.md"))
def test_the_grammar_takes_every_statement_of_the_sheets(path: Path) -> None:
    read, faulty = statements_of(loadpath.read(path))
    assert faulty == []
    assert [typed for typed in read if not by_grammar(typed)] == []


def test_the_grammar_agrees_about_every_statement_of_the_cases() -> None:
    """Those with mistakes in them: what the parser refuses the grammar refuses, and no more."""
    for path in MISTYPED:
        for typed in (typed for part in statements_of(sheet_of_a_case(path)) for typed in part):
            typed = without_indent(typed)
            assert by_hand(typed) in (by_grammar(typed), None), (path.name, typed)


def test_the_grammar_agrees_about_every_statement_of_the_guide() -> None:
    for path in PAGES:
        for sheet in sheets_of_a_page(path):
            for typed in (typed for part in statements_of(sheet) for typed in part):
                typed = without_indent(typed)
                assert by_hand(typed) in (by_grammar(typed), None), (path.name, typed)


# --- lines, good and bad ------------------------------------------------------------------------------------

GOOD = r"""
P_r = 20 kN                     -- rated load [hoist]
P = 20 kN
phi = 1.25 -- dynamic factor [hoist]
n = 12_000
n = 1.2e6
n = 12e-6 1/K
T = -20 degC
T = 3 K^-1
c = 0.24 J/(kg*K)
p = 12 %
p [%] = a/b
x [1] = a
a [deg] = b
a [ kN*m ] = b
s = 5/8 in
s = 2 1/2 in
s = 12 ft 6 in
s = 12 ft 6 1/2 in
s = 12 ft 1/2 in
s = W/(1/2 in)
s = W/2 1/2 in
s = 1 - 1/2 in
s = x-1/2 in
s = 3/4
s = 1/2*b
s = 5/8 in/s
h [ft-in 1/16] = sqrt(a^2 - b^2)
M_Ed [kN*m] = P_Ed*L/4          -- midspan, load at the middle
x = -x_1^2
x = a^b^c
x = a^-1
x = a^(1/3)
x = a - -b
x = a*-b
x = a + (-b)
x = (a + b)*(c - d)/e
x = f(a)
x = f(a, b + c, 2 mm)
x = f()
x = max(a, b)^2
x = b.I_y/b.W_el.y
x = (f_c as psi)^0.5*(1 psi)
x = sqrt((f_c as N/mm^2))
x = <a - b>^0 + <c>^12
x = <<a>^1 - b>^2
x = 12 kN/m * L
x = 12 kN*m
x = a at b
x = plates.b at "top flange"*2
x = plates.b at b.c^2 - a at x'
x = (plates.f at k as psi)
x = a'
σ_b = Δ_1 + größe
M(x [m]) [kN*m] = R_A*x - P*<x - a>^1
chi(lambda [1], alpha [1]) = 1/(lambda + alpha)
f(x) = x
f(x)[mm] = x*2
curve = "b" of "a", "b", "c", "d"  -- table 6.2 [ec3]
curve = "very thin" of "very thin"
strength bending: sigma_Ed <= f_y/gamma_M0        -- [ec3]
strength: sigma <= f_y
strength bottom flange: sigma <= f_y
strength x-axis 2: sigma <= f_y
stiffness: delta <= L/500
stability : P < P_cr
limit: 3 <= t/d <= 12
limit: 12 > t/d >= 3
limit n: f <= 3 Hz or f >= 5 Hz
limit: 1 <= a <= 2 or 3 < a < 4
limit: a > <b - c>^1
check: R_A + R_B = P within 0.1 %
check: a = b within 2 mm + c
valid: 3 <= t/d <= 12 for chi
valid: a > 1 and (b < 2 or c = 3) for x, b.y
valid: (a > 1) for x
valid: ((a > 1) and (b > 2)) or c = "b" for x
unknown C_1 [rad]
unknown C_1 [rad], C_2 [mm], R_A [kN]    -- constants [ec3]
plot V(x), M(x) for x from 0 m to L
plot a*x^2 + f(x)/<x - b>^2 for x from -L/2 to L/2 + 1 mm -- shape
plot (a)*x for x from (0) to b at c
tabulate M(x) for x from 0 m to L, 10 steps
tabulate M(x), v(x), 2 for x from a to L/2 1_0 steps -- the left half
tabulate x for x from 0 to 1, 1 step
tabulate x for x from 0 to 5 m 1 step
x = 10 step
x = 10 step/a
x = 1/2 step
limit = 3 mm
strength = 3 MPa
valid = 1
check [kN] = a
x = 1 -- a note -- with dashes [a] [b]
x = a --
""".strip().split("\n")  # fmt: skip

BAD = r"""
x
x =
= 3
x == 3
x := 3
x = 3 = 3
x = a b
x = 2a
x = 2(a)
x = (2)a
x = f (a)
x = a(
x = (a
x = a)
x = [a]
x = 20 [kN]
x kN = 20
x = 20kN
x = 20%
x = 3,5
x = .5
x = 5.
x = 1.2.3
x = 1e
x = 1__0e
x = a**2
x = a--b
x = --a
x = a +- b
x = a+-b
x = +a
x = a*
x = a/
x = a*/b
x = a^
x = a^^b
x = W/1/2 in
x = W/5/8 in
x = a^1/2 in
x = W/-1/2 in
x = 1-1/2 in
x = 3*2-1/2 in
x = 12 kN/m/s
x = 12 N/m*s
x = 12 kN+a
x = 12 kN-a
x = 12 kN*
x = 12 kN^
x = 12 kN^a
x = 12 (kN)
x = 12 kN m
x = 1 1/2
x = 1/2 ft 6 in
x = 12 ft 6
x = (a as psi
x = (a as)
x = a as psi
x = <a - b>
x = <a - b>^-1
x = <a - b>^n
x = <a - b>^1.5
x = <a - b>^(1)
x = <a - b^1
x = a < b
x = a <= b
x <= 3
x ≤ 3
x = a·b
x = 3²
x = "a"
x = "a" of
x = "a" of b
x = "a" of "a" "b"
x [mm] = "a" of "a"
x = "a
x [ = 3
x [] = 3
x [kN = 3
x [kN m] = 3
x [kN/m/s] = 3
x [mm] [mm] = 3
x. = 3
b.x = 3
x y = 3
1x = 3
_x = 3
when = 3
x = when
x = at
use = 3
x = a at b c
x = a at
x = a at 2
x = a at f(b)
x = (a) at b
x = a + b at when
x = f(a) at "b"
use section IPE 300 as b
solve for x
unknown
unknown x
unknown x [mm] y [mm]
unknown x [mm],
unknown b.x [mm]
unknown x [mm] = 3
unknown [mm] = 3
unknown = 3
unknown x [mm] between 0 and 1
unknown at [mm]
plot
plot = 3
plot x
plot V(x) for x
plot V(x) for x from 0 m
plot V(x) for x from 0 m to
plot V(x) for 2 from 0 m to L
plot V(x) for at from 0 m to L
plot V(x) for b.x from 0 m to L
plot V(x) for x, y from 0 m to L
plot V(x) M(x) for x from 0 m to L
plot V(x) for x = 0 m to L
plot V(x) for x from 0 m to L, 10 steps
plot V(x) for x from 0 m to L to M
plot V(x) = M(x) for x from 0 m to L
plot "a" for x from 0 m to L
plot V(x), for x from 0 m to L
plot for x from 0 m to L
plot(x) = 3
tabulate x for x from 0 to 1
tabulate x for x from 0 to 1, 10
tabulate x for x from 0 to 1,, 10 steps
tabulate x for x from 0 to 1, n steps
tabulate x for x from 0 to 1, 2.5 steps
tabulate x for x from 0 to 1, -3 steps
tabulate x for x from 0 to 1, 10 steps, 2 steps
tabulate x for x from 0 to 1, 10 stepsize
tabulate x for x from 0 to 1, 10 step_1
tabulate x for x from 0 to 1, 10 step'
tabulate x for x from 0 to 1, 10 steps/2
tabulate x for x from 0 to 1, 10steps
x = 10 steps
solve x
solve
solve = 3
f(x = 3
f() = 3
f(2) = 3
f(x y) = 3
f(x,) = 3
f(a.b) = 3
f.g(x) = 3
f(x [m]) kN = 3
strength sigma <= 3
strength:
strength: a
strength: a = b
strength: a == b
strength: a <= b >= c
strength: a <= b <= c <= d
strength: a <= b and c <= d
strength: a <= b or c <= d or e <= f
strength: (a <= b)
strength: a < = b
strength: a =< b
strength: a => b
strength: a <> b
strength: a != b
strengh: a <= b
strength+: a <= b
check: a = b
check: a <= b within 1
check: a = b = c within 1
check: a within 1
valid: a < b
valid: a for b
valid: a < b for
valid: a < b for 3
valid: a < b for x y
valid: not a < b for x
limit: a < b within 3
x = 3; y = 4
x = 3 # comment
x = 3 // comment
x = a ? b : c
x = a % b
x = a & b
x = {a}
x = a!
x = 'a'
x = ١
""".strip().split("\n")  # fmt: skip


@pytest.mark.parametrize("typed", GOOD)
def test_both_take(typed: str) -> None:
    assert (by_hand(typed), by_grammar(typed)) == (True, True)


@pytest.mark.parametrize("typed", BAD)
def test_both_refuse(typed: str) -> None:
    assert (by_hand(typed), by_grammar(typed)) == (False, False)


CASES = {
    "f = cases\n    a when x < 3\n    b otherwise": True,
    "f = cases -- note\n    a when x < 3 -- first [a]\n    b otherwise -- last": True,
    "f = cases\n    a when x < 3 and y > 2\n    b when c = 3": True,
    "f = cases\n    a otherwise": True,
    'f = cases\n    a when k = "b"\n    b when (k = "c" or x < 2) and y > 3': True,
    "f(x [1]) [MPa] = cases\n    a*x\n        when x < 3\n    b otherwise": True,
    "f [MPa] = cases\n    a + \n        b when x < 3 -- n\n    b\n      otherwise": True,
    "M = a +\n    b*c -- continued": True,
    "strength x:\n    a\n    <= b": True,
    "solve for R_A [kN]\n    R_A*L = P*a": True,
    "solve for R_A [kN], R_B [kN] -- both [a]\n    R_A + R_B = P -- up\n    R_B*L = P*a -- about A": True,
    "solve for x\n    a*x^2\n        + b*x = 0\n    3 = y": True,
    "solve for e [mm] between 0 mm and 40 mm\n    P/A*(1 + e*c/r^2) = f_y": True,
    "solve for x between -a/2 and f(b, c), y [1] between 0 and 1, z\n    x = y\n    y = z": True,
    'solve for x\n    "a" = x': True,
    "solve for a,\n    b = c": False,
    "solve for a b\n    a = c": False,
    "solve for a\n    a": False,
    "solve for a\n    a <= b": False,
    "solve for a\n    a = b = c": False,
    "solve for a\n    a == b": False,
    "solve for a\n    a = b, c = d": False,
    "solve for a\n    a [mm] = b": False,
    "solve for a between 0\n    a = b": False,
    "solve for a between 0, 1\n    a = b": False,
    "solve for a from 0 to 1\n    a = b": False,
    "solve for a between 0 and 1 [mm]\n    a = b": False,
    "solve for a.b\n    a.b = c": False,
    "solve for 3\n    a = b": False,
    "solve a\n    a = b": False,
    "solve for\n    a = b": False,
    "solve for a -- note": False,
    "unknown a [mm],\n    b [mm]": True,
    "plot V(x),\n    M(x) -- two\n    for x from 0 m to L": True,
    "tabulate V(x)\n    for x from 0 m to L,\n        10 steps": True,
    "f = cases": False,
    "f = cases a when x < 3": False,
    "f = cases\n    a": False,
    "f = cases\n    a when": False,
    "f = cases\n    a when x": False,
    "f = cases\n    a otherwise\n    b when x < 3": False,
    "f = cases\n    a otherwise b": False,
    "f = cases\n    when x < 3": False,
    "f = cases\n    a when x < 3 otherwise": False,
    "f = 3 + cases\n    a otherwise": False,
    "M = a\n    b": False,
    "M = a +": False,
}


@pytest.mark.parametrize("typed", CASES)
def test_statements_of_several_lines(typed: str) -> None:
    assert (by_hand(typed), by_grammar(typed)) == (CASES[typed], CASES[typed])


# --- generated lines ----------------------------------------------------------------------------------------

NAMES = ["a", "x_1", "sigma_Ed", "L'", "σ", "limit", "valid", "e5", "f"]
WHOLES = ["0", "1", "2", "16", "120"]
NUMBERS = [*WHOLES, "0.5", "12_000", "1.2e6", "3e-3", "2_5.0"]
FRACTIONS = ["1/2", "5/8", "12/1_6"]
UNITS = ["kN", "N/mm^2", "1/K", "J/(kg*K)", "%", "m^-1", "m^(1/2)", "m^0.5", "m*(N/s)^2", "m/(s)^2", "q"]
MIXED = [f"{whole} {fraction}" for whole in WHOLES for fraction in FRACTIONS]


def pairs(numbers: list[str], units: list[str]) -> list[str]:
    return [f"{number} {unit}" for number in numbers for unit in units]


WORDS = {
    "NAME": NAMES, "DOTTED_NAME": ["b.I_y", "B1.M.max", "rod.sigma'"], "FUNCTION": NAMES,
    "DOTTED_FUNCTION": ["B1.V"], "SMALL": ["0", "1", "12"], "NUMBER": NUMBERS,
    "QUANTITY": pairs([*NUMBERS, *MIXED], UNITS), "FRACTION_QUANTITY": pairs(FRACTIONS, UNITS),
    "FEET_AND_INCHES": [f"{f} ft {i} in" for f in NUMBERS for i in [*NUMBERS, *FRACTIONS, *MIXED]],
    "AS": [f"as {unit}" for unit in [*UNITS, "1", "(N)*m"]],
    "STEPS": ["1 steps", "10  steps", "5_0 steps"], "STEP": ["1 step", "12 step"],
    "ASKED": [f"[{unit}]" for unit in [*UNITS, "1", "ft-in 1/16", " kN*m "]],
    "CRITERION": ["strength:", "limit a-b 2:", "stability :"], "VALID": ["valid:"], "CHECK": ["check :"],
    "WORD": ['"b"', '"thin wall"', '""'], "EQUALS": ["="], "PLUS": ["+"], "MINUS": ["-"], "TIMES": ["*"],
    "NOTE": [" -- note [a]", " --", " -- a = b -- c"], "NEW_LINE": ["\n    "],
}  # fmt: skip
"""Examples of each word of the grammar that is a regular expression."""


@cache
def ways() -> dict[str, list[list[str]]]:
    """The alternatives of each rule."""
    rules: dict[str, list[list[str]]] = {}
    for rule in grammar().rules:
        rules.setdefault(rule.origin.name, []).append([symbol.name for symbol in rule.expansion])
    return rules


@cache
def short_ways() -> dict[str, list[list[str]]]:
    """Those alternatives that end soonest."""
    height = dict.fromkeys(ways(), 99)

    def tall(way: list[str]) -> int:
        return max((height.get(symbol, 0) for symbol in way), default=0)

    for _ in ways():
        height |= {name: 1 + min(tall(way) for way in choices) for name, choices in ways().items()}
    return {name: [way for way in choices if tall(way) < height[name]] for name, choices in ways().items()}


def made(symbol: str, random: Random, room: int) -> Iterator[str]:
    """The words of something that a rule makes; with less room the shorter alternatives."""
    if symbol in ways():
        for part in random.choice((ways() if room > 0 else short_ways())[symbol]):
            yield from made(part, random, room - 1)
    elif symbol in WORDS:
        yield random.choice(WORDS[symbol])
    else:
        yield next(t.pattern.value for t in grammar().terminals if t.name == symbol)


def sentence(random: Random, between: list[str]) -> str:
    """One statement that the grammar makes, with white space drawn from `between` where it may stand."""
    text = ""
    for word in made("start", random, random.randint(3, 10)):
        is_call = (
            word == "("
            and re.search(r"\w'?$", text)
            and not re.search(r"\b(and|or|when|for|from|to|between|plot|tabulate|at)$", text)
        )
        text += ("" if is_call or not text else random.choice(between)) + word
    return text


quick = settings(deadline=None, suppress_health_check=list(HealthCheck))


@quick
@given(st.randoms(use_true_random=False))
def test_both_take_what_the_grammar_makes(random: Random) -> None:
    typed = sentence(random, [" "])
    assert by_grammar(typed), typed
    assert by_hand(typed) in (True, None), typed


@quick
@given(st.randoms(use_true_random=False))
def test_both_agree_where_words_run_together(random: Random) -> None:
    agree(sentence(random, ["", "", " "]))


pieces = st.sampled_from([
    "", " ", "-", "--", " -- ", "+", "*", "/", "^", "(", ")", "<", ">", "<=", "=", "==", "[", "]", ",", ".",
    ":", '"', " at ", " from ", " to ",
    " between ", " steps", "solve for ", "plot ", "1", "1/2 ", "1/2 in", " kN", "kN", "%", "a", "f(",
    " when ", " otherwise", " and ", " or ", " for ", " as psi", "cases", "\n        ", "_", "'", "e5", "²",
])  # fmt: skip


@quick
@given(st.data())
def test_both_agree_on_lines_with_one_thing_changed(data: st.DataObject) -> None:
    typed = without_indent(data.draw(st.sampled_from(corpus())))
    start = data.draw(st.integers(0, len(typed)))
    end = data.draw(st.integers(start, min(start + 4, len(typed))))
    agree(typed[:start] + data.draw(pieces) + typed[end:])


# --- the page itself ----------------------------------------------------------------------------------------


def test_the_reserved_words_are_the_language_s() -> None:
    listed = re.search(r"_NOT_RESERVED: /\(\?!\(([a-z|]+)\)", GRAMMAR)
    assert listed is not None
    assert set(listed.group(1).split("|")) == RESERVED


def test_the_page_fits_a_reader() -> None:
    lines = GRAMMAR.split("\n")
    assert max(len(line) for line in lines) <= 130 + 60  # the list of reserved words is one line
    assert len(lines) < 150
