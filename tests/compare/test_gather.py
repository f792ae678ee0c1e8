"""What is found and read, what is refused by name, what counts once."""

import json
import zipfile
from pathlib import Path

import numpy as np
import pytest

from rca.base.errors import ArchiveError
from rca.compare.gather import find, gather
from rca.compare.incident import read_incident
from rca.compare.index import ask, read_index, write_index
from rca.compare.table import table_of
from tests.compare.made import many, results


def put(path: Path, plain: object, **beside: object) -> Path:
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(json.dumps(plain))
    if beside:
        path.with_name("record.json").write_text(json.dumps(beside))
    return path


def test_folders_bundles_and_files_are_found(tmp_path: Path) -> None:
    put(tmp_path / "a" / "report" / "results.json", results("C-1"))
    put(tmp_path / "a" / "report" / "stages" / "results.json", {"not": "searched"})
    put(tmp_path / "a" / ".hidden" / "results.json", results("C-9"))
    put(tmp_path / "flat.json", results("C-2"))
    with zipfile.ZipFile(tmp_path / "b.zip", "w") as archive:
        archive.writestr("bag/data/report/results.json", json.dumps(results("C-3")))
        archive.writestr("bag/data/notes.txt", "x")
    found = gather([tmp_path])
    assert [i.id for i in found.incidents] == ["C-1", "C-2", "C-3"]
    assert not found.refused


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "not JSON"),
        ("{", "not JSON"),
        ("[]", "Expected `object`"),
        ("{}", "format"),
        ('{"format": 2}', "expected 1"),
        (json.dumps(results("C") | {"verdict": 3}), "verdict"),
        (json.dumps(results("C") | {"causes": None}), "causes: found nothing"),
        ("[" * 100_000, "not JSON"),
        (json.dumps(results("C")).replace("0.9", "NaN", 1), "not JSON"),
        (
            json.dumps(results("C")).replace('"side": "suction"', '"side": "left"', 1),
            "verdict.side",
        ),
        (json.dumps(results("C")).replace("2024-05-01", "someday", 1), "case.occurred"),
        (json.dumps(results("C")).replace('"gaseous cavitation": 0.9', '"x": 1.5', 1), "0 to 1"),
    ],
)
def test_a_broken_file_is_named_and_the_others_stand(
    tmp_path: Path, text: str, words: str
) -> None:
    put(tmp_path / "good.json", results("C-1"))
    (tmp_path / "bad.json").write_text(text)
    found = gather([tmp_path])
    assert [i.id for i in found.incidents] == ["C-1"]
    (refused,) = found.refused
    assert refused.source.endswith("bad.json")
    assert words in refused.reason


def test_hostile_bundles_are_refused_in_memory(tmp_path: Path) -> None:
    with zipfile.ZipFile(tmp_path / "bomb.zip", "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("results.json", b"0" * (65 * 2**20))
    with zipfile.ZipFile(tmp_path / "two.zip", "w") as archive:
        archive.writestr("a/results.json", "{}")
        archive.writestr("../results.json", "{}")
    (tmp_path / "no.zip").write_bytes(b"PK not a bundle")
    found = gather([tmp_path])
    assert not found.incidents
    assert {Path(r.source).name for r in found.refused} == {"bomb.zip", "two.zip", "no.zip"}
    assert not (tmp_path.parent / "results.json").exists()
    assert sorted(p.name for p in tmp_path.iterdir()) == ["bomb.zip", "no.zip", "two.zip"]


def test_a_case_told_twice_counts_once_and_the_later_report_stands(tmp_path: Path) -> None:
    put(
        tmp_path / "new" / "results.json", results("C-1", cause="dirt ingress"), ended="2026-05-01"
    )
    put(tmp_path / "old" / "results.json", results("C-1"), ended="2025-01-01")
    found = gather([tmp_path])
    (one,) = found.incidents
    assert one.main_cause == "dirt ingress"
    assert [Path(p).parent.name for p in found.replaced] == ["old"]


def test_a_place_that_is_not_there_is_an_error(tmp_path: Path) -> None:
    with pytest.raises(ArchiveError, match="neither a file nor a folder"):
        list(find(tmp_path / "nowhere"))


def test_links_are_not_followed(tmp_path: Path) -> None:
    put(tmp_path / "outside" / "results.json", results("C-1"))
    (tmp_path / "in").mkdir()
    (tmp_path / "in" / "link").symlink_to(tmp_path / "outside", target_is_directory=True)
    assert not gather([tmp_path / "in"]).incidents


def test_the_store_gives_back_what_went_in(tmp_path: Path) -> None:
    for one in many(40):
        put(tmp_path / f"{one['case']['id']}.json", one)
    (tmp_path / "bad.json").write_text("x")
    gathered = gather([tmp_path])
    write_index(tmp_path / "i.duckdb", gathered)
    table, refused, replaced = read_index(tmp_path / "i.duckdb")
    direct = table_of(gathered.incidents)
    assert refused == gathered.refused
    assert replaced == ()
    for name in direct.__dataclass_fields__:
        one, other = getattr(direct, name), getattr(table, name)
        if isinstance(one, np.ndarray):
            assert np.array_equal(one, other, equal_nan=one.dtype.kind == "f"), name
        else:
            assert one == other, name
    assert ask(tmp_path / "i.duckdb", "SELECT count(*) FROM incidents")[0] == (40,)


def test_the_store_reads_no_other_file_and_values_are_data(tmp_path: Path) -> None:
    put(tmp_path / "c.json", results("'); DROP TABLE incidents; --"))
    write_index(tmp_path / "i.duckdb", gather([tmp_path]))
    with pytest.raises(ArchiveError):
        ask(tmp_path / "i.duckdb", f"SELECT * FROM read_text('{tmp_path / 'c.json'}')")
    rows = ask(tmp_path / "i.duckdb", "SELECT id FROM incidents WHERE id LIKE $x", {"x": "%DROP%"})
    assert len(rows) == 1


def test_signs_keep_the_three_kinds_of_missing() -> None:
    plain = results("C-1")
    plain["evidence"].append(
        {"node": "soot in the oil", "absent": False, "likelihood": {"no": 0.5, "yes": 0.5}}
    )
    found = read_incident(plain, source="x")
    assert found.signs["strainer found clogged"] == 1
    assert found.signs["spark marks"] == -1
    assert "soot in the oil" not in found.signs  # looked, and it leans no way
    assert "corrosion" not in found.signs  # nobody looked
