"""`loadpath audit`: findings and nothing else."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from cli_runs import DOUBTFUL, FAULTY, GOOD, files, run, write

from loadpath.findings import SLUGS


@pytest.fixture(autouse=True)
def in_an_empty_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def test_a_sheet_without_findings_says_nothing_and_writes_nothing() -> None:
    write({"rod.sheet.md": GOOD})
    result = run("audit", "rod.sheet.md")
    assert (result.exit_code, result.output) == (0, "")
    assert list(files(Path())) == ["rod.sheet.md"]


def test_findings_of_every_severity_in_order_of_place() -> None:
    write({"rod.sheet.md": DOUBTFUL.replace(", stability: it is pulled", "") + "    y = x + 2 s\n"})
    result = run("audit", "rod.sheet.md")
    assert result.exit_code == 1
    assert result.stdout == ""
    heads = [line for line in result.stderr.splitlines() if line.startswith("rod.sheet.md:")]
    assert [(line.split(": ")[0], line.split(": ")[1], line.rpartition("[")[2]) for line in heads] == [
        ("rod.sheet.md:1:1", "note", "no-criterion]"),
        ("rod.sheet.md:7:5", "warning", "no-note]"),
        ("rod.sheet.md:9:11", "error", "unit-mismatch]"),
    ]


def test_a_folder_and_standard_input_together() -> None:
    write({"yard/a.sheet.md": FAULTY, "yard/deep/b.sheet.md": DOUBTFUL})
    result = run("audit", "yard", "-", given=FAULTY)
    assert result.exit_code == 1
    for place in ("yard/a.sheet.md:9:11: error", "yard/deep/b.sheet.md:7:5: warning", "-:9:11: error"):
        assert place in result.stderr


def test_json_goes_to_standard_output() -> None:
    write({"yard/a.sheet.md": FAULTY})
    result = run("audit", "yard", "--format", "json")
    assert result.exit_code == 1
    assert result.stderr == ""
    (found,) = json.loads(result.stdout)
    assert (found["file"], found["line"], found["column"]) == ("yard/a.sheet.md", 9, 11)
    assert found["severity"] == SLUGS[found["slug"]][0]


def test_a_file_that_is_no_sheet_is_a_finding() -> None:
    Path("rod.sheet.md").write_bytes(b"---\ntitle: \xff\n---\n")
    result = run("audit", "rod.sheet.md")
    assert result.exit_code == 1
    assert "[unreadable-file]" in result.stderr


def test_a_broken_link_is_wrong_use() -> None:
    Path("rod.sheet.md").symlink_to("nowhere")
    result = run("audit", "rod.sheet.md")
    assert result.exit_code == 2
    assert "there is no sheet or folder rod.sheet.md" in result.stderr


def test_a_fault_of_the_engine_is_never_silent(monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(*_: object) -> object:
        raise ZeroDivisionError("deep inside")

    write({"rod.sheet.md": GOOD})
    monkeypatch.setattr("loadpath.pipeline.audited", broken)
    result = run("audit", "rod.sheet.md")
    assert result.exit_code == 1
    assert "[engine-fault]" in result.stderr and "ZeroDivisionError: deep inside" in result.stderr
    assert "Traceback" not in result.output
