"""Many cases: each in a process of its own, one broken case never stops the rest.

A case whose report already stands, made from the same evidence by the same code, knowledge,
libraries and options, is not run again; so a batch that was cut short goes on where it stopped.
"""

import importlib
import threading
import time
from collections import deque
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from dataclasses import dataclass, replace
from functools import cache
from multiprocessing import get_context
from pathlib import Path
from typing import Any

from rca.archive.integrity import check_report, read_json
from rca.archive.record import code_digest, knowledge_files, versions
from rca.archive.run_record import RECORD
from rca.base.errors import ArchiveError, RcaError
from rca.base.shipped import shipped_folder
from rca.intake.files import list_files
from rca.runner.fetch import fetched, is_remote
from rca.runner.plan import plan
from rca.runner.run import Options, notebook_digests, report_case
from rca.runner.warm_process import WarmProcess

DONE = "done"
ALREADY = "already done"
FAILED = "failed"
RETRIES = 2  # on a cluster, when a worker is lost


@dataclass(frozen=True, slots=True, kw_only=True)
class Job:
    """One case of a batch."""

    case: str  # a folder, or a URL that fsspec knows
    out: Path


@dataclass(frozen=True, slots=True, kw_only=True)
class Finished:
    """How one case ended."""

    case: str
    out: str
    state: str  # "done", "already done" or "failed"
    side: str = ""
    seconds: float = 0.0
    message: str = ""


Tell = Callable[[Finished], None]


def run_batch(
    jobs: Sequence[Job],
    options: Options,
    *,
    workers: int,
    tell: Tell,
    scheduler: str = "",
    again: bool = False,
) -> tuple[Finished, ...]:
    """Run every case; ``tell`` hears of each as it ends. Results in the order of ``jobs``.

    ``workers`` local processes, or those of the Dask cluster at ``scheduler``, which must see the
    same folders. Raises ArchiveError where the cluster can't be reached.
    """
    one = replace(options, jobs=1)
    ended: dict[str, Finished] = {}
    source = _on_cluster(jobs, one, scheduler, again) if scheduler else None
    for finished in source or _locally(jobs, one, workers, again):
        ended[finished.out] = finished
        tell(finished)
    return tuple(ended[str(job.out)] for job in jobs)


def run_one(job: Job, options: Options, again: bool) -> Finished:
    """One case in this process; every failure becomes a result."""
    started = time.monotonic()

    def finished(state: str, side: str = "", message: str = "") -> Finished:
        seconds = time.monotonic() - started
        return Finished(
            case=job.case,
            out=str(job.out),
            state=state,
            side=side,
            seconds=seconds,
            message=message,
        )

    with _one_at_a_time:
        try:
            case = fetched(job.case) if is_remote(job.case) else Path(job.case)
            standing = None if again else standing_side(case, job.out, options)
            if standing is not None:
                return finished(ALREADY, standing)
            warm = None if options.fresh_kernels else _warm()
            outcome = report_case(case, job.out, options, lambda *_: None, warm=warm)
        except (RcaError, OSError) as error:
            return finished(FAILED, message=str(error))
        if outcome.rendered.pdf is None:
            return finished(FAILED, message=outcome.rendered.advice)
        return finished(DONE, str(outcome.results["verdict"]["side"]))


_one_at_a_time = threading.Lock()  # a cluster's worker may have threads; the renderer has one log


@cache
def _warm() -> WarmProcess:
    """The warm process of this worker; it ends with it."""
    return WarmProcess()


def standing_side(case: Path, out: Path, options: Options) -> str | None:
    """The side a standing report found, where running again could give nothing else."""
    try:
        record = read_json(out / RECORD)
        results = read_json(out / "results.json")
    except ArchiveError:
        return None
    told = record.get("options", {})
    steps = plan(shipped_folder("notebooks"), options.notebooks)
    same = (
        record.get("inputs") == {f.file: f.sha256 for f in list_files(case)[0]}
        and record.get("code") == code_digest()
        and record.get("knowledge_files") == knowledge_files()
        and record.get("versions") == versions()
        and record.get("notebooks") == notebook_digests(steps)
        and told.get("parameters") == dict(options.parameters or {})
        and told.get("paper") == options.paper
        and told.get("language") == options.language
        and record.get("seed") == options.seed
        and "report.pdf" in record.get("files", {})
        and not check_report(out, record)
    )
    return str(results["verdict"]["side"]) if same else None


def _locally(
    jobs: Sequence[Job], options: Options, workers: int, again: bool
) -> Iterator[Finished]:
    """Each slot is a process of its own, so that one that dies takes one case with it."""
    waiting = deque(jobs)
    context = get_context("spawn")
    running: dict[Future[Finished], tuple[ProcessPoolExecutor, Job]] = {}

    def start(slot: ProcessPoolExecutor) -> None:
        if waiting:
            job = waiting.popleft()
            running[slot.submit(run_one, job, options, again)] = (slot, job)
        else:
            slot.shutdown(wait=False)

    for _ in range(min(workers, len(jobs))):
        start(ProcessPoolExecutor(1, mp_context=context))
    try:
        while running:
            ready, _ = wait(running, return_when=FIRST_COMPLETED)
            for future in ready:
                slot, job = running.pop(future)
                try:
                    finished = future.result()
                except BrokenProcessPool:
                    slot.shutdown(wait=False)
                    slot = ProcessPoolExecutor(1, mp_context=context)
                    finished = _lost(job, "its process was killed or ran out of memory")
                start(slot)
                yield finished
    finally:
        for slot, _ in running.values():
            slot.shutdown(wait=False, cancel_futures=True)


def _on_cluster(
    jobs: Sequence[Job], options: Options, scheduler: str, again: bool
) -> Iterator[Finished]:
    try:
        distributed: Any = importlib.import_module("distributed")  # an extra
    except ImportError as error:
        raise ArchiveError("--scheduler needs the extra  rca[cluster]") from error
    try:
        client = distributed.Client(scheduler, timeout=30)
    except (OSError, TimeoutError, ValueError) as error:
        raise ArchiveError(f"no Dask scheduler answers at {scheduler}: {error}") from error
    with client:
        futures = {
            client.submit(run_one, job, options, again, pure=False, retries=RETRIES): job
            for job in jobs
        }
        for future in distributed.as_completed(list(futures)):
            if future.status == "finished":
                yield future.result()
            else:
                yield _lost(futures[future], f"lost on the cluster: {future.exception()!r}")


def _lost(job: Job, message: str) -> Finished:
    return Finished(case=job.case, out=str(job.out), state=FAILED, message=message)
