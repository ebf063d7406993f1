"""Settings that hold for every test."""

from __future__ import annotations

import pytest


@pytest.fixture(autouse=True)
def _own_git_settings(monkeypatch: pytest.MonkeyPatch) -> None:
    """The person's own git settings change no test."""
    monkeypatch.setenv("GIT_CONFIG_GLOBAL", "/dev/null")
    monkeypatch.setenv("GIT_CONFIG_SYSTEM", "/dev/null")
