"""What git knows of a folder: what it holds, in the work tree or at a revision. It never fetches."""

from __future__ import annotations

import contextlib
import itertools
import os
import re
import threading
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import IO, Literal, cast

from gatecheck.errors import CannotJudge
from gatecheck.errors import safe as safe  # noqa: PLC0414  # what git says is cleaned by it, here and elsewhere
from gatecheck.git_process import NotInstalledError, start
from gatecheck.git_process import checked as checked  # noqa: PLC0414  # others ask git by these three
from gatecheck.git_process import pieces as pieces  # noqa: PLC0414
from gatecheck.git_process import run as run  # noqa: PLC0414

Kind = Literal["file", "link", "submodule", "unmerged", "folder"]

_KINDS: dict[str, Kind] = {"120000": "link", "160000": "submodule", "040000": "folder"}
_LISTED = re.compile(r"(?:\?|([A-Z]) ([0-7]{6}) ([0-9a-f]+) ([0-3])(?=\t))[ \t]([^\0]+)\0")
_CLOSED = "could not open directory"
_NO_REPOSITORY = "fatal: not a git repository (or any"
_CHUNK = 1 << 20
#: What mends a repository that is nowhere.
MEND_HEAD = "see that .git/HEAD there names a branch or a commit, or clone the repository anew"


@dataclass(frozen=True, slots=True)
class Entry:
    """One path of a listing, relative to the listed folder.

    `object_id` is `None` for what git does not track; `checked_out` is false where a sparse checkout leaves
    the file out of the work tree.
    """

    path: str
    kind: Kind = "file"
    object_id: str | None = None
    checked_out: bool = True


@dataclass(frozen=True, slots=True)
class Blob:
    """The content of one object: without `content` it was too long, without `size` there is none."""

    size: int | None
    content: bytes | None


def toplevel(folder: Path) -> Path | None:
    """Return the top folder of the work tree around `folder`, or `None` where there is none.

    Raises
    ------
    CannotJudge
        Git fails, as it does on a repository of another owner, or a repository is there and no git.
    """
    try:
        status, output, error = run(folder, "rev-parse", "--show-toplevel")
    except NotInstalledError:
        if _around(folder, ".git") is not None:
            raise
        return None
    if status and error.startswith(_NO_REPOSITORY):
        _refuse_broken(folder)
        return None
    return Path(os.fsdecode(checked(folder, "rev-parse", status, output, error).removesuffix(b"\n")))


def _around(folder: Path, name: str) -> Path | None:
    """The folder nearest to `folder`, it or one above it, that holds something called `name`."""
    return next((one for one in (folder.resolve(), *folder.resolve().parents) if (one / name).exists()), None)


def _refuse_broken(folder: Path) -> None:
    """Stop at a repository that git passes over as if it were none, as it does where HEAD names no branch."""
    top = _around(folder, ".git/HEAD")
    # One that git can read lies above where it was told to look no further.
    if top is not None and run(top, "rev-parse", "--resolve-git-dir", str(top / ".git"))[0]:
        raise CannotJudge(f"there is a repository at {safe(str(top))}, and git cannot read it", MEND_HEAD)


def list_files(folder: Path) -> tuple[Entry, ...]:
    """Return what git tracks below `folder`, and the untracked files that it does not ignore.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    command = ("ls-files", "-z", "-t", "-s", "-c", "-o", "--exclude-standard")
    status, listed, error = run(folder, *command)
    output = os.fsdecode(checked(folder, "ls-files", status, listed, error))
    if _CLOSED in error:  # of which git only warns, and leaves its files out
        raise CannotJudge(f"git cannot open every folder of {safe(str(folder))}", "mend their permissions")
    entries: dict[str, Entry] = {}
    for tag, mode, object_id, stage, path in _LISTED.findall(output):
        if not tag:
            # A folder among untracked files is a repository within the repository, which git does not enter.
            entries[path] = Entry(path.rstrip("/"), "submodule" if path[-1] == "/" else "file")
        else:
            kind = _KINDS.get(mode, "file") if stage == "0" else "unmerged"
            entries[path] = Entry(path, kind, object_id, tag != "S")
    return tuple(entries.values())


def list_tree(folder: Path, revision: str) -> tuple[Entry, ...]:
    """Return what the commit `revision` holds below `folder`, by paths relative to it.

    Raises
    ------
    CannotJudge
        Git fails, or does not know the revision.
    """
    return _tree(folder, "-r", resolve(folder, revision))


def _tree(folder: Path, *arguments: str) -> tuple[Entry, ...]:
    output = checked(folder, "ls-tree", *run(folder, "ls-tree", "-z", *arguments))
    entries = []
    for item in os.fsdecode(output).split("\0")[:-1]:
        head, _, path = item.partition("\t")
        mode, _, object_id = head.split(" ")
        entries.append(Entry(path, _KINDS.get(mode, "file"), object_id))
    return tuple(entries)


def read_blobs(folder: Path, object_ids: Sequence[str], most: int) -> Iterator[Blob]:
    """Yield the objects in order, from one process; the content of one above `most` bytes is passed over.

    Raises
    ------
    CannotJudge
        Git ends before it has answered.
    """
    answered = 0
    for blob in _answers(folder, object_ids, most):
        yield blob
        answered += 1
    if answered == len(object_ids):
        return
    # In a partial clone git ends at an object that it may not fetch, rather than say that it is missing.
    rest, held = object_ids[answered:], _held(folder)
    there = [one for one in rest if one in held]
    if len(there) == len(rest):
        raise _stopped(folder)
    answers = _answers(folder, there, most)
    for one in rest:
        blob_or_end = next(answers, None) if one in held else Blob(None, None)
        if blob_or_end is None:
            raise _stopped(folder)
        yield blob_or_end


def _held(folder: Path) -> frozenset[str]:
    """The ids of all objects that are here."""
    command = ("cat-file", "--batch-all-objects", "--batch-check=%(objectname)", "--unordered", "--buffer")
    status, held, _ = run(folder, *command)
    if status:
        raise _stopped(folder)
    return frozenset(held.decode().split())


def _answers(folder: Path, object_ids: Sequence[str], most: int) -> Iterator[Blob]:
    """Yield the objects until git ends."""
    with start(folder, "cat-file", "--batch", "--buffer", feeding=True) as process:
        questions, answers = cast("IO[bytes]", process.stdin), cast("IO[bytes]", process.stdout)
        request = "".join(f"{one}\n" for one in object_ids).encode()
        # Git answers while it is still being asked: one thread alone would wait for it for ever.
        feeder = threading.Thread(target=_feed, args=(questions, request), daemon=True)
        feeder.start()
        try:
            heads = (answers.readline().split() for _ in object_ids)
            yield from (_blob(folder, head, answers, most) for head in itertools.takewhile(bool, heads))
        finally:
            process.kill()
            feeder.join()


def _feed(pipe: IO[bytes], request: bytes) -> None:
    with contextlib.suppress(OSError):  # the reader has stopped
        pipe.write(request)
        pipe.close()


def _blob(folder: Path, head: Sequence[bytes], answers: IO[bytes], most: int) -> Blob:
    if head[-1] == b"missing":
        return Blob(None, None)
    size = int(head[2]) if len(head) == 3 else 0  # noqa: PLR2004  # "<id> <type> <size>"
    content = None
    if size <= most:
        content = answers.read(size)
    else:
        _pass_over(answers, size)
    if answers.read(1) != b"\n":
        raise _stopped(folder)
    return Blob(size, content)


def _stopped(folder: Path) -> CannotJudge:
    return CannotJudge(f"git stopped before it had read the files of {safe(str(folder))}", "run `git fsck` there")


def _pass_over(answers: IO[bytes], size: int) -> None:
    while size > 0 and (chunk := answers.read(min(size, _CHUNK))):
        size -= len(chunk)


def read_file_at(folder: Path, revision: str, path: str) -> bytes | None:
    """Return the file at `path`, relative to `folder`, as it is at `revision`; `None` where there is none.

    Raises
    ------
    CannotJudge
        Git fails, does not know the revision, lacks the content, or holds a symbolic link at that path.
    """
    if "\0" in path:
        return None
    entries = _tree(folder, resolve(folder, revision), "--", path.rstrip("/"))
    if not entries or entries[0].kind in {"folder", "submodule"}:
        return None
    if entries[0].kind == "link":
        raise CannotJudge(f"{safe(path)} is a symbolic link at {safe(revision)}", "commit the file itself there")
    answer = run(folder, "cat-file", "blob", entries[0].object_id or "")
    return checked(folder, "cat-file", *answer)


def resolve(folder: Path, revision: str) -> str:
    """Return the full id of the commit that `revision` names.

    Raises
    ------
    CannotJudge
        Git fails, or does not know the revision; the advice is then what brings it here.
    """
    if revision and revision[0] != "-" and "\0" not in revision:
        status, output, error = run(folder, "rev-parse", "--verify", "--quiet", revision + "^{commit}")
        if status == 0:
            return output.decode().strip()
        if error:
            checked(folder, "rev-parse", status, output, error)
    from gatecheck.fetching import commit_advice, is_shallow  # noqa: PLC0415  # needed for what is not here

    advice = commit_advice(folder, revision)
    if is_shallow(folder):
        raise CannotJudge(f"the revision {safe(revision)} is not in this shallow clone", advice)
    raise CannotJudge(f"git knows no revision {safe(revision)} here", advice)


def is_unborn(folder: Path) -> bool:
    """Whether the checked-out branch has no commit yet.

    Raises
    ------
    CannotJudge
        Git fails.
    """
    status, branch, _ = run(folder, "symbolic-ref", "--quiet", "HEAD")
    if status:  # a detached head stands at a commit
        return False
    status, commit, error = run(folder, "for-each-ref", os.fsdecode(branch.removesuffix(b"\n")))
    # Of a branch that it cannot read git only warns, and leaves it out.
    return not checked(folder, "for-each-ref", status, commit, error) and not error
