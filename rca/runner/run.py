"""One case folder becomes one report folder."""

import hashlib
import shutil
import tempfile
from collections.abc import Callable, Iterator, Mapping
from concurrent.futures import FIRST_COMPLETED, Future, ThreadPoolExecutor, wait
from contextlib import AbstractContextManager, contextmanager, nullcontext
from dataclasses import dataclass, field
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from rca.archive.codec import dumps
from rca.archive.crate import crate
from rca.archive.record import stable_record
from rca.archive.results import assemble
from rca.archive.run_record import CRATE, RECORD, run_record, sealed
from rca.archive.store import Store
from rca.base.errors import NotebookError, ParameterError, RcaError
from rca.base.shipped import shipped_folder
from rca.case.model import Case
from rca.figures.style import font_folder
from rca.intake.read import load_case
from rca.report.exports import write_exports
from rca.report.render import RenderedReport, render_report
from rca.report.revisions import keep_earlier, next_revisions
from rca.runner.execute import check_notebook, read_notebook, run_notebook
from rca.runner.parameters import declared_parameters
from rca.runner.plan import Step, plan
from rca.runner.readings import readings
from rca.runner.report_folder import whole_folder
from rca.runner.warm_process import NOTEBOOK_ENVIRONMENT, WarmProcess

Progress = Callable[[str, str], None]  # (stage, "start" | "done" | "failed")
SEED = 20260306
FAILED_SUFFIX = "failed-notebooks"
RESULTS = "results.json"
RESERVED = frozenset({"case_dir", "store_dir"})


@dataclass(frozen=True, slots=True, kw_only=True)
class Options:
    """How to run; the defaults suit one case on one machine."""

    notebooks: Path | None = None
    fresh_kernels: bool = False
    jobs: int = 2
    seed: int = SEED
    cell_timeout_s: float = 1800.0
    parameters: Mapping[str, object] | None = None
    stage_parameters: Mapping[str, Mapping[str, object]] = field(default_factory=dict)
    paper: str = ""  # that of case.toml where none is given
    language: str = ""
    reason: str = ""  # why the report is issued again


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """What a finished run left behind."""

    folder: Path
    results: dict[str, Any]
    rendered: RenderedReport


def report_case(
    folder: Path,
    out: Path,
    options: Options,
    progress: Progress,
    *,
    warm: WarmProcess | None = None,
    previous: Path | None = None,
) -> Outcome:
    """Run every notebook on a case and put its report folder in place.

    ``warm`` lends a warm process that outlives this case; without it one is made. ``previous`` is
    the report whose revisions are continued, the one at ``out`` where none is named.
    Raises CaseError, ParameterError, NotebookError, ArchiveError or RenderError; then ``out`` is
    as it was before.
    """
    steps = plan(shipped_folder("notebooks"), options.notebooks)
    given = _shared_out(steps, options.parameters or {}, options.stage_parameters)
    progress("case", "start")
    case = load_case(folder)
    progress("case", "done")
    started = datetime.now(UTC)
    with whole_folder(out) as building, _scratch() as scratch:
        store = Store(building)
        try:
            _run_all(
                steps,
                given,
                case_dir=folder.resolve(),
                store=store,
                scratch=scratch,
                options=options,
                progress=progress,
                lent=warm,
            )
        except NotebookError as error:
            kept = _keep_failed(building / "notebooks", out)
            raise NotebookError(f"{error}\nThe executed notebooks are kept in {kept}") from error
        progress("report", "start")
        parameters = resolved_parameters(steps, given)
        results = assemble(
            case, store, record=_record(case, store, steps, options.seed, parameters)
        )
        text = dumps(results)
        (building / RESULTS).write_text(text, encoding="utf-8")
        digest = hashlib.sha256(text.encode()).hexdigest()
        standing = previous if previous is not None else out
        revisions = next_revisions(results, digest, standing, reason=options.reason)
        rendered = render_report(
            case,
            folder,
            store,
            results,
            paper=options.paper,
            language=options.language,
            revisions=revisions,
        )
        keep_earlier(standing, building, revisions)
        write_exports(case, store, results, language=options.language)
        _write_record(case, folder, store, results, options, started)
        progress("report", "done")
    return Outcome(folder=out, results=results, rendered=rendered)


def _shared_out(
    steps: tuple[Step, ...],
    parameters: Mapping[str, object],
    of_stages: Mapping[str, Mapping[str, object]],
) -> dict[str, dict[str, object]]:
    """Each given parameter goes to every notebook that declares it; one nobody knows is refused.

    ``of_stages`` are those of an earlier run, by stage; what a notebook no longer declares is
    left out, and shows as a difference of the parameters.

    Raises ParameterError before anything runs.
    """
    declared = {
        step.stage: {p.name for p in declared_parameters(read_notebook(step.path), step.path.name)}
        for step in steps
    }
    for name in parameters:
        if name in RESERVED or not any(name in names for names in declared.values()):
            known = sorted({n for names in declared.values() for n in names} - RESERVED)
            raise ParameterError(
                f"no notebook has a parameter {name!r} that may be set; "
                f"known are {', '.join(known)}"
            )
    given: dict[str, dict[str, object]] = {}
    for step in steps:
        if not declared[step.stage] >= RESERVED:
            raise ParameterError(
                f"{step.path.name} must declare the parameters case_dir and store_dir"
            )
        mine = {**of_stages.get(step.stage, {}), **parameters}
        given[step.stage] = {n: v for n, v in mine.items() if n in declared[step.stage] - RESERVED}
        check_notebook(step.path, {"case_dir": "", "store_dir": "", **given[step.stage]})
    return given


def _run_all(
    steps: tuple[Step, ...],
    given: Mapping[str, Mapping[str, object]],
    *,
    case_dir: Path,
    store: Store,
    scratch: Path,
    options: Options,
    progress: Progress,
    lent: WarmProcess | None = None,
) -> None:
    """Run the notebooks, each as soon as those it needs are done, at most ``jobs`` at a time."""

    def run(step: Step, warm: WarmProcess | None) -> None:
        progress(step.stage, "start")
        folder = scratch / step.stage
        folder.mkdir()
        run_notebook(
            step.path,
            {"case_dir": str(case_dir), "store_dir": str(store.folder), **given[step.stage]},
            output=store.folder / "notebooks" / step.path.name,
            folder=folder,
            warm=warm,
            seed=options.seed,
            cell_timeout_s=options.cell_timeout_s,
        )
        if not store.has(step.stage):
            raise NotebookError(f"{step.path.name} ran but stored no stage {step.stage!r}")
        progress(step.stage, "done")

    waiting = list(steps)
    done: set[str] = set()
    with (
        _warm(options, lent) as warm,
        ThreadPoolExecutor(max_workers=max(1, options.jobs)) as pool,
    ):
        running: dict[Future[None], Step] = {}
        while waiting or running:
            for step in [s for s in waiting if done.issuperset(s.needs)]:
                waiting.remove(step)
                running[pool.submit(run, step, warm)] = step
            finished, _ = wait(running, return_when=FIRST_COMPLETED)
            for future in finished:
                step = running.pop(future)
                try:
                    future.result()
                except RcaError:
                    progress(step.stage, "failed")
                    for other in running:
                        other.cancel()
                    raise
                done.add(step.stage)


def resolved_parameters(
    steps: tuple[Step, ...], given: Mapping[str, Mapping[str, object]]
) -> dict[str, dict[str, object]]:
    """What each stage runs with, defaults included; the folders are left out."""
    return {
        step.stage: {
            p.name: given[step.stage].get(p.name, p.default)
            for p in declared_parameters(read_notebook(step.path), step.path.name)
            if p.name not in RESERVED
        }
        for step in steps
    }


def _record(
    case: Case,
    store: Store,
    steps: tuple[Step, ...],
    seed: int,
    parameters: dict[str, dict[str, object]],
) -> dict[str, Any]:
    return stable_record(
        case,
        knowledge=str(store.read("verdict").check["knowledge"]),
        seed=seed,
        notebooks=notebook_digests(steps),
        parameters=parameters,
    )


def notebook_digests(steps: tuple[Step, ...]) -> dict[str, str]:
    """SHA-256 over the source of each notebook's cells, by file name."""
    return {
        step.path.name: _source_digest(step.path) + (" (site's own)" if step.own else "")
        for step in steps
    }


def _source_digest(path: Path) -> str:
    """SHA-256 over the source of a notebook's cells, whatever its outputs and ids."""
    digest = hashlib.sha256()
    for cell in read_notebook(path).cells:
        digest.update(cell.cell_type.encode() + b"\0" + cell.source.encode() + b"\0")
    return digest.hexdigest()


def _write_record(
    case: Case,
    folder: Path,
    store: Store,
    results: dict[str, Any],
    options: Options,
    started: datetime,
) -> None:
    """``record.json`` over everything written so far, and the RO-Crate metadata that links it."""
    out = store.folder
    parameters = results["record"]["parameters"]
    record = run_record(
        case,
        folder,
        results,
        readings=readings(case, folder, store),
        options={
            "notebooks": "site's own" if options.notebooks else "shipped",
            "fresh_kernels": options.fresh_kernels,
            "jobs": options.jobs,
            "parameters": dict(options.parameters or {}),
            "paper": options.paper,
            "language": options.language,
            "cell_timeout_s": options.cell_timeout_s,
        },
        streams={"process": options.seed}
        | {stage: p["seed"] for stage, p in parameters.items() if "seed" in p},
        notebook_environment={} if options.fresh_kernels else NOTEBOOK_ENVIRONMENT,
        fonts=font_folder(),
        started=started,
        ended=datetime.now(UTC),
        warnings=_said(out / "notebooks"),
    )
    full = sealed(record, out)
    (out / RECORD).write_text(dumps(full), encoding="utf-8")
    (out / CRATE).write_text(dumps(crate(full)), encoding="utf-8")


def _said(notebooks: Path) -> list[str]:
    """What the notebooks wrote to standard error, by notebook and cell."""
    return [
        f"{path.name}, cell {index}: {output.text.strip()}"
        for path in sorted(notebooks.glob("*.ipynb"))
        for index, cell in enumerate(read_notebook(path).cells)
        for output in cell.get("outputs", ())
        if output.output_type == "stream" and output.name == "stderr"
    ]


def _warm(
    options: Options, lent: WarmProcess | None
) -> AbstractContextManager[WarmProcess | None]:
    if options.fresh_kernels:
        return nullcontext()
    return WarmProcess() if lent is None else nullcontext(lent)


def _keep_failed(notebooks: Path, out: Path) -> Path:
    """Move the executed notebooks of a failed run beside the report, which stays untouched."""
    kept = out.with_name(f"{out.name}-{FAILED_SUFFIX}")
    shutil.rmtree(kept, ignore_errors=True)
    if notebooks.is_dir():
        shutil.copytree(notebooks, kept)
    return kept


@contextmanager
def _scratch() -> Iterator[Path]:
    with tempfile.TemporaryDirectory(prefix="rca-run-") as name:
        yield Path(name)
