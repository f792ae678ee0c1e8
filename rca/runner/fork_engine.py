"""A papermill engine that runs each notebook in a forked copy of one warm process.

Importing the scientific libraries costs more than the work of most notebooks. The warm process
(``rca.runner.warm``) imports them once; each notebook gets a copy of it by fork, so notebooks
are as isolated from each other as with a kernel each, at a fraction of the cost. Where the
platform has no fork, use fresh kernels instead (``rca.runner.execute``).
"""

import contextlib
import json
import os
import signal
from types import TracebackType
from typing import Any, Self

import nbformat
from papermill.engines import Engine

from rca.runner.warm_process import START_TIMEOUT_S, WarmProcess


class ForkEngine(Engine):  # type: ignore[misc]  # papermill ships no types
    """Runs the cells of one notebook in one forked copy."""

    @classmethod
    def execute_managed_notebook(
        cls,
        nb_man: Any,
        kernel_name: str,
        *,
        warm: WarmProcess,
        folder: str,
        seed: int,
        cell_timeout_s: float,
        **kwargs: Any,
    ) -> None:
        """Run all code cells in order; stop at the first that fails, as papermill does."""
        del kernel_name, kwargs
        with _Copy(warm, folder=folder, seed=seed, timeout_s=cell_timeout_s) as copy:
            for index, cell in enumerate(nb_man.nb.cells):
                if cell.cell_type != "code":
                    continue
                nb_man.cell_start(cell, index)
                answer = copy.run(cell.source)
                cell.outputs = [nbformat.from_dict(output) for output in answer["outputs"]]
                cell.execution_count = answer["count"]
                if answer["error"] is not None:
                    nb_man.cell_exception(cell, index)
                    break
                nb_man.cell_complete(cell, index)


class _Copy:
    """One forked copy of the warm process, at the other end of a socket."""

    def __init__(self, warm: WarmProcess, *, folder: str, seed: int, timeout_s: float) -> None:
        self._timeout_s = timeout_s
        self._connection = warm.connect()
        self._connection.settimeout(START_TIMEOUT_S)
        self._stream = self._connection.makefile("rwb")
        self._pid: int = self._receive()["pid"]
        self._send({"start": {"folder": folder, "seed": seed}})
        self._receive()
        self._connection.settimeout(timeout_s)

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        value: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        with contextlib.suppress(OSError):
            self._stream.close()
        self._connection.close()
        with contextlib.suppress(ProcessLookupError, PermissionError):
            os.killpg(self._pid, signal.SIGKILL)

    def run(self, source: str) -> dict[str, Any]:
        """One cell's outputs; a dead or silent copy becomes the cell's error."""
        try:
            self._send({"cell": source})
            return self._receive()
        except TimeoutError:
            return _failed("Timeout", f"the cell ran longer than {self._timeout_s:g} s; stopped")
        except (ConnectionError, json.JSONDecodeError):
            return _failed(
                "DeadKernel",
                "the notebook's process ended in this cell: it was killed, ran out of memory, "
                "or the cell called os._exit",
            )

    def _send(self, message: dict[str, Any]) -> None:
        self._stream.write(json.dumps(message).encode() + b"\n")
        self._stream.flush()

    def _receive(self) -> dict[str, Any]:
        line = self._stream.readline()
        if not line:
            raise ConnectionError
        answer: dict[str, Any] = json.loads(line)
        return answer


def _failed(name: str, message: str) -> dict[str, Any]:
    error = {"output_type": "error", "ename": name, "evalue": message, "traceback": [message]}
    return {"outputs": [error], "count": None, "error": error}
