"""Run one notebook in place, in a process of its own: what ends the client of its kernel ends nothing else."""

from __future__ import annotations

import json
import math
import time
from pathlib import Path
from typing import Any

import nbformat
from jupyter_client.kernelspec import NoSuchKernel
from nbclient import NotebookClient
from nbclient.exceptions import CellExecutionError, CellTimeoutError, DeadKernelError

# It does not say its types.
_FORMAT: Any = nbformat
#: In seconds, for the kernel alone.
_START = 60
#: In seconds, for the outputs that are still on their way when a cell is done; later ones are lost.
_OUTPUTS = 60


class _Run:
    """The run of a notebook: which cell is running (from 1; 0 before the first), and until when they may."""

    def __init__(self, notebook: Any, seconds: float) -> None:
        self.notebook = notebook
        self.cell = 0
        self.seconds = seconds
        self.end = math.inf

    def execute(self) -> dict[str, Any] | None:
        """Run all cells; return why that failed."""
        client = NotebookClient(
            self.notebook,
            timeout_func=self._left,
            startup_timeout=_START,
            iopub_timeout=_OUTPUTS,
            record_timing=False,
            on_notebook_start=self._start,
            on_cell_execute=self._begin,
        )
        try:
            client.execute(cwd=str(Path.cwd()))
        except CellTimeoutError:
            return {"why": "time"}
        except NoSuchKernel as error:
            return {"why": "no kernel", "says": error.name}
        except CellExecutionError as error:
            return {"why": "error", "cell": self.cell, "name": error.ename, "says": error.evalue}
        except DeadKernelError:
            return {"why": "dead", "cell": self.cell}
        except (RuntimeError, OSError) as error:
            return {"why": "no start", "says": str(error)}
        return None

    def _start(self, **_: Any) -> None:
        self.end = time.monotonic() + self.seconds

    def _begin(self, *, cell_index: int, **_: Any) -> None:
        self.cell = cell_index + 1

    def _left(self, _: Any) -> int:
        """The whole seconds that are left; a limit of none would be no limit."""
        return max(1, math.ceil(self.end - time.monotonic()))


def main(path: str, seconds: str, answer: str) -> int:
    """Run the cells of the notebook at `path` in the current folder, and write it back with their outputs.

    Returns 0, or 1 where it fails in a known way; then the file `answer` says why, as JSON. `seconds` are what the
    cells have together.
    """
    try:
        notebook = _FORMAT.read(path, as_version=4)
    except (ValueError, KeyError, AttributeError, TypeError) as error:
        failed: dict[str, Any] | None = {"why": "unreadable", "says": str(error).partition("\n")[0]}
    else:
        failed = _Run(notebook, float(seconds)).execute()
        _FORMAT.write(notebook, path)
    if failed is None:
        return 0
    Path(answer).write_text(json.dumps(failed), encoding="utf-8")
    return 1
