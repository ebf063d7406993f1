"""Where a result comes from, in repositories of several states."""

from __future__ import annotations

import hashlib
import platform
import subprocess
import sys
from pathlib import Path
from types import ModuleType, SimpleNamespace
from typing import Any

import numpy as np
import pytest
import scipy
from scipy import stats

from gatecheck.declaring import DeclareError, declare
from gatecheck.declaring.provenance import provenance, software


@pytest.fixture
def repository(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return a repository with one committed script, in which the test stands."""
    root = tmp_path / "repository"
    (root / "analysis").mkdir(parents=True)
    (root / "analysis" / "worms.py").write_text("print('worms')\n", encoding="utf-8")
    monkeypatch.chdir(root)
    for variable, value in {
        "GIT_CONFIG_GLOBAL": "/dev/null",
        "GIT_AUTHOR_NAME": "A", "GIT_AUTHOR_EMAIL": "a@example.org",
        "GIT_COMMITTER_NAME": "A", "GIT_COMMITTER_EMAIL": "a@example.org",
    }.items():  # fmt: skip
        monkeypatch.setenv(variable, value)
    git("init", "--quiet")
    git("add", ".")
    git("commit", "--quiet", "--message", "Count the worms")
    return root


def git(*arguments: str) -> str:
    return subprocess.run(["git", *arguments], check=True, capture_output=True, text=True).stdout.strip()


def origin(code: Path | str, inputs: tuple[Any, ...] = ()) -> dict[str, Any]:
    found = provenance(str(code), inputs, made_at=False)
    return {name: value for name, value in found.items() if value is not None}


def test_committed_code(repository: Path) -> None:
    expected = {"code": "analysis/worms.py", "commit": git("rev-parse", "HEAD")}
    assert origin(repository / "analysis" / "worms.py") == expected


def test_committed_code_from_a_folder_below(repository: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(repository / "analysis")
    assert origin("worms.py") == {"code": "analysis/worms.py", "commit": git("rev-parse", "HEAD")}


def test_changed_code_has_no_commit(repository: Path) -> None:
    """The commit does not hold the code that ran."""
    (repository / "analysis" / "worms.py").write_text("print('more')\n", encoding="utf-8")
    assert origin("analysis/worms.py") == {"code": "analysis/worms.py"}


def test_changed_code_has_no_commit_from_a_folder_below(repository: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (repository / "analysis" / "worms.py").write_text("print('more')\n", encoding="utf-8")
    monkeypatch.chdir(repository / "analysis")
    assert origin("worms.py") == {"code": "analysis/worms.py"}


def test_changes_of_other_code_do_not_count(repository: Path) -> None:
    """The name of the file is taken as it is, although git would read a pattern in it."""
    (repository / "analysis" / "w*.py").write_text("", encoding="utf-8")
    git("add", ".")
    git("commit", "--quiet", "--message", "Add a file with an odd name")
    (repository / "analysis" / "worms.py").write_text("print('more')\n", encoding="utf-8")
    expected = {"code": "analysis/w*.py", "commit": git("rev-parse", "HEAD")}
    assert origin("analysis/w*.py") == expected


def test_new_code_has_no_commit(repository: Path) -> None:
    (repository / "new [1].py").write_text("", encoding="utf-8")
    assert origin("new [1].py") == {"code": "new [1].py"}


def test_repository_without_commit(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    git("init", "--quiet")
    (tmp_path / "worms.py").write_text("", encoding="utf-8")
    assert origin("worms.py") == {"code": "worms.py"}


def test_code_outside_the_repository_is_left_out(repository: Path) -> None:
    (repository.parent / "elsewhere.py").write_text("", encoding="utf-8")
    assert origin(repository.parent / "elsewhere.py") == {}
    assert origin("<stdin>") == {}


def test_no_repository(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "worms.py").write_text("", encoding="utf-8")
    assert origin("worms.py") == {"code": "worms.py"}


def test_no_git(repository: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PATH", str(repository / "nothing"))
    assert origin("analysis/worms.py") == {"code": "analysis/worms.py"}


def test_inputs_are_hashed(repository: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (repository / "plots.csv").write_bytes(b"plot,worms\n1,3\n")
    monkeypatch.chdir(repository / "analysis")
    digest = hashlib.sha256(b"plot,worms\n1,3\n").hexdigest()
    expected = {"path": "plots.csv", "sha256": digest}
    assert origin("worms.py", ("../plots.csv",))["inputs"] == [expected]
    assert origin("worms.py", (repository / "plots.csv",))["inputs"] == [expected]
    assert origin("worms.py", ({"path": "remote.csv"},))["inputs"] == [{"path": "remote.csv"}]


@pytest.mark.parametrize("inputs", ["plots.csv", Path("plots.csv"), {"path": "plots.csv"}, 3, None])
def test_inputs_that_are_no_list(inputs: Any) -> None:
    with pytest.raises(DeclareError) as caught:
        declare(id="worms", inputs=inputs, folder=None)
    assert str(caught.value) == f"inputs is {inputs!r}, not a list: give a list of paths"


@pytest.mark.parametrize("name", [3, "missing.csv", "/etc/hostname", "analysis"])
def test_inputs_that_are_no_files_of_the_repository(name: Any, repository: Path) -> None:
    assert repository.is_dir()
    with pytest.raises(DeclareError) as caught:
        declare(id="worms", inputs=[name], folder=None)
    assert str(caught.value) == f"inputs: {name!r} is no file in the repository: give the path of one"


def test_calling_script_is_the_code(repository: Path) -> None:
    script = repository / "analysis" / "worms.py"
    script.write_text(
        "from gatecheck.declaring import declare\nprint(declare(id='w').document)\n", encoding="utf-8"
    )
    done = subprocess.run([sys.executable, script], check=True, capture_output=True, text=True)
    assert "'provenance': {'code': 'analysis/worms.py', 'software': {'python': " in done.stdout


def test_software_of_a_result() -> None:
    assert software(stats.ttest_rel([1, 2, 3], [1, 2, 4])) == {
        "python": platform.python_version(),
        "numpy": np.__version__,
        "scipy": scipy.__version__,
    }


def test_software_that_is_not_loaded_or_has_no_version(monkeypatch: pytest.MonkeyPatch) -> None:
    for name in ("numpy", "scipy", "statsmodels"):
        monkeypatch.setitem(sys.modules, name, ModuleType(name))
    monkeypatch.delitem(sys.modules, "statsmodels")
    assert software(None) == {"python": platform.python_version()}


def test_nothing_heavy_is_loaded_for_plain_numbers() -> None:
    code = (
        "import sys; from gatecheck.declaring import declare; declare(id='w', test={'p': 0.5}, folder=None); "
        "print([m for m in ('numpy', 'scipy', 'pandas', 'statsmodels', 'IPython') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], check=True, capture_output=True, text=True)
    assert done.stdout == "[]\n"


def test_notebook_that_the_server_names(repository: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    shell = SimpleNamespace(kernel=object())
    monkeypatch.setitem(sys.modules, "IPython", SimpleNamespace(get_ipython=lambda: shell))
    (repository / "worms.ipynb").write_text("{}", encoding="utf-8")
    monkeypatch.delenv("JPY_SESSION_NAME", raising=False)
    assert origin("/tmp/ipykernel_1/2.py") == {}  # noqa: S108  # a cell's made-up file name
    monkeypatch.setenv("JPY_SESSION_NAME", str(repository / "worms.ipynb"))
    assert origin("/tmp/ipykernel_1/2.py") == {"code": "worms.ipynb"}  # noqa: S108  # likewise
