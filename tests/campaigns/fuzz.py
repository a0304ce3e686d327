"""Sheets that nobody types on purpose, through every stage: no exception, no hang, no markup let through, no
trace that its schema doesn't allow, no other bytes on a second run.

The quick part of it is tests/test_fuzz.py. The long part is a program:

    python tests/campaigns/fuzz.py SECONDS [SEED [KIND...]]

Without kinds it takes all of them, and the hostile sheets first. It prints how many sheets of each kind went
through, the slowest of each, and for each fault found the smallest text that still gives it.
"""

from __future__ import annotations

import faulthandler
import json
import re
import signal
import sys
import time
import traceback
from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from fractions import Fraction
from functools import cache
from importlib.resources import files
from pathlib import Path
from random import Random
from typing import Any, NoReturn

from jsonschema import Draft202012Validator

sys.path.insert(0, str(Path(__file__).parents[1]))

import loadpath
from campaigns.random_algebra import algebra, algebra_damaged
from loadpath.algebra import door
from loadpath.evaluate import evaluate
from loadpath.findings import Finding
from loadpath.functions import FUNCTIONS
from loadpath.pipeline import render
from loadpath.trace import Trace
from loadpath.units import Dimension
from loadpath.units import dimension as d

ROOT = Path(__file__).parents[2]
HEAD = "---\ntitle: Hostile\n---\n\n"
SCRIPT = "<script>alert(1)</script>"
STYLE = "\"}</style><b>'"


class Fault(AssertionError):
    """What must not happen, other than an exception."""


# --- one sheet ----------------------------------------------------------------------------------------------


def audited(text: str) -> Trace:
    """The trace with all findings. Raises Fault for a finding that points outside the text."""
    trace = loadpath.evaluate(loadpath.read_text(text))
    findings = loadpath.audit(trace)
    for finding in findings:
        if finding.slug == "engine-fault":
            raise Fault(f"engine-fault: {finding.message}")
        span = finding.span
        if span is not None and not 0 <= span.start <= span.end <= len(finding.source.text):
            raise Fault(f"{finding.slug} at {span} of {len(finding.source.text)} characters")
    _check_places(findings)
    return trace.with_findings(findings)


OF_A_FILE = {"unreadable-file", "over-limit", "no-front-matter", "missing-title"}
"""Errors that are about no line."""


def _check_places(findings: tuple[Finding, ...]) -> None:
    """Raises Fault for an error of a formula that stands at no line, and for one that is told twice."""
    seen = set()
    for finding in findings:
        if finding.severity != "error":
            continue
        if finding.line == 1 and finding.source.text.startswith("---\n") and finding.slug not in OF_A_FILE:
            raise Fault(f"{finding.slug} on the first line: {finding.message}")
        told = (finding.slug, finding.message, finding.span)
        if told in seen:
            raise Fault(f"{finding.slug} told twice: {finding.message}")
        seen.add(told)


def through(text: str) -> dict[str, bytes]:
    """The documents of a sheet. Raises Fault where markup of the sheet stands in one as markup, and where the
    trace is none."""
    return _documents(audited(text))


def _documents(trace: Trace) -> dict[str, bytes]:
    documents = render(trace, "fuzz")
    html = documents["fuzz.html"].decode()
    if "<script>alert" in html or "</style><b>" in html or html.count("</style>") != html.count("<style"):
        raise Fault("markup of the sheet in the document")
    record = json.loads(documents["fuzz.trace.json"], parse_constant=_no_number)
    for trouble in _schema().iter_errors(record):
        raise Fault(f"trace file, {trouble.json_path}: {trouble.message[:100]}")
    return documents


@cache
def _schema() -> Draft202012Validator:
    schema = files("loadpath.trace") / "trace.schema.json"
    return Draft202012Validator(json.loads(schema.read_text(encoding="utf-8")))


def _no_number(constant: str) -> NoReturn:
    raise Fault(f"trace file: {constant}")


def twice(text: str) -> None:
    """A sheet through every stage, twice. Raises Fault where the second documents are others."""
    trace = audited(text)
    first = _documents(trace)
    if any(finding.slug == "algebra-time-out" for finding in trace.findings):
        return  # what a machine manages in ten seconds is not the same each time
    second = through(text)
    for name in first | second:
        if first.get(name) != second.get(name):
            raise Fault(f"other bytes on a second run: {name}")


# --- hostile sheets -----------------------------------------------------------------------------------------


def block(*lines: str) -> str:
    return HEAD + "\n".join("    " + line for line in lines) + "\n"


def in_every_field(what: str) -> str:
    """A text as the value of each key, and wherever else a sheet has text."""
    quoted = "'" + what.replace("'", "''") + "'"
    keys = [
        "title", "subtitle", "number", "revision", "owner", "project", "client", "client_document", "date",
        "language", "created_by", "reviewed_by", "approved_by", "objective", "method", "conclusion",
    ]  # fmt: skip
    lines = [f"{key}: {quoted}" for key in keys]
    lines += [f"codes: [{quoted}]", f"drawings: [{quoted}]", f"not_applicable: {{stiffness: {quoted}}}"]
    lines += [
        f"sources: {{a: {quoted}, {quoted}: b}}",
        f"assumptions: {{A1: {{text: {quoted}, confirm: true}}}}",
    ]
    lines += [f"revisions: {{A: {{date: {quoted}, by: {quoted}, change: {quoted}}}}}"]
    body = f"# {what}\n\n{what} {{P}} {{{what}}}\n\n![{what}]({what})\n\n"
    body += f"| {what} |\n|---|\n| {what} |\n\n```{what}\n{what}\n```\n"
    formulas = f'    P = 2 kN -- {what} [a]\n    c = "{what}" of "{what}", "b"\n'
    formulas += f"    strength {what}: P <= 3 kN -- [{what}]\n"
    return "---\n" + "\n".join(lines) + f"\n---\n\n{body}\n{formulas}\n    {what} = {what}\n"


def aliases() -> str:
    levels = [f"l{n}: &l{n} [{', '.join([f'*l{n - 1}'] * 9)}]" for n in range(1, 12)]
    return "---\ntitle: Bomb\nl0: &l0 [x, x, x]\n" + "\n".join(levels) + "\nowner: *l11\n---\n"


def hostile(share: float = 1) -> dict[str, str]:
    """Sheets, each with what is hostile about it; of what is merely much, a share."""

    def many(count: int) -> int:
        return max(int(count * share), 1)

    return {
        # the front matter
        "nothing": "",
        "dashes only": "---",
        "never closed": "---\n" + "title: x\n" * many(1000),
        "aliases that explode": aliases(),
        "an alias of itself": "---\ntitle: &a [*a]\n---\n",
        "merge keys": "---\na: &a {b: c}\ntitle: {<<: *a}\n---\n",
        "tags": "---\ntitle: !!python/object/apply:os.system ['true']\n---\n",
        "a binary tag": "---\ntitle: !!binary aGVsbG8=\n---\n",
        "deep lists in YAML": "---\ntitle: " + "[" * many(10_000) + "\n---\n",
        "deep closed lists in YAML": "---\ntitle: " + "[" * many(5000) + "]" * many(5000) + "\n---\n",
        "deep mappings in YAML": "---\n" + "".join(" " * n + "a:\n" for n in range(many(1000))) + "---\n",
        "deep dashes in YAML": "---\ntitle:\n " + "- " * many(5000) + "x\n---\n",
        "question marks in YAML": "---\n" + "? " * many(5000) + "\n---\n",
        "many keys": "---\ntitle: x\n" + "".join(f"k{n}: v\n" for n in range(many(20_000))) + "---\n",
        "one key many times": "---\n" + "title: x\n" * many(20_000) + "---\n",
        "many sources": "---\ntitle: x\nsources:\n"
        + "".join(f"  s{n}: text\n" for n in range(many(20_000)))
        + "---\n",
        "a long scalar": "---\ntitle: " + "x" * many(1_000_000) + "\n---\n",
        "a long folded scalar": "---\ntitle: >\n" + "  word\n\n" * many(30_000) + "---\n",
        "open quotes in YAML": "---\ntitle: '" + "\n" * many(50_000) + "---\n",
        "directives": "---\n%YAML 9.9\n%TAG ! tag:x\n---\ntitle: x\n---\n",
        "script in every field": in_every_field(SCRIPT),
        "style in every field": in_every_field(STYLE),
        "braces in every field": in_every_field("{{ 7*7 }}{% for x in y %}${P}"),
        "signs of markup in every field": in_every_field("*_`[x](javascript:x)&#x3c;&lt;$$\\frac|~~<!--]]>"),
        "conclusion full of values": "---\ntitle: x\nconclusion: "
        + "{a}" * many(20_000)
        + "\n---\n\n    a = 1 -- x\n",
        "ends in a backslash": "---\ntitle: x\n---\n\n\\",
        # prose
        "deep quotations": HEAD + ">" * many(20_000) + " x\n",
        "deep lists": HEAD + "- " * many(10_000) + "x\n",
        "stairs of lists": HEAD + "".join("  " * n + "- x\n" for n in range(many(500))),
        "many brackets": HEAD + "[" * many(50_000) + "\n",
        "many images": HEAD + "![" * many(30_000) + "\n",
        "many open links": HEAD + "[a](" * many(20_000) + "\n",
        "many stars": HEAD + "*a **b " * many(20_000) + "\n",
        "many backticks": HEAD + "".join("`" * n + " " for n in range(1, many(800))) + "\n",
        "many link definitions": HEAD + "".join(f"[a{n}]: b\n" for n in range(many(20_000))),
        "many entities": HEAD + "&amp;" * many(50_000) + "\n",
        "a wide table": HEAD
        + "|a" * many(10_000)
        + "|\n"
        + "|-" * many(10_000)
        + "|\n"
        + "|b" * many(10_000)
        + "|\n",
        "a long table": HEAD + "|a|b|\n|-|-|\n" + "|1|2|\n" * many(20_000),
        "many braces": HEAD + "{" * many(50_000) + "\n",
        "many empty values": HEAD + "{}" * many(50_000) + "\n",
        "many values of one name": block("a = 1 -- x") + "\n" + "{a} " * many(20_000) + "\n",
        "many headings": HEAD + "# h\n\n" * many(10_000),
        "one long line": HEAD + "x" * many(1_000_000) + "\n",
        "one long line of words": HEAD + "sigma = x " * many(100_000) + "\n",
        "many short lines": HEAD + "\n" * many(400_000),
        "a line of statements in prose": HEAD + "a = b\n" * many(5000),
        "angle brackets": HEAD + "<" * many(50_000) + "\n",
        "comments of HTML": HEAD + "<!--" * many(20_000) + "\n",
        "fences that never close": HEAD + "```\n" * many(9_999),
        "links out of the folder": HEAD
        + "![a](../../../etc/passwd)\n![b](/etc/passwd)\n![c](file:///etc/passwd)\n![d](a b)\n",
        "a zero byte": block("a = 1 -- \0"),
        "line ends of all kinds": "---\r\ntitle: x\r---\n\r\n    a = 1\u2028    b = 2\x0b    c = 3\x0c\x85",
        "control characters": HEAD
        + "".join(map(chr, range(32)))
        + "\n    a = 1"
        + "".join(map(chr, range(32)))
        + "\n",
        "marks that combine": HEAD
        + "a"
        + "\u0301" * many(50_000)
        + "\n\n    a"
        + "\u0301" * many(5000)
        + " = 1\n",
        "text of two directions": block("\u202ea = 1 -- \u202e", "\u2066b\u2069 = a"),
        "odd digits": block(
            "x = -²", "y = 1 ft ²", "z² = 3", "w = <²", "v = ³*2", "u = ٣", "t = 2 ft ٣ in", "s = 1e²"
        ),
        "half a surrogate": block("a = 1 -- \ud800", "\udfff = 2"),
        "a byte order mark": "\ufeff" + HEAD,
        # formulas
        "nested parentheses": block("x = " + "(" * 10_000 + "1" + ")" * 10_000),
        "nested parentheses in a line that is read": block("x = " + "(" * 9000 + "1" + ")" * 9000),
        "parentheses never closed": block("x = " + "(" * many(19_000)),
        "nested calls": block("x = " + "sqrt(" * many(3000) + "1" + ")" * many(3000)),
        "nested brackets": block("x = " + "<" * many(3000) + "1" + ">^1" * many(3000)),
        "square brackets": block("x " + "[" * many(10_000) + " = 1"),
        "many minuses": block("x = " + "- " * many(9000) + "1"),
        "many plain minuses": block("x = " + "-" * many(19_000) + "1"),
        "a tower of powers": block("x = 9^9^9^9"),
        "a tall tower of powers": block("x = " + "9^" * many(9000) + "9"),
        "powers of powers": block(
            "x = (((9^9)^9)^9)^9", "y = 0.1^9^9", "z = (-9)^9^9", "w = exp(exp(exp(9)))"
        ),
        "a long sum": block("x = " + "1 + " * many(4500) + "1"),
        "a long product": block("x = " + "2*" * many(9000) + "2"),
        "a long sum on many lines": block("x = 1", *["    + 1"] * many(4000)),
        "many arguments": block("x = max(" + "1, " * many(6000) + "1)"),
        "many parameters": block("f(" + ", ".join(f"a{n}" for n in range(many(3000))) + ") = 1", "x = f(1)"),
        "many options": block('c = "a" of ' + ", ".join(f'"w{n}"' for n in range(many(2500))) + ', "a"'),
        "many branches": block(
            "x = cases", *[f"    {n} when 1 > 2" for n in range(many(1000))], "    0 otherwise"
        ),
        "nested conditions": block(
            "x = cases", "    1 when " + "(" * many(3000) + "1 < 2" + ")" * many(3000), "    2 otherwise"
        ),
        "fifty nested conditions": block(
            "x = cases", "    1 when " + "(" * 45 + "1 < 2" + ")" * 45, "    2 otherwise"
        ),
        "a long chain": block("valid: " + "1 < " * many(4000) + "2 for x", "x = 1"),
        "many ands": block(
            "x = cases", "    1 when " + "1 < 2 and " * many(1500) + "1 < 2", "    2 otherwise"
        ),
        "a number of many digits": block("x = " + "1" * 100_000, "y = 0." + "0" * 15_000 + "1"),
        "an exponent of many digits": block(
            "x = 1e" + "9" * many(15_000), "y = 1e-400", "z = 1e308*10", "w = 1e-300^2"
        ),
        "a name of many letters": block("x" * many(15_000) + " = 1", "y = " + "x" * many(15_000)),
        "a name of many parts": block("x" + "_a" * many(9000) + " = 1"),
        "a name of many primes": block("x" + "'" * many(15_000) + " = 1"),
        "a unit of many letters": block(
            "x = 1 " + "m" * many(15_000),
            "y = 1 " + "m*" * many(9000) + "m",
            "z [" + "(" * many(9000) + "] = 1",
        ),
        "large powers in units": block(
            "x = 1 Tm^99", "y = 1 ((km^99)^99)^99", "z = 1 m^(1/0)", "w = 1 m^999999999"
        ),
        "dimensions that double": block("a0 = 2 mm -- x", *[f"a{n} = a{n - 1}^2" for n in range(1, 60)]),
        "dimensions that halve": block("a0 = 2 mm -- x", *[f"a{n} = sqrt(a{n - 1})" for n in range(1, 60)]),
        "odd powers of dimensions": block(
            "a = 2 mm -- x", "b = a^0.123456789", "c = a^(1/1009)", "d = a^1e9", "e = a^-99"
        ),
        "factors of odd powers": block(
            "a = 2 in -- x", "b = 3 ft -- x", "c [mm^0.35] = a^0.35", "d = a^0.3*b^0.7", "e = a^7*b^-7"
        ),
        "powers that cancel": block(
            "a = 2 in -- x", "b = 3 mm -- x", "c = " + "*".join(["a^20/b^20"] * 6) + " + 1"
        ),
        "powers of small units": block("a = 60 microstrain -- x", "b = a^70", "c [ppm] = a^300 + a"),
        "fractions over nothing": block(
            "a = 1/0 in -- x", "b = 2 1/0 in", "c = 12 ft 1/0 in", "d [ft-in 1/16] = 1/0 in"
        ),
        "calls that double": block(
            "f0(x [1]) = x + 1",
            *[f"f{n}(x [1]) = f{n - 1}(x) + f{n - 1}(x)" for n in range(1, 60)],
            "y = f59(1)",
        ),
        "calls that nest": block(
            "f0(x [1]) = x + 1", *[f"f{n}(x [1]) = f{n - 1}(f{n - 1}(x))" for n in range(1, 40)], "y = f39(1)"
        ),
        "calls of ten": block(
            "f0(x) = x",
            *[f"f{n}(x) = max({', '.join([f'f{n - 1}(x)'] * 10)})" for n in range(1, 12)],
            "y = f11(1 mm)",
        ),
        "a function of itself": block("f(x) = f(x)", "y = f(1)"),
        "a circle of names": block("a = b", "b = c", "c = a"),
        "a long chain of steps": block(
            "a0 = 1 -- x", *[f"a{n} = a{n - 1} + 1" for n in range(1, many(2000))]
        ),
        "a step that uses many": block(
            *[f"a{n} = {n} -- x" for n in range(many(600))],
            "s = " + " + ".join(f"a{n}" for n in range(many(100))),
        ),
        "one name many times": block(*["a = 1 -- x"] * many(3000)),
        "many criteria of one name": block("a = 1 -- x", *["strength b: a <= 2"] * many(1000)),
        "many lines that are wrong": block(*["x = = 1"] * many(3000)),
        "many units that are none": block(*[f"x{n} = 1 kmm" for n in range(many(1000))]),
        "many names that are none": block(*[f"x{n} = y{n} + z{n}" for n in range(many(1000))]),
        "many citations that are none": block(*[f"x{n} = 1 -- [a] [b] [c{n}]" for n in range(many(1000))]),
        "a note of many brackets": block("x = 1 -- " + "[" * many(15_000), "y = 1 -- " + "[a]" * many(5000)),
        "many notes": block("x = 1", *["    -- note"] * many(4000)),
        "reserved words only": block(
            "when = otherwise", "cases", "f = cases", "use take beam", "for for for", "x = at"
        ),
        "deep indents": HEAD + "".join(" " * (4 + n) + "a = 1\n" for n in range(many(300))),
        "tabs": HEAD + "\t" * many(9000) + "a = 1\n" + "\ta = 2\n",
        "zero everywhere": block(
            "a = 0 -- x", "b = 0/0", "c = 0^0", "d = 0^-1", "e = a/a", "strength: 0 <= 0", "limit: a < a"
        ),
    }


# --- random sheets ------------------------------------------------------------------------------------------


def sheets() -> list[str]:
    """Real sheets, to be damaged."""
    paths = [*(ROOT / "tests" / "published").glob("*.sheet.md"), *(ROOT / "calcsheets").glob("*.sheet.md")]
    return [path.read_text(encoding="utf-8") for path in sorted(paths)]


PIECES = [
    "", " ", "\n", "\n\n", "    ", "\t", "---", "--", " -- ", "[", "]", "(", ")", "{", "}", "<", ">", "^",
    "*", "/", "+", "-", "=", "<=", ":", ",", ".", "'", '"', "|", "#", "`", "!", "\\", "&", "%", "$", "_",
    "~", "@", "0", "1e99", "1/2 in", "12 ft 6 in", " kN", " degC", "pi", "x", "σ", "²", "é", "\u0301", "\0",
    "null", "true", "&a ", "*a", "!!", "? ", "- ", "> ", "cases", "when ", " otherwise", "valid: ",
    "check: ", "strength: ", "limit x: ", "use section a as b", "solve for x", "as psi", "within 1 %",
    " for ", "<script>", "</style>", "max(", "round_up(", "sqrt(", "^0.5", "^-1", "[1]", "[mm]",
    "[ft-in 1/16]", "0.0", "(-1)", "1e-320", "{x}", "{x [mm]}",
]  # fmt: skip


def bytes_decoded(random: Random) -> str:
    data = random.randbytes(random.randint(0, 600))
    return random.choice(["", HEAD]) + data.decode(
        random.choice(["utf-8", "latin-1", "utf-16-le"]), "replace"
    )


def pieces_joined(random: Random) -> str:
    return random.choice(["", HEAD, HEAD + "    "]) + "".join(random.choices(PIECES, k=random.randint(1, 60)))


def mutated(random: Random) -> str:
    text = random.choice(sheets())
    for _ in range(random.choice([1, 1, 2, 5, 30])):
        start = random.randint(0, len(text))
        end = min(start + random.choice([0, 0, 1, 1, 3, 20, 200]), len(text))
        text = text[:start] + random.choice(PIECES) + text[end:]
    return text


def spliced(random: Random) -> str:
    """Lines of two sheets, shuffled together."""
    one, two = (random.choice(sheets()).split("\n") for _ in range(2))
    lines = one[: random.randint(0, len(one))] + two[random.randint(0, len(two)) :]
    for _ in range(random.randint(0, 6)):
        lines.insert(random.randint(0, len(lines)), random.choice(random.choice([one, two])))
    return "\n".join(lines)


def numbers_changed(random: Random) -> str:
    """A real sheet with some other numbers and units: its form stays good, what it computes goes astray."""

    def sometimes(share: float, others: list[str]) -> Callable[[re.Match[str]], str]:
        return lambda match: random.choice(others) if random.random() < share else match.group()

    text = random.choice(sheets())
    values = ["0", "1", "1e300", "1e-300", "0.0001", "99999.5", "123456789", "3", "-1", "(-2)", "(1/3)"]
    text = re.sub(r"(?<![\w.\[])\d+(?:\.\d+)?(?![\w.\]])", sometimes(0.2, values), text)
    units = ["mm", "in", "ft", "kN", "lbf", "MPa", "psi", "deg", "rpm", "degC", "K", "%", "kg", "s", "kip*ft"]
    return re.sub(r"\b(mm|kN|MPa|in|kip|ksi|psi|m|N)\b", sometimes(0.07, units), text)


TYPED = {
    d.LENGTH: ["mm", "in", "ft", "m", "mil"], d.FORCE: ["kN", "lbf", "kip", "kgf"],
    d.STRESS: ["MPa", "ksi", "psf", "bar"], d.TEMPERATURE: ["K"],
    d.PLAIN: ["%", "deg", "rad", "ppm", "microstrain"], d.TIME: ["s", "min", "h"], d.POWER: ["hp", "kW"],
    d.FREQUENCY: ["rpm", "Hz"], d.MASS: ["kg", "lb"],
}  # fmt: skip
TYPED_NUMBERS = ["1", "2.5", "0.3", "12_000", "1e-4", "0", "7/8"]
PLAIN_FUNCTIONS = [name for name, function in FUNCTIONS.items() if function.rule == "plain"]


def worked(random: Random) -> str:
    """A sheet whose dimensions fit: sums of one kind, products and powers of any, units that don't cancel."""
    known: list[tuple[str, Dimension]] = []
    lines = []
    for number in range(random.randint(4, 25)):
        name, of = f"x{number}", random.choice(list(TYPED))
        if number < 3 or random.random() < 0.3:
            lines.append(f"{name} = {random.choice(TYPED_NUMBERS)} {random.choice(TYPED[of])} -- x")
        else:
            text, of = _formula(random, known, 3)
            units = next((units for kind, units in TYPED.items() if kind == of), [])
            asked = f" [{random.choice(units)}]" if units and random.random() < 0.6 else ""
            lines.append(f"{name}{asked} = {text}")
            if random.random() < 0.3:
                other = random.choice([n for n, kind in known if kind == of] or ["0"])
                lines.append(f"limit c{number}: {name} {random.choice(['<=', '<', '>=', '>'])} {other}")
        known.append((name, of))
    system = random.choice(["SI", "US", "SI machine", "US machine", "SI pressure"])
    return f"---\ntitle: Worked\nunits: {system}\n---\n\n" + "".join(f"    {line}\n" for line in lines)


def _formula(random: Random, known: list[tuple[str, Dimension]], deep: int) -> tuple[str, Dimension]:
    if deep == 0 or random.random() < 0.2:
        return random.choice(known)
    (a, kind), (b, other) = _formula(random, known, deep - 1), _formula(random, known, deep - 1)
    alike = [name for name, of in known if of == kind]
    if alike and random.random() < 0.4:
        c = random.choice(alike)
        joined = [f"({a} + {c})", f"({a} - {c})", f"max({a}, {c})", f"round_up({a}, {c})", f"abs({a})"]
        return random.choice(joined), kind
    if kind.is_plain and random.random() < 0.4:
        return random.choice([f"{random.choice(PLAIN_FUNCTIONS)}({a})", f"({a})^({a})"]), kind
    if random.random() < 0.2:
        power = random.choice([Fraction(2), Fraction(1, 2), Fraction(-1), Fraction(1, 3)])
        return f"({a})^({power})", kind.power(power)
    return random.choice([(f"({a}*{b})", kind.times(other)), (f"({a})/({b})", kind.over(other))])


KINDS: dict[str, Callable[[Random], str]] = {
    "bytes": bytes_decoded, "pieces": pieces_joined, "mutated": mutated, "spliced": spliced,
    "numbers": numbers_changed, "worked": worked, "algebra": algebra, "algebra damaged": algebra_damaged,
}  # fmt: skip


# --- the campaign -------------------------------------------------------------------------------------------


SLOW = 15
"""Seconds after which a step, or all that stands before or behind the steps, counts as one that hangs."""


def _hangs(*_: object) -> NoReturn:
    raise Fault(f"more than {SLOW} seconds")


def _each_step_has_its_own_time() -> None:
    """Sets the alarm anew before and after each step of a sheet."""
    step = evaluate._Run._step

    def timed(run: Any, planned: Any) -> Any:
        signal.alarm(SLOW)
        worked = step(run, planned)
        signal.alarm(SLOW)
        return worked

    evaluate._Run._step = timed  # type: ignore[method-assign]


def fault_of(text: str) -> str:
    """Where it went wrong, in a form that is equal for equal faults; "" where nothing did."""
    signal.alarm(SLOW)
    try:
        twice(text)
    except RecursionError as error:
        return f"RecursionError in {traceback.extract_tb(error.__traceback__)[-1].name}"
    except Exception as error:  # any exception at all is what is looked for
        last = traceback.extract_tb(error.__traceback__)[-1]
        place = f"{Path(last.filename).name}:{last.lineno} in {last.name}"
        if "seconds" in str(error):
            door.close()  # its answer would be taken for that to the next question
        return f"{type(error).__name__} at {place}: {str(error)[:100]}"
    finally:
        signal.alarm(0)
    return ""


def smallest(text: str, fault: str, seconds: float = 20) -> str:
    """A text without lines, then without characters, that it can do without and still give the fault."""
    place, end = fault.partition(":")[0], time.perf_counter() + seconds
    for unit in ("\n", ""):
        parts = text.split("\n") if unit else list(text)
        size = max(len(parts) // 2, 1)
        while size:
            for start in range(0, len(parts), size):
                if time.perf_counter() > end:
                    return unit.join(parts)
                shorter = parts[:start] + parts[start + size :]
                if fault_of(unit.join(shorter)).startswith(place):
                    parts = shorter
                    break
            else:
                size //= 2
        text = unit.join(parts)
    return text


@dataclass
class Figures:
    """What a campaign came to."""

    count: Counter[str] = field(default_factory=Counter)
    slowest: dict[str, float] = field(default_factory=dict)
    faults: dict[str, str] = field(default_factory=dict)


def campaign(seconds: float, seed: int, kinds: list[str]) -> Figures:
    """Runs the hostile sheets once, then random ones until the time is over; or random ones of some kinds."""
    figures, end = Figures(), time.perf_counter() + seconds
    known: set[str] = set()
    for kind, text in _all(Random(seed), kinds):
        begun = time.perf_counter()
        fault = fault_of(text)
        took = time.perf_counter() - begun
        figures.count[kind] += 1
        figures.slowest[kind] = max(figures.slowest.get(kind, 0.0), took)
        place = fault.partition(":")[0] + fault.partition(":")[2].partition(" ")[0]
        if fault and place not in known:
            known.add(place)
            figures.faults[fault] = text if "seconds" in fault else smallest(text, fault)
        if time.perf_counter() > end:
            break
    return figures


def _all(random: Random, kinds: list[str]) -> Iterator[tuple[str, str]]:
    if not kinds:
        for name, text in hostile(share=0.2).items():
            yield f"hostile: {name}", text
    while True:
        kind = random.choice(kinds or list(KINDS))
        yield kind, KINDS[kind](random)


def main() -> int:
    """The program: 0 where no fault was found."""
    faulthandler.enable()
    signal.signal(signal.SIGALRM, _hangs)
    _each_step_has_its_own_time()
    seconds, seed = float(sys.argv[1]), int(sys.argv[2]) if len(sys.argv) > 2 else 1
    figures = campaign(seconds, seed, sys.argv[3:])
    for kind, count in figures.count.items():
        if not kind.startswith("hostile") or figures.slowest[kind] > 1:
            print(f"{count:8d}  {kind:50s} slowest {figures.slowest[kind]:.2f} s")
    print(f"{sum(figures.count.values()):8d}  sheets, {len(figures.faults)} faults, seed {seed}")
    for fault, text in figures.faults.items():
        print(f"\n{fault}\n{text[:2000]!r}")
    return 1 if figures.faults else 0


if __name__ == "__main__":
    sys.exit(main())
