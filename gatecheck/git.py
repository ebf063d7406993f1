"""The one module that runs git: what a folder holds, in the work tree or at a revision. It never fetches."""

from __future__ import annotations

import contextlib
import itertools
import os
import re
import shlex
import subprocess
import tempfile
import threading
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import IO, Literal, cast

from gatecheck.errors import CannotJudge
from gatecheck.errors import safe as safe  # noqa: PLC0414  # what git says is cleaned by it, here and elsewhere

Kind = Literal["file", "link", "submodule", "unmerged", "folder"]

_KINDS: dict[str, Kind] = {"120000": "link", "160000": "submodule", "040000": "folder"}
_SETTINGS = {
    "LC_ALL": "C",
    "GIT_OPTIONAL_LOCKS": "0",
    "GIT_TERMINAL_PROMPT": "0",
    "GIT_NO_LAZY_FETCH": "1",
    "GIT_ALLOW_PROTOCOL": "none",  # versions that do not know GIT_NO_LAZY_FETCH fail here instead of fetching
    "GIT_NO_REPLACE_OBJECTS": "1",
    "GIT_GRAFT_FILE": f"{os.devnull}/none",  # as replaced objects, invented parents would tell another history
}
#: A hook sets these for its own repository, which need not be the one that is judged.
_OF_ANOTHER_REPOSITORY = {
    "GIT_ALTERNATE_OBJECT_DIRECTORIES",
    "GIT_COMMON_DIR",
    "GIT_DIR",
    "GIT_INDEX_FILE",
    "GIT_NAMESPACE",
    "GIT_OBJECT_DIRECTORY",
    "GIT_PREFIX",
    "GIT_SHALLOW_FILE",
    "GIT_WORK_TREE",
}
_OVERRULED = (
    "-c",
    "core.fsmonitor=false",  # the monitor of file changes is a program that the settings may name
    "-c",
    "log.diffMerges=first-parent",  # what `-m` means to `git log`
)
_OWNER = re.compile(r"detected dubious ownership in repository at '([^\n]*)'")
_LISTED = re.compile(r"(?:\?|([A-Z]) ([0-7]{6}) ([0-9a-f]+) ([0-3])(?=\t))[ \t]([^\0]+)\0")
_CLOSED = "could not open directory"
_NO_REPOSITORY = "fatal: not a git repository (or any"
_CHUNK = 1 << 20


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


class _NotInstalled(CannotJudge):
    """There is no git to run."""


def toplevel(folder: Path) -> Path | None:
    """Return the top folder of the work tree around `folder`, or `None` where there is none.

    Raises
    ------
    CannotJudge
        Git fails, as it does on a repository of another owner, or a repository is there and no git.
    """
    try:
        status, output, error = run(folder, "rev-parse", "--show-toplevel")
    except _NotInstalled:
        if any((above / ".git").exists() for above in (folder.resolve(), *folder.resolve().parents)):
            raise
        return None
    if status and error.startswith(_NO_REPOSITORY):
        return None
    return Path(os.fsdecode(checked(folder, "rev-parse", status, output, error).removesuffix(b"\n")))


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
    with _start(folder, "cat-file", "--batch", "--buffer", feeding=True) as process:
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
        Git fails, or does not know the revision; the advice is then the command that fetches it.
    """
    if revision and revision[0] != "-" and "\0" not in revision:
        status, output, error = run(folder, "rev-parse", "--verify", "--quiet", revision + "^{commit}")
        if status == 0:
            return output.decode().strip()
        if error:
            checked(folder, "rev-parse", status, output, error)
    fetch = f"git fetch --depth=1 origin {shlex.quote(safe(revision))}"
    if checked(folder, "rev-parse", *run(folder, "rev-parse", "--is-shallow-repository")) == b"true\n":
        raise CannotJudge(f"the revision {safe(revision)} is not in this shallow clone", f"run `{fetch}`")
    raise CannotJudge(f"git knows no revision {safe(revision)} here", f"name a commit, or run `{fetch}`")


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


def run(folder: Path, *arguments: str) -> tuple[int, bytes, str]:
    """Run git in `folder` and return its exit status, its output and its complaint."""
    with _start(folder, *arguments) as process:
        output, error = process.communicate()
    return process.returncode, output, error.decode("utf-8", "replace")


def pieces(folder: Path, command: str, *arguments: str) -> Iterator[str]:
    """Yield what git writes, as it writes it, in the pieces that NUL bytes end.

    Raises
    ------
    CannotJudge
        Git fails, which is seen after its last piece.
    """
    # Git may complain at length while it writes: a pipe that nobody reads would stop it.
    with tempfile.TemporaryFile() as complaints:
        with _start(folder, command, *arguments, complaints=complaints) as process:
            rest = b""
            while chunk := cast("IO[bytes]", process.stdout).read(_CHUNK):
                *whole, rest = (rest + chunk).split(b"\0")
                yield from map(os.fsdecode, whole)
        complaints.seek(0)
        error = complaints.read().decode("utf-8", "replace")
    checked(folder, command, process.returncode, rest, error)


def _start(
    folder: Path, *arguments: str, feeding: bool = False, complaints: IO[bytes] | None = None
) -> subprocess.Popen[bytes]:
    kept = {name: value for name, value in os.environ.items() if name not in _OF_ANOTHER_REPOSITORY}
    command = ["git", "-C", str(folder), *_OVERRULED, *arguments]
    try:
        return subprocess.Popen(  # noqa: S603  # no shell: each argument arrives as it is
            command,
            env=kept | _SETTINGS,
            stdin=subprocess.PIPE if feeding else subprocess.DEVNULL,
            stdout=subprocess.PIPE,
            stderr=subprocess.DEVNULL if feeding else complaints or subprocess.PIPE,
        )
    except OSError as error:
        raise _NotInstalled(
            f"git cannot be started ({safe(str(error.strerror))})",
            "install git, and see that it is on the PATH",
        ) from error


def checked(folder: Path, command: str, status: int, output: bytes, error: str) -> bytes:
    """Return the output of git.

    Raises
    ------
    CannotJudge
        Git failed; what it says and what mends it are told.
    """
    if status == 0:
        return output
    owner = _OWNER.search(error)
    if owner:
        where = owner[1]
        raise CannotJudge(
            f"git does not read the repository at {safe(where)}, since another user owns it",
            f"run `git config --global --add safe.directory {shlex.quote(safe(where))}`",
        )
    says = safe(error.strip().split("\n")[0].removeprefix("fatal: ")) or f"exit status {status}"
    raise CannotJudge(f"git {command} failed in {safe(str(folder))}: {says}", "mend the repository, then run again")
