"""Settings that hold for every test."""

from __future__ import annotations

import pytest
from hypothesis import settings

# How long an example takes on a busy machine says nothing about what it shows.
settings.register_profile("without a deadline", deadline=None)
settings.load_profile("without a deadline")


@pytest.fixture(autouse=True)
def _own_git_settings(monkeypatch: pytest.MonkeyPatch) -> None:
    """The person's own git settings change no test."""
    monkeypatch.setenv("GIT_CONFIG_GLOBAL", "/dev/null")
    monkeypatch.setenv("GIT_CONFIG_SYSTEM", "/dev/null")
