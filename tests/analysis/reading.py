"""What the tests of the reading of code share: code in, the tests that it calls out."""

from __future__ import annotations

import json
from pathlib import Path
from textwrap import dedent
from typing import Any

from gatecheck.analysis import read_code
from gatecheck.model.code import CodeFile

ALL = ("**",)


def file_of(root: Path, name: str, content: str | bytes) -> CodeFile:
    """Write one file of code and read it; a file of which nothing is told has no tests."""
    written = dedent(content).encode() if isinstance(content, str) else content
    (root / name).write_bytes(written)
    return next((one for one in read_code(root, ALL, ()).files if one.path == name), CodeFile(name, ()))


def told(file: CodeFile) -> list[str]:
    """Each test as `name line times`, with `+` where it may be made more often and `declared` where it is."""
    return [
        f"{each.name} {each.line} {each.known}{'+' if each.more else ''}{' declared' if each.declared else ''}"
        for each in file.tests
    ]


def notebook(*cells: str, **metadata: Any) -> str:
    """A notebook of format 4 with these cells of code."""
    made = [{"cell_type": "code", "source": dedent(each).strip().splitlines(keepends=True)} for each in cells]
    return json.dumps({"cells": made, "metadata": metadata, "nbformat": 4, "nbformat_minor": 5}, indent=1)
