"""Documents before any format: what a reader sees, in reading order."""

from loadpath.document.build import build
from loadpath.document.model import Document

__all__ = ["Document", "build"]
