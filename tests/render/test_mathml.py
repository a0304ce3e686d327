"""MathML: what a reader sees of a formula, that it is well-formed, and that its brackets keep the meaning."""

from __future__ import annotations

import unicodedata
from xml.etree import ElementTree

import pytest
from formula_trees import HOSTILE, arithmetic, condition, formula, trees, with_values
from hypothesis import given, settings
from hypothesis import strategies as st

from loadpath.formula.tree import At, Binary, Branch, Cases, Factor, Name, Node, Number, Relation, Shown, Word
from loadpath.render.math import COLUMN, equations, flow, mathml, pieces, widest
from loadpath.render.math.boxes import Box, Fraction, Power, Ranged, inside
from loadpath.render.math.breaking import cuts
from loadpath.render.math.layout import MOST_FRACTIONS, lay_out
from loadpath.render.math.width import width

VALUES: dict[str, Node] = {
    "P": Shown("36.18", "kN"), "L": Shown("6", "m"), "w": Shown("0.301", "kN/m"), "k": Shown("-3", ""),
    "M": Shown("-56.10", "kN*m"), "W": Shown("324.3", "cm^3"), "n": Shown("12.5e6", ""),
    "d": Shown("2 1/2", "in"), "T": Shown("-20", "degC"), "alpha": Shown("35", "deg"),
    "f_c": Shown("4000", "psi"),
}  # fmt: skip


# --- how MathML reads ---------------------------------------------------------------------------------------


def seen(text: str) -> str:
    """MathML in one line: `{top | bottom}`, `x_{a}^{2}`, `∑[below][above]`, `√[x]`, `~word~`; `·` a space."""
    return _seen(ElementTree.fromstring(text))


def _seen(element: ElementTree.Element) -> str:
    inner = [_seen(child) for child in element]
    text = (element.text or "").replace("\u2061", "").replace("\u2009", "·")
    match element.tag:
        case "mspace":
            return "·"
        case "mi" if element.get("class") == "word":
            return f"~{text}~"
        case "mi" | "mn" | "mo" | "mtext":
            return text
        case "mfrac":
            return "{" + " | ".join(inner) + "}"
        case "msub":
            return f"{inner[0]}_{{{inner[1]}}}"
        case "msup":
            return f"{inner[0]}^{{{inner[1]}}}"
        case "msubsup":
            return f"{inner[0]}_{{{inner[1]}}}^{{{inner[2]}}}"
        case "munder":
            return f"{inner[0]}[{inner[1]}]"
        case "munderover":
            return f"{inner[0]}[{inner[1]}][{inner[2]}]"
        case "mroot":
            return f"{inner[1]}√[{inner[0]}]"
        case "msqrt":
            return f"√[{''.join(inner)}]"
        case "mtable":
            return " ; ".join(inner)
        case "mtr":
            return ("taken: " if element.get("class") == "chosen" else "") + " & ".join(inner)
    return "".join(inner)


FORMULAS = [
    ("P_Ed*L/4", "{P_{Ed}⋅L | 4}"),
    ("(P_r+P_t)*L^3/(48*E*I_y)", "{(P_{r}+P_{t})⋅L^{3} | 48⋅E⋅I_{y}}"),
    ("gamma_G*w*L^2/8 + M", "{γ_{G}⋅w⋅L^{2} | 8}+M"),
    ("a - b - c", "a−b−c"),
    ("a - (b - c)", "a−(b−c)"),
    ("a + (b + c)", "a+(b+c)"),
    ("a*(b*c)", "a⋅(b⋅c)"),
    ("a*b*c", "a⋅b⋅c"),
    ("a*(b/c)", "a⋅{b | c}"),
    ("a/b*c", "{a | b}⋅c"),
    ("(a + b)*c", "(a+b)⋅c"),
    ("-x^2", "−x^{2}"),
    ("(-x)^2", "(−x)^{2}"),
    ("-(a + b)", "−(a+b)"),
    ("-(a*b)", "−(a⋅b)"),
    ("-(a/b)", "−{a | b}"),
    ("-a/b", "{−a | b}"),
    ("a*(-b)", "a⋅(−b)"),
    ("a + (-b)", "a+(−b)"),
    ("a + (-b)*c", "a+(−b)⋅c"),
    ("a - (-b)/c", "a−{−b | c}"),
    ("-(-a)", "−(−a)"),
    ("2*45 mm", "2×45·mm"),
    ("2*(45 mm)*b", "2×45·mm⋅b"),
    ("0.9*A_net*f_u/gamma_M2", "{0.9⋅A_{net}⋅f_{u} | γ_{M2}}"),
    ("2*pi*r", "2⋅π⋅r"),
    ("2*pi*(3 mm)", "2×π×3·mm"),
    ("(6 m)^2", "(6·m)^{2}"),
    ("1.2e6^2", "(1.2×10^{6})^{2}"),
    ("12_345.6*1.2E-06", "12·345.6×1.2×10^{−6}"),
    ("a/b/c", "{{a | b} | c}"),
    ("a/b/c/d", "{{a/b | c} | d}"),
    ("1/(1/a + 1/(b + 1/c))", "{1 | {1 | a}+{1 | b+1/c}}"),
    ("x^(a/b)", "x^{a/b}"),
    ("x^(-(a + b)/c)", "x^{(−(a+b))/c}"),
    ("a^b^c", "a^{b^{c}}"),
    ("(a^b)^c", "(a^{b})^{c}"),
    ("(a/b)^2", "({a | b})^{2}"),
    ("x^0.5", "x^{0.5}"),
    ("sqrt(a^2 + b^2)/W", "{√[a^{2}+b^{2}] | W}"),
    ("sqrt(x)^2", "(√[x])^{2}"),
    ("cbrt(x*a)", "3√[x⋅a]"),
    ("abs(a - b)^2", "|a−b|^{2}"),
    ("sin(x)^2", "(sin(x))^{2}"),
    ("asin(x) + acos(x) + atan(x)", "arcsin(x)+arccos(x)+arctan(x)"),
    ("atan2(a, b)", "atan2(a,b)"),
    ("log10(x) + ln(x) + exp(-x)", "log_{10}(x)+ln(x)+exp(−x)"),
    ("min(a, b, 0.9*c)", "min(a,b,0.9⋅c)"),
    ("round_up(a, 5 mm)", "round up(a,5·mm)"),
    ("M(2 m) + M_b(x)^2", "M(2·m)+(M_{b}(x))^{2}"),
    ("R*x - P*<x - a>^1", "R⋅x−P⋅⟨x−a⟩^{1}"),
    ("<x - a>^2^2", "(⟨x−a⟩^{2})^{2}"),
    ("57000*sqrt((f_c as psi))", "57·000⋅√[f_{c}\xa0in\xa0psi]"),
    ("2*(f_c as psi)", "2⋅(f_{c}\xa0in\xa0psi)"),
    ("M_Ed_y^2", "M_{Ed,y}^{2}"),
    ("b.I_y*B1.M_max", "b.I_{y}⋅B1.M_{max}"),
    ("b.I_y^2", "b.I_{y}^{2}"),
    ("f_c' + x''", "f′_{c}+x′′"),
    ("f_c'^2", "(f′_{c})^{2}"),
    ("F1 + sigma1_a", "F1+σ1_{a}"),
    ("curve*load_factor", "~curve~⋅~load~_{factor}"),
    ("sigma_b*Delta*phi_x_max", "σ_{b}⋅Δ⋅φ_{x,max}"),
    ("荷载*d_轴 + фактор + é", "荷载⋅d_{轴}+~фактор~+~é~"),
    ("12 ft 6 1/2 in", "12·ft·6{1 | 2}·in"),
    ("5/8 in + 3 in", "{5 | 8}·in+3·in"),
    ("35 deg", "35°"),
    ("12 % + 20 degC", "12·%+20·°C"),
    ("-20 degC + 3 K", "−20·°C+3·K"),
    ("3 kN*m + 4 mm^4 + 2 J/(kg*K)", "3·kN⋅m+4·mm⁴+2·J/(kg⋅K)"),
    ("3 MPa*m^(1/2)", "3·MPa⋅m^{1/2}"),
]


@pytest.mark.parametrize(("typed", "expected"), FORMULAS)
def test_reads(typed: str, expected: str) -> None:
    assert seen(mathml(formula(typed))) == expected


SUBSTITUTED = [
    ("P*L/4", "{36.18·kN×6·m | 4}"),
    ("w*L^2/8", "{0.301·kN/m×(6·m)^{2} | 8}"),
    ("P*M", "36.18·kN×(−56.10·kN⋅m)"),
    ("M*P", "−56.10·kN⋅m×36.18·kN"),
    ("M/W", "{−56.10·kN⋅m | 324.3·cm³}"),
    ("-M/W", "{−(−56.10·kN⋅m) | 324.3·cm³}"),
    ("a + k*b", "a+(−3)⋅b"),
    ("P + k*P", "36.18·kN+(−3)×36.18·kN"),
    ("P - M/L", "36.18·kN−{−56.10·kN⋅m | 6·m}"),
    ("M^2", "(−56.10·kN⋅m)^{2}"),
    ("n*P", "12.5×10^{6}×36.18·kN"),
    ("n^2", "(12.5×10^{6})^{2}"),
    ("pi*d^4/64", "{π×(2{1 | 2}·in)^{4} | 64}"),
    ("T - 20 degC", "−20·°C−20·°C"),
    ("P*cos(alpha)", "36.18·kN×cos(35°)"),
    ("sqrt((f_c as psi))", "√[4000]"),
    ("2^(P/P)", "2^{36.18·kN/(36.18·kN)}"),
    ("P*M(L)", "36.18·kN⋅M(6·m)"),
]


@pytest.mark.parametrize(("typed", "expected"), SUBSTITUTED)
def test_reads_with_values_in_place(typed: str, expected: str) -> None:
    assert seen(mathml(with_values(formula(typed), VALUES))) == expected


def test_a_plain_number_taken_from_a_value_keeps_its_brackets() -> None:
    tree = with_values(formula("2 - (k_c as psi)^2"), {"k_c": Shown("-3.2e6", "psi")})
    assert seen(mathml(tree)) == "2−(−3.2×10^{6})^{2}"


def test_feet_and_inches_from_a_value() -> None:
    assert seen(mathml(Shown("12 ft 6 1/2", "in"))) == "12·ft·6{1 | 2}·in"
    assert seen(mathml(Shown("-12 ft 6", "in"))) == "−12·ft·6·in"


def test_conversion_factors() -> None:
    assert seen(mathml(Factor(formula("2 ft / (3 in)"), "12", "in/ft"))) == "{2·ft | 3·in}×12·in/ft"
    assert seen(mathml(Factor(formula("a + b"), "12", "in/ft", True))) == "(a+b)÷(12·in/ft)"


CALCULUS = [
    ("integral(w*x, x, 0 m, L)", "∫_{0·m}^{L}w⋅x·dx"),
    ("integral(M(x)^2/(2*E*I), x, 0, L)", "∫_{0}^{L}{(M(x))^{2} | 2⋅E⋅I}·dx"),
    ("integral(w(x), x)", "∫w(x)·dx"),
    ("integral(a + x, x)", "∫(a+x)·dx"),
    ("integral(-x, x, a, b/2)", "∫_{a}^{b/2}(−x)·dx"),
    ("integral(integral(x*y, x, 0, y), y, 0, 1)", "∫_{0}^{1}(∫_{0}^{y}x⋅y·dx)·dy"),
    ("derivative(M(x), x)", "{d | dx}·M(x)"),
    ("derivative(a + x, x)", "{d | dx}·(a+x)"),
    ("derivative(E*I*v(x), x)", "{d | dx}·(E⋅I⋅v(x))"),
    ("derivative(x/L, x)", "{d | dx}·{x | L}"),
    ("limit_of(sin(x)/x, x, 0)", "lim[x→0]·{sin(x) | x}"),
    ("sum(k^2, k, 0, 5)", "∑[k=0][5]k^{2}"),
    ("sum(a + k, k, 1, n)", "∑[k=1][n](a+k)"),
    ("sum(plates.A)", "∑plates.A"),
    ("sum(plates.A*plates.y)/sum(plates.A)", "{∑plates.A⋅plates.y | ∑plates.A}"),
    ("largest(abs(M(x)), x, 0 m, B1.L)", "max[0·m≤x≤B1.L]·|M(x)|"),
    ("smallest(V(x) - q, x, 0, L/2)", "min[0≤x≤L/2]·(V(x)−q)"),
    ("where_largest(M(x), x, 0, L)", "x\xa0at\xa0max[0≤x≤L]·M(x)"),
    ("simplified(a*x + b*x)", "simplified(a⋅x+b⋅x)"),
    ("interp(x, xs, ys) + lookup(x, xs, ys)", "interp(x,~xs~,~ys~)+lookup(x,~xs~,~ys~)"),
    ("count(plates.A)", "count(plates.A)"),
    ("sum(a, b)", "sum(a,b)"),
]


@pytest.mark.parametrize(("typed", "expected"), CALCULUS)
def test_calculus_reads(typed: str, expected: str) -> None:
    assert seen(mathml(formula(typed))) == expected


AMONG_OTHERS = [
    ("integral(x, x, 0, L) + c", "∫_{0}^{L}x·dx+c"),
    ("integral(x, x, 0, L)*c", "(∫_{0}^{L}x·dx)⋅c"),
    ("c*integral(x, x, 0, L)", "c⋅∫_{0}^{L}x·dx"),
    ("c*integral(x, x, 0, L)*d", "c⋅(∫_{0}^{L}x·dx)⋅d"),
    ("c*integral(x, x, 0, L) + d", "c⋅∫_{0}^{L}x·dx+d"),
    ("a - integral(x, x)", "a−∫x·dx"),
    ("integral(x, x, 0, L)^2", "(∫_{0}^{L}x·dx)^{2}"),
    ("derivative(M(x), x) + q", "({d | dx}·M(x))+q"),
    ("E*derivative(v(x), x)", "E⋅{d | dx}·v(x)"),
    ("E*derivative(v(x), x)*I", "E⋅({d | dx}·v(x))⋅I"),
    ("sum(k, k, 1, n) + b", "(∑[k=1][n]k)+b"),
    ("a*sum(k, k, 1, n) + b", "a⋅(∑[k=1][n]k)+b"),
    ("-sum(k, k, 1, n) - b", "−(∑[k=1][n]k)−b"),
    ("b + sum(k, k, 1, n)", "b+∑[k=1][n]k"),
    ("sum(plates.A)*h", "(∑plates.A)⋅h"),
    ("limit_of(M(x), x, L) + 1", "(lim[x→L]·M(x))+1"),
    ("largest(M(x), x, 0, L)/W", "{max[0≤x≤L]·M(x) | W}"),
    ("a + where_largest(M(x), x, 0, L)", "a+(x\xa0at\xa0max[0≤x≤L]·M(x))"),
    ("min(sum(k, k, 1, n), b)", "min(∑[k=1][n]k,b)"),
]


@pytest.mark.parametrize(("typed", "expected"), AMONG_OTHERS)
def test_where_a_sign_ends_can_be_seen(typed: str, expected: str) -> None:
    assert seen(mathml(formula(typed))) == expected


FLAT_CALCULUS = [
    ("integral(1/x, x, a, b)", "∫_{a}^{b}(1/x)·dx"),
    ("derivative(M(x), x)", "(d/dx)·M(x)"),
    ("derivative(x/L, x)", "(d/dx)·(x/L)"),
    ("sum(plates.A)/sum(plates.b)", "(∑plates.A)/(∑plates.b)"),
]


@pytest.mark.parametrize(("typed", "expected"), FLAT_CALCULUS)
def test_calculus_on_one_line(typed: str, expected: str) -> None:
    assert seen(mathml(formula(typed), flat=True)) == expected


def test_cells_read() -> None:
    flange, case = At(Name("plates.A"), Word("top flange")), At(Name("loads.P"), Name("case"))
    assert seen(mathml(flange)) == "plates.A\xa0at top flange"
    assert seen(mathml(case)) == "loads.P\xa0at\xa0~case~"
    assert seen(mathml(At(Name("loads.P"), Shown("LC 1", "", True)))) == "loads.P\xa0at LC 1"
    assert seen(mathml(Binary("/", flange, Number("2")))) == "{plates.A\xa0at top flange | 2}"
    square = Binary("^", flange, Number("2"))
    assert seen(mathml(Binary("*", flange, square))) == (
        "(plates.A\xa0at top flange)⋅(plates.A\xa0at top flange)^{2}"
    )


CONDITIONS = [
    ("sigma <= f_y/gamma_M0", "σ≤{f_{y} | γ_{M0}}"),
    ("-60 MPa <= sigma <= 60 MPa", "−60·MPa≤σ≤60·MPa"),
    ("a < b and c > d", "a<b·and·c>d"),
    ("a < b and c > d or e >= f", "a<b·and·c>d·or·e≥f"),
    ("(a < b or c > d) and e >= f", "(a<b·or·c>d)·and·e≥f"),
    ('curve = "b"', "~curve~=“b”"),
]


@pytest.mark.parametrize(("typed", "expected"), CONDITIONS)
def test_relations_read(typed: str, expected: str) -> None:
    assert seen(mathml(condition(typed))) == expected


FLAT = [
    ("P*L/4", "(P⋅L)/4"),
    ("f_y/gamma_M0", "f_{y}/γ_{M0}"),
    ("a/(b*c)", "a/(b⋅c)"),
    ("a/b*c", "(a/b)⋅c"),
    ("a/b/c", "(a/b)/c"),
    ("a/(b/c)", "a/(b/c)"),
    ("a*(b/c)", "a⋅(b/c)"),
    ("a + b/c", "a+b/c"),
    ("-a/b", "(−a)/b"),
    ("10 kN / (2 m)", "10·kN/(2·m)"),
    ("3 kN/m / a", "(3·kN/m)/a"),
    ("a/1.2e6", "a/(1.2×10^{6})"),
]


@pytest.mark.parametrize(("typed", "expected"), FLAT)
def test_on_one_line(typed: str, expected: str) -> None:
    assert seen(mathml(formula(typed), flat=True)) == expected


def test_cases() -> None:
    branches = (
        Branch(formula("0.658^(f_y/f_e)*f_y"), condition("f_y/f_e <= 2.25")),
        Branch(formula("0.877*f_e"), None),
    )
    table = "0.658^{f_{y}/f_{e}}⋅f_{y} & if·f_{y}/f_{e}≤2.25 ; 0.877⋅f_{e} & otherwise"
    assert seen(mathml(Cases(branches))) == "{" + table
    marked = "{ & 0.658^{f_{y}/f_{e}}⋅f_{y} & if·f_{y}/f_{e}≤2.25 ; taken: → & 0.877⋅f_{e} & otherwise"
    assert seen(mathml(Cases(branches), taken=1)) == marked


# --- exact markup -------------------------------------------------------------------------------------------

MARKUP = [
    ("x", "<mi>x</mi>"),
    ("P_Ed", "<msub><mi>P</mi><mtext>Ed</mtext></msub>"),
    ("M_Ed_y^2", "<msubsup><mi>M</mi><mtext>Ed,y</mtext><mn>2</mn></msubsup>"),
    ("load", '<mi class="word">load</mi>'),
    ("-a", '<mo form="prefix">−</mo><mi>a</mi>'),
    ("a - b", "<mi>a</mi><mo>−</mo><mi>b</mi>"),
    ("6 m", '<mrow><mn>6</mn><mspace width="0.2em"/><mtext>m</mtext></mrow>'),
    ("12_345", "<mn>12\u2009345</mn>"),
    (
        "(a + b)*c",
        '<mrow><mo form="prefix" stretchy="false">(</mo><mi>a</mi><mo>+</mo><mi>b</mi>'
        '<mo form="postfix" stretchy="false">)</mo></mrow><mo>⋅</mo><mi>c</mi>',
    ),
    (
        "abs(a/b)",
        '<mrow><mo form="prefix" stretchy="true">|</mo><mfrac><mi>a</mi><mi>b</mi></mfrac>'
        '<mo form="postfix" stretchy="true">|</mo></mrow>',
    ),
    (
        "sin(x)",
        '<mi>sin</mi><mo>&#x2061;</mo><mrow><mo form="prefix" stretchy="false">(</mo><mi>x</mi>'
        '<mo form="postfix" stretchy="false">)</mo></mrow>',
    ),
]


@pytest.mark.parametrize(("typed", "inner"), MARKUP)
def test_markup(typed: str, inner: str) -> None:
    assert mathml(formula(typed)) == f'<math displaystyle="true">{inner}</math>'


def test_nothing_gets_smaller_than_scripts_of_scripts() -> None:
    small = mathml(formula("x^(a^(b^c_d))"))
    assert small.count('scriptlevel="2"') >= 1
    assert "scriptlevel" not in mathml(formula("x^(a_b)"))


# --- pieces -------------------------------------------------------------------------------------------------


def test_pieces_are_cut_before_relations_and_sums() -> None:
    run = [seen(piece) for piece in pieces(Name("M"), formula("P*L/4 + w*L^2/8 - a*(b + c)"))]
    assert run == ["M", "={P⋅L | 4}", "+{w⋅L^{2} | 8}", "−a⋅(b+c)"]


def test_without_a_left_side_the_sign_comes_first() -> None:
    assert [seen(piece) for piece in pieces(None, formula("a + b"))] == ["=a", "+b"]
    assert pieces(None, formula("a"))[0].startswith('<math displaystyle="true"><mo form="infix">=</mo>')


def test_a_relation_flows_over_its_signs_and_words() -> None:
    run = [seen(piece) for piece in flow(condition("n <= 0.8*n_c or n >= 1.2*n_c"))]
    assert run == ["n", "≤0.8⋅n_{c}", "·or·n", "≥1.2⋅n_{c}"]


def test_a_wide_fraction_is_set_on_the_line() -> None:
    typed = "(a_first_of_all + b_second_of_all + c_third_of_all + d_fourth_of_all)*e_fifth/(f_sixth*g_last)"
    assert [seen(piece) for piece in flow(formula(typed), most=60)] == [seen(mathml(formula(typed)))]
    assert [seen(piece) for piece in flow(formula(typed), most=16)] == [
        "((a_{first,of,all}", "+b_{second,of,all}", "+c_{third,of,all}", "+d_{fourth,of,all})",
        "⋅e_{fifth})", "/(f_{sixth}⋅g_{last})",
    ]  # fmt: skip


def test_a_fraction_opened_within_a_product_keeps_its_brackets() -> None:
    tree = formula("a*(b_long_name_here*c_long_name_here/d_long_name_here)")
    run = "".join(seen(piece) for piece in flow(tree, most=9))
    assert run == "a⋅((b_{long,name,here}⋅c_{long,name,here})/d_{long,name,here})"


def test_fractions_within_brackets_that_are_broken_stay_fractions() -> None:
    tree = formula("w*(a_first_of_all/6 + b_second_of_all/2 - c)")
    run = flow(tree, most=10)
    assert [seen(piece) for piece in run] == [
        "w",
        "⋅({a_{first,of,all} | 6}",
        "+{b_{second,of,all} | 2}",
        "−c)",
    ]
    assert [piece.count('minsize="2.2em"') for piece in run] == [0, 1, 0, 1]


def test_a_wide_integrand_and_a_wide_numerator_are_broken_between_their_terms() -> None:
    tree = formula("integral(a_first_of_all + b_second_of_all, x, 0, L)/I")
    assert [seen(piece) for piece in flow(tree, most=11)] == [
        "(∫_{0}^{L}(a_{first,of,all}", "+b_{second,of,all})·dx)", "/I",
    ]  # fmt: skip


def test_a_wide_range_comes_down_to_the_line() -> None:
    tree = formula("sum(k, k, a_first_of_all, b_second_of_all + c_third_of_all)")
    assert "".join(seen(piece) for piece in flow(tree, most=8)) == (
        "∑[k=a_{first,of,all}…b_{second,of,all}+c_{third,of,all}]k"
    )


def test_a_wide_root_and_wide_brackets_may_be_broken() -> None:
    run = [seen(piece) for piece in flow(formula("sqrt(a_first_of_all^2 + b_second_of_all^2)^3"), most=10)]
    assert run == ["(√(a_{first,of,all}^{2}", "+b_{second,of,all}^{2}))^{3}"]


def test_arguments_are_cut_behind_their_commas() -> None:
    tree = formula("min(a_first_of_all, b_second_of_all, c_third_of_all)")
    run = [seen(piece) for piece in flow(tree, most=10)]
    assert run == ["min(a_{first,of,all},", "b_{second,of,all},", "c_{third,of,all})"]


def test_a_wide_exponent_comes_down_to_the_line() -> None:
    run = [seen(piece) for piece in flow(formula("2^(a_first_of_all + b_second_of_all)"), most=8)]
    assert run == ["2^(a_{first,of,all}", "+b_{second,of,all})"]


def test_cases_too_wide_for_the_column_are_told_in_a_row() -> None:
    cases = Cases((Branch(formula("a_long_name"), condition("x < 2")), Branch(formula("b"), None)))
    assert "".join(seen(p) for p in flow(cases, most=8)) == "a_{long,name}·if·x<2,b·otherwise·"


def test_long_names_words_and_numbers_are_cut_at_last() -> None:
    name = "q_wind_on_the_raised_boat_hull_while_it_hangs_above_the_coping_of_the_old_quay"
    assert [seen(p) for p in flow(Name(name), most=10)][:2] == ["q_{wind,on,the,}", "_{raised,boat,}"]
    assert len(flow(Name("x" * 300))) > 10
    assert len(flow(Number("1" * 60))) > 1
    assert len(flow(Word("a word " * 30))) > 1
    assert len(flow(Shown("2", "m*" * 60 + "m"))) > 1


def test_widest_tells_what_a_column_has_to_hold() -> None:
    assert widest(formula("a + b")) < 3
    three = "*".join(f"{letter}_name_of_something_long" for letter in "abcd")
    assert widest(formula(f"{three}/2")) > COLUMN > widest(formula(three.replace("*", " + ")))


# --- equations ----------------------------------------------------------------------------------------------


def rows_seen(relations: list[Node], most: float) -> list[tuple[list[str], list[str]]]:
    return [
        ([seen(p) for p in left], [seen(p) for p in right]) for left, right in equations(relations, most=most)
    ]


def test_equations_part_at_their_relation() -> None:
    typed = ["R_A + R_B = P", "a <= b <= c"]
    assert rows_seen([*map(condition, typed), formula("a + b")], 30) == [
        (["R_{A}", "+R_{B}"], ["=P"]),
        (["a"], ["≤b", "≤c"]),
        ([], ["a", "+b"]),
    ]


def test_a_long_left_side_stands_above_its_relation_and_a_long_chain_takes_rows() -> None:
    long_left = "a_long_name + b_long_name + c_long_name = 0"
    chain = "y = a_long_name + b_long_name = c_long_name + d_long_name"
    assert rows_seen([condition(long_left), condition(chain)], 17) == [
        ([], ["a_{long,name}", "+b_{long,name}", "+c_{long,name}"]),
        ([], ["=0"]),
        (["y"], ["=a_{long,name}", "+b_{long,name}"]),
        ([], ["=c_{long,name}", "+d_{long,name}"]),
    ]


# --- properties ---------------------------------------------------------------------------------------------

CORE = {
    "math", "mrow", "mi", "mn", "mo", "mtext", "mspace", "mfrac", "msqrt", "mroot", "msub", "msup", "msubsup",
    "mtable", "mtr", "mtd", "munder", "munderover",
}  # fmt: skip
ATTRIBUTES = {
    "displaystyle", "scriptlevel", "form", "stretchy", "symmetric", "lspace", "rspace", "width", "class",
    "minsize", "maxsize",
}  # fmt: skip
CHILDREN = {"mfrac": 2, "mroot": 2, "msub": 2, "msup": 2, "msubsup": 3, "munder": 2, "munderover": 3}


def assert_core(text: str) -> None:
    """Well-formed, elements and attributes of MathML Core only, each with the children it takes.

    source: W3C MathML Core, sections 2 and 3 (from memory).
    """
    for element in ElementTree.fromstring(text).iter():
        assert element.tag in CORE
        assert set(element.attrib) <= ATTRIBUTES
        assert len(element) == CHILDREN.get(element.tag, len(element))
        assert element.tail is None
        if element.tag in ("mi", "mn", "mo", "mtext", "mspace"):
            assert len(element) == 0


@settings(max_examples=150, deadline=None)
@given(trees(), st.booleans())
def test_every_tree_is_well_formed(tree: Node, flat: bool) -> None:
    assert_core(mathml(tree, flat=flat, taken=0 if isinstance(tree, Cases) else None))


def letters(texts: list[str]) -> str:
    """Letters and digits that a reader meets, in order; the 3 of a cube root is part of its sign."""
    whole = ""
    for text in texts:
        math = ElementTree.fromstring(text)
        for root in math.iter("mroot"):
            root[1].text = ""
        whole += "".join(math.itertext())
    return "".join(c for c in unicodedata.normalize("NFKC", whole) if c.isalnum())


@settings(max_examples=150, deadline=None)
@given(trees(), st.sampled_from([24.0, 30.0, 42.0]))
def test_pieces_are_well_formed_lose_nothing_and_fit(tree: Node, most: float) -> None:
    run = flow(tree, "=", most=most)
    for piece in run:
        assert_core(piece)
    assert letters(run) == letters([mathml(tree)])
    assert all(sum(width(box) for box in cut) <= most for cut in cuts(lay_out(tree), most))


@settings(max_examples=100, deadline=None)
@given(st.lists(trees(), min_size=1, max_size=3), st.sampled_from([24.0, 42.0]))
def test_equations_are_well_formed_and_lose_nothing(some: list[Node], most: float) -> None:
    run = [piece for left, right in equations(some, most=most) for piece in [*left, *right]]
    for piece in run:
        assert_core(piece)
    assert letters(run) == letters([mathml(tree) for tree in some])


def fractions_deep(box: Box) -> int:
    return isinstance(box, Fraction) + max((fractions_deep(inner) for inner in inside(box)), default=0)


def small_parts(box: Box) -> list[Box]:
    """Exponents and ranges, wherever they stand."""
    own = [box.exponent] if isinstance(box, Power) else list(inside(box)) if isinstance(box, Ranged) else []
    return own + [part for inner in inside(box) for part in small_parts(inner)]


@settings(max_examples=200, deadline=None)
@given(trees())
def test_fractions_stand_two_deep_at_most_and_none_in_what_is_small(tree: Node) -> None:
    box = lay_out(tree)
    assert fractions_deep(box) <= MOST_FRACTIONS
    assert all(fractions_deep(small) == 0 for small in small_parts(box))


@pytest.mark.parametrize("text", HOSTILE)
def test_nothing_typed_becomes_markup(text: str) -> None:
    relation = Relation((Name("x"), Word(text)), ("=",))
    cell = At(Name("plates.A"), Word(text))
    for tree in (Word(text), Shown(text, "", True), Shown("2", text), relation, cell):
        for markup in [mathml(tree), *flow(tree, most=3)]:
            assert_core(markup)
    shown = "".join(ElementTree.fromstring(mathml(Word(text))).itertext())
    assert shown == "“" + text.replace("\u202e", "\ufffd").replace("\x07", "\ufffd") + "”"


def typed_again(text: str) -> str:
    """MathML back into the sheet language, every fraction and exponent in brackets, nothing else added."""
    return _typed(ElementTree.fromstring(text))


_SIGNS = {
    "⋅": " * ", "×": " * ", "−": " - ", "+": " + ", "/": " / ", "⟨": "<", "⟩": ">", "√": "sqrt", "∛": "cbrt",
    "\u2061": "", "′": "'",
}  # fmt: skip
_GREEK = {"σ": "sigma"}


def _typed(element: ElementTree.Element) -> str:
    inner = [_typed(child) for child in element]
    text = element.text or ""
    match element.tag:
        case "mspace":
            return " "
        case "mo":
            return _SIGNS.get(text, text)
        case "mi":
            return _GREEK.get(text, text)
        case "mn":
            return text.replace("\u2009", "").replace("−", "-")
        case "mtext":
            return text.replace("\xa0in\xa0", " as ").replace("⋅", "*").replace("\u2009", " ")
        case "mfrac":
            return f"(({inner[0]}) / ({inner[1]}))"
        case "msub":
            base, below = inner
            return base.rstrip("'") + f"_{below}" + "'" * base.count("'")
        case "msup":
            if inner[0] == "10":
                return f"10^{inner[1]}"
            return f"{inner[0]}^{inner[1]}" if inner[0].endswith(">") else f"{inner[0]}^({inner[1]})"
        case "msubsup":
            return f"{inner[0]}_{inner[1]}^({inner[2]})"
        case "msqrt":
            return f"sqrt({''.join(inner)})"
        case "mroot":
            return f"cbrt({inner[0]})"
    return "".join(inner)


def read_back(texts: list[str]) -> Node:
    typed = "".join(typed_again(text) for text in texts)
    typed = typed.replace(" * 10^6", "e6")  # the only power of ten among the leaves
    typed = typed.replace("f_k as psi", "(f_k as psi)")  # without brackets of its own inside a function
    out, bars = "", 0
    for character in typed:  # |x| as abs(x): a bar opens where an operand is due
        if character == "|":
            opens = not out.rstrip() or out.rstrip()[-1] in "(+-*/^<,"
            bars += 1 if opens else -1
            out += "abs(" if opens else ")"
        else:
            out += character
    assert bars == 0
    return formula(out)


@settings(max_examples=300, deadline=None)
@given(arithmetic(), st.booleans())
def test_what_is_printed_means_what_was_typed(tree: Node, flat: bool) -> None:
    assert read_back([mathml(tree, flat=flat)]) == tree


@settings(max_examples=300, deadline=None)
@given(arithmetic(), st.sampled_from([9.0, 14.0, 25.0]))
def test_what_is_broken_means_what_was_typed(tree: Node, most: float) -> None:
    assert read_back(flow(tree, most=most)) == tree
