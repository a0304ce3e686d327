"""`loadpath issue`: documents where they were asked for, findings where editors look, honest exit codes."""

from __future__ import annotations

import json
import os
import pty
import re
import subprocess
import sys
from pathlib import Path

import pytest
from cli_runs import DOUBTFUL, FAILED, FAULTY, FAULTY_AND_FAILED, GOOD, NOT_SHOWN, files, process, run, write

import loadpath

FORM = re.compile(
    r"^(?P<file>[^:\n]+):(?P<line>\d+):(?P<column>\d+): "
    r"(?P<severity>error|warning|note): (?P<message>.+) \[(?P<slug>[a-z-]+)\]$"
)


@pytest.fixture(autouse=True)
def in_an_empty_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    return tmp_path


# --- documents ----------------------------------------------------------------------------------------------


def test_one_sheet_gives_its_three_documents() -> None:
    write({"rod.sheet.md": GOOD})
    result = run("issue", "rod.sheet.md")
    assert result.exit_code == 0
    assert sorted(files(Path("output"))) == ["rod.html", "rod.md", "rod.trace.json"]
    assert result.stdout.splitlines() == [
        "output/rod.html", "output/rod.md", "output/rod.trace.json",
        "rod.sheet.md: The one criterion is satisfied",
    ]  # fmt: skip
    assert result.stderr == ""


@pytest.mark.parametrize(
    ("to", "names"),
    [
        ("html", ["rod.html"]),
        ("md", ["rod.md"]),
        ("json", ["rod.trace.json"]),
        ("json, html", ["rod.html", "rod.trace.json"]),
        ("md,md", ["rod.md"]),
    ],
)
def test_only_the_formats_asked_for(to: str, names: list[str]) -> None:
    write({"rod.sheet.md": GOOD})
    assert run("issue", "rod.sheet.md", "--to", to, "--out", "made/here").exit_code == 0
    assert sorted(files(Path("made/here"))) == names


def test_several_sheets_and_a_folder_with_its_folders_kept() -> None:
    write(
        {
            "a.sheet.md": GOOD,
            "yard/b.sheet.md": GOOD,
            "yard/deep/a.sheet.md": GOOD,
            "yard/output/old.sheet.md": GOOD,
            "yard/no.md": GOOD,
        }
    )
    result = run("issue", "yard", "a.sheet.md", "--to", "md", "--out", "out")
    assert result.exit_code == 0
    assert sorted(files(Path("out"))) == ["a.md", "b.md", "deep/a.md"]


def test_a_sheet_named_twice_is_issued_once() -> None:
    write({"yard/a.sheet.md": GOOD})
    result = run("issue", "yard", "yard/a.sheet.md", "--to", "md")
    assert result.exit_code == 0
    assert result.stdout.count("output/a.md") == 1


def test_standard_input() -> None:
    result = run("issue", "-", "--to", "json", given=GOOD)
    assert result.exit_code == 0
    assert list(files(Path("output"))) == ["stdin.trace.json"]
    assert json.loads(Path("output/stdin.trace.json").read_text())["sheet"]["title"] == "Good"


def test_standard_input_sees_no_files() -> None:
    write({"project.yaml": "owner: Yard\n"})
    Path("a.png").write_bytes(b"\x89PNG\r\n\x1a\n")
    result = run("issue", "-", "--to", "json", given=GOOD + "\n![A](a.png)\n")
    assert result.exit_code == 1
    assert "[image-path]" in result.stderr


@pytest.mark.parametrize(
    ("given", "says"), [(b"\xff\xfe", "UTF-8"), (b"x" * 1_000_001, "1000 kB")], ids=["not text", "too long"]
)
def test_standard_input_that_is_no_sheet(given: bytes, says: str) -> None:
    result = run("issue", "-", given=given)
    assert result.exit_code == 2
    assert says in result.stderr
    assert not Path("output").exists()


def test_several_jobs_give_the_same_bytes() -> None:
    write(
        {
            f"yard/{n}.sheet.md": text
            for n, text in zip("abcd", (GOOD, FAILED, FAULTY, NOT_SHOWN), strict=True)
        }
    )
    one, two = run("issue", "yard", "--out", "one"), run("issue", "yard", "--out", "two", "--jobs", "2")
    assert (one.exit_code, two.exit_code) == (1, 1)
    assert files(Path("one")) == files(Path("two"))
    assert one.stdout.replace("one/", "two/") == two.stdout
    assert one.stderr == two.stderr


def test_a_sheet_with_errors_still_gives_its_documents() -> None:
    write({"rod.sheet.md": FAULTY})
    assert run("issue", "rod.sheet.md").exit_code == 1
    made = files(Path("output"))
    assert sorted(made) == ["rod.html", "rod.md", "rod.trace.json"]
    assert b"Not for use: 1 error" in made["rod.html"] and b"Not for use: 1 error" in made["rod.md"]


def test_images_are_written_beside_the_markdown() -> None:
    write(
        {
            "rod.sheet.md": GOOD + "\n![A](a.svg)\n",
            "a.svg": '<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 9 9"/>',
        }
    )
    assert run("issue", "rod.sheet.md", "--to", "md").exit_code == 0
    assert sorted(files(Path("output"))) == ["rod.figure-1.svg", "rod.md"]


# --- exit codes ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("sheets", "code"),
    [
        ([GOOD], 0),
        ([DOUBTFUL], 0),
        ([FAILED], 3),
        ([NOT_SHOWN], 3),
        ([FAULTY], 1),
        ([FAULTY_AND_FAILED], 1),
        ([GOOD, FAILED], 3),
        ([FAILED, FAULTY, GOOD], 1),
        ([GOOD, GOOD], 0),
    ],
)
@pytest.mark.parametrize("verb", ["issue", "audit"])
def test_exit_codes(verb: str, sheets: list[str], code: int) -> None:
    """1 outranks 3, and the worst of several sheets counts; documents are written all the same."""
    names = {f"{n}.sheet.md": text for n, text in enumerate(sheets)}
    write(names)
    assert run(verb, *names).exit_code == code
    if verb == "issue":
        assert len(files(Path("output"))) == 3 * len(sheets)


@pytest.mark.parametrize(
    ("arguments", "says"),
    [
        ([], "Missing argument"),
        (["none.sheet.md"], "there is no sheet or folder none.sheet.md"),
        (["empty"], "there is no sheet (*.sheet.md) in empty"),
        (["rod.sheet.md", "--to", "pdf"], "--to takes html, md, json, by commas; pdf is none of them"),
        (["rod.sheet.md", "--to", ","], "nothing is none of them"),
        (["rod.sheet.md", "--out", "taken"], "taken"),
        (["rod.sheet.md", "--jobs", "0"], "0"),
        (["rod.sheet.md", "--format", "xml"], "xml"),
        (["rod.sheet.md", "--fast"], "--fast"),
        (
            ["a/rod.sheet.md", "b/rod.sheet.md"],
            "b/rod.sheet.md and a/rod.sheet.md would both write output/rod.html",
        ),
        (["notes.md", "--out", "."], "notes.md is a sheet, and would be written over"),
    ],
)
def test_wrong_use(arguments: list[str], says: str) -> None:
    write(
        {
            "rod.sheet.md": GOOD,
            "a/rod.sheet.md": GOOD,
            "b/rod.sheet.md": FAILED,
            "taken": "a file",
            "notes.md": GOOD,
        }
    )
    Path("empty").mkdir()
    before = files(Path())
    result = run("issue", *arguments)
    assert result.exit_code == 2
    assert says in result.stderr
    assert files(Path()) == before


# --- writing ------------------------------------------------------------------------------------------------


def test_a_folder_that_cannot_be_written() -> None:
    write({"rod.sheet.md": GOOD, "out/rod.html/in-the-way": "a folder where a file should be"})
    result = run("issue", "rod.sheet.md", "--out", "out")
    assert result.exit_code == 2
    assert "cannot write" in result.stderr and "rod.html" in result.stderr
    assert "Traceback" not in result.output
    assert not [name for name in files(Path("out")) if name.endswith(".part")]


@pytest.mark.parametrize("fault", [OSError("the disk is full"), KeyboardInterrupt()])
def test_a_write_that_breaks_off_leaves_the_old_file_whole(
    fault: BaseException, monkeypatch: pytest.MonkeyPatch
) -> None:
    write({"rod.sheet.md": GOOD})
    assert run("issue", "rod.sheet.md").exit_code == 0
    before = files(Path("output"))
    write({"rod.sheet.md": FAILED})
    monkeypatch.setattr("os.fsync", lambda _: (_ for _ in ()).throw(fault))
    result = run("issue", "rod.sheet.md")
    assert result.exit_code == (2 if isinstance(fault, OSError) else 1)
    assert files(Path("output")) == before


def test_documents_replace_those_of_before() -> None:
    write({"rod.sheet.md": GOOD})
    run("issue", "rod.sheet.md")
    first = files(Path("output"))
    write({"rod.sheet.md": FAILED})
    assert run("issue", "rod.sheet.md").exit_code == 3
    second = files(Path("output"))
    assert set(first) == set(second)
    assert all(first[name] != second[name] for name in first)


# --- findings -----------------------------------------------------------------------------------------------


def test_findings_go_to_standard_error_in_the_form_that_editors_read() -> None:
    write({"yard/rod.sheet.md": FAULTY + "    z = 2*w\n"})
    result = run("issue", "yard/rod.sheet.md")
    heads = [FORM.match(line) for line in result.stderr.splitlines() if FORM.match(line)]
    found = [(m["file"], int(m["line"]), int(m["column"]), m["severity"], m["slug"]) for m in heads if m]
    assert found == [
        ("yard/rod.sheet.md", 9, 11, "error", "unit-mismatch"),
        ("yard/rod.sheet.md", 10, 11, "error", "unknown-name"),
    ]  # fmt: skip
    others = [line for line in result.stderr.splitlines() if not FORM.match(line)]
    assert all(re.match(r" {3,}", line) for line in others)
    assert "    9 |     y = x + 2 s" in others
    assert "      |           ^" in others
    assert "rod.sheet.md:" not in result.stdout.replace("yard/rod.sheet.md: ", "")


def test_notes_are_left_to_the_audit() -> None:
    write({"rod.sheet.md": GOOD.replace("stability: it is pulled", "")})
    assert "note" not in run("issue", "rod.sheet.md").stderr
    assert ": note: " in run("audit", "rod.sheet.md").stderr


def test_findings_as_json() -> None:
    write({"a.sheet.md": FAULTY, "b.sheet.md": DOUBTFUL})
    result = run("issue", "a.sheet.md", "b.sheet.md", "--format", "json")
    assert result.exit_code == 1
    assert result.stderr == ""
    found = json.loads(result.stdout)
    assert [(f["file"], f["line"], f["column"], f["severity"], f["slug"]) for f in found] == [
        ("a.sheet.md", 9, 11, "error", "unit-mismatch"), ("b.sheet.md", 7, 5, "warning", "no-note"),
    ]  # fmt: skip
    assert {"message", "help"} <= set(found[0])


def test_no_finding_is_an_empty_array() -> None:
    write({"rod.sheet.md": GOOD})
    assert json.loads(run("issue", "rod.sheet.md", "--format", "json").stdout) == []


def test_a_name_that_moves_the_cursor_is_shown_as_marks() -> None:
    write({"rod\x1b[31m.sheet.md": FAULTY})
    result = run("issue", "rod\x1b[31m.sheet.md")
    assert "\x1b" not in result.stderr
    assert "rod\ufffd[31m.sheet.md:9:11: error:" in result.stderr


# --- on a terminal ------------------------------------------------------------------------------------------


def on_a_terminal(*arguments: str, **environment: str) -> str:
    """What the program writes to standard error where that is a terminal."""
    master, slave = pty.openpty()
    engine = str(Path(loadpath.__file__).parents[1])
    base = {k: v for k, v in os.environ.items() if k not in ("NO_COLOR", "FORCE_COLOR")}
    with subprocess.Popen(
        [sys.executable, "-m", "loadpath", *arguments], stdout=subprocess.DEVNULL, stderr=slave,
        env={**base, "PYTHONPATH": engine, "TERM": "xterm", **environment},
    ) as program:  # fmt: skip
        os.close(slave)
        shown = b""
        while True:
            try:
                part = os.read(master, 4096)
            except OSError:
                break
            if not part:
                break
            shown += part
        program.wait(60)
    os.close(master)
    return shown.decode()


def test_colour_only_on_a_terminal_and_never_with_no_color(tmp_path: Path) -> None:
    write({"rod.sheet.md": FAULTY})
    assert "\x1b[1merror\x1b[0m" in on_a_terminal("audit", "rod.sheet.md")
    assert "\x1b" not in on_a_terminal("audit", "rod.sheet.md", NO_COLOR="1")
    piped = process("audit", "rod.sheet.md", folder=tmp_path)
    assert b"rod.sheet.md:9:11: error: " in piped.stderr
    assert b"\x1b" not in piped.stderr + piped.stdout


# --- as a program -------------------------------------------------------------------------------------------


def test_the_program_from_outside(tmp_path: Path) -> None:
    write({"rod.sheet.md": FAILED})
    done = process("issue", "rod.sheet.md", "--to", "md", folder=tmp_path)
    assert done.returncode == 3
    assert done.stdout.decode().splitlines() == [
        "output/rod.md",
        "rod.sheet.md: 1 of 1 criterion not satisfied",
    ]
    assert done.stderr == b""


def test_help_and_version() -> None:
    helped = run("--help").stdout
    for word in ("issue", "audit", "guide", "Exit codes: 0 done, 1", "competent person"):
        assert word in helped
    assert run("--version").stdout.strip() == f"loadpath, version {loadpath.__version__}"
    assert run("isue").exit_code == 2
