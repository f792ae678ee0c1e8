"""One case folder becomes one report folder."""

import hashlib
import shutil
import tempfile
from collections.abc import Callable, Iterator, Mapping
from concurrent.futures import FIRST_COMPLETED, Future, ThreadPoolExecutor, wait
from contextlib import contextmanager, nullcontext
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from rca.archive.codec import dumps, to_plain
from rca.archive.record import machine, stable_record
from rca.archive.results import assemble
from rca.archive.store import Store
from rca.base.errors import NotebookError, ParameterError, RcaError
from rca.base.shipped import shipped_folder
from rca.case.model import Case
from rca.intake.read import load_case
from rca.report.render import RenderedReport, render_report
from rca.runner.execute import check_notebook, read_notebook, run_notebook
from rca.runner.fork_engine import WarmProcess
from rca.runner.parameters import declared_parameters
from rca.runner.plan import Step, plan
from rca.runner.report_folder import whole_folder

Progress = Callable[[str, str], None]  # (stage, "start" | "done" | "failed")
SEED = 20260306
FAILED_SUFFIX = "failed-notebooks"


@dataclass(frozen=True, slots=True, kw_only=True)
class Options:
    """How to run; the defaults suit one case on one machine."""

    notebooks: Path | None = None
    fresh_kernels: bool = False
    jobs: int = 2
    seed: int = SEED
    cell_timeout_s: float = 1800.0
    parameters: Mapping[str, object] | None = None
    paper: str = "A4"
    language: str = "en"


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """What a finished run left behind."""

    folder: Path
    results: dict[str, Any]
    rendered: RenderedReport


def report_case(folder: Path, out: Path, options: Options, progress: Progress) -> Outcome:
    """Run every notebook on a case and put its report folder in place.

    Raises CaseError, ParameterError, NotebookError, ArchiveError or RenderError; then ``out`` is
    as it was before.
    """
    steps = plan(shipped_folder("notebooks"), options.notebooks)
    given = _shared_out(steps, options.parameters or {})
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
            )
        except NotebookError as error:
            kept = _keep_failed(building / "notebooks", out)
            raise NotebookError(f"{error}\nThe executed notebooks are kept in {kept}") from error
        progress("report", "start")
        results = assemble(case, store, record=_record(case, store, steps, options.seed))
        (building / "results.json").write_text(dumps(results), encoding="utf-8")
        (building / "record.json").write_text(
            dumps(_run_record(results, started, options)), encoding="utf-8"
        )
        rendered = render_report(
            case, folder, store, results, paper=options.paper, language=options.language
        )
        progress("report", "done")
    return Outcome(folder=out, results=results, rendered=rendered)


def _shared_out(
    steps: tuple[Step, ...], parameters: Mapping[str, object]
) -> dict[str, dict[str, object]]:
    """Each given parameter goes to every notebook that declares it; one nobody knows is refused.

    Raises ParameterError before anything runs.
    """
    declared = {
        step.stage: {p.name for p in declared_parameters(read_notebook(step.path), step.path.name)}
        for step in steps
    }
    reserved = {"case_dir", "store_dir"}
    for name in parameters:
        if name in reserved or not any(name in names for names in declared.values()):
            known = sorted({n for names in declared.values() for n in names} - reserved)
            raise ParameterError(
                f"no notebook has a parameter {name!r} that may be set; "
                f"known are {', '.join(known)}"
            )
    given: dict[str, dict[str, object]] = {}
    for step in steps:
        if not reserved <= declared[step.stage]:
            raise ParameterError(
                f"{step.path.name} must declare the parameters case_dir and store_dir"
            )
        given[step.stage] = {n: v for n, v in parameters.items() if n in declared[step.stage]}
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
        nullcontext() if options.fresh_kernels else WarmProcess() as warm,
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


def _record(case: Case, store: Store, steps: tuple[Step, ...], seed: int) -> dict[str, Any]:
    knowledge = str(store.read("verdict").check["knowledge"])
    hashes = {
        step.path.name: _source_digest(step.path) + (" (site's own)" if step.own else "")
        for step in steps
    }
    return stable_record(case, knowledge=knowledge, seed=seed, notebooks=hashes)


def _source_digest(path: Path) -> str:
    """SHA-256 over the source of a notebook's cells, whatever its outputs and ids."""
    digest = hashlib.sha256()
    for cell in read_notebook(path).cells:
        digest.update(cell.cell_type.encode() + b"\0" + cell.source.encode() + b"\0")
    return digest.hexdigest()


def _run_record(results: dict[str, Any], started: datetime, options: Options) -> dict[str, Any]:
    return {
        "format": 1,
        **results["record"],
        "started": started.isoformat(timespec="seconds"),
        "ended": datetime.now(UTC).isoformat(timespec="seconds"),
        "machine": machine(),
        "options": to_plain(
            {
                "notebooks": str(options.notebooks) if options.notebooks else "shipped",
                "fresh_kernels": options.fresh_kernels,
                "jobs": options.jobs,
                "parameters": dict(options.parameters or {}),
                "paper": options.paper,
                "language": options.language,
            }
        ),
        "results_sha256": hashlib.sha256(dumps(results).encode()).hexdigest(),
    }


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
