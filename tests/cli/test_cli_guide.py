"""`loadpath guide`: every page of the guide on the terminal."""

from __future__ import annotations

import pytest
from cli_runs import run

from loadpath.cli.guide import pages
from loadpath.findings import SLUGS


def test_the_list_of_pages_comes_first() -> None:
    result = run("guide")
    assert result.exit_code == 0
    assert result.stdout.strip() == pages()["index"].strip()
    for page in ("start", "language", "units", "criteria", "document"):
        assert page in result.stdout


@pytest.mark.parametrize("page", ["start", "language", "units", "criteria", "document", "index"])
def test_a_page_is_shown_as_it_is_written(page: str) -> None:
    result = run("guide", page)
    assert result.exit_code == 0
    assert result.stdout == pages()[page].rstrip() + "\n"
    assert result.stdout.startswith("# ")


def test_the_slug_of_every_finding_is_a_page() -> None:
    assert set(SLUGS) <= set(pages())
    assert run("guide", "unit-mismatch").stdout.startswith("#")


@pytest.mark.parametrize(
    ("page", "says"), [("unit-mismach", "did you mean unit-mismatch?"), ("zzzz", "see loadpath guide")]
)
def test_a_page_that_there_is_none_of(page: str, says: str) -> None:
    result = run("guide", page)
    assert result.exit_code == 2
    assert f"the guide has no page {page}" in result.stderr and says in result.stderr
