"""YAML read as text: mistakes in plain words at their place, nothing made from tags, limits kept."""

from __future__ import annotations

import time

import pytest

from loadpath.sheet.yaml_nodes import Items, Mapping, Scalar, Yaml, read_yaml
from loadpath.text import Source, Span


def read(text: str) -> tuple[Mapping, list[str]]:
    source = Source("project.yaml", text)
    mapping, found = read_yaml(source, Span(0, len(text)))
    return mapping, [f"{f.line}:{f.column} {f.slug}" for f in found]


def plain(node: Yaml) -> object:
    if isinstance(node, Scalar):
        return node.text
    if isinstance(node, Items):
        return [plain(item) for item in node.items]
    return {entry.key.text: plain(entry.value) for entry in node.entries}


def test_every_scalar_is_text_with_its_place() -> None:
    text = "revision: 1.10\non: yes\nempty:\nlist: [1, 'two']\n"
    mapping, found = read(text)
    assert (plain(mapping), found) == (
        {"revision": "1.10", "on": "yes", "empty": "", "list": ["1", "two"]},
        [],
    )
    spans = [entry.key.span for entry in mapping.entries]
    assert [text[a:b] for a, b in spans] == ["revision", "on", "empty", "list"]


# source: the texts are what is commonly mistyped; the places are counted by hand
MISTYPED = [
    ("title: Hoist: beam", "1:13 front-matter-syntax", "a colon inside a text", 'title: "Hoist: beam"'),
    ("title: x\n  number: 3", "2:3 front-matter-syntax", "indented", "column of the keys above"),
    ("units:\n  length: m\n area: m^2", "3:2 front-matter-syntax", "column that fits none", "one column"),
    ("units:\n\tlength: m", "2:1 front-matter-syntax", "a tab", "spaces"),
    ("title Hoist\nnumber: 3", "1:1 front-matter-syntax", "no `key:`", "key: value"),
    ("number: 3\ntitle Hoist", "2:1 front-matter-syntax", "no `key:`", "key: value"),
    ("title:Hoist\nnumber: 3", "1:6 front-matter-syntax", "space after it", "key: value"),
    ("Hoist beam", "1:1 front-matter-syntax", "key: value", "colon"),
    ("codes: [a, b\nnumber: 3\n", "1:8 front-matter-syntax", "`[` that opens here", "close it with `]`"),
    ("units: {length: m\nnumber: 3", "1:8 front-matter-syntax", "`{` that opens here", "close it with `}`"),
    ("a: {text: x: y, b: c}", "1:12 front-matter-syntax", "a colon inside a text", "quotes"),
    ("codes: [", "1:8 front-matter-syntax", "`[` that opens here", "close it with `]`"),
    ("units: {system: SI, ", "1:8 front-matter-syntax", "`{` that opens here", "close it with `}`"),
    ("codes: [a, b}", "1:13 front-matter-syntax", "`}` stands where `]`", "`]`"),
    ("codes: [a]]", "1:11 front-matter-syntax", "was not opened", "delete it"),
    ("title: 'Tis\nnumber: 3", "1:8 front-matter-syntax", "not closed", "quotation marks"),
    ('title: "Hoist" beam', "1:16 front-matter-syntax", "after a closing quote", "whole text in quotes"),
    ('title: "\\{x"', "1:9 front-matter-syntax", "`\\{`", "single quotes"),
    ("title: - b", "1:8 front-matter-syntax", "item of a list", "line of its own"),
    ("title: @x", "1:8 front-matter-syntax", "cannot begin with `@`", "quotes"),
    ("title: `x`", "1:8 front-matter-syntax", "a backtick", "quotes"),
    ("objective: > text\n  more", "1:14 front-matter-syntax", "nothing can follow `>`", "next line"),
    ("title: x\n...\nowner: y", "2:1 front-matter-syntax", "`...` ends", "delete"),
    ("title: *x", "1:8 yaml-alias", "alias", "quotes"),
    ("title: * x", "1:8 yaml-alias", "cannot begin with `*`", "quotes"),
    ("title: &x y", "1:8 yaml-alias", "anchor", "quotes"),
    ("title: !!python/object/apply:os.getcwd []", "1:8 yaml-alias", "tag", "quotes"),
    ("title: !x!y z", "1:8 yaml-alias", "tag", "quotes"),
    ("<<: {title: x}", "1:1 yaml-alias", "merge", "type the keys out"),
    ("[a]: b", "1:1 front-matter-syntax", "a key is a word", "quotes"),
    ('title: "\\0"', "1:8 front-matter-syntax", "no text can hold", "single quotes"),
    ('title: "\\uD800"', "1:8 front-matter-syntax", "no text can hold", "single quotes"),
    ('title: "\\U00110000"', "1:1 front-matter-syntax", "no character", "single quotes"),
]


@pytest.mark.parametrize(("text", "place", "message", "help"), MISTYPED)
def test_a_mistake_is_told_in_plain_words(text: str, place: str, message: str, help: str) -> None:
    source = Source("project.yaml", text)
    _, found = read_yaml(source, Span(0, len(text)))
    assert [f"{f.line}:{f.column} {f.slug}" for f in found] == [place]
    assert message in found[0].message
    assert help in found[0].help
    for jargon in ("scalar", "mapping", "token", "block end", "stream", "sequence"):
        assert jargon not in found[0].help
        assert jargon not in found[0].message.replace("a list or a mapping", "").replace(
            "another mapping", ""
        )


def test_what_stood_before_a_mistake_is_kept() -> None:
    mapping, found = read("title: x\nsources:\n  a: one\n  b: two: three\n")
    assert plain(mapping) == {"title": "x", "sources": {"a": "one", "b": "two"}}
    assert found == ["4:9 front-matter-syntax"]


def test_a_mistake_is_placed_in_the_whole_source() -> None:
    text = "---\ntitle: a: b\n---\n"
    _, found = read_yaml(Source("a.sheet.md", text), Span(4, 16))
    assert (found[0].line, found[0].column) == (2, 9)


@pytest.mark.parametrize(
    "text",
    [
        "a: &a [lol, lol]\n"
        + "".join(f"{b}: &{b} [*{a}, *{a}, *{a}]\n" for a, b in zip("abcdefgh", "bcdefghi", strict=True)),
        "a: " + "[" * 10_000,
        "{" * 10_000,
        "- " * 10_000,
        "? " * 10_000,
        "a: [" + "x," * 30_000 + "]",
        "title: " + "x" * 200_000,
    ],
    ids=["aliases that explode", "brackets", "braces", "dashes", "question marks", "many items", "long"],
)
def test_what_would_hang_ends_in_a_finding_soon(text: str) -> None:
    before = time.process_time()
    _, found = read(text)
    assert time.process_time() - before < 2
    assert {line.split()[1] for line in found} <= {"yaml-alias", "over-limit"}
    assert found
