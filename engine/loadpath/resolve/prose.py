"""Values in prose: each names something that the sheet defines, and is printed in a unit."""

from __future__ import annotations

from loadpath.findings import Finding
from loadpath.formula.mistake import Mistake
from loadpath.formula.statements import AskedUnit, Table
from loadpath.formula.tree import Name
from loadpath.resolve.dimensions import Checker
from loadpath.resolve.model import Entry
from loadpath.resolve.names import Names, Suggestions
from loadpath.sheet.model import Heading, Prose, Sheet, Value
from loadpath.units import ONE, Unit


def values_in_prose(
    sheet: Sheet, names: Names, entries: list[Entry], checker: Checker, suggestions: Suggestions
) -> tuple[dict[Value, Unit], list[Finding]]:
    """The unit of each value that can be printed, and what is wrong with the others."""
    units: dict[Value, Unit] = {}
    found = []
    for value in _values(sheet):
        try:
            units[value] = _unit(value, names, entries, checker, suggestions)
        except Mistake as mistake:
            found.append(mistake.as_finding(value.source))
    checker.warnings.clear()
    return units, found


def _values(sheet: Sheet) -> list[Value]:
    front = sheet.front
    values = [*front.objective.values, *front.method.values, *front.conclusion.values]
    for block in sheet.blocks:
        if isinstance(block, Prose):
            values += block.values
        elif isinstance(block, Heading):
            values += [t.meta["value"] for t in (block.tokens.children or ()) if t.type == "value"]
    return values


def _unit(
    value: Value, names: Names, entries: list[Entry], checker: Checker, suggestions: Suggestions
) -> Unit:
    if not value.name:
        return ONE
    if value.name not in names.by_name:
        help = (
            suggestions.nearest(value.name, names.by_name) or "define it on a formula line; `\\{` is a brace"
        )
        message = f"`{value.name}` is defined nowhere on this sheet"
        raise Mistake("unknown-name", value.name_span, message, help)
    entry = entries[names.by_name[value.name]]
    if entry.kind == "function":
        message = f"`{value.name}` is a function and has no one value"
        help = f"give a value of it a name first: `{value.name}_1 = {value.name}(...)`"
        raise Mistake("wrong-arguments", value.name_span, message, help)
    if entry.rows is not None or isinstance(entry.statement, Table):
        what = "a column" if entry.rows is not None else "a table"
        message = f"`{value.name}` is {what}, and prose prints one value"
        column = value.name if entry.rows is not None else f"{value.name}.A"
        help = f'give one of them a name first: `{column.replace(".", "_")}_1 = {column} at "label"`'
        raise Mistake("column-not-number", value.name_span, message, help)
    if not value.unit or entry.type.unknown:
        return entry.unit
    return checker.shown(entry.type, AskedUnit(value.unit, value.unit_span), Name(value.name))[1]
