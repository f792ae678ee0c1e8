"""Every text of the frame has its German; numbers turn, dates and ids don't."""

import re
from pathlib import Path

import pytest

from rca.base.errors import RenderError
from rca.report.catalogue import reader
from rca.report.view import CAUTIONS, CHAPTERS, FIXED_LIMITS, TERMS

TEMPLATES = Path(__file__).resolve().parents[2] / "templates"
OURS = ("analysis", "closing", "facts", "parts", "report", "summary")


def test_every_text_of_the_templates_is_in_the_catalogue() -> None:
    german = reader("de")
    for name in OURS:
        text = (TEMPLATES / f"{name}.html.j2").read_text(encoding="utf-8")
        for key in re.findall(r'"([^"]+)" \| t\b', text):
            assert german.frame(key)


def test_every_fixed_text_is_in_the_catalogue() -> None:
    german = reader("de")
    fixed = [*CAUTIONS, *FIXED_LIMITS, *(n for _, n in CHAPTERS), *(t for r in TERMS for t in r)]
    for key in fixed:
        assert german.frame(key)


def test_an_unknown_text_is_refused() -> None:
    with pytest.raises(RenderError, match="no de for"):
        reader("de").frame("never written")


@pytest.mark.parametrize(
    ("english", "german"),
    [
        ("0.95 bar(a)", "0,95 bar(a)"),
        ("\u22120.5", "\u22120,5"),
        ("clause 7.8.2.1", "clause 7.8.2.1"),
        ("2026.12-4", "2026.12-4"),
        ("2026-03-06 04:12", "2026-03-06 04:12"),
    ],
)
def test_decimal_comma(english: str, german: str) -> None:
    assert reader("de").number(english) == german
