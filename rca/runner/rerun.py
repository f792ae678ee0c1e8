"""The auditor's rerun: integrity first, then every notebook again, then quantity by quantity."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from rca import __version__
from rca.archive.environment import environment, file_digest
from rca.archive.integrity import Breach, check_inputs, read_json
from rca.archive.run_record import RECORD
from rca.base.errors import ArchiveError, CaseError, NotebookError, ParameterError, RenderError
from rca.figures.style import font_folder
from rca.intake.files import list_files
from rca.rerun.check import check_rerun, not_runnable
from rca.rerun.model import FileCompared, RerunCheck
from rca.rerun.page import JSON, RerunPages, write_rerun
from rca.runner.issued import Issued, opened
from rca.runner.report_folder import whole_folder
from rca.runner.run import Options, Progress, report_case

RECOMPUTED = "recomputed"
NOT_COMPARED = ("notebooks/",)  # executed notebooks hold times and folders of their run


@dataclass(frozen=True, slots=True, kw_only=True)
class RerunOptions:
    """How to rerun."""

    notebooks: Path | None = None
    fresh_kernels: bool = False
    jobs: int = 2
    trust: Path | None = None
    paper: str = "A4"


@dataclass(frozen=True, slots=True, kw_only=True)
class Rerun:
    """What a finished rerun left behind."""

    folder: Path
    check: RerunCheck
    pages: RerunPages
    run: Mapping[str, Any] = field(default_factory=dict)


def rerun(
    source: Path, case: Path | None, out: Path, options: RerunOptions, progress: Progress
) -> Rerun:
    """Check, recompute and compare; write the rerun report to ``out``, whole or not at all.

    A run that can't be repeated is a finding and gets its report too. Raises ArchiveError where
    ``source`` is nothing of this program, or unsafe; RenderError for the rerun's own pages.
    """
    started = datetime.now(UTC)
    progress("integrity", "start")
    with opened(source, case, options.trust) as issued, whole_folder(out, mark=JSON) as building:
        progress("integrity", "done")
        check = _check(issued, source.name, building, options, progress)
        surroundings = environment(font_folder())
        run = {
            "program": f"rca {__version__}",
            "started": started.isoformat(timespec="seconds"),
            "ended": datetime.now(UTC).isoformat(timespec="seconds"),
            "machine": f"{surroundings['system']} {surroundings['processor']}, "
            f"Python {surroundings['python']}, machine {surroundings['machine']}",
            "environment": surroundings,
        }
        pages = write_rerun(building, check, run, paper=options.paper)
    return Rerun(folder=out, check=check, pages=pages, run=run)


def _check(
    issued: Issued, name: str, building: Path, options: RerunOptions, progress: Progress
) -> RerunCheck:
    breaches = (*issued.breaches, *_evidence(issued))
    failure = ""
    if issued.case is None:
        failure = "There is no evidence to run on; name the case folder with  --case CASE."
    else:
        try:
            report_case(
                issued.case,
                building / RECOMPUTED,
                _same_options(issued, options),
                progress,
                previous=issued.report,
            )
        except (CaseError, NotebookError, ParameterError, ArchiveError, RenderError) as error:
            failure = f"The run stopped: {error}"
    if failure:
        return not_runnable(
            issued.results,
            source=name,
            failure=failure,
            breaches=breaches,
            signature=issued.signature,
        )
    folder = building / RECOMPUTED
    results = read_json(folder / "results.json")
    record = read_json(folder / RECORD) if issued.whole_record else results["record"]
    return check_rerun(
        issued.results,
        results,
        source=name,
        issued_record=issued.record,
        recomputed_record=record,
        breaches=breaches,
        signature=issued.signature,
        files=_files(issued, folder),
    )


def _same_options(issued: Issued, options: RerunOptions) -> Options:
    """The options of the issued run, as far as they reach into numbers or pages."""
    told = issued.record.get("options", {})
    stable = issued.results["record"]
    return Options(
        notebooks=options.notebooks,
        fresh_kernels=options.fresh_kernels,
        jobs=options.jobs,
        seed=int(stable["seed"]),
        stage_parameters=stable.get("parameters", {}),
        paper=told.get("paper", options.paper),
        language=told.get("language", "en"),
    )


def _evidence(issued: Issued) -> tuple[Breach, ...]:
    if issued.case is None:
        return ()
    there = {file.file: file.sha256 for file in list_files(issued.case)[0]}
    return check_inputs(issued.results["record"]["inputs"], there)


def _files(issued: Issued, folder: Path) -> tuple[FileCompared, ...]:
    """Bytes of every file of the issued report, as recorded, against the recomputed one."""
    if issued.report is None:
        return ()
    listed = issued.record.get("files", {})
    return tuple(
        FileCompared(name=name, same=_same(folder / name, one["sha256"]))
        for name, one in sorted(listed.items())
        if not name.startswith(NOT_COMPARED)
    )


def _same(path: Path, expected: str) -> bool:
    return path.is_file() and file_digest(path) == expected
