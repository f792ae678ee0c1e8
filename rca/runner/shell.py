"""An IPython shell that returns a cell's outputs in the notebook format."""

import base64
import sys
from collections.abc import Callable
from io import TextIOBase
from typing import Any

from IPython.core.displayhook import DisplayHook
from IPython.core.displaypub import DisplayPublisher
from IPython.core.interactiveshell import InteractiveShell
from traitlets.config import Config

Output = dict[str, Any]


class _Tape(TextIOBase):
    """Standard output or error of a cell; joined while nothing else is shown between."""

    def __init__(self, name: str, outputs: Callable[[], list[Output]]) -> None:
        self._name = name
        self._outputs = outputs

    def write(self, text: str) -> int:
        """Add to the cell's outputs."""
        outputs = self._outputs()
        if text and outputs and outputs[-1].get("name") == self._name:
            outputs[-1]["text"] += text
        elif text:
            outputs.append({"output_type": "stream", "name": self._name, "text": text})
        return len(text)

    def writable(self) -> bool:
        """Text may be written."""
        return True


class _Publisher(DisplayPublisher):
    """Collects what a cell displays."""

    outputs: list[Output]

    def publish(self, data: Any, metadata: Any = None, source: Any = None, **kwargs: Any) -> None:
        """Add one display to the cell's outputs."""
        del source, kwargs
        self.outputs.append(
            {"output_type": "display_data", "data": _plain(data), "metadata": metadata or {}}
        )


class _Hook(DisplayHook):
    """Collects the value of a cell's last expression."""

    outputs: list[Output]

    def start_displayhook(self) -> None:
        """Nothing is printed before a result."""

    def write_output_prompt(self) -> None:
        """A notebook has its own prompt."""

    def write_format_data(self, format_dict: Any, md_dict: Any = None) -> None:
        """Add the result to the cell's outputs."""
        self.outputs.append(
            {
                "output_type": "execute_result",
                "execution_count": self.prompt_count,
                "data": _plain(format_dict),
                "metadata": md_dict or {},
            }
        )

    def finish_displayhook(self) -> None:
        """Nothing is printed after a result."""


class _Shell(InteractiveShell):
    """An IPython shell without windows."""

    def ask_exit(self) -> None:
        """``exit()`` ends the notebook, and that is a failure of the run."""
        raise SystemExit

    def enable_gui(self, gui: str | None = None) -> None:
        """Figures go into the notebook; there is no window loop to start."""


def _made(config: Config) -> Any:
    """The shell with our two hooks, which its own types don't know."""
    return _Shell.instance(config=config, display_pub_class=_Publisher, displayhook_class=_Hook)


class NotebookShell:
    """One IPython shell, made before the fork so that each copy has it ready."""

    def __init__(self) -> None:
        config = Config()
        config.HistoryManager.enabled = False  # its thread and its database don't survive a fork
        config.InteractiveShell.colors = "NoColor"
        config.InteractiveShell.autocall = 0
        self._shell = _made(config)
        self._shell.enable_matplotlib("inline")
        self._outputs: list[Output] = []
        self._failure: Output | None = None
        self._shell._showtraceback = self._keep_traceback  # noqa: SLF001  the hook IPython offers

    def run(self, source: str) -> dict[str, Any]:
        """Run one cell; the answer holds its outputs, its count and its error, if any."""
        self._outputs = []
        self._failure = None
        self._shell.display_pub.outputs = self._outputs
        self._shell.displayhook.outputs = self._outputs
        kept = sys.stdout, sys.stderr
        sys.stdout = _Tape("stdout", lambda: self._outputs)
        sys.stderr = _Tape("stderr", lambda: self._outputs)
        try:
            result = self._shell.run_cell(source, store_history=True)
            if not result.success and self._failure is None:
                self._keep_silent_failure(result.error_in_exec or result.error_before_exec)
        finally:
            sys.stdout, sys.stderr = kept
        return {
            "outputs": self._outputs,
            "count": self._shell.execution_count - 1,
            "error": self._failure,
        }

    def _keep_silent_failure(self, error: BaseException | None) -> None:
        """Keep a failure IPython shows no traceback for: ``exit()`` is one."""
        self._failure = {
            "output_type": "error",
            "ename": type(error).__name__,
            "evalue": str(error),
            "traceback": [f"{type(error).__name__}: {error}; cells after this one were not run"],
        }
        self._outputs.append(self._failure)

    def _keep_traceback(
        self, kind: type[BaseException], value: BaseException | str, lines: list[str]
    ) -> None:
        self._failure = {
            "output_type": "error",
            "ename": getattr(kind, "__name__", str(kind)),
            "evalue": str(value),
            "traceback": list(lines),
        }
        self._outputs.append(self._failure)


def _plain(data: dict[str, Any]) -> dict[str, Any]:
    """Display data with bytes (PNG) as base64 text, as the notebook format has it."""
    return {
        mime: base64.b64encode(value).decode() if isinstance(value, bytes) else value
        for mime, value in data.items()
    }
