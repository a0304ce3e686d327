"""`output/` holds what `calcsheets/` gives, byte for byte, and nothing else."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

import loadpath

ROOT = Path(__file__).parents[1]
COMMITTED = ROOT / "output"


def below(folder: Path) -> dict[str, bytes]:
    return {str(p.relative_to(folder)): p.read_bytes() for p in sorted(folder.rglob("*")) if p.is_file()}


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> dict[str, bytes]:
    """What `loadpath issue calcsheets --out output` writes, started in the project's folder."""
    out = tmp_path_factory.mktemp("made") / "output"
    done = subprocess.run(
        [sys.executable, "-m", "loadpath", "issue", "calcsheets", "--out", str(out)], cwd=ROOT,
        capture_output=True,
        env={**os.environ, "PYTHONPATH": str(Path(loadpath.__file__).parents[1])}, timeout=120, check=False,
    )  # fmt: skip
    assert done.returncode == 3, done.stderr.decode()
    assert b": error: " not in done.stderr, done.stderr.decode()
    return below(out)


def test_every_sheet_has_its_documents(made: dict[str, bytes]) -> None:
    stems = {p.name.removesuffix(".sheet.md") for p in (ROOT / "calcsheets").glob("*.sheet.md")}
    assert len(stems) >= 5
    for stem in stems:
        assert {f"{stem}.html", f"{stem}.md", f"{stem}.trace.json"} <= set(made)


def test_the_committed_output_is_what_the_sheets_give(made: dict[str, bytes]) -> None:
    committed = below(COMMITTED)
    assert sorted(committed) == sorted(made), "issue the demo again: loadpath issue calcsheets --out output"
    assert [name for name in made if committed[name] != made[name]] == []
