"""How algebra ends without an answer, and the clock that every call runs against."""

from __future__ import annotations

import time
from collections.abc import Iterator
from contextlib import contextmanager
from contextvars import ContextVar

TIME_LIMIT = 10.0
"""Seconds that one call may take, SymPy's start included."""

_SPLIT = "split the expression, or give the values first and work it in numbers"


class AlgebraFailure(Exception):
    """No answer; the caller makes it a finding at the step.

    Slugs: `algebra-time-out`, `derived-too-large`, `no-closed-form`.
    """

    def __init__(self, slug: str, message: str, help: str) -> None:
        super().__init__(message)
        self.slug, self.message, self.help = slug, message, help


class NoForm(Exception):
    """Inside the package: there is no closed form, or no value at this place."""


def too_large(message: str) -> AlgebraFailure:
    """The failure of an expression that nobody could read or check."""
    return AlgebraFailure("derived-too-large", message, _SPLIT)


def no_closed_form(message: str) -> AlgebraFailure:
    """The failure where an answer is needed and none can be written down."""
    return AlgebraFailure("no-closed-form", message, "work it in numbers, or write the expression otherwise")


def timed_out() -> AlgebraFailure:
    """The failure of a call that was stopped."""
    return AlgebraFailure("algebra-time-out", "the algebra was stopped because it took too long", _SPLIT)


_end: ContextVar[float | None] = ContextVar("end", default=None)


@contextmanager
def time_limit(seconds: float) -> Iterator[None]:
    """One limit over everything done inside."""
    before = _end.get()
    end = time.monotonic() + seconds
    token = _end.set(end if before is None else min(before, end))
    try:
        yield
    finally:
        _end.reset(token)


def remaining() -> float:
    """Seconds left of the call's limit; raises AlgebraFailure when there are none."""
    end = _end.get()
    if end is None:
        return TIME_LIMIT
    left = end - time.monotonic()
    if left <= 0:
        raise timed_out()
    return left
