"""Signed commits and tags on a sealed plan, judged by the exit status of git alone.

What git writes is no evidence: it begins with "Good" also where a key is unknown or out of its time. Whose keys
count is a file of allowed signers as ssh-keygen reads it (ssh-keygen(1), section ALLOWED SIGNERS). The date of a
signature is its signer's own word, also where the time in which a key is valid is checked against it.
"""

from __future__ import annotations

import re
import shutil
import tempfile
from collections.abc import Callable, Iterator, Sequence
from pathlib import Path

from gatecheck import git
from gatecheck.history.walk import History
from gatecheck.model.struct import struct

#: This many signatures on one plan are tried, the oldest commits first.
MOST_TRIED = 50

_LONGEST = 1 << 20
_SSH = b"-----BEGIN SSH SIGNATURE-----"
_IN_COMMIT = re.compile(rb"^gpgsig(?:-sha256)? (-----BEGIN [A-Z0-9 ]+-----)$", re.MULTILINE)
_IN_TAG = re.compile(rb"^(-----BEGIN [A-Z0-9 ]+-----)$", re.MULTILINE)
_TAGS = "%(objectname)%00%(objecttype)%00%(*objectname)%00%(*objecttype)%00%(refname:short)"


@struct
class Candidate:
    """One signed object on a sealed plan: what it is called, its id, and the commit that it signs."""

    name: str
    kind: str
    id: str
    commit: str


@struct
class Signatures:
    """What signatures show: the name of the one that holds, or why none does; `unknown` where not judged."""

    held: str | None = None
    why: str = ""
    unknown: bool = False


def signatures_on(
    root: Path, history: History, window: range, signers: bytes, holds: Callable[[str], bool]
) -> Signatures:
    """Judge the signatures on the commits of `window`, and on tags of them or of commits merged into them.

    Parameters
    ----------
    window
        Indexes of the commits that hold the sealed plan and nothing that it governs.
    signers
        The file of allowed signers.
    holds
        Whether the commit with that id, which may lie beside the line of `history`, holds the same sealed plan.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    candidates, others = [], 0
    on_line = {history.commits[index].id for index in window}
    for one, mark in _signed(root, history, window):
        if one.commit not in on_line and not holds(one.commit):
            continue
        if mark == _SSH:
            candidates.append(one)
        else:
            others += 1
    if not candidates:
        kind = "only signatures of other kinds than SSH are on it, which are not judged" if others else ""
        return Signatures(why=kind or "no signed commit or tag holds it")
    if shutil.which("ssh-keygen") is None:
        return Signatures(why="a signature is on it, and ssh-keygen is not here to judge it", unknown=True)
    held = _first_that_holds(root, candidates[:MOST_TRIED], signers)
    return Signatures(held, "" if held else _none_of(len(candidates)))


def _none_of(count: int) -> str:
    if count > MOST_TRIED:
        return f"none of the first {MOST_TRIED} of {count} signatures on it is by a key that counts"
    return "no signature on it is by a key that counts at its date"


def _first_that_holds(root: Path, candidates: Sequence[Candidate], signers: bytes) -> str | None:
    with tempfile.TemporaryDirectory() as folder:
        allowed = Path(folder) / "signers"
        allowed.write_bytes(signers)
        for one in candidates:
            if _holds(root, one, allowed):
                return one.name
    return None


def _holds(root: Path, one: Candidate, allowed: Path) -> bool:
    settings = (
        "gpg.format=ssh",
        f"gpg.ssh.allowedSignersFile={allowed}",
        "gpg.ssh.program=ssh-keygen",
        # Keys of other kinds are those of whoever runs this; nothing of the person's own decides.
        "gpg.program=false",
        "gpg.x509.program=false",
    )
    options = [word for setting in settings for word in ("-c", setting)]
    status, _, _ = git.run(root, *options, f"verify-{one.kind}", one.id)
    return status == 0


def _signed(root: Path, history: History, window: range) -> Iterator[tuple[Candidate, bytes]]:
    """Yield every signed object with the first line of its signature: commits first, the oldest first."""
    commits = [history.commits[index].id for index in window]
    made = [Candidate(f"the commit {each[:12]}", "commit", each, each) for each in commits]
    tags = list(_tags(root, history, window))
    for one, blob in zip(
        (*made, *tags), git.read_blobs(root, [*commits, *(x.id for x in tags)], _LONGEST), strict=True
    ):
        head, _, text = (blob.content or b"").partition(b"\n\n")
        marks = _IN_COMMIT.findall(head) if one.kind == "commit" else _IN_TAG.findall(text)
        if marks:
            yield one, marks[-1]


def _tags(root: Path, history: History, window: range) -> Iterator[Candidate]:
    """Yield the tags that carry a message, of commits that came with the window; the others cannot be signed."""
    commits = history.commits
    older = ("--no-merged", commits[window.start - 1].id) if window.start else ()
    limits = ("--merged", commits[window.stop - 1].id, *older)
    told = git.run(root, "for-each-ref", f"--format={_TAGS}", *limits, "refs/tags")
    for line in git.checked(root, "for-each-ref", *told).decode("utf-8", "replace").splitlines():
        tag, kind, commit, of, name = line.split("\0")
        if (kind, of) == ("tag", "commit"):
            yield Candidate(f"the tag {git.safe(name)}", "tag", tag, commit)
