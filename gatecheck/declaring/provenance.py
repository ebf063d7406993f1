"""Where a result comes from: the code, its commit, the inputs, the software."""

from __future__ import annotations

import hashlib
import os
import platform
import shutil
import subprocess
import sys
from collections.abc import Iterable, Mapping
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from gatecheck.declaring.errors import DeclareError
from gatecheck.declaring.notebook import kernel
from gatecheck.declaring.values import plain


def provenance(code: str, inputs: Any, made_at: Any) -> dict[str, Any]:
    """Return where a result comes from that the source file `code` declares.

    `code` is left out where it lies outside the repository, and the commit where the code was changed since.
    """
    root = repository_root()
    path = _inside(root, _notebook_or(code))
    return {
        "code": path,
        "commit": _commit_of(path),
        "inputs": _inputs(root, inputs),
        "made_at": _time(made_at),
    }


def repository_root() -> Path:
    """Return the root of the repository around the current folder, or that folder where there is none."""
    root = _git("rev-parse", "--show-toplevel")
    return (Path(root) if root else Path.cwd()).resolve()


def software(result: object) -> dict[str, str]:
    """Return the versions of Python, of the library that made `result`, and of numpy and scipy if loaded."""
    library = type(result).__module__.partition(".")[0]
    names = {library, "numpy", "scipy"}
    # Plain tuples and tables of pandas are what statsmodels returns from many of its tests.
    names |= {"statsmodels"} if library in {"builtins", "pandas"} else set()
    found = {name: getattr(sys.modules.get(name), "__version__", None) for name in sorted(names)}
    return {"python": platform.python_version()} | {name: str(it) for name, it in found.items() if it}


def _notebook_or(code: str) -> Path | None:
    """Return the source file; in a notebook its cells have none, and the server may tell the notebook's."""
    if kernel() is None:
        return Path(code)
    name = os.environ.get("JPY_SESSION_NAME")
    return Path(name) if name else None


def _inside(root: Path, file: Path | None) -> str | None:
    if file is None or not file.is_file() or not file.resolve().is_relative_to(root):
        return None
    return file.resolve().relative_to(root).as_posix()


def _commit_of(path: str | None) -> str | None:
    if path is None:
        return None
    changed = _git("status", "--porcelain", "--", f":(top,literal){path}")
    return _git("rev-parse", "--verify", "--quiet", "HEAD") if changed == "" else None


def _git(*arguments: str) -> str | None:
    """Return what git answers, or `None` where there is no git, no repository or no answer."""
    program = shutil.which("git")
    if program is None:
        return None
    command = [program, *arguments]
    done = subprocess.run(command, capture_output=True, check=False)  # noqa: S603  # arguments are our own
    return os.fsdecode(done.stdout).strip() if done.returncode == 0 else None


def _inputs(root: Path, inputs: Any) -> list[Any] | None:
    if isinstance(inputs, str | os.PathLike | Mapping) or not isinstance(inputs, Iterable):
        raise DeclareError(f"inputs is {inputs!r}, not a list: give a list of paths")
    return [_input(root, each) for each in inputs] or None


def _input(root: Path, given: Any) -> Any:
    if isinstance(given, Mapping):
        return given
    path = _inside(root, Path(given)) if isinstance(given, str | os.PathLike) else None
    if path is None:
        raise DeclareError(f"inputs: {plain(given)!r} is no file in the repository: give the path of one")
    with Path(given).open("rb") as stream:
        return {"path": path, "sha256": hashlib.file_digest(stream, "sha256").hexdigest()}


def _time(made_at: Any) -> str | None:
    if made_at is False:
        return None
    moment = datetime.now(UTC) if made_at is True else made_at
    if not isinstance(moment, datetime):
        raise DeclareError(f"made_at is {made_at!r}: give True for now, or a datetime")
    if moment.tzinfo is None:
        raise DeclareError("made_at has no time zone: give one, such as datetime.now(UTC)")
    return moment.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
