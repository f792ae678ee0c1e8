"""A warm process that has imported the libraries once and forks a fresh copy for each notebook.

Started as ``python -m rca.runner.warm SOCKET`` by ``rca.runner.fork_engine``. It has one thread,
no event loop and no open files but its sockets, so that a fork is safe. For every connection on
SOCKET it forks; the child becomes a session of its own, runs the cells it is sent in an IPython
shell and answers each with its outputs. Nothing a notebook does reaches the next one. When the
parent's end of standard input closes, for whatever reason, all children are killed.
"""

import contextlib
import ctypes
import json
import os
import random
import select
import signal
import socket
import sys
from pathlib import Path
from typing import Any

import matplotlib as mpl
import numpy as np

from rca.physics.bubble import load_kernels
from rca.runner.shell import NotebookShell

_PR_SET_PDEATHSIG = 1


def main() -> None:
    """Serve until standard input closes."""
    mpl.use("module://matplotlib_inline.backend_inline", force=False)
    _preload()
    shell = NotebookShell()
    listener = socket.socket(socket.AF_UNIX, socket.SOCK_STREAM)
    try:
        listener.bind(sys.argv[1])
    except FileNotFoundError:  # whoever started this process is gone already
        return
    listener.listen(64)
    sys.stdout.write("ready\n")
    sys.stdout.flush()
    children: set[int] = set()
    kernels_loaded = False
    while True:
        ready, _, _ = select.select([listener, sys.stdin], [], [], 1.0 if kernels_loaded else 0.05)
        if not ready and not kernels_loaded:
            # idle while the first notebooks run: what is loaded now, later ones inherit
            load_kernels()
            kernels_loaded = True
        children = _reap(children)
        if sys.stdin in ready and not sys.stdin.read(1):
            break
        if listener in ready:
            connection, _ = listener.accept()
            child = os.fork()
            if child == 0:
                listener.close()
                _serve(connection, shell)
            children.add(child)
            connection.close()
    for child in children:
        with contextlib.suppress(ProcessLookupError):
            os.killpg(child, signal.SIGKILL)


def _preload() -> None:
    """Import what every notebook needs, once."""
    import matplotlib.pyplot  # noqa: F401, ICN001, PLC0415
    import pandas  # noqa: F401, ICN001, PLC0415
    import scipy.optimize  # noqa: PLC0415
    import scipy.stats  # noqa: F401, PLC0415

    import rca.notebook  # noqa: F401, PLC0415


def _reap(children: set[int]) -> set[int]:
    return {child for child in children if os.waitpid(child, os.WNOHANG)[0] == 0}


def _serve(connection: socket.socket, shell: NotebookShell) -> None:
    """Run one notebook's cells in this forked copy; never returns."""
    os.setsid()
    _die_with_parent()
    devnull = os.open(os.devnull, os.O_RDONLY)
    os.dup2(devnull, 0)
    stream = connection.makefile("rwb")
    _answer(stream, {"pid": os.getpid()})
    for line in stream:
        message: dict[str, Any] = json.loads(line)
        if "start" in message:
            start = message["start"]
            os.chdir(start["folder"])
            sys.path[:0] = [start["folder"]]
            random.seed(start["seed"])
            np.random.seed(start["seed"])  # noqa: NPY002  for cells that still use it
            _answer(stream, {"started": True})
        else:
            _answer(stream, shell.run(message["cell"]))
    os._exit(0)


def _answer(stream: Any, message: dict[str, Any]) -> None:
    stream.write(json.dumps(message).encode() + b"\n")
    stream.flush()


def _die_with_parent() -> None:
    """Ask Linux to kill this process when the warm process dies."""
    if sys.platform == "linux" and Path("/proc").exists():
        ctypes.CDLL(None).prctl(_PR_SET_PDEATHSIG, signal.SIGKILL)


if __name__ == "__main__":
    main()
