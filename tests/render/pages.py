"""Documents for the tests of renderers: sheets of every sort, and what a page holds once it is parsed."""

from __future__ import annotations

import json
import re
from functools import cache
from pathlib import Path
from xml.etree import ElementTree

from loadpath.document import Document, build
from loadpath.pipeline import audited, read_input
from loadpath.project import MemoryWorld
from loadpath.sheet import read_sheet
from loadpath.text import Source
from loadpath.trace import Trace

ROOT = Path(__file__).parents[2]
CALCSHEETS = sorted((ROOT / "calcsheets").glob("*.sheet.md"))

PNG = bytes.fromhex(
    "89504e470d0a1a0a0000000d49484452000000010000000108000000003a7e9b55"
    "0000000a49444154789c63600000000200015c2bdcb40000000049454e44ae426082"
)

PLAIN_HOSTILE = [
    "<script>alert(1)</script>",
    "</title></style></script><img src=x onerror=alert(1)>",
    "' onload='x' \\ \" autofocus",
    "&lt;b&gt; &amp; &#60;script&#62; &nbsp;",
    "--> <!-- > <?php ?>",
    "a\u202eb\u2066c",
]
"""Texts without a meaning in Markdown or in a formula line."""
HOSTILE = [
    *PLAIN_HOSTILE,
    '"}</style><style>*{color:red}',
    '\\";}*{display:none} /* ',
    "[x](javascript:alert(1)) ![i](http://e.invalid/a.png) <http://e.invalid>",
    "`code` *b* _i_ $x$ $$y$$ | cell | # h",
    "](#x) `<img src=x>` ``` ~~~ ]]>",
]

EVERYTHING = """---
title: Everything
subtitle: Every kind of step
number: SB-1
revision: B
owner: Tern Slip boatyard
project: Slip renewal
status: for review
date: 2026-11-20
created_by: T.S.
reviewed_by: R.M.
objective: Show that {sigma} holds.
method: By hand.
conclusion: It does, with {u}.
codes: [EN 1990 with its national annex]
drawings: [SB-201]
revisions: {A: {date: 2026-01-02, by: T.S., change: First issue}}
sources: {s: A source, ec: A code}
assumptions: {A1: {text: The wall is dry, confirm: true}, A2: Known}
not_applicable: {stability: nothing is pressed}
---

# Everything

Before any section, with **bold**, *slanted*, `code`, a [link](https://example.org) and {P [lbf]}.

    P = 2*10 kN -- load [s] [A1]
    c = "a" of "a", "b" -- curve [s]
    t_0 = 20 degC -- cold
    A = 4 cm^2 -- area [A2]

![A sketch](a.png)

## One

* a list
* of two

> and a quotation

| a | b |
|:--|--:|
| 1 | {sigma} |

    f(u_1 [mm]) [mm] = 2*u_1
    sigma = P/A
    k = cases -- factor [ec]
        1 when c = "a"
        2 otherwise
    e = f(3 mm)
    u = min(e, 5 mm)
    strength tension: sigma <= 60 MPa -- [ec]
    strength: sigma <= 40 MPa
    limit warm: t_0 <= 30 degC
    limit sided: -e <= 5 mm
    limit band: e <= 2 mm or e >= 5 mm

### Below

    valid: 3 <= k <= 12 for e
    stiffness: e <= 2 mm
    check: sigma*A = P within 0.1 %

## With mistakes

    x = 3 kN + 2 m
    y = x/A
    limit z: y <= 2
    w = (3 +
        2
"""
"""A sheet with every kind of step, and some mistakes."""


SEVERAL = """---
title: Several
number: SB-2
sources: {s: A source}
assumptions: {A1: {text: The wall is dry, confirm: true}}
---

## Tables

    P = 30 kN -- load [s]

Table plates: of the girder [s] [A1]

| plate | b [mm] | h [mm] | k |
|---|---|---|---|
| lower flange | 220 | 20 | 1 |
| web | 10 | 400.25 | P/(10 kN) |

    A = plates.b*plates.h -- area
    t = min(plates.b, plates.h) -- thickness
    b_w = plates.b at "web"
    G = sum(A)
    sigma [MPa] = P/A*plates.k -- stress
    strength plates: 2*sigma <= 20 MPa -- each [s]
    limit first: b_w >= 5 mm -- [s]

Table grid: of factors [s]

| r | 0.1 | 0.2 |
|---|---|---|
| 1 | 1.68 | 1.53 |
| 2 | 1.71 | 1.55 |

    K = interp(1.5, 0.15, grid)

## Algebra

    L = 4 m -- span [s]
    q = 2 kN/m -- load [s]
    unknown R [kN] -- reaction
    V(x [m]) [kN] = R - q*x
    M(x [m]) [kN*m] = integral(V(x), x) -- moment
    solve for R
        M(L) = 0
    W = integral(q*x/L, x, 0 m, L) -- area
    M_max = largest(M(x), x, 0 m, L)
    solve for R_A [kN], R_B [kN]
        R_A + R_B = P
        R_B*L = P*(1 m)
    solve for d [m] between 0 m and L/2
        sin(d/L) = 0.25
    plot V(x), M(x) for x from 0 m to L -- shear and moment
    tabulate M(x), V(x) for x from 0 m to L, 4 steps
    check: integral(q, x, 0 m, L) = q*L within 0.1 % -- whole load
    strength moment: M_max <= 5 kN*m -- [s]
"""
"""A sheet with tables, columns, unknowns, algebra and figures."""
LABELS = [
    "<script>alert(1)</script>",
    "`code` $x$ a|b \\ *c* _d_ [e](#f) <b> & \" '",
    "</td></tr></table><img src=x onerror=alert(1)>",
    "Donaudampfschifffahrtselektrizitätenhauptbetriebswerkbauunterbeamter",
]
"""Row labels without good will."""


def labelled(label: str) -> str:
    """A sheet that shows a row label wherever one can stand."""
    cell = re.sub(r"([!-/:-@\[-`{-~])", r"\\\1", label)
    return f"""---
title: Labels
---

Table pieces: with a label

| {cell} | b [mm] |
|---|---|
| {cell} | 3 |
| web | 4 |

    A = min(pieces.b, 3.5 mm)^2 -- area
    t = max(A)
    limit pieces: 2*A <= 9 mm^2
    valid: 2*A <= 25 mm^2 for t
"""


def traced(text: str, name: str = "sheet.sheet.md", files: dict[str, bytes] | None = None) -> Trace:
    world = MemoryWorld({"a.png": PNG, **(files or {})})
    return audited(read_sheet(Source(name, text), world))


def built(text: str, name: str = "sheet.sheet.md", files: dict[str, bytes] | None = None) -> Document:
    return build(traced(text, name, files), "9.9.9")


@cache
def issued(path: Path) -> Document:
    return build(audited(read_input(path)), "9.9.9")


def everywhere(text: str, *, front_only: bool = False) -> str:
    """A sheet with a text in every place that takes one."""
    value = json.dumps(text, ensure_ascii=False)
    prose = json.dumps(re.sub(r"([{}])", r"\\\1", text), ensure_ascii=False)
    front = f"""---
title: {value}
subtitle: {value}
number: {value}
revision: {value}
owner: {value}
project: {value}
client: {value}
client_document: {value}
created_by: {value}
reviewed_by: {value}
approved_by: {value}
objective: {prose}
method: {prose}
conclusion: {prose}
codes: [{value}]
drawings: [{value}]
not_applicable: {{stability: {value}}}
revisions: {{A: {{date: 2026-01-02, by: {value}, change: {value}}}}}
sources: {{s: {value}, f: {{text: {value}, file: data.pdf}}}}
assumptions:
  A1: {{text: {value}, confirm: true}}
  A2: {{text: {value}, confirmed: {{by: {value}, on: 2026-01-02, document: {value}}}}}
---
"""
    line = text.replace("\n", " ")
    word = re.sub(r'["\\]', "", line)
    notes = "" if front_only else f" {line}"
    body = f"""
    x = 3 mm -- a [s] [A1] [A2] [f]{notes}
    y = 2*x -- b{notes}
    c = "{"w" if front_only else word}" of "{"w" if front_only else word}", "b" -- c [s]{notes}
    limit: y <= 9 mm -- d{notes}
    check: y = 6 mm within 1 % -- e{notes}
    valid: y <= 7 mm for y -- g{notes}
    f(u) = 2*u -- h{notes}
"""
    if front_only:
        return front + body
    escaped = re.sub(r"([{}])", r"\\\1", line)
    return (
        front
        + f"\n## {escaped}\n\nA {escaped} b.\n\n* c {escaped}\n\n![{escaped}](a.png)\n"
        + body
        + f"    z = x + {line}\n"
    )


# --- a page once parsed -------------------------------------------------------------------------------------

VOID = ("meta", "br", "wbr", "img", "hr")


def as_xml(page: str) -> ElementTree.Element:
    """A page as XML, which allows nothing to be left open, unescaped or unquoted. Raises ParseError."""
    text = page.removeprefix("<!doctype html>\n").replace("&nbsp;", "\u00a0")
    text = re.sub(rf"<({'|'.join(VOID)})((?:\s[^<>]*)?)>", r"<\1\2/>", text)
    text = re.sub(
        r"(<style>|<script>)(.*?)(</style>|</script>)", r"\1<![CDATA[\2]]>\3", text, flags=re.DOTALL
    )
    return ElementTree.fromstring(text)


def skeleton(page: str) -> list[tuple[str, tuple[str, ...]]]:
    """Every element of a page with the names of its attributes, in order; formulas apart."""
    out: list[tuple[str, tuple[str, ...]]] = []

    def visit(element: ElementTree.Element) -> None:
        out.append((element.tag, tuple(sorted(element.attrib))))
        if element.tag != "math":
            for child in element:
                visit(child)
        out.append(("/" + element.tag, ()))

    visit(as_xml(page))
    return out


def words(element: ElementTree.Element) -> str:
    """The text of an element, its white space evened out."""
    return " ".join("".join(element.itertext()).split())
