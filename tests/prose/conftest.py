"""Folders of prose to read."""

from __future__ import annotations

from scan.conftest import git, own_git_settings, root, write

__all__ = ["git", "own_git_settings", "root", "write"]
