"""Where the page templates, the style sheet and the fonts are: in the wheel, or beside the sources."""

from __future__ import annotations

import re
from collections.abc import Callable
from functools import lru_cache
from pathlib import Path
from typing import Any

_TURNS = re.compile("[\u202a-\u202e\u2066-\u2069]")


def without_turns(text: str) -> str:
    """The text with a replacement character for each sign that turns the direction of writing."""
    return _TURNS.sub("\ufffd", text)


@lru_cache(maxsize=1)
def folder() -> Path:
    """The folder `templates/documents`. Raises FileNotFoundError where the installation lacks it."""
    here = Path(__file__).resolve().parent.parent
    for place in (here / "templates" / "documents", here.parents[1] / "templates" / "documents"):
        if place.is_dir():
            return place
    raise FileNotFoundError("the page templates are missing from this installation of loadpath")


def environment(filters: dict[str, Callable[..., Any]], finalize: Callable[[Any], Any] | None = None) -> Any:
    """A Jinja2 environment over the templates, escaping everything that is not marked as safe."""
    from jinja2 import Environment, FileSystemLoader, StrictUndefined

    made = Environment(
        loader=FileSystemLoader(folder()), autoescape=True, undefined=StrictUndefined, trim_blocks=True,
        lstrip_blocks=True, keep_trailing_newline=True, finalize=finalize,
    )  # fmt: skip
    made.filters |= filters
    return made
