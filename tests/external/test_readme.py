"""The page of outside checks has every check of this folder, and no other."""

from __future__ import annotations

import pytest

from tests.external.recording import Checks
from tests.makers.external_readme import PAGE, checks_in_page, names_in_tests, render


def test_the_page_lists_the_checks_of_the_tests() -> None:
    """`python -m tests.makers.external_readme` renders it anew; digits are not compared."""
    cells, names = checks_in_page(PAGE.read_text(encoding="utf-8")), names_in_tests()
    assert len(names) > 50
    assert {name for name in names if not _has(cells, name)} == set()
    assert [cell for cell in cells if not any(_has([cell], name) for name in names)] == []


def _has(cells: list[str], name: str) -> bool:
    return any(cell == name or cell.startswith(f"{name} (") for cell in cells)


def test_a_comparison_out_of_tolerance_fails() -> None:
    """By the largest of many, by absolute and relative tolerances, and by ranges."""
    kept = Checks(topic="Made up")
    kept.close("a", [1.0, 2.0], [1.0, 2.01], relative=0.01, source="s", kind="published")
    with pytest.raises(AssertionError, match=r"a .*differs by"):
        kept.close("a", [1.0, 2.0], [1.0, 2.03], relative=0.01, source="s", kind="published")
    with pytest.raises(AssertionError, match="b "):
        kept.close("b", 1.0, 1.2, absolute=0.1, source="s", kind="published", at="here")
    with pytest.raises(AssertionError, match="is not 1 to 2"):
        kept.between("c", 3.0, 1.0, 2.0, source="s", kind="published")
    with pytest.raises(AssertionError, match="against"):
        kept.close("d", float("nan"), 1.0, absolute=0.1, source="s", kind="published")
    assert kept.records["a", ""].points == 4


def test_a_page_shows_the_point_nearest_its_tolerance() -> None:
    """Of two labelled points, with the number of all and every point below."""
    kept = Checks(topic="Made up")
    for label, ours in (("one", 1.001), ("two", 1.004)):
        kept.close("a | b", ours, 1.0, absolute=0.01, source="s", kind="published", at=label)
    page = render(kept.records.values())
    assert "| a \\| b (two) | 1.004 | 1 | 0.004 | 0.01 | 2 | s | published |" in page
    assert "| a \\| b | one | 1.001 |" in page
    assert set(checks_in_page(page)) == {"a | b (two)", "a | b"}
