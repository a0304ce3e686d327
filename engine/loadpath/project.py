"""The files of a project: the only module that reads and writes them. Everything else asks a `World`.

A project's folder is the outermost folder at or above the sheet that holds a `project.yaml`; without one it
is the sheet's own folder. The search goes upwards from the sheet's folder and ends at the first of: a folder
that holds `.git` (still looked at), the user's home folder and the root of the file system (neither of these
looked at, unless the sheet lies in it). It never depends on the folder that the engine is started in, so the
same sheet gives the same document. A sheet sees the files of its project's folder and no others.
"""

from __future__ import annotations

import itertools
import os
import stat
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path, PurePosixPath
from typing import Protocol

SHEET_ENDING = ".sheet.md"
PROJECT_FILE = "project.yaml"
OUTPUT_FOLDER = "output"
"""A folder of this name below the one that is searched holds documents, never sheets."""
LARGEST_SHEET = 1_000_000
"""Bytes of a sheet or `project.yaml`."""
LARGEST_FILE = 20_000_000
"""Bytes of an image."""


class Refused(Exception):
    """A file that the project doesn't give out; the text says why, in words for a finding."""


class TooLarge(Refused):
    """A file with more bytes than the engine works."""


class World(Protocol):
    """What a sheet can see of the files around it."""

    def read(self, path: PurePosixPath, largest: int) -> bytes:
        """The file at a path relative to the sheet's folder. Raises `Refused`."""

    def project_texts(self) -> tuple[tuple[str, str], ...]:
        """Each `project.yaml` above the sheet as (path as shown, text), outermost first. Raises `Refused`."""


# --- worlds -------------------------------------------------------------------------------------------------


class FolderWorld:
    """The files around a sheet on disk.

    `root` fixes the project's folder, which must be at or above the sheet's, else `ValueError`; without it
    the folder is searched as the module says.
    """

    def __init__(self, sheet_path: Path, root: Path | None = None) -> None:
        self.folder = _real(sheet_path.parent)
        """The sheet's folder, links resolved."""
        self.root = _project_folder(self.folder) if root is None else _real(root)
        """The project's folder, links resolved."""
        if not self.folder.is_relative_to(self.root):
            raise ValueError(f"{sheet_path} is not in the project's folder {root}")
        self._shown_folder = sheet_path.parent

    def read(self, path: PurePosixPath, largest: int) -> bytes:
        """The file at a path relative to the sheet's folder. Raises `Refused`."""
        inside = _inside(PurePosixPath(self.folder.relative_to(self.root).as_posix()), path)
        return _read_file(self._held(self.root / inside), largest)

    def project_texts(self) -> tuple[tuple[str, str], ...]:
        """Each `project.yaml` down to the sheet's folder, outermost first. Raises `Refused`."""
        texts = []
        for folder in reversed([self.folder, *self.folder.parents]):
            file = folder / PROJECT_FILE
            if folder.is_relative_to(self.root) and os.path.lexists(file):
                shown = self._shown(folder)
                try:
                    texts.append((shown, decode(_read_file(self._held(file), LARGEST_SHEET))))
                except TooLarge as refused:
                    raise TooLarge(f"{shown}: {refused}") from None
                except Refused as refused:
                    raise Refused(f"{shown}: {refused}") from None
        return tuple(texts)

    def _held(self, file: Path) -> Path:
        """The file itself, links resolved; refused where they lead out of the project's folder."""
        real = _real(file)
        if not real.is_relative_to(self.root):
            raise Refused("it is a link that leads out of the project's folder")
        return real

    def _shown(self, folder: Path) -> str:
        """The `project.yaml` of a folder above the sheet, as seen from where the user named the sheet."""
        ups = [".."] * len(self.folder.relative_to(folder).parts)
        return Path(os.path.normpath(Path(self._shown_folder, *ups, PROJECT_FILE))).as_posix()


class MemoryWorld:
    """A project that is nowhere on disk, for tests and editors: path below the project's folder -> bytes."""

    def __init__(self, files: Mapping[str, bytes] | None = None, sheet: str = "sheet.sheet.md") -> None:
        self._files = dict(files or {})
        self._folder = PurePosixPath(sheet).parent

    def read(self, path: PurePosixPath, largest: int) -> bytes:
        """The file at a path relative to the sheet's folder. Raises `Refused`."""
        data = self._files.get(str(_inside(self._folder, path)))
        if data is None:
            raise Refused("there is no such file")
        return _not_larger(data, largest)

    def project_texts(self) -> tuple[tuple[str, str], ...]:
        """Each `project.yaml` at or above the sheet, outermost first. Raises `Refused`."""
        folders = reversed([self._folder, *self._folder.parents])
        names = [str(folder / PROJECT_FILE) for folder in folders]
        return tuple(
            (n, decode(_not_larger(self._files[n], LARGEST_SHEET))) for n in names if n in self._files
        )


def _real(path: Path) -> Path:
    return Path(os.path.realpath(path))


def _project_folder(folder: Path) -> Path:
    """The outermost folder with a `project.yaml`, within the bounds that the module states."""
    found = folder
    for above in [folder, *folder.parents]:
        if above != folder and (above == above.parent or above == _home()):
            break
        if os.path.lexists(above / PROJECT_FILE):
            found = above
        if os.path.lexists(above / ".git"):
            break
    return found


def _home() -> Path | None:
    try:
        return _real(Path.home())
    except RuntimeError:
        return None


def _inside(folder: PurePosixPath, path: PurePosixPath) -> PurePosixPath:
    """A path relative to `folder`, made relative to the project's. Raises `Refused` where it leads out."""
    text = str(path)
    if path.is_absolute():
        raise Refused("its path is absolute, where only a path below the project's folder is read")
    if "\\" in text or ":" in text or "\0" in text:
        raise Refused("its path holds a `\\`, a `:` or a character that no path has; write `folder/file`")
    parts = list(folder.parts)
    for part in path.parts:
        if part != "..":
            parts.append(part)
        elif parts:
            parts.pop()
        else:
            raise Refused("its path leads out of the project's folder")
    return PurePosixPath(*parts)


# --- reading ------------------------------------------------------------------------------------------------


def read_text(path: Path) -> str:
    """A sheet's text: UTF-8, a byte order mark left out, line ends as `\\n`. Raises `Refused`."""
    return decode(_read_file(path, LARGEST_SHEET))


def decode(data: bytes) -> str:
    """Text from the bytes of a sheet, as `read_text` gives it. Raises `Refused`."""
    try:
        text = _not_larger(data, LARGEST_SHEET).decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise Refused(f"it is not UTF-8 text: a byte in line {line} belongs to no character") from None
    return text.replace("\r\n", "\n").replace("\r", "\n")


def _read_file(path: Path, largest: int) -> bytes:
    """An ordinary file's bytes; never waits for a pipe or a device. Raises `Refused`."""
    flags = os.O_RDONLY | getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_BINARY", 0)
    try:
        descriptor = os.open(path, flags)
        with open(descriptor, "rb") as file:
            if not stat.S_ISREG(os.fstat(descriptor).st_mode):
                raise Refused("it is not an ordinary file")
            return _not_larger(file.read(largest + 1), largest)
    except (FileNotFoundError, NotADirectoryError):
        raise Refused("there is no such file") from None
    except IsADirectoryError:
        raise Refused("it is a folder, not a file") from None
    except (OSError, ValueError) as error:
        raise Refused(
            f"it cannot be opened ({getattr(error, 'strerror', None) or 'no path'})".lower()
        ) from None


def _not_larger(data: bytes, largest: int) -> bytes:
    if len(data) > largest:
        raise TooLarge(f"it has more than {largest // 1000} kB, which is the most that is read")
    return data


def find_sheets(paths: Sequence[Path]) -> list[Path]:
    """The sheets that the user names, in that order and each once.

    A folder gives every `*.sheet.md` below it, sorted by path; folders named `output`, anything hidden
    (`.name`) and links that lead out of the folder are left out. Any other path stands for itself, whether or
    not it is there.
    """
    found = dict.fromkeys(sheet for path in paths for sheet in (_below(path) if path.is_dir() else [path]))
    return list(found)


def _below(folder: Path) -> list[Path]:
    real = _real(folder)
    sheets = [sheet for sheet in _walk(folder) if _real(sheet).is_relative_to(real)]
    return sorted(sheets, key=lambda sheet: sheet.parts)


def _walk(folder: Path) -> Iterator[Path]:
    for place, folders, files in os.walk(folder):
        folders[:] = [name for name in folders if not name.startswith(".") and name != OUTPUT_FOLDER]
        for name in files:
            if name.endswith(SHEET_ENDING) and not name.startswith("."):
                yield Path(place, name)


# --- writing ------------------------------------------------------------------------------------------------

_COUNTER = itertools.count()


def write_atomically(path: Path, data: bytes) -> None:
    """Write a file so that a reader finds the old one or the new one whole, never a part. Raises `OSError`.

    The folder must be there. A new file gets the mode that the user's umask leaves.
    """
    temporary = path.with_name(f".{path.name}.{os.getpid()}-{next(_COUNTER)}.part")
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0)
    temporary.unlink(missing_ok=True)  # left by a run that was killed and had the same number
    descriptor = os.open(temporary, flags, 0o666)
    try:
        with open(descriptor, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(descriptor)
        os.replace(temporary, path)
    except BaseException:
        temporary.unlink(missing_ok=True)
        raise
