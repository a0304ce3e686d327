"""Sheets against published results: every case of open.yaml, each with its source beside it in the file.

A case has a sheet `<id>.sheet.md` or a reason in not_yet.yaml, never both and never neither. The expected
values are turned into SI here, by a small table of exact factors of this test's own, so that a wrong factor
in the engine can't cancel itself out.
"""

import math
import re
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
import yaml

import loadpath

HERE = Path(__file__).parent
CASES: dict[str, dict[str, Any]] = {
    case["id"]: case for case in yaml.safe_load((HERE / "open.yaml").read_text(encoding="utf-8"))
}
NOT_YET: dict[str, str] = yaml.safe_load((HERE / "not_yet.yaml").read_text(encoding="utf-8"))

# source: NIST SP 811 (2008), appendix B (from memory): the definitions, from which all other factors follow.
INCH = Fraction(254, 10_000)
FOOT = 12 * INCH
POUND = Fraction(45_359_237, 100_000_000)
GRAVITY = Fraction(980_665, 100_000)
LBF = POUND * GRAVITY
HORSEPOWER = 550 * FOOT * LBF

TO_SI: dict[str, Fraction] = {
    "1": Fraction(1),
    "N": Fraction(1),
    "kN": Fraction(1_000),
    "lbf": LBF,
    "kip": 1_000 * LBF,
    "kgf": GRAVITY,
    "ton_force": 2_000 * LBF,
    "m": Fraction(1),
    "mm": Fraction(1, 1_000),
    "cm": Fraction(1, 100),
    "in": INCH,
    "ft": FOOT,
    "Pa": Fraction(1),
    "kPa": Fraction(1_000),
    "MPa": Fraction(1_000_000),
    "GPa": Fraction(1_000_000_000),
    "psi": LBF / INCH**2,
    "ksi": 1_000 * LBF / INCH**2,
    "kg": Fraction(1),
    "lb": POUND,
    "slug": LBF / FOOT,
    "s": Fraction(1),
    "W": Fraction(1),
    "kW": Fraction(1_000),
    "hp": HORSEPOWER,
    "hp_metric": 75 * GRAVITY,
    "microstrain": Fraction(1, 1_000_000),
    "delta_degF": Fraction(5, 9),
    "delta_degC": Fraction(1),
    "rad": Fraction(1),
    "deg": Fraction(1, 180),  # times pi
    "rpm": Fraction(2, 60),  # times pi
}
TIMES_PI = ("deg", "rpm")


def si(value: float, unit: str) -> float:
    """A value of open.yaml in coherent SI units; an absolute temperature in kelvin."""
    if unit == "degF":
        return float((Fraction(str(value)) + Fraction(45_967, 100)) * Fraction(5, 9))
    factor, pis, sign = Fraction(1), 0, 1
    for part in re.split(r"([*/])", unit):
        if part in ("*", "/"):
            sign = 1 if part == "*" else -1
            continue
        name, _, power = part.partition("^")
        exponent = sign * int(power or 1)
        factor *= TO_SI[name] ** exponent
        pis += exponent * (name in TIMES_PI)
    return float(Fraction(str(value)) * factor) * math.pi**pis


def test_every_case_has_a_sheet_or_a_reason_and_not_both() -> None:
    sheets = {path.name.removesuffix(".sheet.md") for path in HERE.glob("*.sheet.md")}
    assert len(CASES) == 70
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
        if step.kind != "result" or not abs(step.si - value) <= expected["rel_tol"] * abs(value):
            tolerance = expected["rel_tol"] * abs(value)
            wrong.append(f"{expected['name']}: {step.kind} {step.si}, published {value} +- {tolerance:.2g}")
    assert wrong == [], f"source: {case['source']}"


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
    rows = re.findall(r"^\| (O\d\d-\S+) \|.*\| (.+) \|$", readme, re.M)
    assert [case_id for case_id, _ in rows] == list(CASES)
    for case_id, last in rows:
        if case_id in NOT_YET:
            assert last.startswith("not yet")
        else:
            assert last == f"[sheet]({case_id}.sheet.md)"
