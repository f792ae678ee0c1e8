"""Classes and reasons: each is reached, and only by what should reach it."""

import copy
import json
import math
from pathlib import Path

import pytest

from rca.archive.codec import dumps, to_plain
from rca.archive.edges import edges
from rca.archive.integrity import Breach
from rca.archive.quantities import headline, quantities, tolerance_of, tolerances
from rca.rerun.check import check_rerun, not_runnable
from rca.rerun.model import FileCompared, RunClass
from rca.rerun.page import rerun_json, write_rerun
from rca.rerun.quantity import compared
from rca.rerun.reasons import reason_words, reasons


def results() -> dict:
    return {
        "format": 1,
        "case": {"id": "T-1", "title": "invented"},
        "verdict": {
            "side": "suction",
            "sides": {"suction": 0.9, "discharge": 0.2, "both": 0.18, "neither": 0.08},
            "mechanisms": {"aeration": 0.8, "hot spot": 0.1},
            "robustness": {
                "suction": {"best": 0.9, "p05": 0.7, "p95": 0.95},
                "discharge": {"best": 0.2, "p05": 0.1, "p95": 0.3},
            },
            "next_tests": [{"name": "gauge", "information_bit": 0.2}, {"name": "dye"}],
        },
        "causes": [{"cause": "low oil level", "probability": 0.6}, {"cause": "unknown"}],
        "evidence": [
            {"key": "a.b", "id": "E01", "likelihood_ratio": 12.5, "words": "moderate support"},
            {"key": "c.d", "id": "E02", "likelihood_ratio": 2.0, "statement": "about 2.8 % of it"},
        ],
        "checks": {"oil": {"slope": 1e-6, "count": 7, "beyond": False}},
        "record": record(),
    }


def record() -> dict:
    return {
        "inputs": {"case.toml": "aa", "oil/lab.csv": "bb"},
        "notebooks": {"n.ipynb": "cc"},
        "parameters": {"suction": {"samples": 8}},
        "versions": {"numpy": "2.0.0", "weasyprint": "65.0"},
        "knowledge": "k1",
        "knowledge_files": {"verdict/knowledge.toml": "dd"},
        "seed": 1,
        "code": "ee",
    }


def changed(path: str, value: object) -> dict:
    made = copy.deepcopy(results())
    node = made
    *parts, last = path.split("/")
    for part in parts:
        node = node[int(part)] if isinstance(node, list) else node[part]
    node[int(last) if isinstance(node, list) else last] = value
    return made


def run_class(recomputed: dict, **more):
    issued = results()
    return check_rerun(
        issued,
        recomputed,
        source="x",
        issued_record=issued["record"],
        recomputed_record=recomputed["record"],
        **more,
    )


@pytest.mark.parametrize(
    ("path", "value", "expected"),
    [
        ("verdict/sides/suction", 0.9, RunClass.IDENTICAL),
        ("verdict/sides/suction", 0.90001, RunClass.WITHIN),
        ("verdict/sides/suction", 0.92, RunClass.OUTSIDE),
        ("checks/oil/slope", 1e-6 * (1 + 1e-9), RunClass.WITHIN),
        ("checks/oil/slope", 1.01e-6, RunClass.OUTSIDE),
        ("checks/oil/count", 8, RunClass.OUTSIDE),
        ("checks/oil/beyond", True, RunClass.BAND),
        ("checks/oil/slope", None, RunClass.BAND),
        ("checks/oil/slope", "nan", RunClass.BAND),
        ("evidence/0/words", "weak support", RunClass.BAND),
        ("evidence/1/statement", "about 2.9 % of it", RunClass.WITHIN),
        ("evidence/1/statement", "about 3.1 % of it", RunClass.OUTSIDE),
        ("evidence/1/statement", "most of it", RunClass.BAND),
        ("verdict/next_tests", results()["verdict"]["next_tests"][::-1], RunClass.BAND),
        ("causes", results()["causes"][::-1], RunClass.VERDICT),
        ("verdict/side", "both", RunClass.VERDICT),
        ("evidence", results()["evidence"][:1], RunClass.NOT_COMPARABLE),
        ("checks/oil/new", 1.0, RunClass.NOT_COMPARABLE),
        ("record/inputs/case.toml", "zz", RunClass.NOT_COMPARABLE),
        ("record/knowledge", "k2", RunClass.NOT_COMPARABLE),
        ("record/code", "other", RunClass.IDENTICAL),
        ("record/versions/numpy", "2.1.0", RunClass.IDENTICAL),
    ],
)
def test_each_class_is_reached(path: str, value: object, expected: RunClass) -> None:
    check = run_class(changed(path, value))
    assert check.run_class is expected
    assert check.answer.startswith(f"Class {expected.value}")
    assert check.agrees == (expected <= RunClass.WITHIN)


def test_other_page_bytes_with_the_same_numbers_are_cosmetic() -> None:
    files = (FileCompared(name="report.pdf", same=False),)
    assert run_class(results(), files=files).run_class is RunClass.SAME_CONTENT
    assert run_class(results(), files=files).agrees


def test_a_breach_alone_keeps_the_rerun_from_agreeing() -> None:
    breach = Breach(kind="changed", area="report", name="report.pdf", expected="a", found="b")
    check = run_class(results(), breaches=(breach,))
    assert check.run_class is RunClass.IDENTICAL
    assert not check.agrees
    assert "report.pdf" in check.answer


def test_what_can_not_run_is_a_finding() -> None:
    check = not_runnable(results(), source="x", failure="no evidence")
    assert check.run_class is RunClass.NOT_RUNNABLE
    assert not check.agrees
    assert not check.runnable
    assert json.loads(dumps(rerun_json(check, {})))["class"] == 7


@pytest.mark.parametrize(
    ("path", "value", "kind", "words"),
    [
        ("inputs/oil/lab.csv", "zz", "input", "input"),
        ("knowledge_files/verdict/knowledge.toml", "zz", "knowledge", "knowledge"),
        ("code", "zz", "code", "code"),
        ("notebooks/n.ipynb", "zz", "notebook", "notebook"),
        ("seed", 2, "parameters", "parameters"),
        ("parameters/suction", {"samples": 9}, "parameters", "parameters"),
        ("versions/numpy", "2.1.0", "library", "library"),
        ("versions/weasyprint", "66.0", "layout library", "numerics"),
    ],
)
def test_each_reason_is_named(path: str, value: object, kind: str, words: str) -> None:
    now = record()
    head, _, rest = path.partition("/")
    if rest:
        now[head][rest] = value
    else:
        now[head] = value
    found = reasons(record(), now, ())
    assert [r.kind for r in found] == [kind]
    assert reason_words(found) == words


def test_nothing_changed_leaves_numerics_and_a_tampered_result_is_said_so() -> None:
    assert reason_words(reasons(record(), record(), ())) == "numerics"
    breach = Breach(kind="changed", area="results", name="results.json", expected="a", found="b")
    found = reasons(record(), record(), (breach,))
    assert reason_words(found) == "results changed after issue"


def test_a_changed_module_is_named() -> None:
    before = {**record(), "code_files": {"oil/check.py": "a", "oil/fills.py": "b"}}
    now = {**record(), "code": "zz", "code_files": {"oil/check.py": "a", "oil/fills.py": "c"}}
    (reason,) = reasons(before, now, ())
    assert reason.details == ("oil/fills.py: expected b, found c",)


def test_one_more_item_moves_no_other_name() -> None:
    more = results()
    more["evidence"].insert(0, {"key": "new", "id": "E01", "likelihood_ratio": 1.0})
    assert set(quantities(results())) <= set(quantities(more))
    assert "evidence/a.b/likelihood_ratio" in quantities(more)


def test_every_quantity_has_a_tolerance_and_the_headline_is_exact() -> None:
    for name in quantities(results()):
        assert tolerance_of(name) in tolerances()
    rows = {row["id"]: row for row in headline(results())}
    assert float.fromhex(rows["verdict/sides/suction"]["hex"]) == 0.9
    assert rows["evidence/a.b/likelihood_ratio"]["tolerance"] == pytest.approx(1e-4 + 12.5e-3)


@pytest.mark.outside_value(source="numpy.testing.assert_allclose: |a - b| <= atol + rtol |b|")
def test_the_rule_of_tolerance_is_the_usual_one() -> None:
    import numpy as np

    rule = tolerance_of("verdict/sides/suction")
    for recomputed in (0.9 + 1.89e-4, 0.9 + 1.91e-4):
        inside = bool(np.isclose(recomputed, 0.9, rtol=rule.rtol, atol=rule.atol))
        found = compared("verdict/sides/suction", 0.9, recomputed)
        assert found is not None
        assert (found.run_class is RunClass.WITHIN) == inside


def test_values_near_an_edge_are_named_at_issue() -> None:
    made = changed("verdict/sides/suction", 0.7502)
    near = [e for e in edges(made) if e["near"]]
    assert [e["quantity"] for e in near] == ["verdict/sides/suction"]
    assert near[0]["limit"] == 0.75
    calm = changed("verdict/sides/suction", 0.85)
    assert not [e for e in edges(calm) if e["near"]]
    inside = {e["quantity"]: e["inside_band"] for e in edges(calm)}
    assert inside["verdict/sides/suction"]  # 0.9 is an edge of the words, within 0.7 to 0.95
    assert not inside["verdict/mechanisms/hot spot"]
    assert any("verdict/sides/suction" in text for text in run_class(calm).near_edges)


def test_the_margin_is_in_powers_of_ten_of_the_odds() -> None:
    check = run_class(changed("verdict/sides/suction", 0.99))
    margin = next(m for m in check.margins if m.side == "suction")
    assert margin.moved_log10_odds == pytest.approx(math.log10(99) - math.log10(9))
    assert margin.distance_log10_odds == pytest.approx(math.log10(99) - math.log10(3))


def test_the_rerun_is_plain_json(tmp_path: Path) -> None:
    check = run_class(changed("checks/oil/count", 8))
    plain = json.loads(dumps(rerun_json(check, {"program": "rca"})))
    assert plain["differences"][0]["quantity"] == "checks/oil/count"
    assert plain["differences"][0]["ratio"] == "inf"
    assert plain["review"]["rerun_by"] is None
    assert to_plain(check)["counts"]["OUTSIDE"] == 1


@pytest.mark.pdf
def test_the_rerun_report_is_laid_out(tmp_path: Path) -> None:
    check = run_class(changed("verdict/side", "both"))
    pages = write_rerun(tmp_path, check, {"program": "rca"}, paper="A4")
    assert pages.pdf is not None
    html = pages.html.read_text(encoding="utf-8")
    assert "the verdict changed" in html
    assert "Rerun by" in html
    assert list((tmp_path / "tables").glob("rerun-*.csv"))
