"""One run of a real notebook or script, and the words for what keeps it from its end."""

from __future__ import annotations

import json
import os
import shutil
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import pytest
from rerunning.rerunning_trees import MEDIA_TYPE, notebook, showing, worms

from gatecheck.model.rerun import Failure
from gatecheck.rerunning import running
from gatecheck.rerunning.running import run

MINUTES = 2.0
BY_ITSELF = "run it by itself, and mend it there"
ENDS = "see what ends it there; too little memory often does"
INSTALL = "install it, or, if it is code of yours, see that git does not ignore it"


def outcome(folder: Path, path: str, content: str, minutes: float = MINUTES) -> tuple[str, str] | None:
    """Write and run a file; return the message and the advice of its failure."""
    (folder / path).parent.mkdir(parents=True, exist_ok=True)
    (folder / path).write_text(content, encoding="utf-8")
    failure = run(folder, path, minutes)
    assert failure is None or failure.path == path
    return None if failure is None else (failure.message, failure.advice)


def outputs(file: Path) -> list[Any]:
    cells = json.loads(file.read_bytes())["cells"]
    return [each for cell in cells for each in cell.get("outputs", [])]


@pytest.fixture
def r() -> None:
    """A missing R fails continuous integration alone."""
    if shutil.which("Rscript") is None:
        if os.environ.get("CI"):
            pytest.fail("Rscript is missing: install R")
        pytest.skip("Rscript is not installed")


def test_a_script_runs_in_the_folder_with_the_environment_of_the_person(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("STATION", "north")
    (tmp_path / "lib.py").write_text("", encoding="utf-8")
    code = """
import os, pathlib, sys
sys.path.insert(0, os.getcwd())
import lib
print(os.environ["STATION"], os.environ.get("PYTHONHASHSEED"), file=open("told", "w"))
assert sys.stdin.read() == ""
"""
    assert outcome(tmp_path, "analysis/a.py", code) is None
    expected = f"north {os.environ.get('PYTHONHASHSEED')}\n"
    assert (tmp_path / "told").read_text(encoding="utf-8") == expected
    assert not list(tmp_path.rglob("__pycache__"))


@pytest.mark.parametrize(
    "name", ["a b.py", "-c.py", "$(x);&.py", "Ä\u202e.py", "li\nne.py", os.fsdecode(b"\xff.py"), "A.PY"]
)
def test_scripts_of_odd_names_run(tmp_path: Path, name: str) -> None:
    assert outcome(tmp_path, name, "open('ran', 'w').close()") is None
    assert (tmp_path / "ran").exists()


@pytest.mark.parametrize(
    ("code", "message", "advice"),
    [
        ("import sys; sys.exit(4)", "it ended with exit status 4 and said nothing on standard error", BY_ITSELF),
        (
            "import sys; sys.exit('a\\n\\nb\\nc \\x1b[31m\\nd')",
            "it ended with exit status 1; its last words: b / c \x1b[31m / d",
            BY_ITSELF,
        ),
        (
            "raise ValueError('no plots')",
            "it ended with exit status 1; its last words: "
            """File "{folder}/a.py", line 1, in <module> / raise ValueError('no plots') / ValueError: no plots""",
            BY_ITSELF,
        ),
        (
            "import no_such_package.inner",
            "it needs the package no_such_package, which is not installed in this environment",
            INSTALL,
        ),
        ("import os, signal; os.kill(os.getpid(), signal.SIGKILL)", "it was ended by the signal SIGKILL", ENDS),
    ],
)
def test_a_script_that_fails_is_told(tmp_path: Path, code: str, message: str, advice: str) -> None:
    assert outcome(tmp_path, "a.py", code) == (message.format(folder=tmp_path), advice)


def test_a_signal_without_a_name_is_told(tmp_path: Path) -> None:
    nameless = signal.SIGRTMIN + 1
    code = f"import os; os.kill(os.getpid(), {nameless})"

    assert outcome(tmp_path, "a.py", code) == (f"it was ended by the signal {nameless}", ENDS)


def test_endless_complaints_are_cut(tmp_path: Path) -> None:
    told = outcome(tmp_path, "a.py", "import sys; sys.stderr.write('x' * 10**6 + '\\nlast\\n'); sys.exit(1)")

    assert told is not None
    assert told[0] == f"it ended with exit status 1; its last words: {'x' * 300}…"


def test_a_script_that_does_not_end_is_stopped(tmp_path: Path) -> None:
    began = time.monotonic()
    told = outcome(tmp_path, "a.py", "while True: pass", minutes=0.02)

    assert told == ("it was not done after 0.02 minutes, and was stopped", "raise `rerun.minutes`, or shorten it")
    assert time.monotonic() - began < 30


def test_a_limit_of_one_minute_is_told_in_the_singular() -> None:
    assert running._of_time("a.py", 60).message == "it was not done after 1 minute, and was stopped"


def test_what_does_not_listen_is_stopped_too(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A program that ignores the request to end, and one that it left behind."""
    monkeypatch.setattr(running, "_ENDING", 0.5)
    code = """
import os, signal, subprocess, sys, time
signal.signal(signal.SIGTERM, signal.SIG_IGN)
child = subprocess.Popen([sys.executable, "-c", "import time; time.sleep(600)"])
open("pids", "w").write(f"{os.getpid()} {child.pid}")
time.sleep(600)
"""
    assert outcome(tmp_path, "a.py", code, minutes=0.1) is not None
    assert not any(map(_lives, (tmp_path / "pids").read_text(encoding="utf-8").split()))


def test_what_a_script_leaves_running_is_stopped(tmp_path: Path) -> None:
    code = """
import subprocess, sys
child = subprocess.Popen([sys.executable, "-c", "import time; time.sleep(600)"])
open("pid", "w").write(str(child.pid))
"""
    assert outcome(tmp_path, "a.py", code) is None
    assert not _lives((tmp_path / "pid").read_text(encoding="utf-8"))


def _lives(pid: str) -> bool:
    """Whether the process runs; one that has ended may wait for its parent, and is then a zombie."""
    if not Path("/proc/self/stat").exists():
        pytest.skip("there is no /proc to see processes in")
    for _ in range(100):
        try:
            state = Path("/proc", pid, "stat").read_text(encoding="utf-8").rpartition(")")[2].split()[0]
        except OSError:
            return False
        if state == "Z":
            return False
        time.sleep(0.05)
    return True


@pytest.mark.needs_r
@pytest.mark.usefixtures("r")
@pytest.mark.parametrize("name", ["a.R", "my script.r"])
def test_a_script_in_r_runs(tmp_path: Path, name: str) -> None:
    assert outcome(tmp_path, name, 'writeLines("here", "told")') is None
    assert (tmp_path / "told").read_text(encoding="utf-8") == "here\n"


@pytest.mark.needs_r
@pytest.mark.usefixtures("r")
def test_a_script_in_r_that_fails_is_told(tmp_path: Path) -> None:
    told = outcome(tmp_path, "a.R", 'stop("no plots")')
    assert told is not None
    assert told[0].startswith("it ended with exit status 1; its last words: ")
    assert "no plots" in told[0]

    assert outcome(tmp_path, "b.R", "library(nosuchpackage)") == (
        "it needs the package nosuchpackage, which is not installed in this environment",
        INSTALL,
    )


def test_a_missing_interpreter_is_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PATH", str(tmp_path))

    assert outcome(tmp_path, "a.R", "1") == (
        "Rscript cannot be started (No such file or directory)",
        "install it, and see that it is on the PATH",
    )


def test_a_notebook_runs_in_its_own_folder_and_keeps_its_outputs(tmp_path: Path) -> None:
    content = notebook("import os\nopen('here', 'w').close()", "", showing(worms()))

    assert outcome(tmp_path, "notes/a.ipynb", content) is None
    assert (tmp_path / "notes" / "here").exists()
    assert [each["data"][MEDIA_TYPE] for each in outputs(tmp_path / "notes" / "a.ipynb")] == [worms()]
    assert "execution" not in (tmp_path / "notes" / "a.ipynb").read_text(encoding="utf-8").replace(
        "execution_count", ""
    )


def test_a_notebook_that_names_no_kernel_runs_in_that_of_python(tmp_path: Path) -> None:
    assert outcome(tmp_path, "a.ipynb", notebook("open('ran', 'w').close()", kernel=None)) is None
    assert (tmp_path / "ran").exists()


def test_neighbours_of_a_notebook_do_not_stand_in_for_modules_of_the_client(tmp_path: Path) -> None:
    (tmp_path / "json.py").write_text("raise RuntimeError", encoding="utf-8")
    (tmp_path / "nbclient.py").write_text("raise RuntimeError", encoding="utf-8")

    told = outcome(tmp_path, "a.ipynb", "no notebook")

    assert told is not None
    assert told[0].startswith("it is no notebook that can be read: ")


@pytest.mark.parametrize(
    ("sources", "message", "advice"),
    [
        (
            ["1", "raise ValueError('no plots')"],
            "cell 3 ended with ValueError: no plots",
            "run the notebook by itself from top to bottom, and mend it there",
        ),
        (
            ["import no_such_package"],
            "it needs the package no_such_package, which is not installed in this environment",
            INSTALL,
        ),
        (["import os\nos._exit(3)"], "its kernel died while cell 2 ran", ENDS),
    ],
)
def test_a_notebook_that_fails_is_told(tmp_path: Path, sources: list[str], message: str, advice: str) -> None:
    assert outcome(tmp_path, "a.ipynb", notebook(*sources)) == (message, advice)


def test_what_a_notebook_emits_before_it_fails_is_kept(tmp_path: Path) -> None:
    assert outcome(tmp_path, "a.ipynb", notebook(showing(worms()), "1 / 0")) is not None
    assert outputs(tmp_path / "a.ipynb")[0]["data"][MEDIA_TYPE] == worms()


def test_a_notebook_that_does_not_end_is_stopped(tmp_path: Path) -> None:
    endless = "import os\nopen('pid', 'w').write(str(os.getpid()))\nwhile True: pass"

    assert outcome(tmp_path, "a.ipynb", notebook("1", endless), minutes=0.03) == (
        "it was not done after 0.03 minutes, and was stopped",
        "raise `rerun.minutes`, or shorten it",
    )
    assert not _lives((tmp_path / "pid").read_text(encoding="utf-8"))


def test_the_limit_holds_for_all_cells_together(tmp_path: Path) -> None:
    cells = ["import time\ntime.sleep(1.5)"] * 4

    told = outcome(tmp_path, "a.ipynb", notebook(*cells), minutes=0.05)

    assert told is not None
    assert told[0] == "it was not done after 0.05 minutes, and was stopped"


def test_a_client_that_hangs_is_stopped(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(running, "_RUNNER", "import time; time.sleep(600)")
    monkeypatch.setattr(running, "_CLIENT", 0.5)

    assert outcome(tmp_path, "a.ipynb", notebook("1"), minutes=0.01) == (
        "it was not done after 0.01 minutes, and was stopped",
        "raise `rerun.minutes`, or shorten it",
    )


def test_a_client_that_fails_is_told_by_its_last_words(tmp_path: Path) -> None:
    """A notebook that is one by its first look, and whose cells are none."""
    broken = json.dumps({"nbformat": 4, "nbformat_minor": 5, "metadata": {}, "cells": [{"cell_type": "code"}]})

    told = outcome(tmp_path, "a.ipynb", broken)

    assert told is not None
    assert told[0].startswith("it ended with exit status 1; its last words: ")
    assert told[1] == BY_ITSELF


@pytest.mark.parametrize("content", ["", "{", "[]", "3"])
def test_what_is_no_notebook_is_told(tmp_path: Path, content: str) -> None:
    told = outcome(tmp_path, "a.ipynb", content)

    assert told is not None
    assert told[0].startswith("it is no notebook that can be read: ")
    assert told[1] == "save it again in Jupyter"


def test_a_kernel_that_is_not_installed_is_told(tmp_path: Path) -> None:
    assert outcome(tmp_path, "a.ipynb", notebook("1", kernel="no-such-kernel")) == (
        "it asks for the kernel no-such-kernel, which is not installed here",
        "install that kernel (for Python: the package ipykernel), or choose another in the notebook",
    )


@pytest.mark.parametrize(
    ("command", "says"),
    [
        (["false"], "Kernel died before replying to kernel_info"),
        (["/no/such/program"], "No such file or directory"),
    ],
)
def test_a_kernel_that_does_not_start_is_told(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, command: list[str], says: str
) -> None:
    spec = {"argv": [*command, "{connection_file}"], "display_name": "Odd", "language": "odd"}
    (tmp_path / "kernels" / "odd").mkdir(parents=True)
    (tmp_path / "kernels" / "odd" / "kernel.json").write_text(json.dumps(spec), encoding="utf-8")
    monkeypatch.setenv("JUPYTER_PATH", str(tmp_path))

    told = outcome(tmp_path, "a.ipynb", notebook("1", kernel="odd"))

    assert told is not None
    assert told[0].startswith("its kernel did not start: ")
    assert says in told[0]
    assert told[1] == "mend the installation of that kernel"


def test_a_kernel_that_dies_between_cells_is_told() -> None:
    failure: Failure = running._of_answer("a.ipynb", {"why": "dead", "cell": 0}, 1.0)

    assert failure.message == "its kernel died before its first cell"


def test_an_interruption_stops_what_runs(tmp_path: Path) -> None:
    """What a person stops at the terminal does not run on."""
    (tmp_path / "a.ipynb").write_text(
        notebook("import os, time\nopen('pid', 'w').write(str(os.getpid()))\ntime.sleep(600)"), encoding="utf-8"
    )
    # A shell starts its background jobs so that they pass an interruption over, and so do these tests then.
    code = f"""
import signal
signal.signal(signal.SIGINT, signal.default_int_handler)
from pathlib import Path
from gatecheck.rerunning.running import run
run(Path({str(tmp_path)!r}), "a.ipynb", 5)
"""
    process = subprocess.Popen([sys.executable, "-c", code], stderr=subprocess.PIPE, cwd=Path(__file__).parents[2])
    pid = tmp_path / "pid"
    for _ in range(600):
        if pid.exists() and pid.read_text(encoding="utf-8"):
            break
        time.sleep(0.1)
    process.send_signal(signal.SIGINT)
    _, complaints = process.communicate(timeout=240)

    assert b"KeyboardInterrupt" in complaints
    assert not _lives(pid.read_text(encoding="utf-8"))
