"""How algebra ends without an answer, and the clock that every call runs against."""

from __future__ import annotations

import time
from collections.abc import Iterator
from contextlib import contextmanager
from contextvars import ContextVar

TIME_LIMIT = 10.0
"""Seconds that one call may take; loading SymPy, once a process, comes on top."""

_SPLIT = "split the expression into parts, or type numbers in place of names"


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


def no_start() -> AlgebraFailure:
    """The failure of a machine on which SymPy can't be loaded."""
    return AlgebraFailure(
        "algebra-time-out", "SymPy, which does the algebra, could not be started", "look at the installation"
    )


_end: ContextVar[float | None] = ContextVar("end", default=None)
_stood_still = 0.0
"""Seconds for which the clock of the calls has stood still."""


def _now() -> float:
    return time.monotonic() - _stood_still


@contextmanager
def clock_stopped() -> Iterator[None]:
    """What is done inside counts on no call's limit."""
    global _stood_still
    start = time.monotonic()
    try:
        yield
    finally:
        _stood_still += time.monotonic() - start


@contextmanager
def time_limit(seconds: float) -> Iterator[None]:
    """One limit over everything done inside."""
    before = _end.get()
    end = _now() + seconds
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
    left = end - _now()
    if left <= 0:
        raise timed_out()
    return left
