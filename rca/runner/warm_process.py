"""The warm process from outside: started early, so that it imports while others still do.

This module imports nothing heavy; see ``rca.runner.fork_engine`` for what the process is for.
"""

import contextlib
import os
import socket
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from types import TracebackType
from typing import Self

from rca.base.errors import NotebookError

START_TIMEOUT_S = 120.0
NOTEBOOK_ENVIRONMENT = {
    "MPLBACKEND": "module://matplotlib_inline.backend_inline",
    "OPENBLAS_NUM_THREADS": "1",  # a pool of threads would not survive the fork
    "OMP_NUM_THREADS": "1",
    "MKL_NUM_THREADS": "1",
}


class WarmProcess:
    """The warm process; use as a context manager around all notebooks of a report."""

    def __init__(self) -> None:
        self._home = tempfile.TemporaryDirectory(prefix="rca-warm-")
        self._address = str(Path(self._home.name) / "s")
        environment = {"PYTHONHASHSEED": "0"} | os.environ | NOTEBOOK_ENVIRONMENT
        self._process = subprocess.Popen(  # noqa: S603  our own module, our own interpreter
            [sys.executable, "-m", "rca.runner.warm", self._address],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            env=environment,
        )

    def __enter__(self) -> Self:
        """Return at once; the first notebook waits until the libraries are imported."""
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        value: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        """End the warm process and every copy of it."""
        for pipe in (self._process.stdin, self._process.stdout):
            if pipe is not None:
                with contextlib.suppress(BrokenPipeError):
                    pipe.close()
        if not Path(self._address).exists():
            self._process.kill()  # nothing was run: it is still importing
        try:
            self._process.wait(timeout=5)
        except subprocess.TimeoutExpired:
            self._process.kill()
            self._process.wait()
        self._home.cleanup()

    def connect(self) -> socket.socket:
        """A connection to a fresh copy of the warm process.

        Raises NotebookError where the warm process could not start.
        """
        deadline = time.monotonic() + START_TIMEOUT_S
        while time.monotonic() < deadline:
            connection = socket.socket(socket.AF_UNIX, socket.SOCK_STREAM)
            try:
                connection.connect(self._address)
            except (FileNotFoundError, ConnectionRefusedError):
                connection.close()
                if self._process.poll() is not None:
                    break
                time.sleep(0.02)
            else:
                return connection
        raise NotebookError(
            "the process that runs the notebooks did not start "
            f"(exit status {self._process.poll()}); its message is above. "
            "Try again with --fresh-kernels."
        )
