"""Front matter: the keys of a sheet, defaults of the project, and what is said of a faulty value."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st

from loadpath.findings import Finding
from loadpath.project import MemoryWorld
from loadpath.sheet import Assumption, Confirmed, FrontMatter, Revision
from loadpath.sheet.front_matter import KEYS, read_front_matter
from loadpath.text import Source


def read(yaml: str, project: str | None = None) -> tuple[FrontMatter, list[Finding]]:
    files = {} if project is None else {"project.yaml": project.encode()}
    source = Source("a.sheet.md", f"---\n{yaml}\n---\n")
    front, _, found = read_front_matter(source, MemoryWorld(files))
    return front, list(found)


def good(yaml: str, project: str | None = None) -> FrontMatter:
    front, found = read("title: Hoist beam\n" + yaml, project)
    assert found == []
    return front


def wrong(yaml: str) -> list[str]:
    """`line:column slug`, where line 1 is the first one given here."""
    _, found = read("title: Hoist beam\n" + yaml)
    return [f"{f.line - 2}:{f.column} {f.slug}" for f in found]


def mend(yaml: str) -> str:
    _, found = read("title: Hoist beam\n" + yaml)
    return found[0].help


# --- texts as typed --------------------------------------------------------------------------------------


def test_scalars_are_text_as_typed() -> None:
    front = good("revision: 1.10\nnumber: 0012\nclient: yes\nowner: ~\nsubtitle: 2026-11-20\nproject: 1e3")
    assert (front.revision, front.number, front.client) == ("1.10", "0012", "yes")
    assert (front.owner, front.subtitle, front.project) == ("~", "2026-11-20", "1e3")


def test_a_comment_is_left_out_and_a_text_of_several_lines_is_one_line() -> None:
    front = good("owner: Tern Slip   # the yard\nsubtitle: >\n  bending\n  and shear\n")
    assert (front.owner, front.subtitle) == ("Tern Slip", "bending and shear")


def test_a_number_sign_that_would_cut_a_text_off_is_said() -> None:
    assert wrong("owner: Slip #2 of the yard") == ["1:13 front-matter-value"]
    assert good("owner: 'Slip #2 of the yard'").owner == "Slip #2 of the yard"


def test_commas_in_a_text_between_braces_are_text() -> None:
    front = good("not_applicable: {stability: the flange is held by the deck, SB-101, and more}")
    assert front.not_applicable == (("stability", "the flange is held by the deck, SB-101, and more"),)


def test_an_empty_sheet_of_keys_has_the_defaults() -> None:
    assert good(
        "client:\ndate:\nstatus:\ncodes:\nrevisions:\nunits:\ndigits:\npage:\nformat:"
    ) == FrontMatter(title="Hoist beam")


# --- keys ------------------------------------------------------------------------------------------------


def test_an_unknown_key_names_the_nearest() -> None:
    assert wrong("revison: B") == ["1:1 unknown-key"]
    assert mend("revison: B") == "did you mean `revision`?"
    assert mend("created-by: T.S.") == "did you mean `created_by`?"
    assert "did you mean" not in mend("colour: red")


def test_a_misspelt_key_is_taken_for_the_one_it_is_near_to() -> None:
    assumed = "assumptions: {A1: {text: light, confrim: true}}"
    front, _ = read("titel: Hoist beam\nsource: {hoist: HD-7}\n" + assumed)
    assert (front.title, [s.key for s in front.sources]) == ("Hoist beam", ["hoist"])
    assert front.assumptions[0].confirm
    assert read("not_applicable: {strenght: none}")[0].not_applicable == (("strength", "none"),)
    assert read("title: one\ntitel: two")[0].title == "one"


def test_keys_that_could_not_be_read_are_known_to_be_so() -> None:
    assert read("title: one\nsources: HD-7\ncodes: EN 1990\ndigits: 4")[0].unread == {"sources", "codes"}
    assert {"sources", "codes"} <= read("title: one\nnumber: *x\nsources: {a: b}")[0].unread
    assert "title" not in read("title: one\nnumber: *x\nsources: {a: b}")[0].unread
    assert read("title: one\nsources: {a: b}\nstatus: for review")[0].unread == frozenset()


def test_a_mistyped_title_is_one_finding_and_a_missing_one_another() -> None:
    assert [f.slug for f in read("titel: Hoist beam")[1]] == ["unknown-key"]
    assert [f.slug for f in read("number: SB-104")[1]] == ["missing-title"]
    assert [f.slug for f in read("title: ''")[1]] == ["missing-title"]


def test_a_key_given_twice_shows_both_places() -> None:
    _, found = read("title: one\nnumber: 1\ntitle: two")
    assert [(f.slug, f.line) for f in found] == [("duplicate-key", 4)]
    assert found[0].remarks[0].span is not None
    assert found[0].source.line_number(found[0].remarks[0].span.start) == 2


def test_every_key_of_the_language_is_known() -> None:
    """source: the page of the sheet language, section 1."""
    keys = """format title subtitle number revision owner project client client_document date language status
        created_by reviewed_by approved_by revisions objective method conclusion codes drawings not_applicable
        units digits page sources assumptions"""
    assert set(KEYS) == set(keys.split())


# --- values ----------------------------------------------------------------------------------------------


def test_dates() -> None:
    assert good("date: 2024-02-29").date == "2024-02-29"
    for date in ("2026-02-29", "20.11.2026", "2026-1-2", "２０２６-11-20", "2026-11-20T10:00"):
        assert wrong(f"date: {date}") == ["1:7 front-matter-value"], date


def test_statuses() -> None:
    for status in ("preliminary", "for review", "for approval", "for construction", "as built", '""'):
        assert good(f"status: {status}").status == status.strip('"')
    assert good("status: superseded by SB-131").status == "superseded by SB-131"
    assert wrong("status: superseded by") == ["1:9 front-matter-value"]
    assert mend("status: For Review") == "did you mean `for review`?"


def test_digits_page_language_and_format() -> None:
    front = good("digits: 12\npage: Letter\nlanguage: en-GB\nformat: 1")
    assert (front.digits, front.page, front.language, front.format) == (12, "Letter", "en-GB", 1)
    for line in (
        "digits: 1",
        "digits: 13",
        "digits: four",
        "digits: 4.0",
        "page: A3",
        "language: 'en\"'",
        "format: 2",
    ):
        assert wrong(line)[0].endswith("front-matter-value"), line
    assert read("title: x\ndigits: 1")[0].digits == FrontMatter().digits


def test_units() -> None:
    assert good("units: US machine").units == "US machine"
    front = good("units: {system: SI, length: m, pressure: N/mm^2}")
    assert (front.units, front.unit_overrides) == ("SI", (("length", "m"), ("stress", "N/mm^2")))
    assert mend("units: US machines") == "did you mean `US machine`?"
    assert wrong("units: {lenght: m}") == ["1:9 unknown-key"]
    assert wrong("units: {stress: MPa, pressure: bar}") == ["1:22 duplicate-key"]
    assert wrong("units: {length: }") == ["1:9 front-matter-value"]


def test_kinds_that_are_not_applicable() -> None:
    assert wrong("not_applicable: {limit: none}") == ["1:18 front-matter-value"]
    assert wrong("not_applicable: {strenght: none}") == ["1:18 unknown-key"]
    assert wrong("not_applicable: {stability: }") == ["1:18 front-matter-value"]
    assert wrong("not_applicable: stability") == ["1:17 front-matter-value"]


def test_lists() -> None:
    front = good("codes: [EN 1993-1-1:2005 with its national annex, EN 1990]\ndrawings:\n- SB-1\n- SB-2\n")
    assert front.codes == ("EN 1993-1-1:2005 with its national annex", "EN 1990")
    assert front.drawings == ("SB-1", "SB-2")
    assert wrong("codes: EN 1990") == ["1:8 front-matter-value"]
    assert wrong("codes:\n  - EN 1993: 2005") == ["2:5 front-matter-value"]


def test_revisions() -> None:
    front = good(
        "revisions:\n  A: {date: 2026-11-01, by: T.S., change: first issue}\n  B: {change: wider flange}"
    )
    assert front.revisions == (
        Revision("A", "2026-11-01", "T.S.", "first issue"),
        Revision("B", change="wider flange"),
    )
    assert wrong("revisions: {A: {by: T.S., dat: 2026-11-01}}") == ["1:27 unknown-key"]
    assert wrong("revisions: {A: first issue}") == ["1:16 front-matter-value"]


def test_sources() -> None:
    front = good(
        "sources:\n  hoist: Data sheet HD-7, table 2\n  ec3: {text: EN 1993-1-1, 6.2, file: ec3.pdf}"
    )
    assert [(s.key, s.text, s.file) for s in front.sources] == [
        ("hoist", "Data sheet HD-7, table 2", ""),
        ("ec3", "EN 1993-1-1, 6.2", "ec3.pdf"),
    ]
    for entry in front.sources:
        assert entry.source is not None
        assert entry.source.cut(entry.span) == entry.key


def test_faulty_sources() -> None:
    assert wrong("sources: {a b: x}") == ["1:11 front-matter-value"]
    assert wrong("sources: {a: }") == ["1:11 front-matter-value"]
    assert wrong("sources: {a: {file: x.pdf}}") == ["1:11 front-matter-value"]
    for path in ("/etc/hostname", "'c:\\x'", "https://tern.example/x.pdf"):
        assert wrong(f"sources: {{a: {{text: x, file: {path}}}}}") == ["1:30 front-matter-value"], path


def test_assumptions() -> None:
    front = good(
        "assumptions:\n"
        "  A1: {text: The trolley weighs 1.8 kN, confirm: true}\n"
        "  A2: {text: The deck holds, confirmed: {by: T.S., on: 2026-11-20, document: letter 12}}\n"
        "  A3: the slip is dry\n"
        "  A4: {text: no wind, confirm: false}\n"
    )
    assert front.assumptions == (
        Assumption("A1", "The trolley weighs 1.8 kN", confirm=True),
        Assumption("A2", "The deck holds", confirmed=Confirmed("T.S.", "2026-11-20", "letter 12")),
        Assumption("A3", "the slip is dry"),
        Assumption("A4", "no wind"),
    )


def test_an_assumption_that_is_not_plainly_confirmed_is_still_to_be_confirmed() -> None:
    for parts in (
        "confirm: yes",
        "confirmed: {by: T.S.}",
        "confirmed: {by: T.S., on: soon, document: letter 12}",
        "confirmed: T.S.",
        "confirm: true, confirmed: {by: T.S., on: 2026-11-20, document: letter 12}",
    ):
        front, found = read(f"title: x\nassumptions: {{A: {{text: dry, {parts}}}}}")
        assert [f.slug for f in found] == ["front-matter-value"], parts
        assert front.assumptions[0].confirm and front.assumptions[0].confirmed is None, parts


def test_one_key_for_a_source_and_an_assumption() -> None:
    assert wrong("assumptions: {A: dry}\nsources: {A: sheet}") == ["1:15 duplicate-key"]


# --- values in words -------------------------------------------------------------------------------------


def test_values_in_words_are_found_in_every_style_of_yaml() -> None:
    for yaml in (
        "conclusion: it carries {P_Ed [kN]}, see {b.I_y}",
        "conclusion: 'it''s {P_Ed [kN]}, see {b.I_y}'",
        'conclusion: "it \\"carries\\" {P_Ed [kN]}, see {b.I_y}"',
        "conclusion: >\n  it carries\n  {P_Ed [kN]},\n\n  see {b.I_y}",
        "conclusion: it carries\n  {P_Ed\n  [kN]}, see {b.I_y}",
        "conclusion: |-  # {note}\n  it carries\n  {P_Ed [kN]}, see {b.I_y}",
    ):
        values = good(yaml).conclusion.values
        assert [(v.name, v.unit) for v in values] == [("P_Ed", "kN"), ("b.I_y", "")], yaml
        cut = values[0].source.cut
        assert [cut(v.name_span) for v in values] == ["P_Ed", "b.I_y"], yaml
        assert (cut(values[0].unit_span), cut(values[1].span)) == ("kN", "{b.I_y}"), yaml


def test_braces_in_words_that_hold_no_name() -> None:
    assert wrong("objective: show that {a+b} holds") == ["1:22 bad-syntax"]
    assert good("objective: the set \\{a, b}").objective.values == ()
    assert mend("conclusion: {sigma}") == "put the whole text in quotes"


# --- the project's defaults ------------------------------------------------------------------------------


def test_the_sheet_wins_over_the_project() -> None:
    front = good(
        "owner: Slip\nclient:\nproject: ''", "owner: Yard\nclient: Harbour\nproject: Renewal\nnumber: 7"
    )
    assert (front.owner, front.client, front.project, front.number) == ("Slip", "Harbour", "", "7")


def test_sources_and_assumptions_are_joined() -> None:
    project = "sources: {ec0: EN 1990, ec3: EN 1993}\nassumptions: {A1: dry}"
    front = good("sources: {ec3: EN 1993-1-1, own: sketch}", project)
    assert [(s.key, s.text) for s in front.sources] == [
        ("ec0", "EN 1990"),
        ("ec3", "EN 1993-1-1"),
        ("own", "sketch"),
    ]
    assert [a.key for a in front.assumptions] == ["A1"]
    assert [s.source.path for s in front.sources if s.source] == ["project.yaml", "a.sheet.md", "a.sheet.md"]


def test_units_without_a_system_go_on_those_of_the_project() -> None:
    project = "units: {system: US, stress: psi}"
    assert good("units: {length: ft}", project).unit_overrides == (("stress", "psi"), ("length", "ft"))
    assert good("units: {length: ft}", project).units == "US"
    assert good("units: SI", project).unit_overrides == ()


def test_a_title_may_come_from_the_project() -> None:
    assert read("number: 1", "title: Slip renewal")[1] == []


def test_a_finding_in_a_project_file_points_there() -> None:
    _, found = read("title: x", "owner: yard\nownr: x\nsources: {a: b, a: c}")
    assert [(f.source.path, f.line, f.slug) for f in found] == [
        ("project.yaml", 3, "duplicate-key"),
        ("project.yaml", 2, "unknown-key"),
    ]


def test_the_nearer_of_two_project_files_wins() -> None:
    files = {"project.yaml": b"owner: outer\nclient: outer", "slip/project.yaml": b"owner: inner"}
    world = MemoryWorld(files, "slip/a.sheet.md")
    front, _, found = read_front_matter(Source("a.sheet.md", "---\ntitle: x\n---\n"), world)
    assert (front.owner, front.client, found) == ("inner", "outer", ())


def test_a_project_file_that_is_no_text_is_one_finding() -> None:
    world = MemoryWorld({"project.yaml": b"\xff\xfe"})
    front, _, found = read_front_matter(Source("a.sheet.md", "---\ntitle: x\n---\n"), world)
    assert (front.title, [f.slug for f in found]) == ("x", ["unreadable-file"])


# --- where it begins and ends ----------------------------------------------------------------------------


def start(text: str) -> tuple[str, list[str]]:
    """What is left for the body, and the slugs found."""
    source = Source("a.sheet.md", text)
    _, offset, found = read_front_matter(source, MemoryWorld())
    return text[offset:], [f.slug for f in found]


def test_the_body_begins_behind_the_second_line() -> None:
    assert start("---\ntitle: x\n---\n# Loads\n") == ("# Loads\n", [])
    assert start("--- \ntitle: x\n---\t\n") == ("", [])
    assert start("---\ntitle: x\n---") == ("", [])
    assert start("---\ntitle: x\nobjective: |\n  a\n  ---\n---\ntext") == ("text", [])


def test_front_matter_that_is_missing_or_not_closed_is_one_finding() -> None:
    assert start("# Loads\n") == ("# Loads\n", ["no-front-matter"])
    assert start("") == ("", ["no-front-matter"])
    assert start("\n---\ntitle: x\n---\ntext") == ("text", ["no-front-matter"])
    assert start("---\ntitle: x\n\n# Loads\n") == ("\n# Loads\n", ["no-front-matter"])
    assert start("---\ntitle: x\n") == ("", ["no-front-matter"])


# --- any text --------------------------------------------------------------------------------------------

PARTS = st.one_of(
    st.sampled_from(
        ["title: x\n", "objective: ", "conclusion: >\n  ", "sources:\n", "  a: b\n", "units: ", "revisions: "]
    ),
    st.sampled_from(
        [
            "{",
            "}",
            "[",
            "]",
            "{x}",
            "{x [m]}",
            "- ",
            ": ",
            ", ",
            "'",
            '"',
            "\\",
            "\\{",
            "#",
            " #2",
            "confirm: true",
        ]
    ),
    st.sampled_from(
        [
            "&a ",
            "*a",
            "!!python/name:os ",
            "<<: ",
            "? ",
            "|\n",
            ">\n",
            "\n",
            " ",
            "\t",
            "%",
            "@",
            "`",
            "...\n",
        ]
    ),
    st.sampled_from(["\u2028", "\x85", "é", "σ"]),
)


@settings(max_examples=150, deadline=2000)
@given(st.lists(PARTS, max_size=25).map("".join) | st.text(max_size=80))
def test_any_text_gives_front_matter_and_findings_with_places(yaml: str) -> None:
    front, found = read(yaml, yaml)
    assert isinstance(front, FrontMatter)
    for f in found:
        assert f.span is None or 0 <= f.span.start <= f.span.end <= len(f.source.text)
    for words in (front.objective, front.conclusion):
        for value in words.values:
            assert value.source.cut(value.span).startswith("{")
