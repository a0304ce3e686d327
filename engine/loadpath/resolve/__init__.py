"""Resolving: names, order and dimensions, before any number."""

from loadpath.resolve.columns import LOOKED_UP, is_looking
from loadpath.resolve.displays import is_relative
from loadpath.resolve.model import UNKNOWN, Entry, Kind, Resolved, Rows, Type
from loadpath.resolve.parts import PI, expressions, relations_in
from loadpath.resolve.resolve import resolve

__all__ = [
    "LOOKED_UP",
    "PI",
    "UNKNOWN",
    "Entry",
    "Kind",
    "Resolved",
    "Rows",
    "Type",
    "expressions",
    "is_looking",
    "is_relative",
    "relations_in",
    "resolve",
]
