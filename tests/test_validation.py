"""The page of published checks: complete, met as asked, and the same in README.md."""

from __future__ import annotations

from functools import lru_cache

import pytest
import validation


@lru_cache(maxsize=1)
def measured() -> tuple[validation.Check, ...]:
    """Return every check, measured once."""
    return tuple(validation.checks())


def test_every_published_check_is_met_as_asked() -> None:
    """No bound is widened; the one miss is a harder question than the one that is asked.

    Calibrated on the 2-blade report alone, C_P of the 3-blade report is predicted to 8.6 %: the two
    reports disagree with each other by more than a lifting line explains.
    """
    missed = [check.line() for check in measured() if check.measured > check.asked]
    assert [line for line in missed if "calibrated on TR 640 alone" not in line] == []
    assert len(missed) <= 1


def test_readme_carries_the_page_as_it_is_measured() -> None:
    """`python -m tests.validation --write` brings README.md up to date."""
    readme = validation.README.read_text(encoding="utf-8")
    assert readme == validation.put_into(readme, validation.page(list(measured())))


@pytest.mark.parametrize(
    "source",
    [
        "U.S. Standard Atmosphere 1976",
        "library fluids",
        "library ambiance",
        "FAA example",
        "SAE J607",
        "National Test Pilot School",
        "Gagg and Farrar",
        "210 hp engine chart",
        "chart method",
        "NACA Report 189",
        "FAA-H-8083-25",
        "NACA TR 640",
        "NACA TR 658",
        "common practice",
        "second solver",
    ],
)
def test_no_source_is_left_out(source: str) -> None:
    """Every published check has its row."""
    assert any(source in check.source for check in measured())


def test_verdict_tells_goal_from_asked_and_missed() -> None:
    """The last column is computed, not written."""
    verdicts = [
        validation.Check("s", "w", "hp", 2.0, 1.0, value).verdict for value in (0.9, 1.1, 2.1)
    ]
    assert verdicts == ["goal met", "met", "**not met**"]


def test_writing_leaves_the_rest_of_the_readme_alone() -> None:
    """Only what stands between the marks is replaced."""
    text = f"above\n{validation.BEGIN}\nold\n{validation.END}\nbelow\n"
    assert validation.put_into(text, "new") == text.replace("old", "new")
