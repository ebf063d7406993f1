"""Repositories and records to scan."""

from __future__ import annotations

import json
import os
import subprocess
from pathlib import Path
from typing import Any

import pytest
from scan.scanning import Git, Write


@pytest.fixture(autouse=True)
def own_git_settings(monkeypatch: pytest.MonkeyPatch, tmp_path_factory: pytest.TempPathFactory) -> None:
    """Git reads no settings of whoever runs the tests, and stops looking for a repository at the test's folder."""
    for name in [name for name in os.environ if name.startswith("GIT_")]:
        monkeypatch.delenv(name)
    for role in ("AUTHOR", "COMMITTER"):
        monkeypatch.setenv(f"GIT_{role}_NAME", "Ada Example")
        monkeypatch.setenv(f"GIT_{role}_EMAIL", "ada@example.org")
    monkeypatch.setenv("GIT_CONFIG_GLOBAL", "/dev/null")
    monkeypatch.setenv("GIT_CONFIG_SYSTEM", "/dev/null")
    monkeypatch.setenv("GIT_CEILING_DIRECTORIES", str(tmp_path_factory.getbasetemp()))


@pytest.fixture
def root(tmp_path: Path) -> Path:
    """A folder in no repository."""
    folder = tmp_path / "tree"
    folder.mkdir()
    return folder


@pytest.fixture
def git(root: Path) -> Git:
    """Run git in the folder, which this makes a repository."""

    def run(*arguments: str, at: Path = root) -> str:
        command = ["git", "-C", str(at), "-c", "protocol.file.allow=always", *arguments]
        return subprocess.run(command, check=True, capture_output=True, text=True).stdout.strip()

    run("init", "-q", "-b", "main")
    return run


@pytest.fixture
def write(root: Path) -> Write:
    """Write a file below the folder: bytes and text as they are, anything else as JSON."""

    def to(path: str, content: Any) -> Path:
        file = root / path
        file.parent.mkdir(parents=True, exist_ok=True)
        if isinstance(content, bytes):
            file.write_bytes(content)
        else:
            file.write_text(content if isinstance(content, str) else json.dumps(content, indent=1), "utf-8")
        return file

    return to
