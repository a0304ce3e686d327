"""Resolving: names, order and dimensions, before any number."""

from loadpath.resolve.model import UNKNOWN, Entry, Resolved, Type
from loadpath.resolve.resolve import PI, expressions, resolve

__all__ = ["PI", "UNKNOWN", "Entry", "Resolved", "Type", "expressions", "resolve"]
