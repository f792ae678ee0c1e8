"""A site's own numbers: put in with reasons, refused with the line."""

import shutil
from pathlib import Path

import pytest

from rca.base.errors import KnowledgeError
from rca.intake.read import read_case, site_knowledge
from rca.verdict.knowledge import shipped_knowledge
from rca.verdict.overlay import overlaid
from rca.verdict.posterior import posterior

GOOD = """site = "Hill works"

[[change]]
variable = "soot in the oil"
number = "leaves micro-dieseling"
value = [0.5, 0.8, 0.95]
reason = "eleven units with charred seals"

[[change]]
variable = "dirt ingress"
number = "prior"
value = 0.4
reason = "cement plant"
"""


def test_changes_take_effect_and_are_listed_with_reasons() -> None:
    base = shipped_knowledge()
    ours = overlaid(base, GOOD)
    assert ours.variables["dirt ingress"].anyway is not None
    assert ours.variables["dirt ingress"].anyway.best == 0.4
    assert [c.before for c in ours.changes] == [0.75, 0.2]
    assert all(c.reason for c in ours.changes)
    wear = [posterior(k, []).mechanisms["abrasive wear"][0] for k in (base, ours)]
    assert wear[1] > wear[0]


def test_another_knowledge_has_another_identity() -> None:
    base = shipped_knowledge()
    ours, again = overlaid(base, GOOD), overlaid(base, GOOD)
    other = overlaid(base, GOOD.replace("0.4", "0.41"))
    assert len({base.identity, ours.identity, other.identity}) == 3
    assert ours.identity == again.identity
    assert "Hill works" in ours.identity


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("value = 0.4", "value = 0", "line 9.*above 0 and below 1"),
        ("value = 0.4", "value = 1.0", "line 9.*above 0 and below 1"),
        ("value = 0.4", "value = true", "line 9.*above 0 and below 1"),
        ("[0.5, 0.8, 0.95]", "[0.9, 0.8, 0.95]", "line 3.*low, best, high"),
        ('"dirt ingress"', '"dirt ingres"', "line 9.*unknown variable"),
        ('"prior"', '"given low"', "line 9.*has no number"),
        ('reason = "cement plant"', 'reason = " "', "line 9.*needs a reason"),
        ('reason = "cement plant"', "", "line 9.*missing"),
        ("leaves micro-dieseling", "leaves micro-diesel", "line 3.*unknown parent"),
        ("leaves micro-dieseling", "leaves nitration", "line 3.*can't be a parent"),
        ("[[change]]", "[[change", "not TOML"),
        ('site = "Hill works"', "colour = 1", "unknown keys"),
    ],
)
def test_broken_changes_are_refused_with_the_line(old: str, new: str, words: str) -> None:
    assert old in GOOD
    with pytest.raises(KnowledgeError, match=words):
        overlaid(shipped_knowledge(), GOOD.replace(old, new, 1))


def test_a_circle_of_causes_is_refused_with_the_line() -> None:
    text = """[[change]]
variable = "air carried to the inlet"
number = "leaves bubbles on the pressure side"
value = 0.5
reason = "test"
"""
    with pytest.raises(KnowledgeError, match=r"line 1.*circle"):
        overlaid(shipped_knowledge(), text)


def test_a_case_names_its_file_and_a_broken_one_is_an_error(
    tmp_path: Path, sample_dir: Path
) -> None:
    case = tmp_path / "case"
    case.mkdir()
    shutil.copy(sample_dir / "case.toml", case)
    descriptor = case / "case.toml"
    text = descriptor.read_text(encoding="utf-8").split("[[oil_reports]]")[0]
    descriptor.write_text(
        text.replace("[case]", '[case]\nknowledge = "site.toml"', 1), encoding="utf-8"
    )
    assert any("no such file" in p.found for p in read_case(case).errors)
    (case / "site.toml").write_text(GOOD.replace("0.4", "1.0"), encoding="utf-8")
    assert any("site.toml, line 9" in p.found for p in read_case(case).errors)
    (case / "site.toml").write_text(GOOD, encoding="utf-8")
    reading = read_case(case)
    assert reading.case is not None
    assert not reading.errors
    assert site_knowledge(case, reading.case).changes
