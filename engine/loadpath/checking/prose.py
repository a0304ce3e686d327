"""Prose: does it repeat a result by hand, where it will be out of date after the next change?"""

from __future__ import annotations

import re
from bisect import bisect_left
from collections.abc import Iterator
from dataclasses import dataclass

from loadpath.findings import Finding, finding
from loadpath.sheet.model import Heading, Prose, Words
from loadpath.text import Span
from loadpath.trace.model import Step, Trace
from loadpath.trace.texts import display
from loadpath.units import ONE, BadUnit, Dimension, Unit, parse_unit
from loadpath.units.printing import read_plain

LEAST_DIGITS = 3
"""Significant digits of a plain number that is taken for a copied result."""

_SPACES = " \u00a0\u2009\u202f"
_NUMBER = re.compile(
    rf"(?<![\w.,/−-])[-−]?\d[\d_]*(?:[{_SPACES[1:]}]\d{{3}})*(?:\.\d+)?(?:e-?\d+)?(?!\w|[-/.,:]\d)"
)
_UNIT = re.compile(rf"[*_]*(?:[{_SPACES}]|\n[ >]*)?([^\W\d_%°][^\s\0]*|%|°[^\s\0]*)")
_FENCE = re.compile(r"^[ >]*(`{3,}|~{3,})[^\n]*\n.*?(?:^[ >]*\1[`~]*[ ]*$|\Z)", re.MULTILINE | re.DOTALL)
_NO_PROSE = re.compile(r"(`+)(?!`).*?(?<!`)\1(?!`)|\{[^{}]*\}|\]\([^)\s]*\)|<[^>\s]*>", re.DOTALL)
_NUMBERING = re.compile(r"#+\s*[\d.]+")
_SIGNS = str.maketrans({
    "·": "*", "⋅": "*", "−": "-", "²": "^2", "³": "^3", "⁴": "^4", "⁶": "^6", "°": "deg", "µ": "u", "μ": "u",
})  # fmt: skip


def prose_findings(trace: Trace) -> Iterator[Finding]:
    """`stale-number`: a number with its unit, or a plain one of several digits, that a result prints."""
    results = _Results(trace)
    if not results.by_dimension:
        return
    for block in trace.sheet.blocks:
        if isinstance(block, Prose | Heading):
            text = trace.sheet.source.cut(block.span)
            for typed, step in results.repeated_in(_masked(text)):
                at = block.span.start + typed.at
                yield _finding(trace, typed, step, Span(at, at + len(typed.number)))
    front = trace.sheet.front
    for key, words in (
        ("objective", front.objective),
        ("method", front.method),
        ("conclusion", front.conclusion),
    ):
        for typed, step in results.repeated_in(_masked(words.text)):
            yield _finding(trace, typed, step, _in_front_matter(trace, key, words, typed))


def _masked(text: str) -> str:
    """The text with code, values, addresses and the numbers of headings blanked."""

    def blank(match: re.Match[str]) -> str:
        return re.sub(r"[^\n]", "\0", match.group())

    return _NUMBERING.sub(blank, _NO_PROSE.sub(blank, _FENCE.sub(blank, text)))


def _in_front_matter(trace: Trace, key: str, words: Words, typed: _Typed) -> Span | None:
    """The place of a number of the front matter, where the sheet itself holds it."""
    before = words.text[: typed.at].count(typed.number)
    match = re.search(rf"^{key}[ ]*:", trace.sheet.source.text, re.MULTILINE)
    at = match.end() if match else -1
    for _ in range(before + 1):
        at = trace.sheet.source.text.find(typed.number, at + 1) if at >= 0 else -1
    return Span(at, at + len(typed.number)) if at >= 0 else None


def _finding(trace: Trace, typed: _Typed, step: Step, span: Span | None) -> Finding:
    asked = "" if typed.unit in (ONE, step.unit) else f" [{typed.unit.text}]"
    return finding(
        "stale-number",
        f"`{typed.said}` is the result `{step.id}`, typed by hand: it will not follow a change",
        trace.sheet.source, span, help=f"write `{{{step.entry.name}{asked}}}`, which prints the value",
    )  # fmt: skip


# --- numbers ------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Typed:
    """A number in a text."""

    at: int
    number: str
    """As typed."""
    unit: Unit
    said: str
    """With its unit, as typed."""

    @property
    def plain(self) -> str:
        """Without groups, in magnitude."""
        return re.sub(rf"[_{_SPACES}]", "", self.number).lstrip("-−")


def _numbers_in(text: str) -> Iterator[_Typed]:
    for match in _NUMBER.finditer(text):
        number = match.group()
        unit = _UNIT.match(text, match.end())
        if unit is not None and (read := _read_unit(unit.group(1))) is not None:
            yield _Typed(match.start(), number, read, f"{number} {read.text}")
        if len(re.sub(r"^[-−0._]+|\D", "", number.partition("e")[0])) >= LEAST_DIGITS:
            yield _Typed(match.start(), number, ONE, number)


def _read_unit(word: str) -> Unit | None:
    typed = word.rstrip(".,;:!?)]}*_\"'’”|").translate(_SIGNS)
    if len(typed) > 40:
        return None
    try:
        unit = parse_unit(typed)
    except BadUnit:
        return None
    return unit if unit.text else None


class _Results:
    """The printed results of a sheet, to be found by value."""

    def __init__(self, trace: Trace) -> None:
        self.digits = trace.sheet.front.digits
        self.by_dimension: dict[Dimension, list[tuple[float, Step]]] = {}
        self.inputs: dict[Dimension, list[float]] = {}
        for step in trace:
            if not isinstance(step.si, float):
                continue
            if step.kind == "result":
                self.by_dimension.setdefault(step.unit.dimension, []).append((abs(step.si), step))
            elif step.kind == "input":
                self.inputs.setdefault(step.unit.dimension, []).append(abs(step.si))
        for results in self.by_dimension.values():
            results.sort(key=lambda pair: pair[0])
        for values in self.inputs.values():
            values.sort()

    def repeated_in(self, text: str) -> Iterator[tuple[_Typed, Step]]:
        """Each number of a text that is a printed result and no input, with the result."""
        last = -1
        for typed in _numbers_in(text):
            if typed.at != last and (step := self._find(typed)) is not None:
                last = typed.at
                yield typed, step

    def _find(self, typed: _Typed) -> Step | None:
        value = float(typed.plain)
        si = abs(typed.unit.to_si(value))
        inputs = self.inputs.get(typed.unit.dimension, [])
        at = bisect_left(inputs, si * (1 - 1e-12))
        if at < len(inputs) and inputs[at] <= si * (1 + 1e-12):
            return None
        results = self.by_dimension.get(typed.unit.dimension, [])
        wide = 10.0 ** (1 - self.digits)
        for known, step in results[bisect_left(results, si * (1 - wide), key=lambda pair: pair[0]) :]:
            if known > si * (1 + wide):
                return None
            if self._prints(step, typed, value):
                return step
        return None

    def _prints(self, step: Step, typed: _Typed, value: float) -> bool:
        if typed.unit is ONE and step.unit is not ONE:
            return False
        shown = display(step, typed.unit)
        if shown is None or "/" in shown.number or " " in shown.number:
            return False
        number = shown.number.lstrip("-")
        return number == typed.plain if typed.unit is ONE else read_plain(number) == value
