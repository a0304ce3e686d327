"""The files of a project: what a sheet can read, and what is refused."""

from __future__ import annotations

import os
import stat
from collections.abc import Callable
from pathlib import Path, PurePosixPath

import pytest

from loadpath.project import (
    LARGEST_SHEET,
    FolderWorld,
    MemoryWorld,
    Refused,
    TooLarge,
    World,
    find_sheets,
    read_text,
    write_atomically,
)

MakeWorld = Callable[[dict[str, bytes], str], World]


def on_disk(folder: Path) -> MakeWorld:
    def make(files: dict[str, bytes], sheet: str) -> World:
        (folder / ".git").mkdir()
        for name, data in files.items():
            (folder / name).parent.mkdir(parents=True, exist_ok=True)
            (folder / name).write_bytes(data)
        (folder / sheet).parent.mkdir(parents=True, exist_ok=True)
        return FolderWorld(folder / sheet)

    return make


@pytest.fixture(params=["disk", "memory"])
def make_world(request: pytest.FixtureRequest, tmp_path: Path) -> MakeWorld:
    """The two worlds behave alike."""
    return on_disk(tmp_path) if request.param == "disk" else lambda files, sheet: MemoryWorld(files, sheet)


# --- what a sheet reads -----------------------------------------------------------------------------------


def test_a_sheet_reads_files_beside_and_above_it_within_the_project(make_world: MakeWorld) -> None:
    files = {"project.yaml": b"", "logo.png": b"logo", "slip/a.png": b"a", "slip/sketches/b.png": b"b"}
    world = make_world(files, "slip/hoist.sheet.md")
    assert world.read(PurePosixPath("a.png"), 10) == b"a"
    assert world.read(PurePosixPath("sketches/b.png"), 10) == b"b"
    assert world.read(PurePosixPath("sketches/../../logo.png"), 10) == b"logo"


@pytest.mark.parametrize(
    ("path", "why"),
    [
        ("../../secret.png", "out of the project's folder"),
        ("sketches/../../../secret.png", "out of the project's folder"),
        ("/etc/hostname", "absolute"),
        ("c:/windows/a.png", "`:`"),
        ("..\\secret.png", "`\\`"),
        ("a\0.png", "no path has"),
        ("missing.png", "no such file"),
    ],
)
def test_other_files_are_refused_in_plain_words(make_world: MakeWorld, path: str, why: str) -> None:
    world = make_world({"project.yaml": b""}, "slip/hoist.sheet.md")
    with pytest.raises(Refused, match=why.replace("\\", r"\\")):
        world.read(PurePosixPath(path), 10)


def test_a_file_over_the_limit_is_refused(make_world: MakeWorld) -> None:
    world = make_world({"a.png": b"12345"}, "hoist.sheet.md")
    assert world.read(PurePosixPath("a.png"), 5) == b"12345"
    with pytest.raises(TooLarge):
        world.read(PurePosixPath("a.png"), 4)


def test_project_files_come_outermost_first(make_world: MakeWorld) -> None:
    files = {"project.yaml": b"owner: outer", "slip/project.yaml": b"\xef\xbb\xbfowner: inner\r\n"}
    world = make_world(files, "slip/beams/hoist.sheet.md")
    assert [text for _, text in world.project_texts()] == ["owner: outer", "owner: inner\n"]


# --- links, folders and pipes ----------------------------------------------------------------------------


def test_a_link_that_leads_out_is_refused_and_one_within_is_followed(tmp_path: Path) -> None:
    (tmp_path / "secret.png").write_bytes(b"secret")
    project = tmp_path / "project"
    (project / "sketches").mkdir(parents=True)
    (project / "sketches" / "a.png").write_bytes(b"a")
    (project / "out.png").symlink_to(tmp_path / "secret.png")
    (project / "folder").symlink_to(tmp_path)
    (project / "in.png").symlink_to(project / "sketches" / "a.png")
    world = FolderWorld(project / "hoist.sheet.md", project)
    assert world.read(PurePosixPath("in.png"), 10) == b"a"
    for path in ("out.png", "folder/secret.png"):
        with pytest.raises(Refused, match="leads out"):
            world.read(PurePosixPath(path), 10)


def test_a_folder_and_a_pipe_are_refused_without_waiting(tmp_path: Path) -> None:
    (tmp_path / "folder").mkdir()
    os.mkfifo(tmp_path / "pipe")
    world = FolderWorld(tmp_path / "hoist.sheet.md", tmp_path)
    for path in ("folder", "pipe", "."):
        with pytest.raises(Refused):
            world.read(PurePosixPath(path), 10)


def test_a_project_file_that_leads_out_is_refused_by_name(tmp_path: Path) -> None:
    (tmp_path / "other.yaml").write_text("owner: other")
    project = tmp_path / "project"
    project.mkdir()
    (project / "project.yaml").symlink_to(tmp_path / "other.yaml")
    world = FolderWorld(project / "hoist.sheet.md", project)
    with pytest.raises(Refused, match=r"project/project\.yaml.*leads out"):
        world.project_texts()


# --- where a project begins ------------------------------------------------------------------------------


def test_the_outermost_project_file_below_a_repository_marks_the_project(tmp_path: Path) -> None:
    (tmp_path / "project.yaml").touch()  # above the repository: not looked at
    repository = tmp_path / "repository"
    sheets = repository / "yard" / "slip"
    sheets.mkdir(parents=True)
    (repository / ".git").mkdir()
    assert FolderWorld(sheets / "a.sheet.md").root == sheets
    (sheets / "project.yaml").touch()
    (repository / "yard" / "project.yaml").touch()
    assert FolderWorld(sheets / "a.sheet.md").root == repository / "yard"
    (repository / "project.yaml").touch()
    assert FolderWorld(sheets / "a.sheet.md").root == repository


def test_the_home_folder_ends_the_search(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("HOME", str(tmp_path))
    (tmp_path / "project.yaml").touch()
    (tmp_path / "sheets").mkdir()
    assert FolderWorld(tmp_path / "sheets" / "a.sheet.md").root == tmp_path / "sheets"
    assert FolderWorld(tmp_path / "a.sheet.md").root == tmp_path


def test_the_working_folder_changes_names_and_nothing_else(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / ".git").mkdir()
    (tmp_path / "slip").mkdir()
    (tmp_path / "project.yaml").write_text("owner: yard")
    monkeypatch.chdir(tmp_path)
    assert FolderWorld(Path("slip/a.sheet.md")).project_texts() == (("project.yaml", "owner: yard"),)
    monkeypatch.chdir(tmp_path / "slip")
    assert FolderWorld(Path("a.sheet.md")).project_texts() == (("../project.yaml", "owner: yard"),)


def test_a_root_that_does_not_hold_the_sheet_is_a_mistake_of_the_caller(tmp_path: Path) -> None:
    with pytest.raises(ValueError, match="not in the project's folder"):
        FolderWorld(tmp_path / "a.sheet.md", tmp_path / "other")


# --- reading texts ---------------------------------------------------------------------------------------


def test_text_is_read_without_byte_order_mark_and_with_one_kind_of_line_end(tmp_path: Path) -> None:
    (tmp_path / "a").write_bytes("\ufeffä\r\nb\rc\n".encode())
    assert read_text(tmp_path / "a") == "ä\nb\nc\n"


def test_what_is_not_utf_8_is_refused_with_its_line(tmp_path: Path) -> None:
    (tmp_path / "a").write_bytes(b"one\ntwo \xe9\n")
    with pytest.raises(Refused, match="line 2"):
        read_text(tmp_path / "a")


def test_a_text_over_the_limit_is_refused(tmp_path: Path) -> None:
    (tmp_path / "a").write_bytes(b"x" * (LARGEST_SHEET + 1))
    with pytest.raises(TooLarge):
        read_text(tmp_path / "a")
    (tmp_path / "a").write_bytes(b"x" * LARGEST_SHEET)
    assert len(read_text(tmp_path / "a")) == LARGEST_SHEET


# --- finding sheets --------------------------------------------------------------------------------------


def test_a_folder_gives_its_sheets_sorted_and_leaves_out_what_is_no_work(tmp_path: Path) -> None:
    names = ["b.sheet.md", "a/z.sheet.md", "a/a.sheet.md", "notes.md", ".hidden/c.sheet.md", ".d.sheet.md"]
    for name in [*names, "output/e.sheet.md", "a/output/f.sheet.md"]:
        (tmp_path / name).parent.mkdir(exist_ok=True)
        (tmp_path / name).touch()
    found = [path.relative_to(tmp_path).as_posix() for path in find_sheets([tmp_path])]
    assert found == ["a/a.sheet.md", "a/z.sheet.md", "b.sheet.md"]


def test_named_sheets_keep_their_order_and_stand_once(tmp_path: Path) -> None:
    b, a = tmp_path / "b.sheet.md", tmp_path / "a.sheet.md"
    a.touch()
    b.touch()
    assert find_sheets([b, tmp_path, tmp_path / "missing.sheet.md"]) == [b, a, tmp_path / "missing.sheet.md"]


def test_a_folder_gives_no_sheet_that_lies_elsewhere(tmp_path: Path) -> None:
    (tmp_path / "project").mkdir()
    (tmp_path / "secret").touch()
    (tmp_path / "project" / "a.sheet.md").symlink_to(tmp_path / "secret")
    assert find_sheets([tmp_path / "project"]) == []


# --- writing ---------------------------------------------------------------------------------------------


def test_a_file_is_written_whole_with_the_mode_that_umask_leaves(tmp_path: Path) -> None:
    before = os.umask(0o027)
    try:
        write_atomically(tmp_path / "a.html", b"one")
        write_atomically(tmp_path / "a.html", b"two")
    finally:
        os.umask(before)
    assert (tmp_path / "a.html").read_bytes() == b"two"
    assert stat.S_IMODE((tmp_path / "a.html").stat().st_mode) == 0o640
    assert [path.name for path in tmp_path.iterdir()] == ["a.html"]


def test_a_write_that_fails_leaves_the_old_file_and_nothing_beside_it(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(_descriptor: int) -> None:
        raise OSError("disk full")

    write_atomically(tmp_path / "a.html", b"old")
    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(OSError, match="disk full"):
        write_atomically(tmp_path / "a.html", b"new")
    assert (tmp_path / "a.html").read_bytes() == b"old"
    assert [path.name for path in tmp_path.iterdir()] == ["a.html"]
