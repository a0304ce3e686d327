"""Every expected form comes out as it was written down before the code."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
import yaml
from algebra_trees import relation, text, tree

from loadpath import algebra
from loadpath.formula.tree import Node

FORMS: list[dict[str, Any]] = yaml.safe_load(
    (Path(__file__).parent / "expected_forms.yaml").read_text(encoding="utf-8")
)


def above(form: dict[str, Any]) -> Callable[[Node], bool]:
    known = {tree(t) for t in form.get("above", [])}
    return lambda node: node in known


def answer(form: dict[str, Any]) -> Any:
    match form["call"]:
        case "antiderivative":
            return algebra.antiderivative(tree(form["f"]), form["x"], above(form))
        case "definite":
            a, b = tree(form["a"]), tree(form["b"])
            return algebra.definite(tree(form["f"]), form["x"], a, b, above(form))
        case "limit":
            return algebra.limit(tree(form["f"]), form["x"], tree(form["a"]))
        case "derivative" | "single_brackets" as call:
            return getattr(algebra, call)(tree(form["f"]), form["x"])
        case "simplified":
            return algebra.simplified(tree(form["f"]))
        case "solve_linear":
            equations = tuple(relation(e) for e in form["equations"])
            return algebra.solve_linear(equations, tuple(form["unknowns"]))
        case "roots":
            return algebra.roots(relation(form["equation"]), form["unknown"])
    raise ValueError(form["call"])


def printed(found: Any) -> Any:
    if isinstance(found, dict):
        return {name: text(node) for name, node in found.items()}
    if isinstance(found, tuple):
        return [text(node) for node in found]
    return found if found is None else text(found)


@pytest.mark.parametrize("form", FORMS, ids=[f["what"] for f in FORMS])
def test_expected_form(form: dict[str, Any]) -> None:
    assert printed(answer(form)) == form["gives"]
