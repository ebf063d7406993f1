"""A repository for each test."""

from __future__ import annotations

from pathlib import Path

import pytest
from plans.planting import Station, fresh


@pytest.fixture
def station(tmp_path: Path) -> Station:
    """A repository with one commit, which holds neither plan nor data."""
    return fresh(tmp_path / "station")
