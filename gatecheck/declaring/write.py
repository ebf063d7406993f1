"""Write a record to its file: whole or not at all, the same bytes for the same record."""

from __future__ import annotations

import json
import os
import re
import secrets
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from gatecheck.declaring.errors import DeclareError

_SUFFIX = ".record.json"
_LONGEST_NAME = 255 - len(".tmp-00000000")
#: Characters and names that some file system reserves.
_RESERVED = re.compile(r'[<>:"\\|?*\x00-\x1f\x7f]|^(con|prn|aux|nul|com[0-9]|lpt[0-9])(\.|$)', re.IGNORECASE)


def record_path(folder: str | os.PathLike[str], name: str) -> Path:
    """Return the file of the record `name` under `folder`.

    Raises
    ------
    DeclareError
        `name` would lead out of the folder, or is no file name on some systems.
    """
    parts = name.split("/")
    for part in parts:
        if not part or part.startswith(".") or part.endswith(".") or _RESERVED.search(part):
            raise DeclareError(
                f"id {name!r} makes no file name, because of the part {part!r}: use words that neither "
                'begin nor end with a dot, without < > : " \\ | ? *, with single slashes between them'
            )
    if (
        len(os.fsencode(parts[-1] + _SUFFIX)) > _LONGEST_NAME
        or len(os.fsencode(max(parts, key=len))) > _LONGEST_NAME
    ):
        raise DeclareError(f"id {name!r} is too long for a file name: shorten it, or divide it with slashes")
    return Path(folder, *parts[:-1], parts[-1] + _SUFFIX)


def write(document: dict[str, Any], path: Path) -> dict[str, Any]:
    """Write `document` to `path`, and return the document that stands there.

    A file that differs in nothing but commit and time is left as it stands: the same numbers would otherwise
    be rewritten with each commit.
    """
    standing = _standing(path)
    if standing is not None and _essence(standing) == _essence(document):
        return standing
    text = json.dumps(document, indent=2, ensure_ascii=False, allow_nan=False) + "\n"
    try:
        _replace(path, text.encode())
    except OSError as error:
        raise DeclareError(f"{path} cannot be written: {error.strerror}") from error
    return document


def _replace(path: Path, content: bytes) -> None:
    """Put `content` in the place of `path` in one step, so that no reader ever meets half a file."""
    path.parent.mkdir(parents=True, exist_ok=True)
    beside = path.with_name(f"{path.name}.tmp-{secrets.token_hex(4)}")
    try:
        with beside.open("xb") as stream:
            stream.write(content)
        beside.replace(path)
    finally:
        beside.unlink(missing_ok=True)


def _standing(path: Path) -> dict[str, Any] | None:
    try:
        document = json.loads(path.read_bytes())
    except (OSError, ValueError, RecursionError):
        return None
    return document if isinstance(document, dict) else None


def _essence(document: Mapping[str, Any]) -> str:
    """Return what a record says apart from when it was said."""
    origin = document.get("provenance")
    kept = (
        {k: v for k, v in origin.items() if k not in {"commit", "made_at"}} if isinstance(origin, dict) else origin
    )
    return json.dumps({**document, "provenance": kept}, sort_keys=True)
