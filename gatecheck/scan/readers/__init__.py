"""The readers: which one turns the bytes of which file into documents and problems."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from gatecheck.model.verdict import Problem
from gatecheck.scan.readers import json_text, jsonl_text, notebook
from gatecheck.scan.readers.document import Document

Reader = Callable[[str, bytes], tuple[Document | Problem, ...]]


def _yaml(path: str, content: bytes) -> tuple[Document | Problem, ...]:
    from gatecheck.scan.readers import yaml_text  # noqa: PLC0415  # its parser is loaded for YAML alone

    return yaml_text.read(path, content)


#: No reader raises, whatever the bytes.
READERS: Mapping[str, Reader] = {
    ".json": json_text.read,
    ".jsonl": jsonl_text.read,
    ".yaml": _yaml,
    ".yml": _yaml,
    ".ipynb": notebook.read,
}


def suffix_of(path: str) -> str:
    """Return the suffix that decides on the reader of `path`, in lower case."""
    return path[path.rfind(".") :].lower()
