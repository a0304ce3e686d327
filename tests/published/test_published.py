"""Sheets against published results: every case of open.yaml and algebra.yaml, each with its source beside it.

A case has a sheet `<id>.sheet.md` or a reason in not_yet.yaml, never both and never neither. The expected
values are turned into SI by a table of exact factors of the tests' own (si_factors.py). Those of algebra.yaml
are worked again by general libraries (recompute.py).
"""

import math
import re
from pathlib import Path
from typing import Any

import pytest
import yaml
from recompute import WORKED, compared
from si_factors import si

import loadpath
from loadpath.trace.file import record

HERE = Path(__file__).parent


def cases(name: str) -> dict[str, dict[str, Any]]:
    return {case["id"]: case for case in yaml.safe_load((HERE / name).read_text(encoding="utf-8"))}


OPEN, ALGEBRA = cases("open.yaml"), cases("algebra.yaml")
CASES = OPEN | ALGEBRA
NOT_YET: dict[str, str] = yaml.safe_load((HERE / "not_yet.yaml").read_text(encoding="utf-8"))


def test_every_case_has_a_sheet_or_a_reason_and_not_both() -> None:
    sheets = {path.name.removesuffix(".sheet.md") for path in HERE.glob("*.sheet.md")}
    assert (len(OPEN), len(ALGEBRA)) == (70, 51)
    assert sheets.isdisjoint(NOT_YET)
    assert sheets | set(NOT_YET) == set(CASES)


@pytest.mark.parametrize("case_id", CASES)
def test_case(case_id: str) -> None:
    path = HERE / f"{case_id}.sheet.md"
    if not path.exists():
        assert case_id in NOT_YET, f"{case_id} has neither a sheet nor a reason in not_yet.yaml"
        pytest.skip(f"not yet: {NOT_YET[case_id]}")
    case = CASES[case_id]
    trace = loadpath.evaluate(loadpath.read(path))
    assert [finding for finding in trace.findings if finding.severity == "error"] == []

    wrong = []
    for given in case["inputs"]:
        step, value = trace[given["name"]], si(given["value"], given["unit"])
        if step.kind != "input" or not math.isclose(step.si, value, rel_tol=1e-12):
            wrong.append(f"{given['name']}: {step.kind} {step.si}, the case has the input {value}")
    for expected in case["expected"]:
        step, value = trace[expected["name"]], si(expected["value"], expected["unit"])
        tolerance = expected["rel_tol"] * abs(value)
        if step.kind not in ("result", "solution") or not abs(step.si - value) <= tolerance:
            wrong.append(f"{expected['name']}: {step.kind} {step.si}, published {value} +- {tolerance:.2g}")
    assert wrong == [], f"source: {case['source']}"


@pytest.mark.parametrize(
    ("case_id", "criterion", "worst", "over", "row"),
    [
        ("A44-load-combinations", "strength bending", "eta_max", "", "LC1"),
        ("A49-truss-table", "strength bars", "u_max", "", "CD"),
        ("A50-bolt-group", "strength bolts", "R_max", "R_n", "b4"),
    ],
)
def test_the_worst_row_of_a_criterion_on_columns(
    case_id: str, criterion: str, worst: str, over: str, row: str
) -> None:
    """The worst utilisation is that of the case; the row is the first of those that have it."""
    case = CASES[case_id]
    values = {each["name"]: si(each["value"], each["unit"]) for each in (*case["inputs"], *case["expected"])}
    ratio = values[worst] / (values[over] if over else 1.0)
    trace = loadpath.evaluate(loadpath.read(HERE / f"{case_id}.sheet.md"))
    step = trace[criterion]
    assert step in trace.criteria
    assert step.verdict is not None and step.governing is not None
    assert step.verdict.utilisation == pytest.approx(ratio, rel=1e-9)
    assert step.verdict.satisfied is (ratio <= 1)
    assert step.rows[step.governing].label == row
    ratios = [each.verdict.utilisation for each in step.rows if each.verdict]
    assert len(ratios) == len(case["tables"][0]["rows"])
    assert max(ratios) == step.verdict.utilisation
    (written,) = [c for c in record(trace, "1").criteria if c.id == criterion]
    assert (written.utilisation, written.satisfied) == (step.verdict.utilisation, ratio <= 1)


def test_every_criterion_on_columns_is_compared_above() -> None:
    on_columns = {
        (case_id, step.id)
        for case_id in ALGEBRA
        if "tables" in ALGEBRA[case_id]
        for step in loadpath.evaluate(loadpath.read(HERE / f"{case_id}.sheet.md")).criteria
        if step.rows
    }
    assert {case_id for case_id, _ in on_columns} == {
        "A44-load-combinations",
        "A49-truss-table",
        "A50-bolt-group",
    }


def test_the_sheets_hold_no_expected_number() -> None:
    """An expected value that stands on the sheet would prove nothing."""
    inputs = {str(each["value"]) for case in ALGEBRA.values() for each in case["inputs"]}
    for case_id, case in ALGEBRA.items():
        text = (HERE / f"{case_id}.sheet.md").read_text(encoding="utf-8")
        for expected in case["expected"]:
            typed = str(expected["value"])
            if len(typed.strip("-0.")) >= 6 and typed not in inputs:
                assert typed[:9] not in text, (case_id, expected["name"])


@pytest.mark.parametrize("case_id", [case_id for case_id in ALGEBRA if "tables" in ALGEBRA[case_id]])
def test_the_tables_of_the_case_stand_on_the_sheet(case_id: str) -> None:
    lines = (HERE / f"{case_id}.sheet.md").read_text(encoding="utf-8").splitlines()
    rows = [[cell.strip() for cell in line.strip("|").split("|")] for line in lines if line.startswith("|")]
    typed = []
    for table in ALGEBRA[case_id]["tables"]:
        heads = [head if isinstance(head, str) else heading(**head) for head in table["columns"]]
        typed += [heads, *[[str(cell) for cell in row] for row in table["rows"]]]
    assert [row for row in rows if set("".join(row)) != {"-"}] == typed


def heading(name: str, unit: str = "") -> str:
    return f"{name} [{unit}]" if unit else name


@pytest.mark.parametrize("case_id", ALGEBRA)
def test_general_libraries_give_the_expected_values(case_id: str) -> None:
    """source: the libraries named in the case; see recompute.py."""
    assert list(WORKED) == list(ALGEBRA)
    assert [row for row in compared(ALGEBRA[case_id]) if not row[3]] == []


def test_a_wrong_expected_value_is_noticed() -> None:
    case = ALGEBRA["A27-bar-between-walls"]
    first, *others = case["expected"]
    changed = {**case, "expected": [{**first, "value": first["value"] * (1 + 3 * first["rel_tol"])}, *others]}
    assert [same for *_, same in compared(changed)] == [False, *[True] * len(others)]


@pytest.mark.parametrize("case_id", ["O68-units-force-stress", "O69-units-mass-power"])
def test_the_factors_of_this_test_give_the_printed_ones(case_id: str) -> None:
    """source: NIST SP 811 (2008), appendix B.8 (from memory), as printed in the case."""
    expected = {row["name"]: row for row in CASES[case_id]["expected"]}
    for given in CASES[case_id]["inputs"]:
        printed = expected[f"{given['name']}_si"]
        assert si(given["value"], given["unit"]) == pytest.approx(
            si(printed["value"], printed["unit"]), rel=printed["rel_tol"], abs=0
        )


def test_the_readme_has_one_row_for_each_case() -> None:
    readme = (HERE / "README.md").read_text(encoding="utf-8")
    rows = re.findall(r"^\| ([AO]\d\d-\S+) \|.*\| (.+) \|$", readme, re.M)
    assert [case_id for case_id, _ in rows] == list(CASES)
    for case_id, last in rows:
        if case_id in NOT_YET:
            assert last.startswith("not yet")
        else:
            assert last == f"[sheet]({case_id}.sheet.md)"
