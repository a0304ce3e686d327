"""The values of front matter: what each key takes. One that its key does not take is a finding and None."""

from __future__ import annotations

import datetime
import difflib
import re
from collections.abc import Callable, Iterable, Sequence
from dataclasses import replace

from loadpath.findings import Finding, Remark, finding
from loadpath.sheet.model import Assumption, Confirmed, Revision, SourceEntry, Words
from loadpath.sheet.values import read_words
from loadpath.sheet.yaml_nodes import Entry, Items, Mapping, Scalar, Yaml
from loadpath.text import Source, Span

FORMAT = 1
STATUSES = (
    "preliminary",
    "for review",
    "for approval",
    "for construction",
    "as built",
    "superseded by SB-131",
)
PAGES = ("A4", "Letter")
UNIT_SYSTEMS = ("SI", "US", "SI machine", "US machine", "SI pressure")
UNIT_KINDS = (
    "force", "length", "stress", "pressure", "moment", "area", "section_modulus", "second_moment",
    "line_load", "temperature", "power", "energy", "mass",
)  # fmt: skip
"""`pressure` is another word for `stress`."""
CRITERION_KINDS = ("strength", "stiffness", "stability")

_KEY = re.compile(r"[\w.-]+")
_LANGUAGE = re.compile(r"[A-Za-z]{2,8}(-[A-Za-z0-9]{1,8})*")


class Values:
    """Reads the values of one text, and keeps what is wrong with them."""

    def __init__(self, source: Source) -> None:
        self.source = source
        self.found: list[Finding] = []

    def wrong(self, message: str, span: Span, help: str, slug: str = "front-matter-value") -> None:
        self.found.append(finding(slug, message, self.source, span, help=help))

    # --- texts and lists

    def text(self, node: Yaml) -> str | None:
        """One line of text."""
        if isinstance(node, Scalar):
            return " ".join(node.text.split("\n")).strip()
        first = self.source.text[node.span.start]
        what = "`key: value`" if isinstance(node, Mapping) else "a list"
        message = f"a text is needed here, but this reads as {what}"
        if first in "{[":
            message = f"a text that begins with `{first}` needs quotes round it"
        self.wrong(message, node.span, "put the whole text in quotes")
        return None

    def words(self, node: Yaml) -> Words | None:
        """Prose, which may hold `{values}`."""
        if not isinstance(node, Scalar):
            self.text(node)
            return None
        text = node.text.strip()
        words, found = read_words(text, self.source, _places(text, node, self.source))
        self.found += found
        return words

    def texts(self, node: Yaml) -> tuple[str, ...] | None:
        """A list of texts."""
        if isinstance(node, Scalar) and not node.text:
            return ()
        if not isinstance(node, Items):
            help = "put all in one pair of brackets: `[one, two]`, or each behind `- ` on a line of its own"
            self.wrong("a list is needed here", node.span, help)
            return None
        texts = [self.text(item) for item in node.items]
        return tuple(text for text in texts if text)

    def filled(self, key: Scalar, node: Yaml, what: str) -> str:
        """A text that says something; "" where it can't be read."""
        text = self.text(node)
        if text == "":
            self.wrong(f"{what} is empty", key.span, "write it after the colon")
        return text or ""

    def one_of(self, node: Yaml, options: Sequence[str], what: str) -> str | None:
        text = self.text(node)
        if text is None or text in options:
            return text
        self.wrong(f"`{_short(text)}` is no {what}", node.span, _meant(text, options))
        return None

    def entries(self, node: Yaml, what: str, form: str, keys: Sequence[str] = ()) -> tuple[Entry, ...]:
        """The entries of a mapping, those with an unknown key left out."""
        if isinstance(node, Mapping):
            return self.known(node.entries, keys) if keys else node.entries
        if not (isinstance(node, Scalar) and node.nothing):
            self.wrong(f"`{_short(what)}` needs its parts as `key: value`", node.span, f"write {form}")
        return ()

    def known(self, entries: Sequence[Entry], keys: Sequence[str], where: str = "here") -> tuple[Entry, ...]:
        """Those with a known key; a misspelt one counts as the key it is near to, where that is not given."""
        given = {entry.key.text for entry in entries}
        kept = []
        for entry in entries:
            if self.knows(entry.key, keys, where):
                kept.append(entry)
            elif (near := nearest(entry.key.text, keys)) and near not in given:
                given.add(near)
                kept.append(Entry(replace(entry.key, text=near), entry.value))
        return tuple(kept)

    def knows(self, key: Scalar, keys: Sequence[str], where: str = "here") -> bool:
        if key.text in keys:
            return True
        help = _meant(key.text, keys, listed=len(keys) < 15)
        if key.text.partition(":")[0] in keys:
            help = "a colon needs a space after it"
        self.wrong(f"`{_short(key.text)}` is not a key {where}", key.span, help, "unknown-key")
        return False

    # --- single keys

    def format(self, node: Yaml) -> int | None:
        text = self.text(node)
        if text is None or text == str(FORMAT):
            return FORMAT
        message = f"`{_short(text)}` is no format that this version of loadpath reads"
        self.wrong(message, node.span, f"write `format: {FORMAT}`")
        return None

    def date(self, node: Yaml) -> str | None:
        text = self.text(node)
        if not text:
            return text
        try:
            if re.fullmatch(r"[0-9]{4}-[0-9]{2}-[0-9]{2}", text):
                return datetime.date.fromisoformat(text).isoformat()
        except ValueError:
            pass
        self.wrong(f"`{_short(text)}` is no date", node.span, "write year, month and day: `2026-11-20`")
        return None

    def status(self, node: Yaml) -> str | None:
        text = self.text(node)
        if not text or re.fullmatch(r"superseded by \S.*", text):
            return text
        return self.one_of(node, STATUSES, "status")

    def page(self, node: Yaml) -> str | None:
        return self.one_of(node, PAGES, "page size that is printed")

    def language(self, node: Yaml) -> str | None:
        text = self.text(node)
        if text is None or _LANGUAGE.fullmatch(text):
            return text
        help = "write a code such as `en` or `en-GB`"
        self.wrong(f"`{_short(text)}` is no code of a language", node.span, help)
        return None

    def digits(self, node: Yaml) -> int | None:
        text = self.text(node)
        if text is None:
            return None
        if re.fullmatch(r"[0-9]{1,2}", text) and 2 <= int(text) <= 12:
            return int(text)
        self.wrong(f"`{_short(text)}` is no number of digits", node.span, "write a whole number from 2 to 12")
        return None

    # --- mappings

    def units(self, node: Yaml) -> tuple[str, dict[str, str]] | None:
        """The system, "" where none is named, and the units by kind."""
        if not isinstance(node, Mapping):
            system = self.one_of(node, UNIT_SYSTEMS, "system of units")
            return None if system is None else (system, {})
        system, kinds = "", {}
        for entry in self.entries(node, "units", "", ("system", *UNIT_KINDS)):
            kind = "stress" if entry.key.text == "pressure" else entry.key.text
            if kind == "system":
                system = self.one_of(entry.value, UNIT_SYSTEMS, "system of units") or ""
            elif kind in kinds:
                help = "keep one of the two: they are one kind"
                self.wrong("`stress` and `pressure` are both given", entry.key.span, help, "duplicate-key")
            elif unit := self.filled(entry.key, entry.value, f"the unit of `{kind}`"):
                kinds[kind] = unit
        return system, kinds

    def not_applicable(self, node: Yaml) -> tuple[tuple[str, str], ...] | None:
        """Pairs of kind and reason."""
        entries = self.entries(node, "not_applicable", "`{stability: the reason}`")
        for entry in entries:
            if entry.key.text == "limit":
                help = "leave it out: only strength, stiffness and stability need a criterion or a reason"
                self.wrong("`limit` is asked of no sheet", entry.key.span, help)
        kinds = self.known([entry for entry in entries if entry.key.text != "limit"], CRITERION_KINDS)
        pairs = [(entry.key.text, self.filled(entry.key, entry.value, "the reason")) for entry in kinds]
        return tuple((kind, reason) for kind, reason in pairs if reason)

    def revisions(self, node: Yaml) -> tuple[Revision, ...] | None:
        form = "`A: {date: 2026-11-20, by: T.S., change: first issue}`"
        return tuple(self.revision(entry) for entry in self.entries(node, "revisions", form))

    def revision(self, entry: Entry) -> Revision:
        readers: dict[str, Callable[[Yaml], str | None]] = {
            "date": self.date,
            "by": self.text,
            "change": self.text,
        }
        given = self.entries(entry.value, entry.key.text, "`{date, by, change}`", tuple(readers))
        texts = {e.key.text: readers[e.key.text](e.value) or "" for e in given}
        return Revision(entry.key.text, **texts)

    def sources(self, node: Yaml) -> dict[str, SourceEntry]:
        form = "a key, a colon and what a reader can find the source by"
        entries = self.entries(node, "sources", form)
        return {e.key.text: self.source_entry(e) for e in entries if self.citable(e.key)}

    def source_entry(self, entry: Entry) -> SourceEntry:
        given = self.text_and_more(entry, ("text", "file"))
        file = self.file(given["file"]) if "file" in given else ""
        text = self.said(entry, given, "the source")
        return SourceEntry(entry.key.text, text, file, self.source, entry.key.span)

    def file(self, node: Yaml) -> str:
        text = self.text(node) or ""
        if not text.startswith("/") and not re.search(r"[\\:]", text) and ".." not in text.split("/"):
            return text
        help = "write its path from the folder that this is typed in: `data-sheet.pdf`"
        self.wrong("the file of a source is one of the project's", node.span, help)
        return ""

    def assumptions(self, node: Yaml) -> dict[str, Assumption]:
        entries = self.entries(node, "assumptions", "a key, a colon and what is assumed")
        return {e.key.text: self.assumption(e) for e in entries if self.citable(e.key)}

    def assumption(self, entry: Entry) -> Assumption:
        """Where it cannot be read whether it is confirmed, it is not."""
        given = self.text_and_more(entry, ("text", "confirm", "confirmed"))
        text = self.said(entry, given, "the assumption")
        answer: str | None = "false"
        if "confirm" in given:
            answer = self.one_of(given["confirm"], ("true", "false"), "answer to `confirm`")
        confirmed = self.confirmed(given["confirmed"]) if "confirmed" in given else None
        if answer == "true" and confirmed is not None:
            message = "an assumption is to be confirmed or is confirmed, not both"
            self.wrong(message, given["confirm"].span, "delete `confirm: true` once it is confirmed")
            confirmed = None
        confirm = answer != "false" or ("confirmed" in given and confirmed is None)
        return Assumption(entry.key.text, text, confirm, confirmed, self.source, entry.key.span)

    def confirmed(self, node: Yaml) -> Confirmed | None:
        before = len(self.found)
        entries = self.entries(node, "confirmed", "`{by, on, document}`", ("by", "on", "document"))
        given = {e.key.text: e.value for e in entries}
        by, document = (self.text(given[key]) if key in given else "" for key in ("by", "document"))
        on = self.date(given["on"]) if "on" in given else ""
        if by and on and document:
            return Confirmed(by, on, document)
        if len(self.found) == before:
            help = "write `confirmed: {by: T.S., on: 2026-11-20, document: letter 12}`"
            self.wrong("a confirmation says by whom, on which day and in which document", node.span, help)
        return None

    def text_and_more(self, entry: Entry, keys: Sequence[str]) -> dict[str, Yaml]:
        """The parts of `key: text` or `key: {text: ..., ...}`."""
        if isinstance(entry.value, Scalar):
            return {"text": entry.value}
        form = "`key: text` or `key: {text: ...}`"
        return {e.key.text: e.value for e in self.entries(entry.value, entry.key.text, form, keys)}

    def said(self, entry: Entry, given: dict[str, Yaml], what: str) -> str:
        if "text" in given:
            return self.filled(entry.key, given["text"], what)
        if isinstance(entry.value, Mapping):
            self.wrong(f"{what} has no `text`", entry.key.span, "write `{text: ...}`")
        return ""

    def citable(self, key: Scalar) -> bool:
        if _KEY.fullmatch(key.text):
            return True
        help = "a key holds letters, digits, `_`, `-` and `.` only"
        self.wrong(f"`{_short(key.text)}` cannot be cited", key.span, help)
        return False


def twice(sources: Iterable[SourceEntry], assumptions: Iterable[Assumption]) -> tuple[Finding, ...]:
    """A source and an assumption of one key: `[key]` could mean either."""
    by_key, found = {entry.key: entry for entry in sources}, []
    for assumption in assumptions:
        other = by_key.get(assumption.key)
        if other is None or assumption.source is None:
            continue
        same = other.source is assumption.source
        remark = Remark("the source", other.span if same else None)
        message = f"`{assumption.key}` is the key of a source and of an assumption"
        help = "give one of them another key"
        place = (assumption.source, assumption.span)
        found.append(finding("duplicate-key", message, *place, remarks=(remark,), help=help))
    return tuple(found)


def nearest(text: str, options: Sequence[str]) -> str:
    """The option that was probably meant, "" where none is near."""
    folded = {_folded(option): option for option in options}
    near = difflib.get_close_matches(_folded(text[:50]), list(folded), 1, 0.6)
    return folded[near[0]] if near else ""


def _folded(text: str) -> str:
    return text.casefold().replace("-", "_").replace(" ", "_")


def _meant(text: str, options: Sequence[str], listed: bool = True) -> str:
    """The nearest option; else all of them where they are few."""
    if near := nearest(text, options):
        return f"did you mean `{near}`?"
    if listed:
        return "it is one of " + ", ".join(f"`{option}`" for option in options)
    return "delete it, or say it in the text of the sheet"


def _short(text: str) -> str:
    return text if len(text) <= 40 else text[:39] + "…"


def _places(text: str, node: Scalar, source: Source) -> Callable[[int], int]:
    """Where each character of a scalar was typed; its white space may be folded and its quotes escaped."""
    if "{" not in text:
        return lambda _: node.span.start
    raw, at = source.cut(node.span), 0
    if node.style in ("|", ">"):
        at = raw.find("\n") + 1
    places = []
    for character in text:
        if character.isspace():
            places.append(at)
            while at < len(raw) and raw[at].isspace():
                at += 1
            continue
        found = raw.find(character, at, at + 200)
        at = found if found >= 0 else at
        places.append(at)
        at += found >= 0
    return lambda offset: node.span.start + min(places[offset], len(raw) - 1)
