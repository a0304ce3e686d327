"""The trace of an evaluated sheet: the record that everything a reader sees is drawn from."""

from loadpath.trace.model import (
    Called,
    Operand,
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
    "Operand",
    "Step",
    "Taken",
    "Trace",
    "Verdict",
    "Working",
    "criterion_kind",
    "criterion_name",
]
