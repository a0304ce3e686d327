"""README: its commands run, its sheet is a sheet, its links lead somewhere."""

from __future__ import annotations

import re
import shlex
import shutil
import subprocess
import tomllib
from pathlib import Path

import pytest
from click.testing import CliRunner

import loadpath
from loadpath.cli import main
from loadpath.pipeline import audited, exit_code, read_input

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
PROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))


def blocks(info: str) -> list[str]:
    return re.findall(rf"^```{info}\n(.*?)^```$", README, flags=re.MULTILINE | re.DOTALL)


COMMANDS = [line for block in blocks("sh") for line in block.splitlines()]
LOADPATH = [
    part.strip()
    for line in COMMANDS
    for part in line.split("&&")
    if part.strip().startswith(".venv/bin/loadpath")
]


# --- what it begins with ------------------------------------------------------------------------------------


def test_a_paragraph_that_states_the_job_then_two_commands() -> None:
    parts = README.split("\n\n")
    assert parts[0] == "# loadpath"
    assert not parts[1].startswith(("#", "`", "-", "*", ">")) and "document" in parts[1]
    first, second = blocks("sh")[:2]
    assert first.count("\n") == second.count("\n") == 1
    assert README.index(first) < README.index("```markdown")


def test_the_two_commands_do_all_that_a_fresh_clone_needs() -> None:
    set_up, test = (shlex.split(line) for line in COMMANDS[:2])
    assert set_up[:4] == ["python3", "-m", "venv", ".venv"]
    assert ".venv/bin/pip" in set_up and set_up[set_up.index("-e") + 1] == "."
    assert set_up[-3:-1] == [".venv/bin/loadpath", "issue"]
    assert (ROOT / set_up[-1]).is_file()
    assert test[test.index("-c") + 1] == "tests/constraints.txt"
    assert test[test.index("-e") + 1] == ".[test]"
    assert test[-3:] == [".venv/bin/python", "-m", "pytest"]


def test_every_package_is_pinned_for_the_tests() -> None:
    def name(text: str) -> str:
        return re.split(r"[<>=~\[; ]", text)[0].lower().replace("_", "-")

    pins = [
        line
        for line in (ROOT / "tests" / "constraints.txt").read_text(encoding="utf-8").splitlines()
        if line[:1] not in ("", "#")
    ]
    assert all("==" in pin for pin in pins)
    declared = PROJECT["project"]["dependencies"] + PROJECT["project"]["optional-dependencies"]["test"]
    assert {name(d) for d in declared} <= {name(pin) for pin in pins}


def test_ci_runs_the_same_two_commands() -> None:
    script = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    found = re.search(r"< <\((awk .*README\.md.*)\)$", script, flags=re.MULTILINE)
    assert found, "the line of .ci/run that takes the commands from README"
    read = subprocess.run(
        ["bash", "-c", found.group(1)], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert read.stdout.splitlines() == COMMANDS[:2]


# --- its commands -------------------------------------------------------------------------------------------


@pytest.mark.parametrize("line", LOADPATH)
def test_a_command_runs_in_a_copy_of_the_project(
    line: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Those that install packages are run by CI from a clean clone; the program itself is run here."""
    shutil.copytree(ROOT / "calcsheets", tmp_path / "calcsheets")
    monkeypatch.chdir(tmp_path)
    command, _, comment = line.partition("#")
    expected = int(comment.strip().removeprefix("exit code ")) if comment else 0
    result = CliRunner().invoke(main, shlex.split(command)[1:])
    assert result.exit_code == expected, result.output
    if " issue " in command:
        assert sorted(p.suffix for p in (tmp_path / "output").iterdir() if "figure" not in p.name) == [
            ".html",
            ".json",
            ".md",
        ]


def test_there_are_commands_to_run() -> None:
    assert len(LOADPATH) >= 2
    assert all(line.startswith((".venv/bin/", "python3 -m venv")) for line in COMMANDS)


# --- its sheet ----------------------------------------------------------------------------------------------


def test_the_sheet_is_short_and_without_a_finding_that_counts() -> None:
    sheet, _ = blocks("markdown")
    assert len(sheet.splitlines()) <= 16
    trace = audited(read_input("-", sheet))
    assert [f for f in trace.findings if f.severity != "note"] == []
    assert exit_code(trace) == 0
    assert len(trace.criteria) == 1


def test_the_lines_of_algebra_are_worked() -> None:
    """The deflection of a propped cantilever.

    source: handbook tables, w*L^4/(185*E*I) (from memory); the 185 is rounded to a whole number.
    """
    _, lines = blocks("markdown")
    head = "---\ntitle: Algebra\nsources: {plan: a, ec3: b, profile: c}\n---\n\n"
    trace = audited(read_input("-", head + lines))
    assert [f for f in trace.findings if f.severity != "note"] == []
    assert trace["v_max"].si == pytest.approx(12e3 * 4**4 / (185 * 210e9 * 3892e-8), rel=0.5 / 185)


# --- its links ----------------------------------------------------------------------------------------------


def test_links_and_pictures_are_there() -> None:
    links = re.findall(r"\]\(([^)#]+)\)", README)
    assert links
    for link in links:
        assert not link.startswith("/")
        assert (ROOT / link).exists(), link
    pictures = re.findall(r"!\[([^\]]+)\]\(([^)]+)\)", README)
    assert pictures and all(len(alt) > 20 for alt, _ in pictures)
    for _, path in pictures:
        assert (ROOT / path).read_bytes().startswith(b"\x89PNG")


def test_what_it_says_of_python_is_there() -> None:
    for name in re.findall(r"`loadpath\.(\w+)\(", README):
        assert callable(getattr(loadpath, name))


def test_the_caution_stands_in_it() -> None:
    assert "checked by a competent person" in README
