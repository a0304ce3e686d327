"""Characters that no sheet can hold."""

from __future__ import annotations

import re

_FORBIDDEN = re.compile("[\x00-\x08\x0b-\x1f\x7f-\x9f\ud800-\udfff\ufffe\uffff]")


def forbidden(text: str) -> re.Match[str] | None:
    """The first control character other than tab and line end, half of a pair, or code of no character."""
    return _FORBIDDEN.search(text)
