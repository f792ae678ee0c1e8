"""How the ways of running the sample's notebooks compare: ``python -m tests.benchmarks.notebooks``.

One run of each way, in turn, wall seconds and ratios. The floor is the same cells in one plain
Python process, imports included. papermill's default is a fresh kernel a notebook with autosave
after each cell.
"""

import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import nbformat
from papermill.execute import execute_notebook

from rca.runner import run as runner
from rca.runner.plan import plan

ROOT = Path(__file__).resolve().parents[2]
STEPS = plan(ROOT / "notebooks", None)
CASE = ROOT / "sample_case"


def plain_process(folder: Path) -> None:
    """The cells of all notebooks as one script in one fresh interpreter."""
    lines = ["import IPython.display", "import matplotlib; matplotlib.use('agg')"]
    for step in STEPS:
        for cell in nbformat.read(step.path, as_version=4).cells:
            if cell.cell_type == "code":
                lines.append(cell.source)
                if "parameters" in cell.metadata.get("tags", ()):
                    lines.append(f"case_dir, store_dir = {str(CASE)!r}, {str(folder)!r}")
    script = folder / "all.py"
    script.write_text("\n".join(lines))
    subprocess.run([sys.executable, str(script)], check=True, cwd=ROOT, stdout=subprocess.DEVNULL)


def forked(jobs: int, *, fresh: bool = False) -> Callable[[Path], None]:
    def run(folder: Path) -> None:
        scratch = folder / "scratch"
        scratch.mkdir()
        runner._run_all(
            STEPS, {s.stage: {} for s in STEPS}, case_dir=CASE, store=runner.Store(folder),
            scratch=scratch, options=runner.Options(jobs=jobs, fresh_kernels=fresh),
            progress=lambda *_: None,
        )

    return run


def papermill_default(folder: Path) -> None:
    for step in STEPS:
        execute_notebook(
            str(step.path), str(folder / step.path.name),
            {"case_dir": str(CASE), "store_dir": str(folder)}, progress_bar=False,
            kernel_name="python3",
        )


WAYS: dict[str, Callable[[Path], None]] = {
    "one plain process (floor)": plain_process,
    "forked, one at a time": forked(1),
    "forked, two at a time (default)": forked(2),
    "fresh kernels, two at a time": forked(2, fresh=True),
    "papermill's default": papermill_default,
}


def main() -> None:
    with tempfile.TemporaryDirectory() as name:
        plain_process(Path(name))  # compiled kernels cached, files read once
    seconds: dict[str, float] = {}
    for words, way in WAYS.items():
        with tempfile.TemporaryDirectory() as name:
            started = time.perf_counter()
            way(Path(name))
            seconds[words] = time.perf_counter() - started
    floor = seconds["one plain process (floor)"]
    default = seconds["papermill's default"]
    print(f"{'way':34} {'wall s':>7} {'/ floor':>8} {'default /':>10}")
    for words, wall in seconds.items():
        print(f"{words:34} {wall:7.1f} {wall / floor:8.2f} {default / wall:10.2f}")


if __name__ == "__main__":
    main()
