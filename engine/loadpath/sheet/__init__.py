"""Sheets: from the text that an engineer types to front matter, prose and statements with their places."""

from loadpath.sheet.model import (
    Assumption,
    Block,
    Confirmed,
    Formulas,
    FrontMatter,
    Heading,
    Image,
    Prose,
    Revision,
    Sheet,
    SourceEntry,
    Value,
    Words,
)
from loadpath.sheet.reader import read_sheet, read_sheet_file

__all__ = [
    "Assumption",
    "Block",
    "Confirmed",
    "Formulas",
    "FrontMatter",
    "Heading",
    "Image",
    "Prose",
    "Revision",
    "Sheet",
    "SourceEntry",
    "Value",
    "Words",
    "read_sheet",
    "read_sheet_file",
]
