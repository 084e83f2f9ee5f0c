"""README.md shows the table of checks as it stands, row for row."""

from pathlib import Path

import pytest

from chemistry import checks

README = (Path(__file__).resolve().parents[2] / "README.md").read_text(encoding="utf-8")


@pytest.mark.parametrize("row", checks.checks(), ids=lambda row: row.key)
def test_each_check_stands_in_the_readme(row):
    assert (
        f"| {row.functions} | {row.source} | {row.checked_against} | {row.worst_difference:g} {row.unit} | {row.still_from_memory or '–'} |"
        in README
    )
