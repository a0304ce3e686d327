"""LaTeX: what it says, that KaTeX and MathJax can read it, and that nothing typed gets out of it."""

from __future__ import annotations

import re

import pytest
from formula_trees import HOSTILE, condition, formula, trees, with_values
from hypothesis import given, settings
from hypothesis import strategies as st
from markdown_it import MarkdownIt

from loadpath.formula.names import GREEK
from loadpath.formula.tree import At, Branch, Cases, Factor, Name, Node, Relation, Shown, Word
from loadpath.render.math import latex, latex_equations, latex_lines, mathml

FORMULAS = [
    ("P_Ed*L/4", r"\dfrac{P_{\mathrm{Ed}} \cdot L}{4}"),
    ("(P_r+P_t)*L^3/(8*I)", r"\dfrac{(P_{\mathrm{r}} + P_{\mathrm{t}}) \cdot L^{3}}{8 \cdot I}"),
    ("a - (b - c)", "a - (b - c)"),
    ("a*(b*c)", r"a \cdot (b \cdot c)"),
    ("a*(b/c)", r"a \cdot \dfrac{b}{c}"),
    ("a/b*c", r"\dfrac{a}{b} \cdot c"),
    ("-x^2", "-x^{2}"),
    ("(-x)^2", "(-x)^{2}"),
    ("-(a + b)", "-(a + b)"),
    ("a*(-b)", r"a \cdot (-b)"),
    ("a + (-b)*c", r"a + (-b) \cdot c"),
    ("-(-a)", "-(-a)"),
    ("2*45 mm", r"2 \times 45\thinspace \mathrm{mm}"),
    ("2*pi*r", r"2 \cdot \pi \cdot r"),
    ("(6 m)^2", r"(6\thinspace \mathrm{m})^{2}"),
    ("1.2e6^2", r"(1.2 \times 10^{6})^{2}"),
    ("12_345.6*1.2E-06", r"12\thinspace 345.6 \times 1.2 \times 10^{-6}"),
    ("a/b/c", r"\dfrac{\frac{a}{b}}{c}"),
    ("a/b/c/d", r"\dfrac{\frac{a/b}{c}}{d}"),
    ("x^(a/b)", "x^{a/b}"),
    ("a^b^c", "a^{b^{c}}"),
    ("(a^b)^c", "(a^{b})^{c}"),
    ("(a/b)^2", r"\left(\dfrac{a}{b}\right)^{2}"),
    ("(a/b + c)*d", r"\left(\dfrac{a}{b} + c\right) \cdot d"),
    ("sqrt(a^2 + b^2)", r"\sqrt{a^{2} + b^{2}}"),
    ("sqrt(x)^2", r"(\sqrt{x})^{2}"),
    ("cbrt(x)", r"\sqrt[3]{x}"),
    ("abs(a - b)", r"\lvert a - b\rvert"),
    ("abs(a/b)", r"\left\lvert \dfrac{a}{b}\right\rvert"),
    ("sin(x)^2", r"(\sin(x))^{2}"),
    ("asin(x)", r"\arcsin(x)"),
    ("atan2(a, b)", r"\mathrm{atan2}(a, b)"),
    ("log10(x)", r"\log_{10}(x)"),
    ("exp(-x) + ln(x)", r"\exp(-x) + \ln(x)"),
    ("min(a, b)", r"\min(a, b)"),
    ("round_up(a, 5 mm)", r"\text{round up}(a, 5\thinspace \mathrm{mm})"),
    ("M_b(2 m)", r"M_{\mathrm{b}}(2\thinspace \mathrm{m})"),
    ("P*<x - a>^1", r"P \cdot \langle x - a\rangle^{1}"),
    ("<x/2 - a>^2", r"\left\langle \dfrac{x}{2} - a\right\rangle^{2}"),
    ("57000*sqrt((f_c as psi))", r"57\thinspace 000 \cdot \sqrt{f_{\mathrm{c}}\text{ in }\mathrm{psi}}"),
    ("2*(f_c as psi)", r"2 \cdot (f_{\mathrm{c}}\text{ in }\mathrm{psi})"),
    ("M_Ed_y^2", r"M_{\mathrm{Ed{,}y}}^{2}"),
    ("b.I_y", r"\mathrm{b.}I_{\mathrm{y}}"),
    ("top_flange.I_y", r"\text{topˍflange.}I_{\mathrm{y}}"),
    ("f_c' + x''", r"f_{\mathrm{c}}^{\prime} + x^{\prime \prime}"),
    ("f_c'^2", r"(f_{\mathrm{c}}^{\prime})^{2}"),
    ("F1 + sigma1", r"F1 + \sigma1"),
    ("load_factor", r"\mathit{load}_ {\mathrm{factor}}"),
    ("sigma_x_max*phi*Delta", r"\sigma_{\mathrm{x{,}max}} \cdot \varphi \cdot \Delta"),
    ("a_sigma", r"a_{\sigma}"),
    ("荷载*d_轴 + é", r"\text{荷载} \cdot d_{\text{轴}} + \text{é}"),
    ("Alpha", r"\mathrm{A}"),
    ("12 ft 6 1/2 in", r"12\thinspace \mathrm{ft}\thinspace 6\tfrac{1}{2}\thinspace \mathrm{in}"),
    ("5/8 in", r"\tfrac{5}{8}\thinspace \mathrm{in}"),
    ("35 deg", r"35{}^{\circ}"),
    ("20 degC", r"20\thinspace \mathrm{{}^{\circ}C}"),
    ("12 %", r"12\thinspace \mathrm{\text{％}}"),
    ("3 kN*m", r"3\thinspace \mathrm{kN{\cdot}m}"),
    ("4 mm^4", r"4\thinspace \mathrm{mm^{4}}"),
    ("2 K^-1", r"2\thinspace \mathrm{K^{-1}}"),
    ("2 J/(kg*K)", r"2\thinspace \mathrm{J/(kg{\cdot}K)}"),
    ("3 MPa*m^(1/2)", r"3\thinspace \mathrm{MPa{\cdot}m^{1/2}}"),
    ("3 um", r"3\thinspace \mathrm{\text{µ}m}"),
    ("3 US_gal", r"3\thinspace \mathrm{US\thinspace gal}"),
]  # fmt: skip


@pytest.mark.parametrize(("typed", "expected"), FORMULAS)
def test_reads(typed: str, expected: str) -> None:
    assert latex(formula(typed)) == expected


def test_values_in_place() -> None:
    tree = with_values(formula("P*M/W^2"), {
        "P": Shown("36.18", "kN"), "M": Shown("-56.10", "kN*m"), "W": Shown("12.5e6", "mm^3"),
    })  # fmt: skip
    assert latex(tree) == (
        r"\dfrac{36.18\thinspace \mathrm{kN} \times (-56.10\thinspace \mathrm{kN{\cdot}m})}"
        r"{(12.5 \times 10^{6}\thinspace \mathrm{mm^{3}})^{2}}"
    )


def test_conversion_factors() -> None:
    times, divided = Factor(formula("2 ft"), "12", "in/ft"), Factor(formula("a + b"), "12", "in/ft", True)
    assert latex(times) == r"2\thinspace \mathrm{ft} \times 12\thinspace \mathrm{in/ft}"
    assert latex(divided) == r"(a + b) \div (12\thinspace \mathrm{in/ft})"


CALCULUS = [
    ("integral(w*x, x, 0 m, L)", r"\int_{0\thinspace \mathrm{m}}^{L} w \cdot x\thinspace \mathrm{d}x"),
    ("integral(a + x, x)", r"\int (a + x)\thinspace \mathrm{d}x"),
    ("c*integral(x, x, 0, L)*d", r"c \cdot \left(\int_{0}^{L} x\thinspace \mathrm{d}x\right) \cdot d"),
    ("derivative(M(x), x)", r"\dfrac{\mathrm{d}}{\mathrm{d}x}\thinspace M(x)"),
    ("derivative(a + x, x)/2", r"\dfrac{\frac{\mathrm{d}}{\mathrm{d}x}\thinspace (a + x)}{2}"),
    ("limit_of(sin(x)/x, x, 0)", r"\lim_{x \to 0} \thinspace \dfrac{\sin(x)}{x}"),
    ("sum(k^2, k, 0, 5)", r"\sum_{k = 0}^{5} k^{2}"),
    ("sum(plates.A)", r"\sum \mathrm{plates.}A"),
    ("largest(M(x), x, 0 m, L)", r"\max_{0\thinspace \mathrm{m} \le x \le L} \thinspace M(x)"),
    ("smallest(V(x) + q, x, 0, L)", r"\min_{0 \le x \le L} \thinspace (V(x) + q)"),
    ("where_largest(M(x), x, 0, L)", r"x\text{ at }\max_{0 \le x \le L} \thinspace M(x)"),
    (
        "where_smallest(M(x), x, 0, L) + a",
        r"\left(x\text{ at }\min_{0 \le x \le L} \thinspace M(x)\right) + a",
    ),
    ("simplified(a*x + b*x)", r"\mathrm{simplified}(a \cdot x + b \cdot x)"),
    ("interp(x, plates.y, plates.A)", r"\mathrm{interp}(x, \mathrm{plates.}y, \mathrm{plates.}A)"),
]  # fmt: skip


@pytest.mark.parametrize(("typed", "expected"), CALCULUS)
def test_calculus_reads(typed: str, expected: str) -> None:
    assert latex(formula(typed)) == expected


def test_cells_read() -> None:
    assert latex(At(Name("plates.A"), Word("top flange"))) == r"\mathrm{plates.}A\text{ at top flange}"
    assert latex(At(Name("loads.P"), Name("case"))) == r"\mathrm{loads.}P\text{ at }\mathit{case}"


CONDITIONS = [
    ("sigma <= f_y/gamma_M0", r"\sigma \le \dfrac{f_{\mathrm{y}}}{\gamma_{\mathrm{M0}}}"),
    ("a < b and c > d", r"a \lt b\enspace \text{and}\enspace c \gt d"),
    (
        "(a < b or c >= d) and e < f",
        r"(a \lt b\enspace \text{or}\enspace c \ge d)\enspace \text{and}\enspace e \lt f",
    ),
    ('curve = "b"', r"\mathit{curve} = \text{“b”}"),
]


@pytest.mark.parametrize(("typed", "expected"), CONDITIONS)
def test_relations_read(typed: str, expected: str) -> None:
    assert latex(condition(typed)) == expected


def test_on_one_line() -> None:
    assert latex(formula("a + P*L/(4*W)"), flat=True) == r"a + (P \cdot L)/(4 \cdot W)"


def test_cases() -> None:
    branches = (Branch(formula("a/2"), condition("a <= 2.25")), Branch(formula("b"), None))
    assert latex(Cases(branches), taken=0) == (
        r"\begin{cases} \dfrac{a}{2} & \text{if }a \le 2.25\quad \text{(taken)} \cr "
        r"b & \text{otherwise} \end{cases}"
    )


# --- lines --------------------------------------------------------------------------------------------------


def test_what_fits_stays_on_one_line() -> None:
    assert latex_lines(Name("M"), [formula("P*L/4"), formula("6 m")]) == (
        r"M = \dfrac{P \cdot L}{4} = 6\thinspace \mathrm{m}"
    )
    assert latex_lines(None, [formula("a + b")]) == "{} = a + b"


def test_what_is_too_wide_is_aligned_and_broken_before_operators() -> None:
    second = "c_long_name*d_long_name + e_long_name - f_long_name"
    block = latex_lines(Name("M"), [formula("a_long_name + b_long_name"), formula(second)], most=14)
    assert block.split("\n") == [
        r"\begin{aligned}",
        r"M & = a_{\mathrm{long{,}name}} + b_{\mathrm{long{,}name}} \cr",
        r"& = c_{\mathrm{long{,}name}} \cdot d_{\mathrm{long{,}name}} \cr",
        r"& \qquad {} + e_{\mathrm{long{,}name}} - f_{\mathrm{long{,}name}}",
        r"\end{aligned}",
    ]


def test_what_begins_within_a_bracket_is_set_in_deeper_and_a_long_term_stands_alone() -> None:
    typed = "q + w*(a_long_name/2 + b_long_name - c_long_name + d_long_name) + e"
    assert latex_lines(Name("M"), [formula(typed)], most=15).split("\n") == [
        r"\begin{aligned}",
        r"M & = q \cr",
        r"& \qquad {} + w \cdot \Bigl(\dfrac{a_{\mathrm{long{,}name}}}{2} \cr",
        r"& \qquad \quad {} + b_{\mathrm{long{,}name}} - c_{\mathrm{long{,}name}} \cr",
        r"& \qquad \quad {} + d_{\mathrm{long{,}name}}\Bigr) \cr",
        r"& \qquad {} + e",
        r"\end{aligned}",
    ]


def test_a_range_that_is_too_wide_comes_down_to_the_line() -> None:
    typed = "largest(M(x), x, a_first_of, b_second_of)"
    assert latex_lines(None, [formula(typed)], most=11).split("\n")[1:-1] == [
        r"& = \max[a_{\mathrm{first{,}of}} \le x \cr",
        r"& \qquad \quad {} \le b_{\mathrm{second{,}of}}] \thinspace M(x)",
    ]


# --- equations ----------------------------------------------------------------------------------------------


def test_equations_are_aligned_at_their_relations() -> None:
    block = latex_equations([condition("R_A + R_B = P"), condition("0 = C_2"), condition("-a <= b <= c/2")])
    assert block.split("\n") == [
        r"\begin{aligned}",
        r"R_{\mathrm{A}} + R_{\mathrm{B}} & = P \cr",
        r"{} 0 & = C_{\mathrm{2}} \cr",
        r"{} -a & \le b \le \dfrac{c}{2}",
        r"\end{aligned}",
    ]


def test_each_equation_is_broken_by_itself() -> None:
    chain = "y = a_long_name + b_long_name = c_long_name + d_long_name + e_long_name"
    long_left = "a_long_name + b_long_name + c_long_name + d_long_name = 0"
    block = latex_equations([condition(chain), condition(long_left), formula("a")], most=14)
    assert block.split("\n") == [
        r"\begin{aligned}",
        r"y & = a_{\mathrm{long{,}name}} + b_{\mathrm{long{,}name}} \cr",
        r"& = c_{\mathrm{long{,}name}} + d_{\mathrm{long{,}name}} \cr",
        r"& \qquad {} + e_{\mathrm{long{,}name}} \cr",
        r"& a_{\mathrm{long{,}name}} + b_{\mathrm{long{,}name}} \cr",
        r"& \qquad {} + c_{\mathrm{long{,}name}} + d_{\mathrm{long{,}name}} \cr",
        r"& = 0 \cr",
        r"& a",
        r"\end{aligned}",
    ]


# --- properties ---------------------------------------------------------------------------------------------

MACROS = r"""
\dfrac \frac \tfrac \sqrt \mathrm \mathit \text \cdot \times \div \thinspace \enspace \quad \qquad
\le \ge \lt \gt \left \right \lvert \rvert \langle \rangle \circ \prime \begin \end \cr \surd \wedge
\Bigl \Bigr \int \sum \lim \to \ldots
\sin \cos \tan \sec \sinh \cosh \tanh \arcsin \arccos \arctan \exp \ln \log \min \max
\alpha \beta \gamma \delta \varepsilon \zeta \eta \theta \iota \kappa \lambda \mu \nu \xi \pi \rho \sigma \tau
\upsilon \varphi \chi \psi \omega \Gamma \Delta \Theta \Lambda \Xi \Pi \Sigma \Upsilon \Phi \Psi \Omega
"""
"""All that the printer may use.

source: KaTeX 0.19 and MathJax 3.2 themselves: both read some 900 formulas, those of this file and of its
generated trees, every macro here among them, without an error.
"""


def assert_tame(text: str) -> None:
    """Braces in pairs, known macros, none of the signs that TeX or Markdown would act on."""
    depth = 0
    for character in text:
        depth += (character == "{") - (character == "}")
        assert depth >= 0
    assert depth == 0
    assert set(re.findall(r"\\[A-Za-z]+", text)) <= set(MACROS.split())
    assert not re.search(r"\\[^A-Za-z]|\\$", text)
    assert not re.search(r"[$`<>#%~|*\"]", text)
    assert text.count(r"\left") == text.count(r"\right")
    assert "&" not in re.sub(r"\\begin\{(cases|aligned)\}.*\\end\{\1\}", "", text, flags=re.S)


def assert_markdown_leaves_it(text: str) -> None:
    """A host that reads Markdown before it reads math changes nothing.

    source: CommonMark 0.31 with GFM strikethrough and tables, through markdown-it-py.
    """
    markdown = MarkdownIt("commonmark").enable(["table", "strikethrough"])
    tokens = markdown.parse(f"$$\n{text}\n$$")
    assert [token.type for token in tokens] == ["paragraph_open", "inline", "paragraph_close"]
    assert {child.type for child in tokens[1].children or ()} <= {"text", "softbreak"}
    assert tokens[1].content == f"$$\n{text}\n$$"
    assert "".join(c.content or "\n" for c in tokens[1].children or ()) == f"$$\n{text}\n$$"


@settings(max_examples=150, deadline=None)
@given(trees(), st.booleans())
def test_every_tree_is_tame(tree: Node, flat: bool) -> None:
    text = latex(tree, flat=flat, taken=0 if isinstance(tree, Cases) else None)
    assert_tame(text)
    assert "\n" not in text


@settings(max_examples=150, deadline=None)
@given(trees(), trees(), st.sampled_from([15.0, 42.0]))
def test_every_block_is_tame_and_passes_through_markdown(tree: Node, other: Node, most: float) -> None:
    text = latex_lines(Name("sigma_Ed"), [tree, other], most=most)
    assert_tame(text)
    assert_markdown_leaves_it(text)


@settings(max_examples=100, deadline=None)
@given(st.lists(trees(), min_size=1, max_size=3), st.sampled_from([15.0, 42.0]))
def test_every_block_of_equations_is_tame_and_passes_through_markdown(some: list[Node], most: float) -> None:
    text = latex_equations(some, most=most)
    assert_tame(text)
    assert_markdown_leaves_it(text)


@pytest.mark.parametrize("text", HOSTILE)
def test_nothing_typed_gets_out(text: str) -> None:
    relation = Relation((Name("x"), Word(text)), ("=",))
    cell = At(Name("plates.A"), Word(text))
    for tree in (Word(text), Shown(text, "", True), Shown("2", text), relation, cell):
        assert_tame(latex(tree))
        assert_markdown_leaves_it(latex_lines(None, [tree]))


def test_signs_that_mean_something_are_printed_by_their_twins() -> None:
    assert latex(Word(r"\a{b}$c$ <d> 5 % #1 _x")) == r"\text{“＼a｛b｝＄c＄ ＜d＞ 5 ％ ＃1 ˍx”}"


@pytest.mark.parametrize("name", sorted(GREEK))
def test_every_greek_letter_has_its_form(name: str) -> None:
    assert_tame(latex(Name(f"{name}_{name}2")))
    assert mathml(Name(name)).count(GREEK[name]) == 1
