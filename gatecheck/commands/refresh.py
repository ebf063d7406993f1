"""Command `refresh`: write linked numbers in prose from the records, or show how they would change."""

from __future__ import annotations

import argparse
import os
import shutil
import tempfile
from collections.abc import Sequence
from pathlib import Path

from gatecheck.commands.edge import folder, readable_policy, tell, width
from gatecheck.errors import CannotJudge
from gatecheck.model.exit import Exit
from gatecheck.model.verdict import Judged, Place, Problem
from gatecheck.prose.agree import broken_links
from gatecheck.prose.fields import EVIDENCE, subjects
from gatecheck.prose.links import links_in
from gatecheck.prose.reading import Prose, read_prose
from gatecheck.prose.refreshed import RenewedFile, renewed
from gatecheck.render.refresh import Refreshed, TextChange, refreshed
from gatecheck.rules.text_agrees import Settings, settings_in
from gatecheck.scan import scan

_MARK = b"\xef\xbb\xbf"


def act(parsed: argparse.Namespace) -> int:
    """Show what changes, write it where that is asked for, and tell what is left.

    The status is that nothing is left to do, that a linked number still differs, or that something could not be
    read or linked.
    """
    root, policy = folder(parsed), readable_policy(parsed)
    globs, settings = policy.document.scan, settings_in(policy) or Settings()
    found = scan(root, globs.include, globs.exclude)
    prose = read_prose(root, settings.include, settings.exclude)
    known = subjects([one.record for one in found.found], _evidence(root, prose))
    files = renewed(prose.passages, known)
    for file in files if parsed.write else ():
        _write(root, file)
    done = Refreshed(
        changes=tuple(change for file in files for change in _changes(file)),
        numbers=sum(file.edits for file in files),
        kept=tuple(one for file in files for one in _kept(file)),
        problems=(*found.problems, *prose.problems, *broken_links(prose.passages, known)),
        written=parsed.write,
    )
    tell(refreshed(done, width()))
    if done.problems:
        return Exit.CANNOT_JUDGE
    left = done.kept or (done.numbers and not done.written)
    return Exit.FALLS_SHORT if left else Exit.STANDS


def _evidence(root: Path, prose: Prose) -> Sequence[Judged]:
    """The records as they are judged, where a link names a figure of their evidence."""
    if not any(link.field in EVIDENCE for passage in prose.passages for link in links_in(passage)):
        return ()
    from gatecheck.gate import Request, check  # noqa: PLC0415  # loads the arrays, which few links need

    return check(Request(root)).judged


def _changes(file: RenewedFile) -> list[TextChange]:
    cells = [f" (cell {each.passage.cell})" if each.passage.cell else "" for each in file.passages]
    return [
        TextChange(file.file.path + cell, each.passage.body, each.body)
        for cell, each in zip(cells, file.passages, strict=True)
    ]


def _kept(file: RenewedFile) -> list[Problem]:
    return [
        Problem(
            Place(file.file.path, each.line),
            f"the text says {each.what.number.told} for {each.what.link.field} of {each.what.link.record}, and the "
            f"record's {each.what.recorded.shown} cannot be written in these digits",
            "write it by hand",
        )
        for each in file.kept
    ]


def _write(root: Path, file: RenewedFile) -> None:
    """Put the new text in place of the old one at once, so that a reader sees one or the other whole.

    Raises
    ------
    CannotJudge
        The file has changed since it was read, or cannot be written.
    """
    target = root / file.file.path
    try:
        content = target.read_bytes()
        mark = _MARK if content.startswith(_MARK) else b""
        if content != mark + file.file.text.encode("utf-8"):
            raise CannotJudge(f"{file.file.path!a} has changed since it was read", "run the command again")
        _replace(target, mark + file.text.encode("utf-8"))
    except OSError as error:
        reason = os.strerror(error.errno or 0)
        raise CannotJudge(f"{file.file.path!a} cannot be written ({reason})", "make it writable") from None


def _replace(target: Path, content: bytes) -> None:
    with tempfile.NamedTemporaryFile(dir=target.parent, prefix=".gatecheck-", delete=False) as beside:
        beside.write(content)
    try:
        shutil.copymode(target, beside.name)
        Path(beside.name).replace(target)
    except OSError:
        Path(beside.name).unlink()
        raise
