"""The trace of an evaluated sheet: the record that everything a reader sees is drawn from."""

from loadpath.trace.model import (
    Called,
    Curve,
    Curves,
    Operand,
    PutBack,
    Spot,
    Step,
    Taken,
    Trace,
    Verdict,
    Working,
    criterion_kind,
    criterion_name,
)

__all__ = [
    "Called",
    "Curve",
    "Curves",
    "Operand",
    "PutBack",
    "Spot",
    "Step",
    "Taken",
    "Trace",
    "Verdict",
    "Working",
    "criterion_kind",
    "criterion_name",
]
