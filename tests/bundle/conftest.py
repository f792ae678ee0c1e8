"""A finished report of the invented scaffold case, made without running a notebook."""

import json
from datetime import UTC, datetime
from pathlib import Path

import pytest

from rca.archive.codec import dumps
from rca.archive.crate import crate
from rca.archive.record import stable_record
from rca.archive.run_record import run_record, sealed
from rca.figures.style import font_folder
from rca.intake.read import load_case
from rca.intake.scaffold import make_case

ROOT = Path(__file__).resolve().parents[2]


def write_report(case_dir: Path, report: Path) -> None:
    """Results, a page, a notebook and a figure with the record that lists them."""
    case = load_case(case_dir)
    earlier = min((ROOT / "sample_case" / "earlier").glob("*.json"))
    results = json.loads(earlier.read_text(encoding="utf-8"))
    results["record"] = stable_record(
        case, knowledge="k", seed=1, notebooks={"n.ipynb": "0" * 64}, parameters={"s": {"seed": 1}}
    )
    (report / "notebooks").mkdir(parents=True)
    (report / "figures").mkdir()
    (report / "results.json").write_text(dumps(results), encoding="utf-8")
    (report / "report.html").write_text("<p>invented</p>")
    (report / "notebooks" / "n.ipynb").write_text("{}")
    (report / "figures" / "ä 50.svg").write_text("<svg/>")
    moment = datetime(2026, 3, 6, tzinfo=UTC)
    record = run_record(
        case, case_dir, results, readings={}, options={}, streams={}, notebook_environment={}, fonts=font_folder(),
        started=moment, ended=moment, warnings=(),
    )  # fmt: skip
    full = sealed(record, report)
    (report / "record.json").write_text(dumps(full), encoding="utf-8")
    (report / "ro-crate-metadata.json").write_text(dumps(crate(full)), encoding="utf-8")


@pytest.fixture(scope="session")
def made(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A case folder with its report inside; copy it before changing anything."""
    case = tmp_path_factory.mktemp("made") / "case"
    make_case(case)
    (case / "oil").mkdir(exist_ok=True)
    (case / "oil" / "Bericht Öl.txt").write_text("as received", encoding="utf-8")
    write_report(case, case / "report")
    return case
