"""What is stored comes back as it was."""

import json
import math
from pathlib import Path

import numpy as np
import pytest

from rca.archive.codec import dumps, from_plain, to_plain
from rca.archive.results import schema, validate
from rca.archive.store import Store
from rca.base.errors import ArchiveError
from rca.base.panel import Column, Panel, Section, Table
from rca.base.source import Reading, Source
from rca.case.series import AlignedRecord, Series
from rca.suction.check import SuctionCheck, check_suction


def test_a_typed_result_comes_back_the_same(small_case) -> None:
    check = check_suction(small_case, None, seed=1, samples=64)
    text = dumps(to_plain(check))
    assert from_plain(SuctionCheck, json.loads(text)) == check


def test_numbers_without_a_value_survive() -> None:
    plain = to_plain(Reading(value=float("nan"), unit="Pa", u=float("inf")))
    back = from_plain(Reading, json.loads(dumps(plain)))
    assert math.isnan(back.value)
    assert back.u == float("inf")


def test_a_changed_shape_is_refused() -> None:
    with pytest.raises(ArchiveError, match="run the report again"):
        from_plain(Reading, {"value": "much", "unit": 3})


def test_the_slow_records_come_back_the_same(tmp_path: Path) -> None:
    time = np.arange(5.0)
    series = Series(
        quantity="inlet pressure",
        unit="Pa",
        mean=time,
        low=time - 1,
        high=time + 1,
        source=Source(file="a", locator="b"),
        usable=False,
        remark="stuck",
    )
    store = Store(tmp_path)
    assert store.read_aligned() is None
    store.write_aligned(AlignedRecord(time_s=time, bin_s=1.0, series={"inlet pressure": series}))
    back = store.read_aligned()
    assert back is not None
    assert back.series["inlet pressure"].remark == "stuck"
    assert back.get("inlet pressure") is None
    assert np.array_equal(back.series["inlet pressure"].high, time + 1)


@pytest.mark.parametrize("cell", ["=1+1", "+cmd", "@x", "-2+3", "\t=1"])
def test_a_table_holds_no_formula(tmp_path: Path, cell: str) -> None:
    table = Table(name="t", title="T", columns=(Column(title="c"),), rows=((cell,), ("-2.5",)))
    lines = Store(tmp_path).write_table(table).read_text().splitlines()
    assert lines[1].strip('"').startswith("'")
    assert lines[2] == "-2.5"


def test_a_stage_that_was_not_run_is_named(tmp_path: Path) -> None:
    with pytest.raises(ArchiveError, match="'oil' are not in the store"):
        Store(tmp_path).read("oil")


@pytest.mark.parametrize("name", ["../x", "", "a/b", "A", "x y"])
def test_a_name_can_not_leave_the_store(tmp_path: Path, name: str) -> None:
    with pytest.raises(ArchiveError, match="can't name"):
        Store(tmp_path).write_svg(name, b"")


def test_the_earlier_results_of_the_sample_fit_the_schema(sample_dir: Path) -> None:
    files = sorted((sample_dir / "earlier").glob("*.json"))
    assert len(files) >= 5
    for path in files:
        validate(json.loads(path.read_text(encoding="utf-8")))


def test_results_of_another_shape_are_refused_with_the_key(sample_dir: Path) -> None:
    path = next((sample_dir / "earlier").glob("*.json"))
    plain = json.loads(path.read_text(encoding="utf-8"))
    plain["verdict"]["side"] = "left"
    with pytest.raises(ArchiveError, match=r"verdict\.side"):
        validate(plain)
    assert schema()["properties"]["format"]["const"] == 1


def test_a_section_is_plain_data() -> None:
    section = Section(
        stage="s", title="t", panels=(Panel(key="k", title="t", question="q", answer="a"),)
    )
    assert from_plain(Section, to_plain(section)) == section
