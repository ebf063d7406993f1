"""The contract: one reader and one JSON Schema for each format, both made from the typed models."""

from __future__ import annotations

from pathlib import Path


def published(kind: str) -> str:
    """Return the published JSON Schema of the format `kind`, as it stands in the package.

    Raises
    ------
    FileNotFoundError
        No schema of that name is published.
    """
    return (Path(__file__).parent / f"{kind}.schema.json").read_text(encoding="utf-8")
