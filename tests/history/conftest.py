"""Repositories with a history."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from history.repositories import Repository, repository


@pytest.fixture(autouse=True)
def own_git_variables(monkeypatch: pytest.MonkeyPatch, tmp_path_factory: pytest.TempPathFactory) -> None:
    """Git stops looking for a repository at the test's folder, and reads no variables of whoever runs the tests."""
    for name in [name for name in os.environ if name.startswith("GIT_") and "_CONFIG_" not in name]:
        monkeypatch.delenv(name)
    monkeypatch.setenv("GIT_CEILING_DIRECTORIES", str(tmp_path_factory.getbasetemp()))


@pytest.fixture
def repo(tmp_path: Path) -> Repository:
    """A repository without a commit."""
    return repository(tmp_path / "repo")
